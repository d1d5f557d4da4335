package scenario

import (
	"strconv"

	"lodebook/models/civil"
)

// series are the sheets that were filled in over months, with their values.
func (t *tale) series() {
	t.drift()
	t.helium()
	t.readings()
}

// drifting are the distances at which a detector found the test piece, month by month.
var drifting = []string{"58.0", "57.5", "58.5", "57.0", "55.5", "54.0", "52.5", "49.5", "47.0", "44.0"}

// drift is the detector whose distance falls, each time within what still passes.
func (t *tale) drift() {
	first := len(drifting)
	t.instead("check/detector-sensitivity", driftDetector, t.month(first))
	for i, cm := range drifting {
		entry := SheetEntry{driftDetector, "check/detector-sensitivity", t.inMonth(first-i, 11), map[string]string{
			"distance_cm": cm, "all_heights": "yes", "false_alarms": strconv.Itoa(i / 5),
		}, ""}
		if i == len(drifting)-1 {
			entry.Values["remark"] = "Shorter again; the manufacturer is asked"
		}
		t.sheets = append(t.sheets, entry)
	}
}

// helium is the level of the magnet that holds some, week by week, with one refill.
func (t *tale) helium() {
	const weeks = 12
	this := civil.PeriodOf(civil.ByWeek, t.today).First
	t.instead("check/magnet-helium", seaMagnet, this-7*weeks)
	for i := range weeks {
		level := 74.8 - 0.45*float64(i)
		if i >= 8 {
			level += 14.5
		}
		t.sheets = append(t.sheets, SheetEntry{seaMagnet, "check/magnet-helium", t.openWeek(this - civil.Day(7*(weeks-i))), map[string]string{
			"level_pct": strconv.FormatFloat(level, 'f', 1, 64), "pressure": "yes",
		}, ""})
	}
}

// openWeek is the first operating day of the week that begins on a Monday.
func (t *tale) openWeek(monday civil.Day) civil.Day { return min(t.openFrom(monday), monday+6) }

// readings are single sheets with values: a door that is stiff and a unit that is fine.
func (t *tale) readings() {
	force := t.ago(63)
	t.instead("inspection/door-force", stiffDoor, force)
	ramp := t.inMonth(1, 15)
	t.instead("inspection/ramp-unit", landMagnet, t.month(1))
	t.sheets = append(t.sheets,
		SheetEntry{stiffDoor, "inspection/door-force", force, map[string]string{"force_n": "38.5", "closing_s": "5.8", "shield": "yes", "remark": "Closer to be set again"}, ""},
		SheetEntry{landMagnet, "inspection/ramp-unit", ramp, map[string]string{"ready": "yes", "battery_v": "25.9"}, ""},
	)
}

// plans are the drills to come: one this week where a day of it is left, and two next week.
func plans(a almanac) []Plan {
	next := civil.PeriodOf(civil.ByWeek, a.today).Last + 1
	return []Plan{
		{"drill/fire", "early", a.openFrom(a.today), "14:00", "With the harbour's fire crew"},
		{"drill/arrest", "late", a.openFrom(next + 1), "19:30", ""},
		{"drill/quench", "night", a.openFrom(next + 3), "02:30", "The first for this crew"},
	}
}
