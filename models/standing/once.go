package standing

import "lodebook/models/civil"

// once goes by the latest accepted record: met for good, or due on its own last good day.
func (ob *obligation) once() finding {
	d, any := ob.accepted()
	switch {
	case !any:
		return ob.first()
	case d.until == noDay:
		return finding{word: Met, record: d.record, open: true, lasts: civil.LastDay, stays: civil.LastDay}
	}
	f := ob.byDue(d.until)
	f.record, f.from = d.record, d.on
	return f
}
