package standing

import (
	"lodebook/models/civil"
	"lodebook/models/program"
)

// renewal is how one accepted record set the due day of an item with every. Without a record it is
// none.
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
	for _, d := range ob.deeds[ob.folded:] {
		if d.passed {
			ob.fold = renew(&ob.item.Cadence, d, ob.fold)
		} else {
			ob.fold = renewal{}
		}
	}
	ob.folded = len(ob.deeds) // as the days go by, deeds are only added
	r := &ob.fold
	if r.record == nil {
		return ob.first()
	}
	f := ob.byDue(r.due)
	f.record, f.renewal = r.record, *r
	f.from = ob.deeds[len(ob.deeds)-1].on
	return f
}

// renew is the due day after an accepted record; old is what the ones before it made, if anything.
// A record that would not move the due day on leaves the old renewal standing, unless it has a
// last good day of its own.
func renew(c *program.Cadence, d deed, old renewal) renewal {
	r, renews := renewal{deed: d, from: d.on}, old.record != nil
	if renews && c.Early != nil && old.due.Sub(*c.Early) <= d.on && d.on <= old.due {
		r.anniversary, r.from = true, old.due
	}
	r.sum = r.from.Add(c.Every)
	r.end = r.sum
	if c.MonthEnd {
		r.end = r.sum.MonthEnd()
	}
	r.due = r.end
	if d.until != noDay {
		r.due = min(d.until, r.end)
	} else if renews && old.due > r.end {
		return old
	}
	return r
}
