package starter

import (
	"bytes"
	"errors"
	"os"
	"slices"
	"strings"
	"testing"

	"lodebook/models/program"
)

func lib(t testing.TB) *library {
	t.Helper()
	l, err := whole()
	if err != nil {
		t.Fatal(err)
	}
	return l
}

func newSite(t testing.TB) []byte {
	t.Helper()
	src, err := New("NEWSITE", "New Site", "Europe/Lisbon")
	if err != nil {
		t.Fatal(err)
	}
	return src
}

func parse(t testing.TB, src []byte) *program.Program {
	t.Helper()
	p, err := program.Parse(src)
	if err != nil {
		t.Fatalf("%v\nin\n%s", err, src)
	}
	return p
}

func adopt(t testing.TB, src []byte, group string) []byte {
	t.Helper()
	out, err := Adopt(src, group)
	if err != nil {
		t.Fatalf("%s: %v", group, err)
	}
	return out
}

// A new site has what it can name and is asked for nothing.
func TestNew(t *testing.T) {
	src := newSite(t)
	p := parse(t, src)
	if p.Site.Code != "NEWSITE" || p.Site.Name != "New Site" || p.Site.TimeZone != "Europe/Lisbon" {
		t.Errorf("site %+v", p.Site)
	}
	if len(p.Items) != 0 {
		t.Errorf("%d items are active that nobody chose", len(p.Items))
	}
	var zones []string
	for _, z := range p.Zones {
		zones = append(zones, z.Code)
		if want := z.Code == "III" || z.Code == "IV"; z.Restricted != want || z.Devices != (z.Code != "IV") {
			t.Errorf("zone %+v", z)
		}
	}
	if got := strings.Join(zones, " "); got != "I II III IV" {
		t.Errorf("zones %s", got)
	}
	if len(p.Levels) != 2 || len(p.Posts) != 3 || len(p.Crews) != 3 || len(p.FixtureKinds) == 0 || len(p.PersonFacts) == 0 {
		t.Errorf("levels %v, posts %v, crews %v, %d kinds, %d facts of people", p.Levels, p.Posts, p.Crews, len(p.FixtureKinds), len(p.PersonFacts))
	}
	head, _, _ := strings.Cut(string(src), "lodebook:")
	for _, who := range []string{"starting point", "local codes", "accredits you", "manufacturers", "medical director"} {
		if !strings.Contains(head, who) {
			t.Errorf("the head of the file does not speak of %q", who)
		}
	}
}

func TestNewRefuses(t *testing.T) {
	for _, c := range [][3]string{
		{"A B", "N", "Etc/UTC"}, {"", "N", "Etc/UTC"}, {"A", " ", "Etc/UTC"}, {"A", "N", "Local"},
		{"A, x: 1", "N", "Etc/UTC"}, {"A", "N", "Etc/Nowhere"}, {"A\nlodebook: 2", "N", "Etc/UTC"},
	} {
		_, err := New(c[0], c[1], c[2])
		var faults program.Faults
		if !errors.As(err, &faults) {
			t.Errorf("%q: got %v, want faults", c, err)
		}
	}
	p, err := New("010", `Ädelsten "A": #1, {x}`, "Etc/UTC")
	if err != nil {
		t.Fatal(err)
	}
	if s := parse(t, p).Site; s.Code != "010" || s.Name != `Ädelsten "A": #1, {x}` {
		t.Errorf("site %+v", s)
	}
}

// Each item says where it comes from, and nothing in the starter is
// without use.
func TestGroups(t *testing.T) {
	l := lib(t)
	count := 0
	for _, g := range Groups() {
		if g.Title == "" || g.About == "" || len(g.Items) == 0 {
			t.Errorf("group %+v is bare", g)
		}
		count += len(g.Items)
		for _, it := range g.Items {
			if it.Title == "" || it.Basis == "" || it.Cadence == "" {
				t.Errorf("item %+v is bare", it)
			}
		}
	}
	if count != len(l.program.Items) || count < 48 {
		t.Errorf("the groups have %d items of %d; at least 48 are asked", count, len(l.program.Items))
	}
	for _, w := range l.program.Warnings() {
		t.Error(w)
	}
}

// What a site may lack is asked for only where a fact says that it is there.
func TestConditional(t *testing.T) {
	l := lib(t)
	for code, fact := range map[string]string{
		"MAGNET-JOINT": "has_vent", "MAGNET-HELIUM": "has_helium", "VENT-BARRIER": "over_public_path",
		"DOOR-RELIEF": "swing", "DOOR-ACCESS": "badge_reader", "OXYGEN-REPEATER": "has_repeater",
		"EXHAUST-LINK": "starts_on_alarm", "CRYOGEN-TRAINING": "cryogen_work",
	} {
		it, ok := l.program.Item(code)
		if !ok || !slices.Contains(it.When.Reads(), "facts."+fact) {
			t.Errorf("item %s does not read %s", code, fact)
		}
	}
	joint, _ := l.program.Item("MAGNET-JOINT")
	ok, err := joint.When.Match(program.Subject{Asks: program.AsksFixture, Code: "M1", Kind: "magnet", Facts: map[string]any{"has_vent": false}})
	if ok || err != nil {
		t.Errorf("a magnet without a vent is asked for its joint: %v, %v", ok, err)
	}
}

