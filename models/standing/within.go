package standing

// within counts back over the days that have an accepted record: the count-th latest one and the
// length of the window give the due day.
func (ob *obligation) within() finding {
	c := &ob.item.Cadence
	days := 0
	for i := len(ob.deeds) - 1; i >= 0; i-- {
		d := ob.deeds[i]
		if !d.passed {
			continue
		}
		if later, any := ob.acceptedAfter(i); any && later.on == d.on {
			continue // records of one day count once
		}
		if days++; days == c.Count {
			f := ob.byDue(d.on.Add(c.Within))
			f.record, f.from = d.record, d.on
			f.open, f.lasts = f.word == Met, ob.item.Notice.Before(*f.due)-1
			return f
		}
	}
	return ob.first()
}

// acceptedAfter is the first accepted record behind the i-th.
func (ob *obligation) acceptedAfter(i int) (deed, bool) {
	for _, d := range ob.deeds[i+1:] {
		if d.passed {
			return d, true
		}
	}
	return deed{}, false
}
