package standing

import (
	"slices"

	"lodebook/models/civil"
)

// Where there is a board, the level that a person holds is told by the courses of what confers levels; it
// is the same that deriveHeld makes of the records.

// heldByCourses is the level that the person holds on the day.
func (v *view) heldByCourses(person *local, on civil.Day) string {
	ed := v.edition(on)
	if ed == nil {
		return ""
	}
	if _, here := v.presence(person, on); !here {
		return ""
	}
	for _, r := range ed.reachable(v.text(person, factLevel, on)) {
		if v.opensByCourses(r, person, on) {
			return r.level.Code
		}
	}
	return ""
}

// opensByCourses tells whether at least one item that confers the level asks the person and all that do
// are open.
func (v *view) opensByCourses(r rung, person *local, on civil.Day) bool {
	open := false
	for _, item := range r.items {
		i := v.board.plan.number[item.Code]
		row := v.board.row(i, person.no)
		if row < 0 {
			continue
		}
		switch state := stateOn(v.board.tracks[i].course(row), on); {
		case state == uint8(none):
		case !opens(state):
			return false
		default:
			open = true
		}
	}
	return open
}

// ladderByCourses is the person's held level over all days.
func (v *view) ladderByCourses(person *local) []holding {
	t := turns{after: dayBefore, upTo: civil.LastDay}
	v.reignTurns(&t)
	v.stintTurns(&t, person)
	v.factTurns(&t, person, factLevel)
	for i, confers := range v.board.plan.confers {
		if !confers {
			continue
		}
		if row := v.board.row(int32(i), person.no); row >= 0 {
			for _, p := range v.board.tracks[i].course(row) {
				t.add(p.day())
			}
		}
	}
	slices.Sort(t.days)
	var out []holding
	for _, d := range slices.Compact(t.days) {
		if level := v.heldByCourses(person, d); len(out) == 0 || out[len(out)-1].level != level {
			out = append(out, holding{d, level})
		}
	}
	v.ladders[person.no] = ladder{civil.LastDay, out}
	return out
}
