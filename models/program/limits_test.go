package program

import (
	"strings"
	"testing"
)

// What would take the reader minutes is refused at once.
func TestLimits(t *testing.T) {
	for name, c := range map[string]struct{ src, want string }{
		"bytes":  {head + "# " + strings.Repeat("x", maxSource), "line 1, column 1: the file has 1048626 bytes"},
		"pieces": {strings.Repeat("{}", maxTokens), "line 1, column 1: found 300000 pieces of YAML; more than any program needs"},
		"list":   {head + "zones: [" + strings.Repeat("{code: I},", maxList+1) + "]", "line 3, column 8: zones: found 2001 entries; more than any program needs"},
		"facts":  {head + "person_facts: {" + strings.Repeat("x: text,", maxList+1) + "}", "line 3, column 15: person_facts: found 2001 entries"},
		"hours":  {head + "calendar: {hours: {mon: [" + strings.Repeat(`"08:00-09:00",`, 200) + "]}}", "line 3, column 19: calendar.hours: found 200 spans of hours"},
		"depth":  {strings.Repeat("- ", 150) + "a", "line 1, column 201: found \"-\"; nested deeper than anything in a program"},
		"key":    {head + strings.Repeat("x", 5000) + ": 1", "line 3, column 1: " + strings.Repeat("x", 60) + "…: found"},
		"commas": {head + "documents: [{code: A, title: a" + strings.Repeat(", b", 60) + "}]", `line 3, column 183: documents[0].b: found "b"; no such key here`},
	} {
		_, err := Parse([]byte(c.src))
		if err == nil || !strings.HasPrefix(err.Error(), c.want) {
			t.Errorf("%s: got %.300v, want %s", name, err, c.want)
		}
	}
}
