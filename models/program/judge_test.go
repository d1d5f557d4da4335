package program

import (
	"slices"
	"testing"

	"lodebook/models/civil"
)

func ventSheet() *Sheet {
	yes, three, four, nine := true, 3.0, 4.0, 9.0
	return &Sheet{Code: "vent", Fields: []Field{
		{Code: "clear", Label: "Outlet clear", Type: FieldYesNo, Required: true, Must: &yes},
		{Code: "path", Label: "Distance to the walkway", Type: FieldNumber, Unit: "m", Required: true, Min: &three, WarnBelow: &four, Max: &nine},
		{Code: "cap", Label: "Rain cap", Type: FieldChoice, Choices: []string{"seated", "loose", "gone"}, FailOn: []string{"gone"}},
		{Code: "seen", Label: "Last look inside", Type: FieldDay},
		{Code: "remark", Label: "Remark", Type: FieldText},
	}}
}

func TestJudge(t *testing.T) {
	for _, c := range []struct {
		values         map[string]string
		passed, remark bool
		reasons        []string
	}{
		{map[string]string{"clear": "yes", "path": "4"}, true, false, nil},
		{map[string]string{"clear": "yes", "path": "3,99 m"}, true, true, []string{"Distance to the walkway is 3.99 m, which is less than 4 m."}},
		{map[string]string{"clear": "yes", "path": "3.00"}, true, true, []string{"Distance to the walkway is 3.00 m, which is less than 4 m."}},
		{map[string]string{"clear": "yes", "path": "2.1"}, false, false, []string{"Distance to the walkway is 2.1 m; at least 3 m is asked."}},
		{map[string]string{"clear": "yes", "path": "9.01"}, false, false, []string{"Distance to the walkway is 9.01 m; at most 9 m is allowed."}},
		{map[string]string{"clear": "No", "path": "3.5"}, false, false, []string{"Outlet clear: no.", "Distance to the walkway is 3.5 m, which is less than 4 m."}},
		{map[string]string{"clear": "yes", "path": "5", "cap": "gone"}, false, false, []string{"Rain cap: gone."}},
		{map[string]string{"clear": "yes", "path": "5", "cap": "loose", "seen": "2025-03-01", "remark": "gulls"}, true, false, nil},
	} {
		j, faults := ventSheet().Judge(c.values)
		if len(faults) > 0 || j.Passed != c.passed || j.Remark != c.remark || !slices.Equal(j.Reasons, c.reasons) {
			t.Errorf("%v: %+v, faults %+v", c.values, j, faults)
		}
	}
}

func TestJudgeRefuses(t *testing.T) {
	good := map[string]string{"clear": "yes", "path": "5"}
	for _, c := range []struct{ field, value string }{
		{"clear", ""}, {"clear", "maybe"}, {"path", ""}, {"path", "five"}, {"path", "NaN"}, {"path", "Inf"}, {"path", "0x10"}, {"path", "1e3"},
		{"path", "5 ft"}, {"path", "1,2,3"}, {"path", "."}, {"path", "5 m m"}, {"cap", "open"}, {"seen", "1 March"}, {"weather", "fine"},
	} {
		values := map[string]string{c.field: c.value}
		for k, v := range good {
			if _, ok := values[k]; !ok {
				values[k] = v
			}
		}
		_, faults := ventSheet().Judge(values)
		if len(faults) != 1 || faults[0].Field != c.field || faults[0].Value != c.value || faults[0].Problem == "" || faults[0].Accepted == "" {
			t.Errorf("%s = %q: %+v", c.field, c.value, faults)
		}
	}
}

func TestSetInForceFrom(t *testing.T) {
	const bare = "# ours\nlodebook: 1\nsite: {code: A, name: A, time_zone: Atlantic/Faroe}\nzones: [{code: I}]\n"
	day := civil.Of(2026, 2, 28)
	once, err := SetInForceFrom([]byte(bare), day)
	if err != nil {
		t.Fatal(err)
	}
	if want := "# ours\nlodebook: 1\nin_force_from: 2026-02-28\n" + bare[len("# ours\nlodebook: 1\n"):]; string(once) != want {
		t.Errorf("inserted:\n%s", once)
	}
	twice, err := SetInForceFrom(once, day+1)
	if err != nil {
		t.Fatal(err)
	}
	p, err := Parse(twice)
	if err != nil || *p.InForceFrom != day+1 {
		t.Errorf("replaced: %v\n%s", err, twice)
	}
}
