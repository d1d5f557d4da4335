package standing

import "lodebook/models/civil"

// first words the standing of every, within and once while there are not enough accepted records:
// due a first time after the start.
func (ob *obligation) first() finding {
	start := ob.begins()
	f := ob.byDue(start.Add(ob.item.First))
	f.from = start
	if f.word == Met {
		f.word = Awaited
	}
	f.open = false
	return f
}

// byDue words the standing by its due day: met, closing from the notice on and through the grace,
// then a gap. Whether it is open stands for every and once with an accepted record.
func (ob *obligation) byDue(due civil.Day) finding {
	f := finding{word: Met, due: ob.day(due), open: true, lasts: due.Add(ob.item.Grace)}
	notice := ob.item.Notice.Before(due)
	f.closes, f.ends = notice, f.lasts+1
	switch {
	case ob.on < notice:
		f.stays = notice - 1
	case ob.on <= f.lasts:
		f.word, f.stays = Closing, f.lasts
	default:
		f.word, f.open, f.since, f.stays = ob.gap(), false, f.lasts+1, civil.LastDay
	}
	return f
}

// gap is what a due day that has gone by is called.
func (ob *obligation) gap() Word {
	if _, any := ob.accepted(); any {
		return Lapsed
	}
	return Missing
}
