package standing

import (
	"unsafe"

	"lodebook/models/civil"
)

// Bytes is how large the columns are in which the engine keeps what it judges by: the records with the identifiers of their entries, and of
// the boards that are made the rows and points of all courses. What leads to them, and what is on
// record about subjects beside their records, is not in it.
func (e *Engine) Bytes() int64 {
	n := int64(len(e.marks.list)) * markPageSize * int64(unsafe.Sizeof(mark{}))
	for no := range e.people.n {
		n += e.people.at(no).bytes()
	}
	for _, s := range e.sites {
		for _, l := range s.locals {
			if l.past != nil {
				n += l.past.bytes()
			}
		}
		if b := s.made.Load(); b != nil {
			for _, t := range b.tracks {
				n += int64(len(t.rows))*int64(unsafe.Sizeof(row{})) + int64(len(t.asked))*int64(unsafe.Sizeof(asking{})) +
					int64(len(t.points))*int64(unsafe.Sizeof(point(0)))
			}
		}
	}
	return n
}

func (p *past) bytes() int64 {
	var n int64
	for i := range p.deeds {
		n += int64(len(p.deeds[i].list)) * int64(unsafe.Sizeof(record{}))
	}
	return n
}

// ScanAsOf adds up, over all cores, every number that AllCounts looks a past day up in: no lookup of all
// of them can be quicker. The sum means nothing.
func (e *Engine) ScanAsOf() int64 {
	return e.scan(func(t *track) int64 {
		var sum int64
		for i := range t.rows {
			sum += int64(t.rows[i].at) + int64(t.rows[i].size)
		}
		for _, p := range t.points {
			sum += int64(p)
		}
		return sum
	})
}

// ScanNow is ScanAsOf of what Recount looks at.
func (e *Engine) ScanNow() int64 {
	return e.scan(func(t *track) int64 {
		var sum int64
		for i := range t.rows {
			sum += int64(t.rows[i].at) + int64(t.rows[i].size)
		}
		return sum
	})
}

func (e *Engine) scan(fn func(*track) int64) int64 {
	var sum int64
	for _, n := range overSites(e, func(s *site) int64 {
		var of int64
		for _, t := range e.board(s).tracks {
			of += fn(t)
		}
		return of
	}) {
		sum += n
	}
	return sum
}

// Asked counts, for every site over all cores, to how many present subjects each item's selector applies
// on a day, by all that is recorded: the pass of the selectors alone, in which each is judged once for
// each different set of the facts that it reads.
func (e *Engine) Asked(on civil.Day) int {
	total := 0
	for _, n := range overSites(e, func(s *site) int {
		v := e.viewOf(s, Always)
		if e.known == Always {
			v.board = s.made.Load()
		}
		ed := v.edition(on)
		if ed == nil {
			return 0
		}
		of := 0
		for _, l := range s.locals {
			if _, here := v.presence(l, on); !here {
				continue
			}
			for _, item := range ed.items {
				if item.Asks != l.subject.Asks {
					continue
				}
				if yes, err := v.matches(item, l, on); yes && err == nil {
					of++
				}
			}
		}
		return of
	}) {
		total += n
	}
	return total
}
