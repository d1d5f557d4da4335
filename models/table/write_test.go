package table

import (
	"bytes"
	"encoding/csv"
	"errors"
	"io"
	"reflect"
	"slices"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// TestHarmless checks what OWASP's page "CSV Injection" names as the starts of formulas.
func TestHarmless(t *testing.T) {
	for cell, want := range map[string]string{
		"":                          "",
		"Ada":                       "Ada",
		"2025-03-01":                "2025-03-01",
		"a=1":                       "a=1",
		"=1+1":                      "'=1+1",
		`=HYPERLINK("http://x","")`: `'=HYPERLINK("http://x","")`,
		"+cmd|' /C calc'!A0":        "'+cmd|' /C calc'!A0",
		"-2+3":                      "'-2+3",
		"@SUM(1)":                   "'@SUM(1)",
		"\t=1":                      "'\t=1",
		"\r=1":                      "'\r=1",
		"\n=1":                      "'\n=1",
		"  =1":                      "'  =1",
		"\u00a0\ufeff=1":            "'\u00a0\ufeff=1",
		"＝1":                        "'＝1",
		"-":                         "'-",
		"-5":                        "-5",
		"+5.25":                     "+5.25",
		"-.5":                       "-.5",
		"-5 m":                      "'-5 m",
		"-5\n=1":                    "'-5\n=1",
		"-1e5":                      "'-1e5",
		"'=1":                       "'=1",
	} {
		if got := Harmless(cell); got != want {
			t.Errorf("%q becomes %q, want %q", cell, got, want)
		}
	}
}

// TestWrite pins the bytes: RFC 4180 §2, rules 1, 6 and 7.
func TestWrite(t *testing.T) {
	var b bytes.Buffer
	rows := [][]string{{"P1", "Åse, \"the\" first"}, {"=P2", ""}, {"-3", "two\nlines"}}
	if err := Write(&b, []string{"code", "name"}, slices.Values(rows)); err != nil {
		t.Fatal(err)
	}
	want := "code,name\r\nP1,\"Åse, \"\"the\"\" first\"\r\n'=P2,\r\n-3,\"two\r\nlines\"\r\n"
	if b.String() != want {
		t.Errorf("%q, want %q", b.String(), want)
	}
	if err := Write(io.Discard, []string{"code"}, slices.Values([][]string{{"P1", "x"}})); err == nil || !strings.Contains(err.Error(), "row 1 has 2 cells") {
		t.Errorf("%v", err)
	}
	if err := Write(full{}, []string{"code"}, slices.Values([][]string{{"P1"}})); !errors.Is(err, io.ErrShortWrite) {
		t.Errorf("a full disk gives %v", err)
	}
	many := func(yield func([]string) bool) {
		for yield([]string{strings.Repeat("x", 1000)}) {
		}
	}
	if err := Write(full{}, []string{"code"}, many); !errors.Is(err, io.ErrShortWrite) {
		t.Errorf("a full disk gives %v", err)
	}
}

type full struct{}

func (full) Write([]byte) (int, error) { return 0, io.ErrShortWrite }

// TestWriteRoundTrip reads what was written, by package encoding/csv and by a Reader, and finds no
// cell that starts a formula.
func TestWriteRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		cell := rapid.StringOfN(rapid.RuneFrom([]rune("=+-@\t\r\n '\",;ab1.é\u00a0")), 0, 8, -1)
		rows := rapid.SliceOfN(rapid.Map(rapid.SliceOfN(cell, 2, 2), func(c []string) []string { return append([]string{"k"}, c...) }), 1, 5).Draw(t, "rows")
		var b bytes.Buffer
		if err := Write(&b, []string{"code", "name", "email"}, slices.Values(rows)); err != nil {
			t.Fatal(err)
		}
		got, err := csv.NewReader(bytes.NewReader(b.Bytes())).ReadAll()
		if err != nil || len(got) != len(rows)+1 {
			t.Fatal(got, err)
		}
		r, faults, err := opened(b.Bytes(), Options{})
		if err != nil || len(faults) > 0 {
			t.Fatal(faults, err)
		}
		for i, row := range rows {
			for j, c := range got[i+1] {
				if c != "" && strings.ContainsAny(c[:1], "=+-@\t\r\n") && !plainNumber.MatchString(c) {
					t.Fatalf("%q was written as %q", row[j], c)
				}
			}
			ours, faults, err := r.Next()
			if err != nil || len(faults) > 0 {
				t.Fatal(faults, err)
			}
			want := []string{"k", flat(Harmless(row[1])), flat(Harmless(row[2]))}
			if have := []string{ours.Text("code"), flat(ours.Text("name")), flat(ours.Text("email"))}; !reflect.DeepEqual(have, want) {
				t.Fatalf("%q, want %q", have, want)
			}
		}
	})
}

// flat leaves out carriage returns, which package encoding/csv does not write but at ends of lines,
// and trims.
func flat(s string) string { return clean(strings.ReplaceAll(s, "\r", "")) }
