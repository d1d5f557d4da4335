package standing

import (
	"fmt"

	"lodebook/models/civil"
)

// whyHeld derives the held level of the day and says how.
func (v *view) whyHeld(person *local, on civil.Day) (string, []string) {
	var r reasons
	level := v.heldLevel(person, on)
	ed := v.edition(on)
	p, here := v.presence(person, on)
	assigned := v.text(person, factLevel, on)
	switch {
	case ed == nil:
		r.say("No version of the program is in force on %v.", on)
	case !here:
		r.say("%s is not on staff on %v.", person.subject.Code, on)
	case assigned == "":
		r.say("No level is assigned to %s on %v.", person.subject.Code, on)
	case ed.reachable(assigned) == nil:
		r.say("The assigned level %s is not one of the program's.", assigned)
	default:
		r.say("The assigned level is %s.", assigned)
		for _, rung := range ed.reachable(assigned) {
			if v.beneath.whyRung(&r, rung, p, ed, on); rung.level.Code == level {
				break
			}
		}
	}
	return level, r
}

// whyRung tells of each item that confers the level how it stands.
func (v *view) whyRung(r *reasons, rung rung, p presence, ed *edition, on civil.Day) {
	any, held := false, true
	for _, item := range rung.items {
		_, f, asked := v.verdict(item, p, ed, on)
		if !asked {
			continue
		}
		any = true
		state := "open"
		if !f.open {
			state, held = "not open", false
		}
		r.say("%s, which confers %s, stands as %s%s and is %s.", item.Code, rung.level.Code, f.word, dueWords(f), state)
	}
	switch {
	case !any:
		r.say("No item that confers %s is asked of %s, so it is not held.", rung.level.Code, p.subject.Code)
	case !held:
		r.say("So %s is not held.", rung.level.Code)
	default:
		r.say("So %s is held.", rung.level.Code)
	}
}

func dueWords(f finding) string {
	if f.due == nil {
		return ""
	}
	return fmt.Sprintf(" (due %v)", *f.due)
}
