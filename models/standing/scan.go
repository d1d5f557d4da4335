package standing

import (
	"fmt"
	"slices"
	"unsafe"

	"lodebook/models/civil"
	"lodebook/models/program"
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
	for _, n := range overSites(e, func(s *site, _ *worker) int64 {
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

// Asked counts, for every site over all cores, how many present subjects each item is asked of on a day, by all
// that is recorded: the pass of the selectors alone. Of each kind of subject, all selectors together are judged
// once for each different set of what they read.
func (e *Engine) Asked(on civil.Day) int {
	total := 0
	for _, n := range overSites(e, func(s *site, w *worker) int { return e.asked(s, on, w) }) {
		total += n
	}
	return total
}

func (e *Engine) asked(s *site, on civil.Day, w *worker) int {
	v := e.viewOf(s, e.known)
	v.board, v.answers = s.made.Load(), w.answers
	ed := v.edition(on)
	if ed == nil {
		return 0
	}
	of := map[program.Asks]*selectors{}
	total := 0
	for _, l := range s.locals {
		if _, here := v.presence(l, on); !here {
			continue
		}
		asks := l.subject.Asks
		if of[asks] == nil {
			of[asks] = w.of(ed.items, asks)
		}
		total += of[asks].count(v, l, on)
	}
	return total
}

// selectors are those of the items that ask a kind of subject.
type selectors struct {
	always int                 // items without one
	fields []string            // that those of together read
	all    []*program.Selector // that go by fields that many subjects have alike
	alone  []*program.Selector // that do not
	known  map[string]int      // how many of all match, by the fields
	key    []byte
}

// of gives the selectors of the items that ask a kind of subject: the same for programs whose selectors are.
func (w *worker) of(items []*program.Item, asks program.Asks) *selectors {
	key := []byte(asks)
	for _, item := range items {
		if item.Asks == asks {
			key = fmt.Appendf(key, " %p", item.When)
		}
	}
	s := w.selectors[string(key)]
	if s == nil {
		s = newSelectors(items, asks)
		w.selectors[string(key)] = s
	}
	return s
}

func newSelectors(items []*program.Item, asks program.Asks) *selectors {
	s := &selectors{known: map[string]int{}}
	for _, item := range items {
		switch {
		case item.Asks != asks:
		case item.When == nil:
			s.always++
		case slices.ContainsFunc(item.When.Reads(), func(field string) bool { return field == "code" || field == factName || !isField(field) }):
			s.alone = append(s.alone, item.When)
		default:
			s.all = append(s.all, item.When)
			s.fields = append(s.fields, item.When.Reads()...)
		}
	}
	slices.Sort(s.fields)
	s.fields = slices.Compact(s.fields)
	return s
}

// count is how many items ask the subject; one that cannot be judged does not.
func (s *selectors) count(v *view, l *local, on civil.Day) int {
	s.key = s.key[:0]
	for _, field := range s.fields {
		s.key = appendValue(s.key, v.field(l, field, on))
	}
	n, ok := s.known[string(s.key)]
	if !ok {
		n = v.matching(s.all, l, on)
		s.known[string(s.key)] = n
	}
	return n + s.always + v.matching(s.alone, l, on)
}

func (v *view) matching(all []*program.Selector, l *local, on civil.Day) int {
	n := 0
	for _, sel := range all {
		if yes, err := v.match(sel, l, on); yes && err == nil {
			n++
		}
	}
	return n
}
