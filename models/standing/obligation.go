package standing

import (
	"lodebook/models/civil"
	"lodebook/models/program"
)

// obligation is one item asked of one subject, on one day, with all that bears on it.
type obligation struct {
	*view
	edition  *edition
	item     *program.Item
	subject  presence
	on       civil.Day
	deeds    []deed
	events   []happening // after
	excusals []*Excusal

	start   civil.Day // see began
	started bool
	fold    renewal // of every: what the first folded deeds made
	folded  int
}

// finding is what the rules make of an obligation, and what they made it of.
type finding struct {
	word   Word
	due    *civil.Day
	record *record // the one that decided
	// open tells whether it opens reach; then it stays open through the day lasts if nothing more
	// goes on record, no version, fact or excusal begins or ends.
	open  bool
	lasts civil.Day
	// stays is a day through which the word stays if, further, no record, event or excusal begins to
	// count or ends: at the least the day judged.
	stays civil.Day
	// Of what goes by a due day: from closes on it is closing, from ends on a gap; else both are 0.
	closes, ends civil.Day
	since        civil.Day // of a gap: its first day by the rule
	from         civil.Day // of met and closing: the day on which the span up to the due day began

	excusal *Excusal
	renewal renewal
	period  asked
	event   *happening
	// Of a data-fault: the selector that cannot be judged, and why not.
	sel *program.Selector
	err error
}

// verdict judges the item of the subject; asked is false where there is no obligation. The
// obligation is good until the next call.
func (v *view) verdict(item *program.Item, p presence, ed *edition, on civil.Day) (ob *obligation, f finding, asked bool) {
	if v.inForce(item, on) > on {
		return nil, finding{}, false
	}
	yes, err := v.matches(item, p.local, on)
	if err != nil {
		return nil, finding{word: DataFault, sel: item.When, err: err}, true
	}
	if !yes {
		return nil, finding{}, false
	}
	return v.asks(item, p, ed, on, nil)
}

// asks judges the item of a subject of whom it is asked, since the start if that is known.
func (v *view) asks(item *program.Item, p presence, ed *edition, on civil.Day, start *civil.Day) (ob *obligation, f finding, asked bool) {
	ob = &v.obligation
	*ob = obligation{view: v, edition: ed, item: item, subject: p, on: on}
	if start != nil {
		ob.start, ob.started = *start, true
	}
	ob.deeds = v.gather(item, p.local, ed, on)
	ob.excusals = v.excuse(item.Code, p.local)
	if item.Cadence.Rule == program.After {
		ob.events = v.happenings(item, p.local, ed, on)
	}
	f, asked = ob.judge()
	return ob, f, asked
}

// floor is the earliest day on which the obligation can have begun, its selector apart.
func (ob *obligation) floor() civil.Day {
	return max(ob.subject.since, ob.inForce(ob.item, ob.on))
}

// begins is the obligation's start.
func (ob *obligation) begins() civil.Day {
	if !ob.started {
		ob.start = ob.began(ob.item, ob.subject.local, ob.floor(), ob.on)
		ob.started = true
	}
	return ob.start
}

// last is the last record, and whether there is one.
func (ob *obligation) last() (deed, bool) {
	if len(ob.deeds) == 0 {
		return deed{}, false
	}
	return ob.deeds[len(ob.deeds)-1], true
}

// accepted is the last accepted record.
func (ob *obligation) accepted() (deed, bool) {
	for i := len(ob.deeds) - 1; i >= 0; i-- {
		if ob.deeds[i].passed {
			return ob.deeds[i], true
		}
	}
	return deed{}, false
}

// judge applies rules 1 to 3 of design section 3 to an obligation that has begun. It is false where
// an item asked after events has nothing to ask.
func (ob *obligation) judge() (finding, bool) {
	last, any := ob.last()
	failed := any && !last.passed
	if ob.item.Cadence.Rule == program.After && len(ob.events) == 0 && !(failed && last.on >= ob.begins()) {
		return finding{}, false
	}
	before := civil.FirstDay - 1
	if failed {
		before = last.on
	}
	if x := longest(ob.excusals, ob.on, before); x != nil {
		return finding{word: Excused, excusal: x, open: !failed && opening(ob.excusals, ob.on), lasts: civil.LastDay, stays: civil.LastDay}, true
	}
	if failed {
		return finding{word: Failed, record: last.record, since: last.on, stays: civil.LastDay}, true
	}
	return ob.byCadence(), true
}

func (ob *obligation) byCadence() finding {
	switch ob.item.Cadence.Rule {
	case program.Every:
		return ob.every()
	case program.Within:
		return ob.within()
	case program.Once:
		return ob.once()
	case program.Each:
		return ob.each()
	case program.After:
		return ob.after()
	default:
		return ob.holds()
	}
}
