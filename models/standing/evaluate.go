package standing

import (
	"slices"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// Evaluate gives every standing that the query asks for, in order of item code, then subject code.
// A subject of which it cannot be told whether an item asks it has a row with the word DataFault,
// whose Why names what is not on record. Obligations that do not exist are left out; before the
// site's first version there are none. The error tells that the site is not known.
func (e *Engine) Evaluate(site string, q Query) ([]Standing, error) {
	v, err := e.view(site, q.KnownAt)
	if err != nil {
		return nil, err
	}
	ed := v.edition(q.On)
	if ed == nil {
		return nil, nil
	}
	if q.KnownAt == e.known {
		v.board = v.site.made.Load() // where there is one, it knows who is asked and from when
	}
	c := v.columns(ed, q)
	for _, asks := range program.AllAsks {
		for _, p := range c.subjects[asks] { // by subject first, since what is on record about one lies together
			for i := range c.columns {
				if col := &c.columns[i]; col.item.Asks == asks {
					if s, ok := v.standing(col.item, col.track, p, ed, q); ok {
						col.rows = append(col.rows, s)
					}
				}
			}
		}
	}
	return c.join(), nil
}

// asked lists the subjects of the kind that the query asks for.
func (v *view) asked(asks program.Asks, q Query) []presence {
	switch {
	case q.Subject == nil:
		return v.present(asks, q.On)
	case q.Subject.Asks == asks:
		return v.only(*q.Subject, q.On)
	}
	return nil
}

// standing judges one item of one subject; it is false where there is no obligation.
func (v *view) standing(item *program.Item, track int32, p presence, ed *edition, q Query) (Standing, bool) {
	ob, f, asked := v.look(item, track, p, ed, q)
	if !asked || q.Words != nil && !slices.Contains(q.Words, f.word) {
		return Standing{}, false
	}
	s := Standing{Item: item.Code, Version: ed.Number, Subject: p.subject, Rule: item.Cadence.Rule, Word: f.word}
	if f.word == DataFault {
		s.Why = whyFaulty(f.sel, f.err)
		return s, true
	}
	ob.fill(&s, f)
	if q.Why {
		s.Why = ob.why(f)
	}
	return s, true
}

// look is the verdict, by what the board knows where there is one. What the query does not ask for is not
// judged then.
func (v *view) look(item *program.Item, track int32, p presence, ed *edition, q Query) (*obligation, finding, bool) {
	if v.board == nil {
		return v.verdict(item, p, ed, q.On)
	}
	no := v.board.row(track, p.no)
	if no < 0 {
		return nil, finding{}, false
	}
	t := v.board.tracks[track]
	word := wordOn(t.course(no), q.On)
	if word == uint8(none) || q.Words != nil && !slices.Contains(q.Words, Words[word]) {
		return nil, finding{}, false
	}
	a := &t.asked[no]
	if a.reign < 0 || q.On < a.first || q.On > a.last || q.Why {
		return v.verdict(item, p, ed, q.On)
	}
	return v.asks(item, p, ed, q.On, &a.start)
}

// fill writes the finding down.
func (ob *obligation) fill(s *Standing, f finding) {
	s.Start = ob.day(ob.begins())
	s.Due = f.due
	s.InGrace = f.word == Closing && ob.on > *f.due
	if f.record != nil {
		s.Record = ob.e.marks.at(f.record.seq).String()
	}
	if f.excusal != nil && f.excusal.To != nil {
		s.ExcusedUntil = ob.day(*f.excusal.To)
	}
	if f.word.IsGap() {
		s.Since = ob.day(max(f.since, *s.Start))
	}
	s.Left = f.left(ob.on)
}

// left is the share of the span up to the due day that is left: all of it where nothing ends it.
func (f finding) left(on civil.Day) float64 {
	switch {
	case f.word != Met && f.word != Closing:
		return 0
	case f.due == nil:
		return 1
	}
	span, left := *f.due-f.from, *f.due-on
	if left <= 0 || span <= 0 {
		return 0
	}
	return min(1, float64(left)/float64(span))
}

// columns are the items that a query asks for, each with room for a standing of every subject.
type columns struct {
	subjects map[program.Asks][]presence
	columns  []column
	room     []Standing
}

type column struct {
	item  *program.Item
	track int32 // of the board, where there is one
	rows  []Standing
}

func (v *view) columns(ed *edition, q Query) *columns {
	c := &columns{subjects: map[program.Asks][]presence{}}
	for _, asks := range program.AllAsks {
		c.subjects[asks] = v.asked(asks, q)
	}
	most := 0
	for _, item := range ed.items {
		if q.Item == "" || q.Item == item.Code {
			col := column{item: item}
			if v.board != nil {
				col.track = v.board.plan.number[item.Code]
			}
			c.columns = append(c.columns, col)
			most += len(c.subjects[item.Asks])
		}
	}
	if q.Words != nil {
		return c // of which there may be few
	}
	c.room = make([]Standing, most)
	at := 0
	for i := range c.columns {
		end := at + len(c.subjects[c.columns[i].item.Asks])
		c.columns[i].rows = c.room[at:at:end]
		at = end
	}
	return c
}

// join closes the gaps between the columns.
func (c *columns) join() []Standing {
	out := c.room[:0]
	for _, col := range c.columns {
		out = append(out, col.rows...)
	}
	return out
}
