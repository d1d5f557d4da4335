package book_test

import (
	"fmt"
	"strings"
	"testing"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
)

// The morning's job flags what is wrong around the doors, once, and clears it when it is right again. P1's screening of
// 2026-02-01 is good through 2027-02-01, and its notice begins 30 days before: by hand.
func TestTheMorningFlagsTheDoors(t *testing.T) {
	d := gate(t)
	run := func(day string) book.FlagCounts {
		t.Helper()
		on, err := civil.ParseDay(day)
		d.ok(err)
		n, err := d.RaiseFlags(t.Context(), book.JobActor(), site, on)
		d.ok(err)
		return n
	}
	alarms := func() string {
		t.Helper()
		list, err := d.Alarms(t.Context(), d.officer, site)
		d.ok(err)
		var out []string
		for _, a := range list {
			out = append(out, strings.TrimSpace(fmt.Sprintf("%s %s %s", a.Kind, a.About, a.Who)))
		}
		return strings.Join(out, ", ")
	}
	run("2026-03-10")
	if got := alarms(); got != "" {
		t.Errorf("of a quiet site: %s", got)
	}
	d.imp("holders", "badge,door\nB-2,D1\nB-9,D1\n")
	d.imp("passages", "at,door,badge,direction\n2026-03-09T08:00:00Z,D1,B-2,in\n")
	run("2026-03-10")
	if got := alarms(); got != "doors D1, passages QUAY" {
		t.Errorf("of an open door and a passage: %s", got)
	}
	if n := run("2026-03-10"); n.Raised != 0 || n.Reopened != 0 {
		t.Errorf("a second run: %v", n)
	}
	_, err := d.Explain(t.Context(), d.officer, site, book.MarkForm{At: "2026-03-09T08:00:00Z", Door: "D1", Badge: "B-2", Note: "a fire drill"})
	d.ok(err)
	d.imp("holders", "badge,door\nB-1,D1\n")
	if n := run("2026-03-10"); n.Cleared != 2 {
		t.Errorf("mended: %v", n)
	}
	for day, want := range map[string]string{"2027-01-01": "", "2027-01-02": "reach IV P1"} {
		at, err := time.Parse(time.DateOnly, day)
		d.ok(err)
		d.now = at.Add(8 * time.Hour)
		run(day)
		if got := alarms(); got != want {
			t.Errorf("on %s: %q, want %q", day, got, want)
		}
	}
}