// The cautions that a sheet must show.
func TestCautions(t *testing.T) {
	l := lib(t)
	for sheet, words := range map[string]string{
		"quench-button-month": "Never press a quench button to test it.",
		"vent-outside":        "An outside look proves nothing about the inside of a vent pipe.",
		"vent-full":           "An outside look proves nothing about the inside of a vent pipe.",
		"detector-day":        "A detector is an aid and replaces no screening.",
		"label-check":         "An unlabelled item is treated as MR Unsafe.",
	} {
		s, ok := l.program.Sheet(sheet)
		if !ok || !slices.Contains(s.Cautions, words) {
			t.Errorf("sheet %s does not say %q", sheet, words)
		}
	}
}

// 29 CFR 1910.146(b): air below 19.5 % oxygen is deficient, above 23.5 % enriched.
func TestOxygenLimits(t *testing.T) {
	s, ok := lib(t).program.Sheet("oxygen-day")
	if !ok {
		t.Fatal("no sheet")
	}
	for reading, want := range map[string]bool{"19.4": false, "19.49": false, "19.5": true, "20.9": true, "23.5": true, "23.6": false} {
		if j, faults := s.Judge(map[string]string{"reading_pct": reading, "fault_light": "no"}); j.Passed != want || len(faults) > 0 {
			t.Errorf("%s %%: passed %v, want %v; %v", reading, j.Passed, want, faults)
		}
	}
}

func sites(t testing.TB) map[string][]byte {
	t.Helper()
	example, err := os.ReadFile("../testdata/example.yaml")
	if err != nil {
		t.Fatal(err)
	}
	crlf := bytes.ReplaceAll(append([]byte("\ufeff"), example...), []byte("\n"), []byte("\r\n"))
	return map[string][]byte{"new": newSite(t), "example": example, "example with CRLF and a mark": crlf}
}

// Each group alone is taken by a new site and by the example of the formats page; twice is once.
func TestAdoptEach(t *testing.T) {
	for name, src := range sites(t) {
		some := Groups()
		if bytes.Contains(src, []byte("\r\n")) {
			some = some[2:5] // line ends are the editor's matter and not the groups'
		}
		for _, g := range some {
			out := adopt(t, src, g.Code)
			p := parse(t, out)
			for _, it := range g.Items {
				if _, ok := p.Item(it.Code); !ok {
					t.Errorf("%s: %s is not adopted with %s", name, it.Code, g.Code)
				}
			}
			if again := adopt(t, out, g.Code); !bytes.Equal(again, out) {
				t.Errorf("%s: adopting %s twice is not the same as once", name, g.Code)
			}
		}
	}
}

// All groups, in three orders: the same items in the end, and nothing of the file lost.
func TestAdoptAll(t *testing.T) {
	forward := groupCodes()
	backward := slices.Clone(forward)
	slices.Reverse(backward)
	mixed := append(slices.Clone(forward[7:]), forward[:7]...)
	orders := map[string][][]string{"new": {forward, backward, mixed}, "example": {forward, backward}, "example with CRLF and a mark": {mixed}}
	for name, src := range sites(t) {
		var first []string
		for i, order := range orders[name] {
			out := src
			for _, g := range order {
				out = adopt(t, out, g)
			}
			p := parse(t, out)
			var all []string
			for _, it := range p.Items {
				all = append(all, it.Code)
			}
			slices.Sort(all)
			if i == 0 {
				first = all
			} else if !slices.Equal(all, first) {
				t.Errorf("%s: the order of adoption changes the items", name)
			}
			stands(t, name, src, out)
			for _, it := range lib(t).program.Items {
				if _, ok := p.Item(it.Code); !ok {
					t.Errorf("%s: %s is missing", name, it.Code)
				}
			}
		}
	}
}

// stands checks that every line of the file is still there, in its order; a list on one line may
// have grown.
func stands(t *testing.T, name string, before, after []byte) {
	t.Helper()
	lines := strings.Split(string(after), "\n")
	at := 0
	for _, line := range strings.Split(strings.TrimRight(string(before), "\r\n"), "\n") {
		start := strings.TrimRight(strings.TrimSuffix(strings.TrimSpace(line), "[]"), "]} \r")
		for at < len(lines) && !strings.Contains(lines[at], start) {
			at++
		}
		if at == len(lines) {
			t.Errorf("%s: the line %q is gone or moved", name, line)
			return
		}
		at++
	}
}

// Items of the site's own with a starter's code stay as they are.
func TestAdoptKeepsOwnItems(t *testing.T) {
	own := `  - {code: DRILL-QUENCH, title: Ours, asks: crew, record: drill/quench, within: P6M}`
	src := strings.Replace(string(newSite(t)), "items: []", "items:\n"+own, 1)
	out := adopt(t, []byte(src), "drills")
	it, ok := parse(t, out).Item("DRILL-QUENCH")
	if !ok || it.Title != "Ours" || !strings.Contains(string(out), own) {
		t.Errorf("the site's item is now %+v", it)
	}
}

