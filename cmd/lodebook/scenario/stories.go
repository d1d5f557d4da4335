package scenario

import (
	"strings"

	"lodebook/models/civil"
)

// people are the stories of single people.
func (t *tale) people() {
	// A contractor's level 2 training ran to the end of the month before last.
	t.instead("training/level-2", lapsedVisitor, civil.FirstDay,
		row{day: t.ago(byCode(lapsedVisitor).joined), by: nameOf(officer)},
		row{day: t.inMonth(26, 12), by: nameOf(officer)}, row{day: t.inMonth(14, 12), by: nameOf(deputy)})

	// A colleague of his is excused until his firm's next course; the import asks that it lets him in.
	t.instead("training/level-2", waitingOpen, civil.FirstDay,
		row{day: t.ago(byCode(waitingOpen).joined), by: nameOf(officer)}, row{day: t.inMonth(13, 10), by: nameOf(officer)})
	t.excusals = append(t.excusals, excusal{
		"TRAIN-LEVEL-2", waitingOpen, t.month(0), t.today + 21, "The firm's course was moved to next month", nameOf(deputy), true,
	})

	// A third brought a certificate with an end of its own.
	t.instead("training/level-2", certificate, civil.FirstDay, row{
		day: t.ago(byCode(certificate).joined), until: new(t.today + 24), by: magnetFirm, note: "Certificate of the firm's own course",
	})

	t.instead("screening/staff", newcomer, civil.FirstDay)
	t.instead("acknowledgement/HOUSE-RULES", unread, t.ago(450), row{day: t.ago(384)})
	t.instead("training/life-support", "S43", civil.FirstDay, row{day: t.ago(748), by: nameOf(officer)})

	// Cleared with a restriction: the control corridor and no further.
	t.instead("screening/staff", limited, t.ago(400), row{day: t.ago(88), limit: "I II III", by: nameOf(officer)})

	changed := t.twoDays(34)
	t.happened(event{"health-change", selfReported, changed, ""}, row{what: "screening/staff", day: changed + 1, by: nameOf(officer)})
	earlier := t.twoDays(310)
	t.happened(event{"health-change", "S31", earlier, ""}, row{what: "screening/staff", day: earlier + 1, by: nameOf(deputy)})

	// Back after a time away, he was taken through what to do before his crew's next drill.
	t.edits = append(t.edits, func(h *history) {
		h.add(row{what: "drill/oxygen", subject: cameBack, day: t.ago(74), by: nameOf(officer), note: "Walked through on his return"})
	})

	t.except(func(r row) bool {
		return r.subject == excusedPerson && strings.HasPrefix(r.what, drillKind) && r.day > t.ago(420)
	})
	t.excusals = append(t.excusals, excusal{
		"DRILL-EACH-PERSON", excusedPerson, t.ago(50), t.today + 40, "Lent to another site until next month", nameOf(officer), false,
	})
}

// soon are renewals that run low whatever day it is: who did the last one, and the days, about, that
// are left of it.
func (t *tale) soon() {
	for _, x := range []struct {
		what, subject, by string
		left              int
	}{
		{"screening/staff", "S07", officer, 9}, {"screening/staff", "S24", deputy, 16}, {"screening/staff", "S39", deputy, 6},
		{"screening/staff", "S33", officer, 22}, {"acknowledgement/HOUSE-RULES", technologist, technologist, 11},
		{"inspection/door-force", "DOOR-02", facilityHead, 7}, {"inspection/label-check", "PORT-PUMP", officer, 13},
		{"inspection/exhaust-flow", "FAN-DEWAR", facilityHead, 19},
	} {
		last := t.ago(365 - x.left)
		t.instead(x.what, x.subject, last-90, row{day: last, by: nameOf(x.by)})
	}
}

