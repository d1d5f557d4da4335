package standing

import "lodebook/models/civil"

// excuse gathers the known excusals of the item and the subject's pauses.
func (v *view) excuse(item string, l *local) []*Excusal {
	var out []*Excusal
	for _, list := range [2][]Excusal{l.excused(item), v.past(l).pauses} {
		for i := range list {
			if x := &list[i]; x.KnownAt(v.k) {
				out = append(out, x)
			}
		}
	}
	return out
}

// covers tells whether the day lies inside; both ends are included.
func (x *Excusal) covers(d civil.Day) bool { return x.From <= d && (x.To == nil || d <= *x.To) }

// end is the last day, LastDay where it is open.
func (x *Excusal) end() civil.Day {
	if x.To == nil {
		return civil.LastDay
	}
	return *x.To
}

// longest is the one of those that cover the day and begin after another which lasts longest.
func longest(all []*Excusal, on, after civil.Day) *Excusal {
	var best *Excusal
	for _, x := range all {
		if x.covers(on) && x.From > after && (best == nil || x.end() > best.end()) {
			best = x
		}
	}
	return best
}

// opening tells whether one of those that cover the day opens reach.
func opening(all []*Excusal, on civil.Day) bool {
	for _, x := range all {
		if x.Item != "" && x.Opens && x.covers(on) {
			return true
		}
	}
	return false
}
