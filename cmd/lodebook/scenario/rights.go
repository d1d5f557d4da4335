package scenario

import (
	"slices"

	"lodebook/models/civil"
)

// rightsTable says who may enter which zone: whoever works in the control corridor may enter it, and those of level 2
// and whoever cleans or repairs the magnet rooms may enter those. Some rights end by themselves.
func rightsTable(a almanac) []byte {
	var rows [][]string
	for _, x := range staff {
		for _, ph := range phases(a, x) {
			if ph.change {
				continue // it is the same stint
			}
			for _, zone := range zonesOf(x) {
				rows = append(rows, []string{x.code, zone, ph.first.String(), rightEnds(a, x), byCode(officer).name})
			}
		}
	}
	return table("person,zone,from,to,granted_by", rows)
}

func zonesOf(x person) []string {
	switch {
	case x.code == levelUnknown, slices.Contains([]string{"reception", "guard"}, x.job):
		return nil
	case x.level == "L2", x.job == "cleaner", x.job == "ventilation fitter":
		return []string{"III", "IV"}
	}
	return []string{"III"}
}

// rightEnds is the last day of the rights of those whose work here has an end, or empty.
func rightEnds(a almanac, x person) string {
	switch x.job {
	case "research student":
		return a.ago(-40).String()
	case "magnet engineer":
		return civil.Of(yearOf(a.ago(0))+1, 1, 31).String()
	case "researcher":
		if x.left == 0 {
			return a.ago(21).String() // the project is over, and he is still here
		}
	}
	return ""
}

func yearOf(d civil.Day) int {
	y, _, _ := d.Date()
	return y
}
