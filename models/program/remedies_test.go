package program

import (
	"testing"

	"lodebook/models/civil"
)

var faultyRemedies = []refusedFile{
	{"severities", head + `remedies:
  - {severity: low, due: P90D, confirm: true}
  - {severity: high, due: P7D}
  - {severity: low, due: a week}
  - {due: P1D, confirm: perhaps}
`, []string{
		`line 5, column 5: remedies[1].confirm: the milder low before it is confirmed by a second person and this one is not; write confirm: true, or put the severities in order, the mildest first`,
		`line 6, column 16: remedies[2].severity: found "low"; the code is taken on line 4; give each its own code`,
		`line 6, column 26: remedies[2].due: found "a week"; write an ISO 8601 duration such as P1Y or P6M`,
		`line 7, column 5: remedies[3].severity: not given; write a code of letters, digits, - _ and . that begins with a letter or a digit, at most 64 long`,
		`line 7, column 25: remedies[3].confirm: found "perhaps"; write true or false, without quotes`,
	}},
	{"kinds of incident and reports", head + `incidents: [{code: burn}, {code: burn}]
reports:
  - {code: BODY, to: The body, within: 3, days: weekdays, kinds: [fire]}
  - {code: BODY, within: -1}
  - {code: LATE, to: Nobody soon, within: 4000}
`, []string{
		`line 3, column 34: incidents[1].code: found "burn"; the code is taken on line 3; give each its own code`,
		`line 5, column 49: reports[0].days: found "weekdays"; write working or all`,
		`line 5, column 67: reports[0].kinds[0]: found "fire"; there is no such kind of incident; write burn or burn`,
		`line 6, column 5: reports[1].to: not given; write who is told`,
		`line 6, column 12: reports[1].code: found "BODY"; the code is taken on line 5; give each its own code`,
		`line 6, column 26: reports[1].within: found "-1"; write a whole number from 0 on`,
		`line 7, column 43: reports[2].within: found "4000"; more than ten years; write at most 3660`,
	}},
	{"what a failed sheet takes out", head + `fixture_kinds: [{code: vent}]
sheets: [{code: V, for: vent, also_zone: true, back_by_another: yes, fields: [{code: a, type: yesno}]}]
`, []string{
		`line 4, column 31: sheets[0].also_zone: found "also_zone"; means something only where a failed sheet takes its fixture out of service; write on_fail_out: true too, or leave it out`,
		`line 4, column 48: sheets[0].back_by_another: found "back_by_another"; means something only where a failed sheet takes its fixture out of service; write on_fail_out: true too, or leave it out`,
		`line 4, column 65: sheets[0].back_by_another: found "yes"; write true or false, without quotes`,
	}},
}

func TestRemediesOfAFile(t *testing.T) {
	p := mustParse(t, head+`remedies: [{severity: mild, due: P1M}, {severity: grave, name: Grave, due: P1W, confirm: true}]
incidents: [{code: burn, name: Burn}, {code: noise}]
reports: [{code: A, to: Body A, within: 3}, {code: B, to: Body B, within: 10, days: all, kinds: [burn]}]
fixture_kinds: [{code: vent}]
sheets: [{code: V, for: vent, on_fail_out: true, also_zone: true, back_by_another: true, fields: [{code: a, type: yesno}]}]
`)
	same(t, "severities", p.Severities, []Severity{{"mild", "Mild", length("P1M"), false}, {"grave", "Grave", length("P1W"), true}})
	same(t, "incidents", p.Incidents, []IncidentKind{{"burn", "Burn"}, {"noise", "noise"}})
	same(t, "reports", p.Reports, []Report{{"A", "Body A", 3, true, nil}, {"B", "Body B", 10, false, []string{"burn"}}})
	same(t, "reports of noise", p.ReportsOf("noise"), p.Reports[:1])
	same(t, "reports of a burn", p.ReportsOf("burn"), p.Reports)
	s := p.Sheets[0]
	same(t, "the sheet", []bool{s.OnFailOut, s.AlsoZone, s.BackByAnother}, []bool{true, true, true})
	if _, ok := p.Severity("high"); ok {
		t.Error("a file with severities of its own has the usual ones too")
	}
}

func TestUsualSeveritiesAndIncidents(t *testing.T) {
	p := mustParse(t, head)
	high, ok := p.Severity("high")
	if low, has := p.Severity("low"); !ok || !has || !high.Confirm || low.Confirm || high.Due != length("P7D") || low.Due != length("P90D") {
		t.Errorf("severities %+v", p.Severities)
	}
	for _, code := range []string{"near-miss", "projectile", "burn", "acoustic", "screening-miss", "quench", "access", "other"} {
		if _, ok := p.Incident(code); !ok {
			t.Errorf("no kind %s", code)
		}
	}
}

func TestGraverTakesLongerIsWarnedOf(t *testing.T) {
	p := mustParse(t, head+"remedies: [{severity: low, due: P7D}, {severity: high, due: P1M}]\n")
	same(t, "warnings", p.oddSeverities(), []string{"Severity high leaves P1M for a remedy and the milder low only P7D."})
}

// Days are counted by hand on the calendar of 2026 and of the leap year 2028: 1 December 2026 and 29 February 2028
// are both a Tuesday.
func TestReportIsDue(t *testing.T) {
	week := civil.Calendar{Open: [7]bool{false, true, true, true, true, true, false}, Closed: map[civil.Day]bool{*date("2026-12-25"): true, *date("2028-02-29"): true}}
	for _, c := range []struct {
		within   int
		working  bool
		from, to string
	}{
		{3, true, "2026-12-01", "2026-12-04"},  // Tuesday to Friday
		{3, true, "2026-12-03", "2026-12-08"},  // over a weekend
		{1, true, "2026-12-04", "2026-12-07"},  // a Friday
		{1, true, "2026-12-05", "2026-12-07"},  // a Saturday
		{3, true, "2026-12-23", "2026-12-29"},  // the 25th is closed, and a Friday
		{0, true, "2026-12-05", "2026-12-05"},  // that very day, though closed
		{3, false, "2026-12-24", "2026-12-27"}, // all days
		{1, false, "2028-02-28", "2028-02-29"}, // a leap day counts
		{1, true, "2028-02-28", "2028-03-01"},  // and is closed here
		{366, false, "2028-02-29", "2029-03-01"},
	} {
		x := Report{Within: c.within, Working: c.working}
		if got := x.Due(*date(c.from), week).String(); got != c.to {
			t.Errorf("%d days (working %v) after %s: %s, want %s", c.within, c.working, c.from, got, c.to)
		}
	}
	if got := (Report{Within: 2, Working: true}).Due(*date("2026-12-01"), civil.Calendar{}); got != civil.LastDay {
		t.Errorf("where nothing is ever open: %s", got)
	}
}
