package scenario

import "lodebook/models/civil"

// tale is what did not go by the book: it adds to the history and takes from it.
type tale struct {
	almanac
	events   []event
	excusals []excusal
	pauses   []pause
	sheets   []SheetEntry
	never    []string // as in history
	edits    []func(*history)
}

// tell invents the site's stories.
func tell(a almanac) *tale {
	t := &tale{almanac: a}
	t.pauses = []pause{
		{onLeave, a.ago(95), new(a.today + 120), "Parental leave"},
		{awayItem, a.ago(9), new(a.today + 12), "At its manufacturer for repair"},
		{"S23", a.ago(300), new(a.ago(272)), "Unpaid leave"},
	}
	t.people()
	t.soon()
	t.things()
	t.crews()
	t.series()
	return t
}

// away are the pauses of a subject.
func (t *tale) away(code string) []pause {
	var out []pause
	for _, p := range t.pauses {
		if p.subject == code {
			out = append(out, p)
		}
	}
	return out
}

// change lets the stories change the history.
func (t *tale) change(h *history) {
	for _, edit := range t.edits {
		edit(h)
	}
}

// instead takes a subject's records of the kind off the history from a day on and puts others there.
func (t *tale) instead(what, subject string, from civil.Day, rows ...row) {
	t.edits = append(t.edits, func(h *history) {
		h.drop(func(r row) bool { return r.what == what && r.subject == subject && r.day >= from })
		for _, r := range rows {
			r.what, r.subject = what, subject
			h.add(r)
		}
	})
}

// except takes the records that the question is true of off the history.
func (t *tale) except(is func(row) bool) {
	t.edits = append(t.edits, func(h *history) { h.drop(is) })
}

// happened puts an event on record and, where there is one, the record that answers it.
func (t *tale) happened(e event, answer ...row) {
	t.events = append(t.events, e)
	t.edits = append(t.edits, func(h *history) {
		for _, r := range answer {
			r.subject = e.subject
			h.add(r)
		}
	})
}
