package program

import (
	"errors"
	"strings"
	"testing"
)

func TestSelfReport(t *testing.T) {
	p := mustParse(t, head+"events: [{code: change, of: person, self_report: true}, {code: storm, of: site}]\n")
	same(t, "of change", p.Events[0].SelfReport, true)
	same(t, "of storm", p.Events[1].SelfReport, false)
	_, err := Parse([]byte(head + "events: [{code: change, of: person, self_report: true}, {code: storm, of: site, self_report: true}, {code: move, of: person, self_report: often}]\n"))
	var faults Faults
	if !errors.As(err, &faults) || len(faults) != 3 {
		t.Fatalf("%v", err)
	}
	for i, want := range []string{"write of: person", "mark one event alone", "self_report"} {
		if got := faults[i].Sentence(); !strings.Contains(got, want) {
			t.Errorf("fault %d is %s, want %q in it", i, got, want)
		}
	}
}
