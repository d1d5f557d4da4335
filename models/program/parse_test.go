package program

import (
	"os"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"

	"lodebook/models/civil"
)

// example is the program file of the formats page, as it stands there.
func example(t testing.TB) []byte {
	t.Helper()
	src, err := os.ReadFile("testdata/example.yaml")
	if err != nil {
		t.Fatal(err)
	}
	return src
}

func mustParse(t testing.TB, src string) *Program {
	t.Helper()
	p, err := Parse([]byte(src))
	if err != nil {
		t.Fatalf("refused:\n%v", err)
	}
	return p
}

func same(t *testing.T, what string, got, want any) {
	t.Helper()
	if !reflect.DeepEqual(got, want) {
		t.Errorf("%s: got %+v, want %+v", what, got, want)
	}
}

func date(s string) *civil.Day {
	d, err := civil.ParseDay(s)
	if err != nil {
		panic(err)
	}
	return &d
}

func length(s string) civil.Duration {
	d, err := civil.ParseDuration(s)
	if err != nil {
		panic(err)
	}
	return d
}

func number(v float64) *float64 { return &v }

func TestExampleSections(t *testing.T) {
	src := example(t)
	p := mustParse(t, string(src))
	yes := true
	same(t, "in_force_from", p.InForceFrom, date("2025-01-01"))
	same(t, "site", []string{p.Site.Code, p.Site.Name, p.Site.TimeZone, p.Site.Location.String()}, []string{"TERNQUAY", "Tern Quay Imaging", "Atlantic/Azores", "Atlantic/Azores"})
	same(t, "open", p.Calendar.Open, [7]bool{false, true, true, true, true, true, false})
	same(t, "closed", p.Calendar.Closed, map[civil.Day]bool{*date("2026-12-25"): true, *date("2027-01-01"): true})
	var hours []OpenHours
	for d := time.Monday; d <= time.Friday; d++ {
		hours = append(hours, OpenHours{d, 450, 1200})
	}
	same(t, "hours", p.Hours, hours)
	same(t, "zones", p.Zones, []Zone{{Code: "I", Name: "I", Devices: true}, {Code: "II", Name: "II", Devices: true}, {Code: "III", Name: "III", Restricted: true, Devices: true}, {Code: "IV", Name: "IV", Restricted: true}})
	same(t, "levels", p.Levels, []Level{{"L1", "Level 1", 1}, {"L2", "Level 2", 2}})
	same(t, "posts", p.Posts, []Post{{"MRSO", "MR safety officer"}})
	same(t, "crews", p.Crews, []Crew{{"early", "Early shift"}, {"late", "Late shift"}})
	same(t, "person_facts", p.PersonFacts, []Fact{{Code: "employer", Label: "Employer", Type: FactText}, {Code: "reports_to", Label: "Reports to", Type: FactPerson}})
	same(t, "fixture_kinds", p.FixtureKinds, []FixtureKind{{"vent", "Quench vent", []Fact{
		{Code: "outlet_height_m", Label: "Outlet height m", Type: FactNumber, Unit: "m"},
		{Code: "over_public_path", Label: "Over public path", Type: FactYesNo},
	}}})
	same(t, "events", p.Events, []Event{{Code: "quench", Name: "Quench", Of: "magnet"}, {Code: "roof-work", Name: "Roof work", Of: "vent"}, {Code: "health-change", Name: "Health change", Of: "person"}})
	same(t, "documents", p.Documents, []Document{{"POL-ACCESS", "Access policy"}})
	same(t, "sheets", p.Sheets, []Sheet{{
		Code: "vent-yearly", Title: "Vent yearly", For: "vent", RecordedBy: []string{"facilities", "safety-officer"},
		OnFail: "Call the safety officer; close the walkway below",
		Fields: []Field{
			{Code: "outlet_clear", Label: "Outlet free of nests, debris and water", Type: FieldYesNo, Must: &yes, Required: true},
			{Code: "clear_of_path_m", Label: "Distance from the outlet to the nearest walkway", Type: FieldNumber, Unit: "m", Required: true, Min: number(3), WarnBelow: number(4)},
			{Code: "remark", Label: "Remark", Type: FieldText},
		},
	}})
	same(t, "source", p.Source, src)
}

