package scenario

import (
	"fmt"
	"slices"
	"time"
)

// badgeOf is the badge of the person at that place of the staff.
func badgeOf(i int) string { return fmt.Sprintf("AV-%05d", 20417+i*331) }

// lostBadge is on the doors' list and nobody's.
const lostBadge = "AV-19006"

const doorDays = 12 // of which door events are on record

// passagesTable is the export of the doors' own system: who went through which door in the last days. The doors let in
// whom they know, also a contractor whose training ran out and a researcher whose project is over.
func passagesTable(a almanac) []byte {
	var rows [][]string
	add := func(ago, minute int, door, badge, direction string) {
		at := a.ago(ago).Midnight(a.loc).Add(time.Duration(minute) * time.Minute)
		rows = append(rows, []string{at.UTC().Format(time.RFC3339), door, badge, direction})
	}
	for ago := doorDays; ago >= 1; ago-- {
		day := a.ago(ago).Weekday()
		for i, x := range staff {
			if x.left > 0 || x.joined < doorDays || (i+ago)%3 != 0 || x.code == onLeave || x.code == newcomer || x.code == limited || x.code == waitingOpen || x.code == lapsedVisitor {
				continue
			}
			if day == time.Saturday || day == time.Sunday || !slices.Contains(zonesOf(x), "IV") || x.job == "researcher" {
				continue
			}
			add(ago, 7*60+30+i*3, "DOOR-05", badgeOf(i), "in")
			add(ago, 15*60+i*2, "DOOR-05", badgeOf(i), "out")
		}
	}
	at := func(code string) string {
		return badgeOf(slices.IndexFunc(staff, func(x person) bool { return x.code == code }))
	}
	add(9, 10*60+12, "DOOR-06", at(lapsedVisitor), "in")
	add(4, 13*60+47, "DOOR-06", at(lapsedVisitor), "in")
	add(6, 9*60+5, "DOOR-03", at(researcher), "in")
	add(3, 21*60+40, "DOOR-02", lostBadge, "in")
	add(2, 8*60+15, "DOOR-11", at(technologist), "in")
	return table("at,door,badge,direction", inOrder(rows))
}

// inOrder sorts rows; where two days fall on one, as around a holiday, the same row comes once.
func inOrder(rows [][]string) [][]string {
	slices.SortFunc(rows, slices.Compare[[]string])
	return slices.CompactFunc(rows, slices.Equal[[]string])
}

// holdersTable is the doors' own list of who can open what.
func holdersTable() []byte {
	var rows [][]string
	for i, x := range staff {
		if x.left > 0 && x.code != cameBack {
			continue
		}
		for _, zone := range zonesOf(x) {
			for _, door := range map[string][]string{"III": {"DOOR-02", "DOOR-03"}, "IV": {"DOOR-05", "DOOR-06"}}[zone] {
				if x.code == nightLead && door == "DOOR-06" {
					continue // forgotten
				}
				rows = append(rows, []string{badgeOf(i), door})
			}
		}
	}
	rows = append(rows, []string{lostBadge, "DOOR-02"})
	return table("badge,door", rows)
}
