package network

import (
	"slices"

	"lodebook/models/civil"
)

// habit is how what answers an item is done: by whom, how often, and how well.
type habit struct {
	what   []string // record kinds that answer, one of which is taken
	every  int      // days from one to the next, of what is renewed; 0: done once
	slack  int      // days by which it is mostly done before that
	each   civil.Unit
	cycle  bool // each period of the unit, instead of every
	begin  int  // days from the beginning within which it is first done
	until  int  // days for which the certificate is good, 0: it says nothing
	clock  bool // with the time of day
	miss   int  // how many of a thousand are left out
	fail   int  // how many of a thousand fail
	asked  func(w *worker, d civil.Day) bool
	kind   string // of the fixtures
	thing  func(t *thing) bool
	guests bool // guests do it at this site too
}

func level2(w *worker, d civil.Day) bool {
	l := valueOn(w.levels, d)
	return l == "L2" || l == "L3"
}

func level3(w *worker, d civil.Day) bool { return valueOn(w.levels, d) == "L3" }

func inCrew(crews ...string) func(*worker, civil.Day) bool {
	return func(w *worker, d civil.Day) bool { return slices.Contains(crews, valueOn(w.crews, d)) }
}

// personHabits are those of people, in the order of the items in site.yaml.
var personHabits = []habit{
	{what: []string{"training/induction"}, begin: 12, miss: 25, fail: 3, guests: true},
	{what: []string{"screening/staff"}, every: 365, slack: 40, begin: 28, miss: 25, fail: 8},
	{what: []string{"training/level-1"}, every: 365, slack: 45, begin: 40, miss: 25, fail: 15},
	{what: []string{"training/level-2"}, every: 365, slack: 45, begin: 40, miss: 25, fail: 20, asked: level2},
	{what: []string{"training/level-3", "training/level-3-course"}, every: 730, slack: 70, begin: 55, miss: 20, fail: 20, asked: level3},
	{what: []string{"acknowledgement/POL-ACCESS"}, every: 181, slack: 20, begin: 14, miss: 40},
	{what: []string{"training/fire"}, every: 375, slack: 30, begin: 60, miss: 40, fail: 5},
	{what: []string{"training/talk"}, cycle: true, each: civil.ByYear, miss: 60, asked: level2},
	{what: []string{"training/life-support"}, every: 730, slack: 60, begin: 85, until: 730, miss: 30, fail: 30, asked: level2},
	{what: []string{"drill/quench", "drill/collapse"}, every: 88, slack: 14, begin: 80, miss: 50, fail: 10, asked: level2},
	{what: []string{"drill/evacuation"}, every: 600, slack: 60, begin: 500, miss: 40, asked: inCrew("early", "late", "night")},
	{what: []string{"training/night"}, every: 1400, slack: 40, begin: 20, until: 1500, miss: 30, asked: inCrew("night")},
	{what: []string{"training/cryogen"}, every: 1095, slack: 60, begin: 35, miss: 40, fail: 20, asked: func(w *worker, _ civil.Day) bool { return w.cryogen }},
	{what: []string{"training/contractor"}, every: 182, slack: 10, begin: 10, miss: 60, asked: func(w *worker, _ civil.Day) bool { return w.employer == firms[0] || w.employer == firms[1] }},
	{what: []string{"review/at-work"}, every: 365, slack: 30, begin: 90, miss: 60, fail: 10, asked: level2},
	{what: []string{"review/quarter"}, cycle: true, each: civil.ByQuarter, miss: 50, asked: level3},
	{what: []string{"training/emergency-plan"}, every: 365, slack: 30, begin: 50, miss: 40, asked: func(w *worker, _ civil.Day) bool { return w.post != "" }},
}

// fixtureHabits are those of fixtures.
var fixtureHabits = []habit{
	{kind: "detector", what: []string{"check/detector"}, cycle: true, each: civil.ByDay, clock: true, miss: 22, fail: 4},
	{kind: "detector", what: []string{"inspection/detector"}, every: 365, slack: 20, begin: 50, miss: 30, fail: 20},
	{kind: "door", what: []string{"inspection/door"}, cycle: true, each: civil.ByMonth, miss: 35, fail: 12},
	{kind: "door", what: []string{"inspection/door-force"}, every: 365, slack: 20, begin: 45, miss: 30, fail: 30, thing: func(t *thing) bool { return t.swing == "inward" }},
	{kind: "magnet", what: []string{"check/helium"}, cycle: true, each: civil.ByWeek, clock: true, miss: 20, fail: 5},
	{kind: "oxygen-monitor", what: []string{"check/oxygen"}, cycle: true, each: civil.ByQuarter, clock: true, miss: 40, fail: 15},
	{kind: "oxygen-monitor", what: []string{"inspection/oxygen-cell"}, every: 365, slack: 20, begin: 45, miss: 30, fail: 10},
	{kind: "vent", what: []string{"inspection/vent"}, every: 365, slack: 20, begin: 45, miss: 30, fail: 25},
	{kind: "vent", what: []string{"inspection/vent-photo"}, every: 730, slack: 30, begin: 70, miss: 60, thing: func(t *thing) bool { return t.low }},
	{kind: "portable", what: []string{"inspection/label"}, every: 730, slack: 40, begin: 90, miss: 30, fail: 10},
}
