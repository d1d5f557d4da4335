package standing

import "lodebook/models/civil"

// after looks for the earliest event that no accepted record answers.
func (ob *obligation) after() finding {
	for i := range ob.events {
		ev := ob.events[i]
		if ob.answer(ev) == nil {
			return ob.unanswered(ev)
		}
	}
	latest := ob.events[len(ob.events)-1]
	return finding{word: Met, record: ob.answer(latest), event: &latest, open: true, lasts: civil.LastDay, stays: civil.LastDay}
}

// unanswered words the standing after an event: closing at once, a gap once the window is over.
func (ob *obligation) unanswered(ev happening) finding {
	due := ev.on.Add(ob.item.Cadence.Within)
	f := finding{word: Closing, due: ob.day(due), from: ev.on, event: &ev}
	f.stays = due.Add(ob.item.Grace)
	if ob.on > f.stays {
		f.word, f.since, f.stays = ob.gap(), f.stays+1, civil.LastDay
	}
	return f
}

// answer is the last accepted record that answers the event, or nil.
func (ob *obligation) answer(ev happening) *record {
	for i := len(ob.deeds) - 1; i >= 0 && ob.deeds[i].on >= ev.on; i-- {
		if d := ob.deeds[i]; d.passed && d.answers(ev, len(ob.item.Guards) > 0) {
			return d.record
		}
	}
	return nil
}
