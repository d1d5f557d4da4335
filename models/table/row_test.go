package table

import (
	"slices"
	"testing"
)

// TestNumbers reads numbers as typed.
func TestNumbers(t *testing.T) {
	for _, c := range []struct{ cell, delim, want, says string }{
		{"19.50", ",", "19.50", ""},
		{"+4", ",", "4", ""},
		{"-4.0", ",", "-4.0", ""},
		{"\u22124", ",", "-4", ""}, // U+2212, the minus sign
		{"007", ",", "7", ""},
		{".5", ",", "0.5", ""},
		{"-0.00", ",", "0.00", ""},
		{"12345678901234567890.123", ",", "12345678901234567890.123", ""},
		{"19,5", ";", "19.5", ""},
		{"19.5", ";", "19.5", ""},
		{"19,5", "\t", "", "has a comma"},
		{"1.234,5", ";", "", "is not a number; accepted: digits and at most one decimal point or comma"},
		{"1 234", ";", "", "is not a number"},
		{"4 m", ",", "", "is not a number; accepted: digits and at most one decimal point, as 19.5"},
		{"5.", ",", "", "is not a number"},
		{"-", ",", "", "is not a number"},
		{"1e5", ",", "", "is not a number"},
		{"NaN", ",", "", "is not a number"},
		{"0x10", ",", "", "is not a number"},
		{"٣", ",", "", "is not a number"}, // an Arabic digit, which few readers of a book can check
	} {
		got, ok, f := one(t, c.cell, c.delim, Options{}).Number("joined")
		if c.says == "" && (got != c.want || !ok || f != nil) {
			t.Errorf("%q parted by %q is %q, %v; want %q", c.cell, c.delim, got, f, c.want)
		}
		if c.says != "" {
			if f == nil || ok {
				t.Errorf("%q parted by %q is %q, want a fault", c.cell, c.delim, got)
				continue
			}
			only(t, []Fault{*f}, 2, "joined", c.says)
		}
	}
	if _, ok, f := one(t, "", ",", Options{}).Number("joined"); ok || f != nil {
		t.Error("a blank cell is no number and no fault")
	}
	if _, ok, f := one(t, `"19,5"`, ",", Options{}).Number("joined"); ok || f == nil {
		t.Error("a decimal comma in a file of commas may be one of thousands")
	}
}

// TestYesNo reads answers.
func TestYesNo(t *testing.T) {
	for cell, want := range map[string][2]bool{
		"yes": {true, true}, "Y": {true, true}, "TRUE": {true, true}, "1": {true, true},
		"No": {false, true}, "n": {false, true}, "false": {false, true}, "0": {false, true},
		"": {false, false},
	} {
		yes, present, f := one(t, cell, ",", Options{}).YesNo("joined")
		if yes != want[0] || present != want[1] || f != nil {
			t.Errorf("%q is %v, %v, %v", cell, yes, present, f)
		}
	}
	if _, present, f := one(t, "x", ",", Options{}).YesNo("joined"); present || f == nil {
		t.Error("x is no answer")
	}
}

// TestWords parts a list.
func TestWords(t *testing.T) {
	got := one(t, "\" III  IV;V,\nVI\"", ",", Options{}).Words("joined")
	if !slices.Equal(got, []string{"III", "IV", "V", "VI"}) {
		t.Errorf("%q", got)
	}
	if got := one(t, "", ",", Options{}).Words("joined"); len(got) != 0 {
		t.Errorf("%q of a blank cell", got)
	}
}
