package standing

import (
	"cmp"
	"slices"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// deed is a record on the day that the judging site gives it.
type deed struct {
	on civil.Day
	*record
}

// compareDeeds orders records by day; within a day those without a time come first, in order of
// recording, then those with a time, by it.
func compareDeeds(a, b deed) int {
	if a.on != b.on {
		return cmp.Compare(a.on, b.on)
	}
	if c := compareTimes(a.time, b.time); c != 0 {
		return c
	}
	return cmp.Or(cmp.Compare(a.order, b.order), cmp.Compare(a.Seq, b.Seq))
}

// compareTimes puts no time before any.
func compareTimes(a, b *time.Time) int {
	switch {
	case a == nil && b == nil:
		return 0
	case a == nil:
		return -1
	case b == nil:
		return 1
	}
	return a.Compare(*b)
}

// gather lists the known records up to the day that answer the item, in order. The list is good
// until the next call.
func (v *view) gather(item *program.Item, l *local, ed *edition, on civil.Day) []deed {
	out := v.deeds[:0]
	for _, what := range item.Records {
		list := l.past.records[what]
		for i := range list {
			r := &list[i]
			if !r.KnownAt(v.k) || item.Local && r.site != v.site {
				continue
			}
			day := dayIn(r.day, r.time, ed.loc)
			if day <= on {
				out = append(out, deed{day, r})
			} else if day > on+2 {
				break // records lie in order of their days in UTC, a day at most from those of any zone
			}
		}
	}
	if !slices.IsSortedFunc(out, compareDeeds) {
		slices.SortFunc(out, compareDeeds)
	}
	v.deeds = out
	return out
}

// happening is an event on the day that the judging site gives it.
type happening struct {
	on civil.Day
	*Event
}

// happenings lists the known events up to the day that ask the item, ordered as records are.
func (v *view) happenings(item *program.Item, l *local, ed *edition, on civil.Day) []happening {
	var out []happening
	for _, code := range item.Cadence.After {
		list := l.past.events[code]
		for i := range list {
			ev := &list[i]
			if day := dayIn(ev.Day, ev.Time, ed.loc); ev.KnownAt(v.k) && day <= on {
				out = append(out, happening{day, ev})
			}
		}
	}
	slices.SortFunc(out, func(a, b happening) int {
		return cmp.Or(cmp.Compare(a.on, b.on), compareTimes(a.Time, b.Time), cmp.Compare(a.Seq, b.Seq))
	})
	return out
}

// answers tells whether the record answers the event: on a later day; on the same day by a later
// time where both have one, and else unless the item guards a zone.
func (d deed) answers(ev happening, guards bool) bool {
	switch {
	case d.on != ev.on:
		return d.on > ev.on
	case d.time != nil && ev.Time != nil:
		return d.time.After(*ev.Time)
	}
	return !guards
}
