package standing

import (
	"cmp"
	"fmt"
	"slices"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// Span is a run of days on which an obligation has one standing. First and Last are included; Last is
// civil.LastDay where nothing known ends it.
type Span struct {
	First, Last civil.Day
	Word        Word
}

// History gives all standings of an item and a subject as spans in order of day, as known at k. Days
// without an obligation lie in none of them. The error tells that the site is not known.
func (e *Engine) History(site, item string, s Subject, k int64) ([]Span, error) {
	at := e.site(site)
	if at == nil || len(at.editions) == 0 {
		return nil, fmt.Errorf("site %q is not in the book", site)
	}
	if k == e.known {
		return spansOf(e.courseOf(at, item, s)), nil
	}
	v := e.viewOf(at, k)
	l := v.local(s)
	return spansOf(v.course(item, l, v.segments(item, l, nil), nil)), nil
}

func (e *Engine) courseOf(s *site, item string, sub Subject) []point {
	b := e.board(s)
	i, asked := b.plan.number[item]
	no, known := s.number[sub]
	if !asked || !known {
		return nil
	}
	if row := b.row(i, no); row >= 0 {
		return b.tracks[i].course(row)
	}
	return nil
}

func spansOf(course []point) []Span {
	var out []Span
	for i, p := range course {
		if p.word() == uint8(none) {
			continue
		}
		s := Span{First: p.day(), Last: civil.LastDay, Word: Words[p.word()]}
		if i+1 < len(course) {
			s.Last = course[i+1].day() - 1
		}
		if n := len(out); n > 0 && out[n-1].Word == s.Word && out[n-1].Last+1 == s.First {
			out[n-1].Last = s.Last // only whether it opens has changed
		} else {
			out = append(out, s)
		}
	}
	return out
}

// EachHistory calls fn with the history of every obligation of a site, in order
// of item; the spans are good until fn returns.
func (e *Engine) EachHistory(site string, fn func(item string, s Subject, spans []Span)) error {
	at := e.site(site)
	if at == nil || len(at.editions) == 0 {
		return fmt.Errorf("site %q is not in the book", site)
	}
	for _, t := range e.board(at).tracks {
		for i := range t.rows {
			if spans := spansOf(t.course(int32(i))); len(spans) > 0 {
				fn(t.item, at.locals[t.asked[i].local].subject, spans)
			}
		}
	}
	return nil
}

// Lines gives the sequence number of every record of a subject, the ended ones included, in no order.
// A person's are those of all sites.
func (e *Engine) Lines(site string, s Subject) []int64 {
	p := e.pastOf(site, s)
	if p == nil {
		return nil
	}
	var out []int64
	for _, of := range p.deeds {
		for i := range of.list {
			out = append(out, int64(of.list[i].seq))
		}
	}
	return out
}

// Known lists the subjects of a kind of which anything is on record at a site, also those who have left or are
// no longer declared, by code.
func (e *Engine) Known(site string, asks program.Asks) []Subject {
	s := e.site(site)
	if s == nil {
		return nil
	}
	out := make([]Subject, len(s.ofKind[asks]))
	for i, no := range s.ofKind[asks] {
		out[i] = s.locals[no].subject
	}
	slices.SortFunc(out, func(a, b Subject) int { return cmp.Compare(a.Code, b.Code) })
	return out
}

// LastDay is the day of the last record of a kind and code that stands, nil where there is none.
func (e *Engine) LastDay(site string, s Subject, what string) *civil.Day {
	kind, ok := e.kinds.number[what]
	p := e.pastOf(site, s)
	if !ok || p == nil {
		return nil
	}
	i := p.find(kind)
	if i < 0 {
		return nil
	}
	for n := len(p.deeds[i].list) - 1; n >= 0; n-- {
		if r := p.deeds[i].list[n]; r.ended == 0 {
			return &r.day
		}
	}
	return nil
}

func (e *Engine) pastOf(site string, s Subject) *past {
	if s.Asks == program.AsksPerson {
		if no, ok := e.names.find(s.Code); ok {
			return e.people.at(no)
		}
		return nil
	}
	at := e.site(site)
	if at == nil {
		return nil
	}
	if no, ok := at.number[s]; ok {
		return at.locals[no].past
	}
	return nil
}