func TestExampleItems(t *testing.T) {
	p := mustParse(t, string(example(t)))
	early, notice := length("P60D"), length("P60D")
	want := []Item{
		{Code: "TRAIN-L2", Title: "Level 2 training is renewed every year", Asks: AsksPerson, Records: []string{"training/level-2"},
			Cadence: Cadence{Rule: Every, Every: length("P1Y"), MonthEnd: true, Early: &early, Count: 1},
			Notice:  Notice{Given: &notice}, Since: date("2025-01-01"), Guards: []string{"III", "IV"}, Confers: "L2", Basis: "Site rule", Line: 35},
		{Code: "DET-DAILY", Title: "Detector check before the first patient", Asks: AsksFixture, Records: []string{"check/detector"},
			Cadence: Cadence{Rule: Each, Each: civil.ByDay, Operating: true, Count: 1}, Line: 51},
		{Code: "DRILL-QUENCH", Title: "Two quench drills a year", Asks: AsksCrew, Records: []string{"drill/quench"},
			Cadence: Cadence{Rule: Within, Within: length("P1Y"), Count: 2}, First: length("P1Y"), Notice: Notice{Days: 30}, Line: 52},
		{Code: "INDUCTION", Title: "Site induction", Asks: AsksPerson, Records: []string{"training/induction"},
			Cadence: Cadence{Rule: Once, Count: 1}, Notice: Notice{Days: 30}, Line: 53},
		{Code: "VENT-AFTER", Title: "The vent is looked at after roof work", Asks: AsksFixture, Records: []string{"inspection/vent-yearly"},
			Cadence: Cadence{Rule: After, After: []string{"roof-work"}, Within: length("P2D"), Count: 1}, Line: 54},
		{Code: "MRSO-FILLED", Title: "The safety officer's post is filled", Asks: AsksPost, Cadence: Cadence{Rule: Holds, Count: 1}, Line: 55},
	}
	sources := []string{"subject.level == 'L2'", "subject.kind == 'detector'", "", "", "subject.kind == 'vent'", "subject.code == 'MRSO'"}
	if len(p.Items) != len(want) {
		t.Fatalf("%d items, want %d", len(p.Items), len(want))
	}
	for i, it := range p.Items {
		if (it.When != nil) != (sources[i] != "") || it.When != nil && it.When.Source() != sources[i] {
			t.Errorf("item %s: when is %v, want %s", it.Code, it.When, sources[i])
		}
		it.When = nil
		if want[i].Cadence.Rule == Holds {
			same(t, "holds", it.Cadence.Holds.Source(), "size(subject.holders) > 0")
			it.Cadence.Holds = nil
		}
		same(t, it.Code, it, want[i])
	}
}

// A text with a comma inside braces is one text; a reader is told to quote it. Kinds that no file
// of fixtures can have yet are told too.
func TestExampleWarnings(t *testing.T) {
	same(t, "warnings", mustParse(t, string(example(t))).Warnings(), []string{
		"Zone III is restricted and no item guards it for level L1: nobody of that level is ever entitled to it.",
		"Zone IV is restricted and no item guards it for level L1: nobody of that level is ever entitled to it.",
		"No item confers level L1: nobody is ever held to have it.",
		"Fixture kind magnet, named by event quench, is not declared: no fixture can be of it.",
		"Fixture kind detector, named by item DET-DAILY, is not declared: no fixture can be of it.",
		"No item comes after the event quench: recording one asks for nothing.",
		"No item comes after the event health-change: recording one asks for nothing.",
		"sheets[0].fields[0].label (line 31) is a text with a comma and no quotes inside braces; put it in quotes, since other programs read it otherwise.",
	})
}

// The text of a token is the code, whatever number, date or truth value YAML 1.2 (chapter 10) or
// YAML 1.1 would see in it.
func TestCodesAsWritten(t *testing.T) {
	written := []string{"010", "yes", "1e3", "0x1F", "1_000", "0b1", "true", "2025-01-01", "1.0", "NO", "12:30x"}
	var src strings.Builder
	src.WriteString(head + "zones:\n")
	for _, c := range written[:10] {
		src.WriteString("  - code: " + c + "\n")
	}
	same(t, "codes", mustParse(t, src.String()).zoneCodes(), written[:10])
	same(t, "quoted", mustParse(t, head+`zones: [{code: "010"}, {code: 'null'}]`).zoneCodes(), []string{"010", "null"})
}

// A byte-order mark and the line ends of other systems change neither what is read nor where a
// fault lies.
func TestLineEndsAndMark(t *testing.T) {
	plain := string(example(t))
	for name, src := range map[string]string{
		"CRLF":           strings.ReplaceAll(plain, "\n", "\r\n"),
		"CR":             strings.ReplaceAll(plain, "\n", "\r"),
		"mark":           "\ufeff" + plain,
		"document start": "%YAML 1.2\n---\n" + plain + "...\n",
	} {
		p := mustParse(t, src)
		same(t, name, []any{p.Zones, p.Sheets, p.Items[0].Cadence}, []any{mustParse(t, plain).Zones, mustParse(t, plain).Sheets, mustParse(t, plain).Items[0].Cadence})
	}
	bad := "\ufeff" + strings.ReplaceAll("lodebook: 1\nsite: {code: A,\n  time_zone: Local}\n", "\n", "\r\n")
	_, err := Parse([]byte(bad))
	if err == nil || !strings.HasPrefix(err.Error(), "line 3, column 14: site.time_zone") {
		t.Errorf("got %v, want a fault of the time zone on line 3, column 14", err)
	}
}

