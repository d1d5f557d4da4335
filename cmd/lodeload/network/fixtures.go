package network

import (
	"fmt"

	"lodebook/models/program"
)

// thing is a fixture as the history sees it.
type thing struct {
	code, kind string
	in         span
	swing      string
	low        bool // a vent near a path
}

func (t *thing) subject() Subject { return Subject{program.AsksFixture, t.code} }

// kinds are those of a site's fixtures in the order in which they come; the rest are portable items.
var kinds = []string{
	"detector", "detector", "magnet", "vent", "door", "door", "door", "door", "oxygen-monitor", "oxygen-monitor", "vent", "magnet",
}

// things are the fixtures of the site. Every tenth of those behind the first ones is of some kind of
// them again.
func (s *Site) things() []*thing {
	r := s.n.chance(s.no, "fixtures")
	var all []*thing
	for i := range s.n.share(s.n.Fixtures, s.no) {
		t := &thing{code: fmt.Sprintf("F%05d", i+1), kind: "portable", in: span{First - between(r, 0, 4000), NoDay}}
		if i < len(kinds) {
			t.kind = kinds[i]
		} else if i%10 == 9 {
			t.kind = pick(r, kinds[2:])
		}
		if i >= len(kinds) && in(r, 150) {
			t.in.first = First + between(r, 0, s.n.Days-1)
		}
		if i >= len(kinds) && in(r, 80) {
			t.in.last = max(t.in.first, First) + between(r, 100, 1500)
		}
		t.swing, t.low = pick(r, []string{"inward", "outward"}), in(r, 300)
		all = append(all, t)
		s.Fixtures = append(s.Fixtures, t.row(i))
	}
	return all
}

func (t *thing) row(i int) Fixture {
	f := Fixture{Code: t.code, Kind: t.kind, Name: fmt.Sprintf("%s %d", t.kind, i+1), Zone: "IV", Since: t.in.first, Until: t.in.last, Facts: map[string]string{}}
	switch t.kind {
	case "door":
		f.Zone = []string{"II", "III", "IV"}[i%3]
		f.Facts["swing"] = t.swing
	case "detector":
		f.Zone = "III"
	case "vent":
		f.Zone = "I"
		f.Facts["outlet_height_m"], f.Facts["over_public_path"] = "5.2", "no"
		if t.low {
			f.Facts["outlet_height_m"], f.Facts["over_public_path"] = "3.1", "yes"
		}
	}
	return f
}
