package standing

import (
	"lodebook/models/civil"
	"lodebook/models/program"
)

// renewal is how one accepted record set the due day of an item with every.
type renewal struct {
	deed
	anniversary bool      // counted from the old due day, since the record came early
	from        civil.Day // the day counted from
	sum         civil.Day // a cadence later
	end         civil.Day // that, or its month's last day
	due         civil.Day
}

// every folds over the records: each accepted one renews, a failed one makes the old due day
// forgotten.
func (ob *obligation) every() finding {
	var r *renewal
	for _, d := range ob.deeds {
		if d.Passed {
			r = renew(&ob.item.Cadence, d, r)
		} else {
			r = nil
		}
	}
	if r == nil {
		return ob.first()
	}
	f := ob.byDue(r.due)
	f.record, f.renewal = r.Record, r
	f.from = ob.deeds[len(ob.deeds)-1].day
	return f
}

// renew is the due day after an accepted record; old is what the ones before it made, if anything.
// A record that would not move the due day on leaves the old renewal standing, unless it has a
// last good day of its own.
func renew(c *program.Cadence, d deed, old *renewal) *renewal {
	r := &renewal{deed: d, from: d.day}
	if old != nil && c.Early != nil && old.due.Sub(*c.Early) <= d.day && d.day <= old.due {
		r.anniversary, r.from = true, old.due
	}
	r.sum = r.from.Add(c.Every)
	r.end = r.sum
	if c.MonthEnd {
		r.end = r.sum.MonthEnd()
	}
	r.due = r.end
	if d.Until != nil {
		r.due = min(*d.Until, r.end)
	} else if old != nil && old.due > r.end {
		return old
	}
	return r
}