func TestEmptySectionsAndDefaults(t *testing.T) {
	p := mustParse(t, head+"calendar:\nzones:\n  # - {code: I}\nitems: []\n")
	same(t, "calendar", p.Calendar, civil.EveryDay())
	same(t, "name", p.Site.Name, "A")
	same(t, "empty", []int{len(p.Zones), len(p.Items), len(p.Hours)}, []int{0, 0, 0})
	if p.InForceFrom != nil {
		t.Errorf("in force from %v", p.InForceFrom)
	}
}

func TestHours(t *testing.T) {
	p := mustParse(t, head+`calendar:
  hours: {mon: "22:00-06:00", "wed, fri-sat": ["00:00-08:00", "16:00 - 24:00"], sun: "00:00-24:00"}
`)
	var got []string
	for _, h := range p.Hours {
		got = append(got, h.String())
	}
	same(t, "hours", got, []string{
		"sun 00:00-24:00", "mon 22:00-06:00", "wed 00:00-08:00", "wed 16:00-24:00",
		"fri 00:00-08:00", "fri 16:00-24:00", "sat 00:00-08:00", "sat 16:00-24:00",
	})
	same(t, "crossing midnight", p.Hours[1], OpenHours{time.Monday, 22 * 60, 30 * 60})
}

func TestExtraKeys(t *testing.T) {
	p := mustParse(t, `lodebook: 1
site: {code: A, time_zone: Etc/UTC}
zones: [{code: IV, name: Magnet room}]
posts: [{code: MRSO}]
person_facts: {badge_kind: {type: choice, label: Kind of badge, choices: [staff, visitor]}}
fixture_kinds: [{code: vent, name: Vent}]
events: [{code: storm, name: Storm damage, of: site}]
sheets:
  - code: s
    title: A look at the vent
    cautions: [Never from a ladder in wind, "Two people, always"]
    fields:
      - {code: a, help: Look up, type: choice, choices: [good, bad], fail_on: [bad], required: false}
      - {code: b, type: number, min: 1, warn_below: 2, warn_above: 8.5, max: 9e1}
items:
  - {code: X, title: T, asks: site, record: inspection/s, every: P1Y, group: vents, help: How, owner: MRSO}
  - {code: Y, title: T, asks: site, record: [inspection/s, review/r], each: year, owner: facilities, local: true}
`)
	same(t, "fact", p.PersonFacts[0], Fact{Code: "badge_kind", Label: "Kind of badge", Type: FactChoice, Choices: []string{"staff", "visitor"}})
	same(t, "names", []string{p.Zones[0].Name, p.FixtureKinds[0].Name, p.Events[0].Name, p.Sheets[0].Title}, []string{"Magnet room", "Vent", "Storm damage", "A look at the vent"})
	same(t, "cautions", p.Sheets[0].Cautions, []string{"Never from a ladder in wind", "Two people, always"})
	same(t, "a", p.Sheets[0].Fields[0], Field{Code: "a", Label: "A", Help: "Look up", Type: FieldChoice, Choices: []string{"good", "bad"}, FailOn: []string{"bad"}})
	same(t, "b", p.Sheets[0].Fields[1], Field{Code: "b", Label: "B", Type: FieldNumber, Required: true, Min: number(1), WarnBelow: number(2), WarnAbove: number(8.5), Max: number(90)})
	x, y := p.Items[0], p.Items[1]
	same(t, "x", []string{x.Group, x.Help, x.Owner}, []string{"vents", "How", "MRSO"})
	same(t, "y", []any{y.Records, y.Owner, y.Local}, []any{[]string{"inspection/s", "review/r"}, "facilities", true})
}

func TestLookups(t *testing.T) {
	p := mustParse(t, vocabulary+"  - {code: X, title: T, asks: person, record: training/x, once: true}\ndocuments: [{code: D}]\n")
	_, item := p.Item("X")
	_, sheet := p.Sheet("vent-yearly")
	l, level := p.Level("L2")
	_, kind := p.FixtureKind("magnet")
	_, zone := p.Zone("IV")
	_, crew := p.Crew("early")
	_, post := p.Post("MRSO")
	_, document := p.Document("D")
	_, event := p.Event("storm")
	same(t, "found", []bool{item, sheet, level, kind, zone, crew, post, document, event}, slices.Repeat([]bool{true}, 9))
	same(t, "rank", l.Rank, 2)
	if _, ok := p.Item("Y"); ok {
		t.Error("found an item that is not there")
	}
	for record, want := range map[string]bool{"inspection/vent-yearly": true, "check/vent-yearly": true, "training/vent-yearly": false, "inspection/other": false, "vent-yearly": false} {
		if _, ok := p.SheetFor(record); ok != want {
			t.Errorf("SheetFor(%s) found is %v, want %v", record, ok, want)
		}
	}
	same(t, "recorders", p.Recorders(&p.Sheets[0]), []string{"facilities", "safety-officer"})
	same(t, "own recorders", p.Recorders(&Sheet{RecordedBy: []string{"early"}}), []string{"early"})
}
