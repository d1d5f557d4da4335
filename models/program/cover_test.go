package program

import "testing"

func TestEscort(t *testing.T) {
	p := mustParse(t, head+"zones: [{code: III, restricted: true, escort: L2}, {code: IV}]\nlevels: [{code: L1}, {code: L2}]\n")
	same(t, "escort of III", p.Zones[0].Escort, "L2")
	same(t, "escort of IV", p.Zones[1].Escort, "")
}

// faultyCover are wrong in who must be there.
var faultyCover = []refusedFile{
	{"escort", head + "zones: [{code: III, escort: L3}, {code: IV, escort: [L1]}]\nlevels: [{code: L1}]\n", []string{
		`line 3, column 29: zones[0].escort: found "L3"; there is no such level; write L1`,
		"line 3, column 53: zones[1].escort: found a list; write L1",
	}},
}
