package standing

import "lodebook/models/civil"

// holds asks the condition of what is on record on the day.
func (ob *obligation) holds() finding {
	condition := ob.item.Cadence.Holds
	yes, err := ob.match(condition, ob.subject.local, ob.on)
	switch {
	case err != nil:
		return finding{word: DataFault, sel: condition, err: err, stays: civil.LastDay}
	case yes:
		return finding{word: Met, open: true, lasts: civil.LastDay, stays: civil.LastDay}
	}
	f := finding{word: Failed, since: ob.begins(), stays: civil.LastDay}
	for _, turn := range ob.turns(ob.subject.local, condition.Reads(), ob.begins(), ob.on) {
		if yes, err := ob.match(condition, ob.subject.local, turn-1); yes || err != nil {
			f.since = turn
			break
		}
	}
	return f
}
