package program

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

func ventSheet(t testing.TB) *Sheet {
	s, ok := mustParse(t, head+`
fixture_kinds: [{code: vent}]
sheets:
  - code: vent
    for: vent
    fields:
      - {code: clear, label: Outlet clear, type: yesno, must: true}
      - {code: wet, label: Water stands in the pipe, type: yesno, must: false}
      - {code: path, label: Distance from the outlet to the nearest walkway, type: number, unit: m, warn_below: 4, min: 3}
      - {code: load, label: Load, type: number, max: 0.3, warn_above: 0.1, required: false}
      - {code: mesh, label: Mesh, type: choice, choices: [whole, torn, missing], fail_on: [torn, missing]}
      - {code: seen, label: Last look inside, type: day}
      - {code: note, label: Note, type: text}
`).Sheet("vent")
	if !ok {
		t.Fatal("no sheet")
	}
	return s
}

// good answers pass; each case changes some of them.
func answers(changes ...string) map[string]string {
	v := map[string]string{"clear": "yes", "wet": "no", "path": "5", "mesh": "whole"}
	for i := 0; i < len(changes); i += 2 {
		v[changes[i]] = changes[i+1]
	}
	return v
}

func TestJudge(t *testing.T) {
	s := ventSheet(t)
	for _, c := range []struct {
		values map[string]string
		want   string // pass, remark or fail, then the reasons
	}{
		{answers(), "pass"},
		{answers("note", "windy", "seen", "2025-01-31"), "pass"},
		{answers("path", "4"), "pass"},
		{answers("path", "4.00 m"), "pass"},
		{answers("path", "3.99"), "remark; Distance from the outlet to the nearest walkway is 3.99 m; below 4 m is worth a remark."},
		{answers("path", "3"), "remark; Distance from the outlet to the nearest walkway is 3 m; below 4 m is worth a remark."},
		{answers("path", "2.1"), "fail; Distance from the outlet to the nearest walkway is 2.1 m; at least 3 m is asked."},
		{answers("path", "2,10m"), "fail; Distance from the outlet to the nearest walkway is 2.10 m; at least 3 m is asked."},
		{answers("path", "2.99999999999999999999"), "fail; Distance from the outlet to the nearest walkway is 2.99999999999999999999 m; at least 3 m is asked."},
		{answers("path", "\u22121"), "fail; Distance from the outlet to the nearest walkway is -1 m; at least 3 m is asked."},
		{answers("load", "0.1"), "pass"},
		{answers("load", "0.3"), "remark; Load is 0.3; above 0.1 is worth a remark."},
		{answers("load", "0.30000000000000000001"), "fail; Load is 0.30000000000000000001; at most 0.3 is asked."},
		{answers("clear", "No"), "fail; Outlet clear: the answer is no; yes is asked."},
		{answers("wet", "true"), "fail; Water stands in the pipe: the answer is yes; no is asked."},
		{answers("mesh", "torn", "path", "3.5"), "fail; Distance from the outlet to the nearest walkway is 3.5 m; below 4 m is worth a remark. Mesh is torn, which fails."},
	} {
		j, faults := s.Judge(c.values)
		if len(faults) > 0 {
			t.Errorf("%v: faults %v", c.values, faults)
			continue
		}
		got := "fail"
		if j.Passed && j.Remark {
			got = "remark"
		} else if j.Passed {
			got = "pass"
		}
		if len(j.Reasons) > 0 {
			got += "; " + strings.Join(j.Reasons, " ")
		}
		if got != c.want {
			t.Errorf("%v:\n%s\nwant\n%s", c.values, got, c.want)
		}
	}
}

// Numbers are kept with the digits that were typed.
func TestJudgeKeepsWhatWasTyped(t *testing.T) {
	j, faults := ventSheet(t).Judge(answers("path", " +19,50 m ", "load", "", "note", " a b ", "clear", "TRUE", "seen", "2025-01-31"))
	if len(faults) > 0 {
		t.Fatal(faults)
	}
	same(t, "values", j.Values, map[string]string{"path": "19.50", "note": "a b", "clear": "yes", "wet": "no", "mesh": "whole", "seen": "2025-01-31"})
}

func TestJudgeFaults(t *testing.T) {
	s := ventSheet(t)
	number := "give a number in m, such as 2.1"
	for _, c := range []struct {
		values map[string]string
		want   []FieldFault
	}{
		{answers("path", ""), []FieldFault{{"path", "", "not filled in", number}}},
		{answers("path", "far"), []FieldFault{{"path", "far", "not a number", number}}},
		{answers("path", "NaN"), []FieldFault{{"path", "NaN", "not a number", number}}},
		{answers("path", "Inf"), []FieldFault{{"path", "Inf", "not a number", number}}},
		{answers("path", "0x1F"), []FieldFault{{"path", "0x1F", "not a number", number}}},
		{answers("path", "1e3"), []FieldFault{{"path", "1e3", "not a number", number}}},
		{answers("path", "1.234,5"), []FieldFault{{"path", "1.234,5", "not a number", number}}},
		{answers("path", "5 cm"), []FieldFault{{"path", "5 cm", "the unit is not the field's own", number}}},
		{answers("path", "5 ft"), []FieldFault{{"path", "5 ft", "the unit is not the field's own", number}}},
		{answers("path", "m"), []FieldFault{{"path", "m", "not a number", number}}},
		{answers("load", "1 kg"), []FieldFault{{"load", "1 kg", "the field has no unit", "give a number such as 2.1"}}},
		{answers("clear", "maybe"), []FieldFault{{"clear", "maybe", "neither yes nor no", "give yes or no"}}},
		{answers("mesh", "Torn"), []FieldFault{{"mesh", "Torn", "not one of the choices", "give whole, torn or missing"}}},
		{answers("seen", "31.1.2025"), []FieldFault{{"seen", "31.1.2025", "not a day of the calendar", "give a day as YYYY-MM-DD"}}},
		{answers("pth", "5", "mesh", " "), []FieldFault{{"mesh", "", "not filled in", "give whole, torn or missing"}, {"pth", "5", "the sheet has no such field", "did you mean path? write clear, wet, path, load, mesh, seen or note"}}},
	} {
		j, faults := s.Judge(c.values)
		same(t, fmt.Sprint(c.values), faults, c.want)
		if j.Passed || j.Remark {
			t.Errorf("%v passed", c.values)
		}
	}
}

// Between limits with few digits the answer agrees with plain arithmetic on whole hundredths.
func TestJudgeLimits(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		hundredths := rapid.IntRange(-500, 500)
		v, lo, hi := hundredths.Draw(t, "v"), hundredths.Draw(t, "lo"), hundredths.Draw(t, "hi")
		limit := func(n int) *float64 { f := float64(n) / 100; return &f }
		sign := ""
		if v < 0 {
			sign = "-"
		}
		typed := fmt.Sprintf("%s%d.%02d", sign, int(math.Abs(float64(v)))/100, int(math.Abs(float64(v)))%100)
		s := Sheet{Fields: []Field{{Code: "a", Label: "A", Type: FieldNumber, Min: limit(lo), Max: limit(hi)}}}
		j, faults := s.Judge(map[string]string{"a": typed})
		if want := v >= lo && v <= hi; len(faults) > 0 || j.Passed != want {
			t.Fatalf("%s between %d and %d hundredths: passed %v, want %v; %v", typed, lo, hi, j.Passed, want, faults)
		}
	})
}
