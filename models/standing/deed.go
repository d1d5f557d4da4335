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
	return cmp.Or(cmp.Compare(a.at, b.at), cmp.Compare(a.seq, b.seq)) // what has no time comes first
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
		list := v.records(l, what)
		for i := range list {
			r := &list[i]
			if !r.knownAt(v.k) || item.Local && int32(r.site) != v.site.no {
				continue
			}
			day := r.in(ed.loc)
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
		list := v.past(l).eventsOf(code)
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
	case d.at != untimed && ev.Time != nil:
		return d.at > ev.Time.UnixMicro()
	}
	return !guards
}

// dayIn is the day in the zone of something that has a day and perhaps a time.
func dayIn(day civil.Day, at *time.Time, loc *time.Location) civil.Day {
	if at == nil {
		return day
	}
	return civil.DayOf(*at, loc)
}