// things are the stories of fixtures.
func (t *tale) things() {
	t.instead("inspection/vent-full", overdueVent, t.ago(560), row{day: t.ago(393), by: nameOf(facilityHead)})
	t.instead("inspection/oxygen-calibration", lateMonitor, t.ago(560), row{day: t.ago(374), by: nameOf(facilityHead)})
	t.instead("inspection/power-off-test", lateButton, t.ago(560), row{day: t.ago(387), by: nameOf(facilityHead)})
	t.instead("inspection/label-check", newItem, civil.FirstDay)
	t.roof()
	t.failing()
	t.repair()

	missed := t.missedMorning()
	t.except(func(r row) bool { return r.what == "check/detector-day" && r.subject == missedCheck && r.day == missed })

	t.happened(event{"storm", failedVent, t.twoDays(265), "Gale from the south-west"},
		row{what: "inspection/vent-outside", day: t.twoDays(265) + 1, by: nameOf(facilityHead)})
	t.happened(event{"monitor-alarm", "OXY-SEA-LOW", t.ago(172), "Sensor at its end, no helium"},
		row{what: "inspection/oxygen-calibration", day: t.ago(170), by: nameOf(facilityHead), note: "New sensor"},
		row{what: "check/oxygen-sensor", day: t.ago(170), by: nameOf(facilityHead)})
	t.happened(event{"incident", "site:" + siteCode, t.twoDays(121), "A steel pen at the seaward door, found by the detector"},
		row{what: "review/incident", day: t.twoDays(121) + 1, by: nameOf(director)})
}

// roof is the work beside the vent on the roof: once looked at too late, and not yet this time.
func (t *tale) roof() {
	first, looked := t.ago(146), t.ago(140)
	last := t.ago(5)
	t.except(func(r row) bool {
		between := first <= r.day && r.day < looked
		return r.subject == roofVent && strings.HasPrefix(r.what, "inspection/vent") && (between || r.day >= last)
	})
	t.happened(event{"roof-work", roofVent, first, "New gutter"},
		row{what: "inspection/vent-outside", day: looked, by: nameOf(facilityHead), note: "Looked at late: the firm had not told us"})
	t.happened(event{"roof-work", roofVent, last, "Aerial taken down"})
}

// failing is the vent whose yearly inspection failed: what failed is not seen from outside, where
// it is in order.
func (t *tale) failing() {
	failed := t.ago(9)
	seen := t.openFrom(failed + 2)
	t.except(func(r row) bool {
		return r.subject == failedVent && strings.HasPrefix(r.what, "inspection/vent") && r.day >= failed && r.day <= seen
	})
	t.instead("inspection/vent-full", failedVent, failed)
	t.edits = append(t.edits, func(h *history) {
		h.add(row{what: "inspection/vent-outside", subject: failedVent, day: seen, by: nameOf(facilityHead)})
	})
	t.sheets = append(t.sheets, SheetEntry{failedVent, "inspection/vent-full", failed, map[string]string{
		"outlet_clear": "yes", "rain_cap": "yes", "mesh": "whole", "water": "yes", "supports": "yes", "path_m": "2.40", "opening_m": "5.10",
		"distances_kept": "no", "barrier": "yes", "inside_on": t.ago(700).String(), "remark": "About a hand of water at the drain; the new benches stand under the outlet",
	}, "Path closed with the harbour office"})
}

// repair is the door that failed a look, was repaired and measured.
func (t *tale) repair() {
	found := t.twoDays(205)
	t.edits = append(t.edits, func(h *history) {
		h.add(row{what: "inspection/door-month", subject: repairedDoor, day: found, failed: true, by: nameOf("S37"), note: "Does not latch"})
		h.add(row{what: "inspection/door-month", subject: repairedDoor, day: found + 1, by: nameOf(facilityHead)})
	})
	t.happened(event{"door-repair", repairedDoor, found, "New closer"}, row{what: "inspection/door-force", day: found + 1, by: nameOf(facilityHead)})
}

// missedMorning is an operating day of last week, with one after it before today.
func (t *tale) missedMorning() civil.Day {
	return t.openBy(civil.PeriodOf(civil.ByWeek, t.today).First - 5)
}

// crews are the stories of whole crews.
func (t *tale) crews() {
	t.never = append(t.never, "drill/quench crew:night")
	t.instead("review/crew-briefing", "crew:late", t.month(1))
}
