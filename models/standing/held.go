package standing

import (
	"slices"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// holding is a level held from a day on; empty is none.
type holding struct {
	from  civil.Day
	level string
}

// ladder is what a person held on the days up to one.
type ladder struct {
	upTo     civil.Day
	holdings []holding
}

// Held is the level that the person holds on the day, as known at k, and why: the highest level, not
// above the assigned one, that some item in force confers and asks of them, all such items being
// open. It is empty where there is none.
func (e *Engine) Held(site, person string, on civil.Day, k int64) (level string, why []string) {
	v, err := e.view(site, k)
	if err != nil {
		return "", []string{err.Error()}
	}
	return v.whyHeld(v.local(Subject{program.AsksPerson, person}), on)
}

// heldLevel is the held level on the day; in the view beneath, in which held levels are derived,
// there is none.
func (v *view) heldLevel(person *local, on civil.Day) string {
	if v.beneath == nil || person.subject.Asks != program.AsksPerson {
		return ""
	}
	if known, ok := v.ladders[person.no]; ok && known.upTo >= on {
		return known.on(on)
	}
	if v.board != nil && person.no >= 0 {
		return v.heldByCourses(person, on)
	}
	level, _ := v.beneath.deriveHeld(person, on)
	return level
}

// on is the level held on a day up to which the ladder is known.
func (l *ladder) on(d civil.Day) string {
	level := ""
	for _, h := range l.holdings {
		if h.from > d {
			break
		}
		level = h.level
	}
	return level
}

// deriveHeld derives the held level of the day, and the last day through which it stays so if nothing
// more goes on record and no version, stint, fact or excusal begins or ends.
func (v *view) deriveHeld(person *local, on civil.Day) (level string, lasts civil.Day) {
	ed := v.edition(on)
	p, here := v.presence(person, on)
	if ed == nil || !here {
		return "", civil.LastDay
	}
	for _, r := range ed.reachable(v.text(person, factLevel, on)) {
		if open, lasts := v.confers(r, p, ed, on); open {
			return r.level.Code, lasts
		}
	}
	return "", civil.LastDay
}

// reachable are the rungs not above the assigned level, highest first; none without one.
func (ed *edition) reachable(assigned string) []rung {
	i := slices.IndexFunc(ed.conferring, func(r rung) bool { return r.level.Code == assigned })
	if assigned == "" || i < 0 {
		return nil
	}
	return ed.conferring[i:]
}

// confers tells whether at least one item that confers the level asks the person and all that do are
// open, and through which day they stay so. An item whose selector lacks a fact blocks.
func (v *view) confers(r rung, p presence, ed *edition, on civil.Day) (open bool, lasts civil.Day) {
	lasts = civil.LastDay
	for _, item := range r.items {
		_, f, asked := v.verdict(item, p, ed, on)
		if !asked {
			continue
		}
		if !f.open {
			return false, lasts
		}
		open, lasts = true, min(lasts, f.lasts)
	}
	return open, lasts
}

// heldTurns adds the days on which the person's held level changed.
func (v *view) heldTurns(t *turns, person *local) {
	if v.beneath == nil || person.subject.Asks != program.AsksPerson {
		return
	}
	for _, h := range v.ladder(person, t.upTo) {
		t.add(h.from)
	}
}

// ladder is the person's held level over the days from the first version up to the day.
func (v *view) ladder(person *local, upTo civil.Day) []holding {
	if known, ok := v.ladders[person.no]; ok && known.upTo >= upTo {
		return known.holdings
	}
	if v.board != nil && person.no >= 0 {
		return v.ladderByCourses(person)
	}
	var out []holding
	outer := v.beneath.conferTurns(person, upTo)
	for i, d := 0, v.reigns[0].from; d <= upTo; {
		level, lasts := v.beneath.deriveHeld(person, d)
		if len(out) == 0 || out[len(out)-1].level != level {
			out = append(out, holding{d, level})
		}
		for i < len(outer) && outer[i] <= d {
			i++
		}
		d = lasts + 1
		if i < len(outer) {
			d = min(d, outer[i])
		}
	}
	v.ladders[person.no] = ladder{upTo, out}
	return out
}

// conferTurns lists, in order, every day up to the given one on which something goes on record,
// begins or ends that bears on what confers a level to the person.
func (v *view) conferTurns(person *local, upTo civil.Day) []civil.Day {
	t := turns{after: civil.FirstDay - 1, upTo: upTo}
	v.reignTurns(&t)
	v.stintTurns(&t, person)
	v.fieldTurns(&t, person, factLevel)
	for _, r := range v.reigns {
		for _, rung := range r.conferring {
			for _, item := range rung.items {
				v.itemTurns(&t, person, item)
			}
		}
	}
	slices.Sort(t.days)
	return slices.Compact(t.days)
}

// itemTurns adds the days on which something bears on the item asked of the subject, its due days
// apart.
func (v *view) itemTurns(t *turns, l *local, item *program.Item) {
	if item.Since != nil {
		t.add(*item.Since)
	}
	for _, sel := range []*program.Selector{item.When, item.Cadence.Holds} {
		if sel == nil {
			continue
		}
		for _, field := range sel.Reads() {
			v.fieldTurns(t, l, field)
		}
	}
	for _, what := range item.Records {
		v.recordTurns(t, v.records(l, what))
	}
	for _, code := range item.Cadence.After {
		v.eventTurns(t, v.past(l).eventsOf(code))
	}
	for _, x := range v.excuse(item.Code, l) {
		t.addSpan(&x.From, x.To)
	}
}

func (v *view) eventTurns(t *turns, events []Event) {
	for i := range events {
		for j := range v.reigns {
			t.add(dayIn(events[i].Day, events[i].Time, v.reigns[j].loc))
		}
	}
}
