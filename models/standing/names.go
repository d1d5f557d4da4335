package standing

import (
	"hash/maphash"
	"maps"
	"slices"
)

// names numbers people by their code. Its parts are copied when they are first written after a fork,
// so that adding one name to many costs little.
type names struct {
	parts *[nameParts]namePart
}

type namePart struct {
	own *owner
	of  map[string]int32
}

const nameParts = 1024

var nameSeed = maphash.MakeSeed()

func partOf(code string) int { return int(maphash.String(nameSeed, code) % nameParts) }

func (n names) fork() names {
	if n.parts == nil {
		return n
	}
	parts := *n.parts
	return names{&parts}
}

func (n names) find(code string) (int32, bool) {
	if n.parts == nil {
		return 0, false
	}
	no, ok := n.parts[partOf(code)].of[code]
	return no, ok
}

func (n *names) put(own *owner, code string, no int32) {
	if n.parts == nil {
		n.parts = &[nameParts]namePart{}
	}
	p := &n.parts[partOf(code)]
	if p.own != own {
		p.own = own
		if p.of = maps.Clone(p.of); p.of == nil {
			p.of = map[string]int32{}
		}
	}
	p.of[code] = no
}

// pages is a list of pasts by number, in pages that are copied when they are first written after a
// fork.
type pages struct {
	list []*page
	n    int32
}

const pageSize = 512

type page struct {
	own *owner
	of  [pageSize]*past
}

func (p pages) fork() pages {
	p.list = append([]*page(nil), p.list...)
	return p
}

func (p *pages) at(no int32) *past { return p.list[no/pageSize].of[no%pageSize] }

func (p *pages) set(own *owner, no int32, to *past) {
	at := p.list[no/pageSize]
	if at.own != own {
		c := *at
		c.own = own
		at = &c
		p.list[no/pageSize] = at
	}
	at.of[no%pageSize] = to
}

func (p *pages) add(own *owner, x *past) int32 {
	no := p.n
	if no%pageSize == 0 {
		p.list = append(p.list, &page{own: own})
	}
	p.n++
	p.set(own, no, x)
	return no
}

// marks are the identifiers of entries by sequence number, in pages as those of people.
type marks struct{ list []markPage }

type markPage struct {
	own *owner
	of  *[markPageSize]mark // nil: none
}

const markPageSize = 1024

func (m marks) fork() marks { return marks{slices.Clone(m.list)} }

func (m *marks) at(seq uint32) mark {
	if no := int(seq / markPageSize); no < len(m.list) && m.list[no].of != nil {
		return m.list[no].of[seq%markPageSize]
	}
	return markOf("")
}

func (m *marks) put(own *owner, seq uint32, id mark) {
	no := int(seq / markPageSize)
	if no >= len(m.list) {
		m.list = append(m.list, make([]markPage, no+1-len(m.list))...)
	}
	p := &m.list[no]
	if p.own != own {
		of := &[markPageSize]mark{}
		if p.of != nil {
			*of = *p.of
		}
		*p = markPage{own, of}
	}
	p.of[seq%markPageSize] = id
}