// A site's own kind gets the facts that the items read and keeps what it has.
func TestAdoptAddsFacts(t *testing.T) {
	for name, kinds := range map[string]string{
		"flow without facts":   "fixture_kinds: [{code: magnet}]\n",
		"flow with facts":      "fixture_kinds: [{code: magnet, facts: {maker_code: text}}]\n",
		"flow with none":       "fixture_kinds: [{code: magnet, facts: {}}]\n",
		"block without facts":  "fixture_kinds:\n  - name: M # the big one\n    code: magnet\n  - code: door\n",
		"block with facts":     "fixture_kinds:\n- code: magnet\n  facts:\n    maker_code:\n      type: text\n    # last\n\n  name: M\n- code: door\n",
		"block with flow":      "fixture_kinds:\n  - code: magnet\n    facts: {has_vent: yesno} # here\n",
		"block, nothing there": "fixture_kinds:\n  - code: magnet\n    facts:\n    name: M\n",
	} {
		src := "lodebook: 1\nsite: {code: A, time_zone: Etc/UTC}\nlevels: [{code: L1}, {code: L2}]\n" + kinds
		p := parse(t, adopt(t, []byte(src), "magnets"))
		k, _ := p.FixtureKind("magnet")
		var facts []string
		for _, f := range k.Facts {
			facts = append(facts, f.Code)
		}
		for _, want := range []string{"has_vent", "has_helium"} {
			if !slices.Contains(facts, want) {
				t.Errorf("%s: the facts of a magnet are %v, without %s", name, facts, want)
			}
		}
		if strings.Contains(kinds, "maker_code") && !slices.Contains(facts, "maker_code") {
			t.Errorf("%s: the site's own fact is gone", name)
		}
	}
	for name, facts := range map[string]string{"none": "", "nothing": "person_facts:\n", "flow": "person_facts: {employer: text}\n", "block": "person_facts:\n  employer: text # c\n\n"} {
		src := "lodebook: 1\nsite: {code: A, time_zone: Etc/UTC}\nlevels: [{code: L1}, {code: L2}]\nzones: [{code: IV, restricted: true}]\n" + facts + "# end\n"
		p := parse(t, adopt(t, []byte(src), "people"))
		if _, ok := p.Item("CRYOGEN-TRAINING"); !ok || !slices.ContainsFunc(p.PersonFacts, func(f program.Fact) bool { return f.Code == "cryogen_work" }) {
			t.Errorf("%s: the facts of people are %v", name, p.PersonFacts)
		}
	}
}

// Levels and zones of other names take the places of the starter's.
func TestAdoptFitsLevelsAndZones(t *testing.T) {
	src := "lodebook: 1\nsite: {code: A, time_zone: Etc/UTC}\nlevels: [{code: basic}, {code: full}]\nzones: [{code: open}, {code: suite, restricted: true}, {code: magnet-room, restricted: true}]\nitems: [{code: X, title: T, asks: site, record: check/x, each: day}]\n"
	p := parse(t, adopt(t, []byte(src), "people"))
	it, ok := p.Item("TRAIN-LEVEL-2")
	if !ok || it.Confers != "full" || !slices.Equal(it.Guards, []string{"suite", "magnet-room"}) || it.When.Source() != "subject.level == 'full'" {
		t.Errorf("the item is %+v", it)
	}
	p = parse(t, adopt(t, []byte(strings.ReplaceAll(src, ", restricted: true", "")), "people"))
	if it, _ := p.Item("TRAIN-LEVEL-2"); len(it.Guards) != 0 {
		t.Errorf("it guards %v, and nothing is restricted", it.Guards)
	}
}

func TestAdoptRefuses(t *testing.T) {
	head := "lodebook: 1\nsite: {code: A, time_zone: Etc/UTC}\n"
	for _, c := range []struct{ name, src, group, want string }{
		{"unknown group", head, "cats", `there is no group "cats"; the groups are people, doors`},
		{"a faulty file", head + "zone: []\n", "doors", "line 3, column 1: zone"},
		{"one level", head + "levels: [{code: only}]\n", "people", "declares 1 levels; declare two"},
		{"an event of something else", head + "levels: [{code: L1}, {code: L2}]\nfixture_kinds: [{code: magnet}]\nevents: [{code: roof-work, of: magnet}]\n", "after-events", "the event happens to a magnet, and the item asks a vent"},
		{"a fact of another type", head + "fixture_kinds: [{code: door, facts: {swing: number}}]\nlevels: [{code: L1}, {code: L2}]\n", "doors", "a number and a text cannot stand on the two sides of =="},
		{"in braces", "{lodebook: 1, site: {code: A, time_zone: Etc/UTC}}\n", "doors", "a program in braces cannot be added to"},
	} {
		out, err := Adopt([]byte(c.src), c.group)
		if out != nil || err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: got %v, want %q", c.name, err, c.want)
		}
	}
}
