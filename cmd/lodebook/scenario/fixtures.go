package scenario

// The fixtures that a story is about.
const (
	seaMagnet     = "MAG-SEA"     // holds helium and has a vent
	landMagnet    = "MAG-LAND"    // holds none and has none
	roofVent      = "VENT-SEA"    // work on the roof beside it is unanswered
	failedVent    = "VENT-QUAY"   // failed its yearly inspection
	overdueVent   = "VENT-DEWAR"  // its yearly inspection is overdue
	driftDetector = "DET-SEA"     // finds the test piece at a shorter distance every month
	missedCheck   = "DET-HALL"    // was not tried one morning last week
	lateMonitor   = "OXY-DEWAR"   // its calibration is overdue
	lateButton    = "OFF-PLANT"   // its function test is overdue
	repairedDoor  = "DOOR-05"     // failed a monthly look, repaired, measured again
	stiffDoor     = "DOOR-07"     // opens with more force than it should
	newItem       = "PORT-IVPOLE" // in use for days and not judged yet
	awayItem      = "PORT-MONITOR"
)

// fixture is one thing that gets inspected. Since and until count in days before today; until is
// zero for a thing in use.
type fixture struct {
	code, kind, name, zone string
	since, until           int
	facts                  map[string]string
}

func facts(pairs ...string) map[string]string {
	m := map[string]string{}
	for i := 0; i+1 < len(pairs); i += 2 {
		m[pairs[i]] = pairs[i+1]
	}
	return m
}

var fixtures = []fixture{
	{"DOOR-01", "door", "Door, entrance hall to waiting", "II", 2600, 0, facts("swing", "sliding", "badge_reader", "no")},
	{"DOOR-02", "door", "Door, waiting to control corridor", "III", 2600, 0, facts("swing", "outward", "badge_reader", "yes")},
	{"DOOR-03", "door", "Door, staff stair to control corridor", "III", 2600, 0, facts("swing", "inward", "badge_reader", "yes")},
	{"DOOR-04", "door", "Door, loading bay to control corridor", "III", 2600, 0, facts("swing", "outward", "badge_reader", "yes")},
	{"DOOR-05", "door", "Door, control room to seaward magnet", "IV", 2600, 0, facts("swing", "outward", "badge_reader", "yes")},
	{"DOOR-06", "door", "Door, control room to landward magnet", "IV", 900, 0, facts("swing", "outward", "badge_reader", "yes")},
	{"DOOR-07", "door", "Door, preparation to seaward magnet", "IV", 2600, 0, facts("swing", "inward", "badge_reader", "no")},
	{"DOOR-08", "door", "Door, plant room", "III", 2600, 0, facts("swing", "outward", "badge_reader", "no")},
	{"MAG-SEA", "magnet", "Seaward magnet", "IV", 2600, 0, facts("field_t", "3.0", "has_helium", "yes", "has_vent", "yes")},
	{"MAG-LAND", "magnet", "Landward magnet", "IV", 900, 0, facts("field_t", "0.55", "has_helium", "no", "has_vent", "no")},
	{"VENT-SEA", "vent", "Seaward vent, on the roof", "I", 2600, 0, facts("outlet_height_m", "11.4", "over_public_path", "no")},
	{"VENT-QUAY", "vent", "Seaward relief vent, over the quay path", "I", 2600, 0, facts("outlet_height_m", "4.2", "over_public_path", "yes")},
	{"VENT-DEWAR", "vent", "Dewar room vent, in the yard", "I", 2600, 0, facts("outlet_height_m", "6.0", "over_public_path", "no")},
	{"OXY-SEA-HIGH", "oxygen-monitor", "Oxygen monitor, seaward ceiling", "IV", 2600, 0, facts("alarm_at_pct", "19.5", "has_repeater", "yes")},
	{"OXY-SEA-LOW", "oxygen-monitor", "Oxygen monitor, seaward table", "IV", 1300, 0, facts("alarm_at_pct", "19.5", "has_repeater", "yes")},
	{"OXY-PLANT", "oxygen-monitor", "Oxygen monitor, plant room", "III", 2600, 0, facts("alarm_at_pct", "19.5", "has_repeater", "no")},
	{"OXY-DEWAR", "oxygen-monitor", "Oxygen monitor, dewar room", "III", 2600, 0, facts("alarm_at_pct", "19.5", "has_repeater", "no")},
	{"DET-HALL", "detector", "Detector portal, control corridor", "III", 1500, 0, facts("mounted", "portal")},
	{"DET-SEA", "detector", "Detector, seaward door", "III", 1500, 0, facts("mounted", "wall")},
	{"DET-LAND", "detector", "Detector, landward door", "III", 900, 0, facts("mounted", "wall")},
	{"FAN-SEA", "exhaust", "Exhaust fan, seaward magnet room", "IV", 2600, 0, facts("starts_on_alarm", "yes")},
	{"FAN-DEWAR", "exhaust", "Exhaust fan, dewar room", "III", 2600, 0, facts("starts_on_alarm", "no")},
	{"DEWAR-1", "dewar", "Dewar of 100 litres", "III", 1100, 0, nil},
	{"QB-SEA-ROOM", "quench-button", "Quench button, seaward magnet room", "IV", 2600, 0, nil},
	{"QB-SEA-CTRL", "quench-button", "Quench button, control room", "III", 2600, 0, nil},
	{"OFF-SEA", "power-off", "Emergency-off, seaward magnet room", "IV", 2600, 0, nil},
	{"OFF-LAND", "power-off", "Emergency-off, landward magnet room", "IV", 900, 0, nil},
	{"OFF-CTRL", "power-off", "Emergency-off, control room", "III", 2600, 0, nil},
	{"OFF-PLANT", "power-off", "Emergency-off, plant room", "III", 2600, 0, nil},
	{"PADS-SEA", "pads", "Pads, seaward magnet", "IV", 2600, 0, nil},
	{"PADS-LAND", "pads", "Pads, landward magnet", "IV", 900, 0, nil},
	{"HEAR-SEA", "hearing", "Earplugs and muffs, seaward", "II", 2600, 0, nil},
	{"HEAR-LAND", "hearing", "Earplugs and muffs, landward", "II", 900, 0, nil},
	{"PORT-TROLLEY", "portable", "Patient trolley", "IV", 1700, 0, facts("label", "MR Conditional")},
	{"PORT-CHAIR", "portable", "Wheelchair", "IV", 1250, 0, facts("label", "MR Conditional")},
	{"PORT-MONITOR", "portable", "Patient monitor", "IV", 980, 0, facts("label", "MR Conditional")},
	{"PORT-PUMP", "portable", "Contrast injector", "IV", 1340, 0, facts("label", "MR Conditional")},
	{"PORT-EXT-1", "portable", "Fire extinguisher, control corridor", "III", 2000, 0, facts("label", "MR Conditional")},
	{"PORT-EXT-2", "portable", "Fire extinguisher, landward door", "III", 900, 0, facts("label", "MR Conditional")},
	{"PORT-STEP", "portable", "Wooden step", "IV", 2200, 0, facts("label", "MR Safe")},
	{"PORT-CLEAN", "portable", "Cleaning set", "IV", 720, 0, facts("label", "MR Safe")},
	{"PORT-IVPOLE", "portable", "Infusion pole", "IV", 6, 0, nil},
	{"PORT-LADDER", "portable", "Ladder, withdrawn", "III", 1600, 210, facts("label", "MR Unsafe")},
}
