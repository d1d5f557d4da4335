package standing

import (
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
	var out []Standing
	subjects := map[program.Asks][]presence{}
	for _, item := range ed.items {
		if q.Item != "" && item.Code != q.Item {
			continue
		}
		of, listed := subjects[item.Asks]
		if !listed {
			of = v.asked(item.Asks, q)
			subjects[item.Asks] = of
		}
		for _, p := range of {
			if s, ok := v.standing(item, p, ed, q); ok {
				out = append(out, s)
			}
		}
	}
	return out, nil
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
func (v *view) standing(item *program.Item, p presence, ed *edition, q Query) (Standing, bool) {
	ob, f, asked := v.verdict(item, p, ed, q.On)
	if !asked {
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

// fill writes the finding down.
func (ob *obligation) fill(s *Standing, f finding) {
	s.Start = ob.day(ob.begins())
	if f.due != nil {
		s.Due = ob.day(*f.due)
		s.InGrace = f.word == Closing && ob.on > *f.due
	}
	if f.record != nil {
		s.Record = f.record.ID
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
