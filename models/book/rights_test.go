package book_test

import (
	"errors"
	"fmt"
	"strings"
	"testing"
	"time"

	"lodebook/models/book"
)

// rights says what is on record of a person: zone, beginning, end.
func (d *desk) rights(person string) string {
	d.Helper()
	list, err := d.Rights(d.Context(), d.officer, site, person)
	d.ok(err)
	var out []string
	for _, r := range list {
		end := "open"
		if r.To != nil {
			end = r.To.Format(time.RFC3339)
		}
		out = append(out, fmt.Sprintf("%s %s %s", r.Zone, r.From.Format(time.RFC3339), end))
	}
	return strings.Join(out, "; ")
}

func (d *desk) grant(f book.RightForm) string {
	d.Helper()
	r, err := d.Grant(d.Context(), d.officer, site, f, book.Correction{})
	d.ok(err)
	return r.ID()
}

// A right is from a moment to a moment: days are whole by the site's clocks, which in the Faroes are an hour ahead
// of UTC in summer, from the last Sunday of March on (the IANA database's rule EU, from memory).
func TestARightHoldsWholeDaysOrInstants(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	d.grant(book.RightForm{Person: "P1", Zone: "III", From: "2026-03-28", To: "2026-03-29"})
	d.grant(book.RightForm{Person: "P1", Zone: "IV", From: "2026-04-01 14:30", Reason: "joins the team"})
	want := "III 2026-03-28T00:00:00Z 2026-03-29T23:00:00Z; IV 2026-04-01T13:30:00Z open"
	if got := d.rights("P1"); got != want {
		t.Errorf("on record is %s, want %s", got, want)
	}
}

func TestARightIsWithdrawn(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	id := d.grant(book.RightForm{Person: "P1", Zone: "IV", From: "2026-03-01"})
	for name, c := range map[string]struct{ at, reason, field string }{
		"no reason":            {"", "", "reason"},
		"no moment":            {"soon", "moved", "at"},
		"before it begins":     {"2026-02-28", "moved", "at"},
		"on the day before it": {"2026-02-28T23:59:59Z", "moved", "at"},
	} {
		_, err := d.EndRight(t.Context(), d.officer, id, c.at, c.reason)
		var invalid *book.Invalid
		if !errors.As(err, &invalid) || invalid.Faults[0].Field != c.field || invalid.Faults[0].Accepted == "" {
			t.Errorf("%s: %v", name, err)
		}
	}
	r, err := d.EndRight(t.Context(), d.officer, id, "", "moved to another team")
	d.ok(err)
	if got, want := d.rights("P1"), "IV 2026-03-01T00:00:00Z 2026-03-02T08:00:00Z"; got != want {
		t.Errorf("on record is %s, want %s", got, want)
	}
	if _, err := d.EndRight(t.Context(), d.officer, id, "", "again"); !errors.As(err, new(*book.Stale)) {
		t.Errorf("a right that was withdrawn already: %v", err)
	}
	if _, err := d.EndRight(t.Context(), d.officer, r.ID(), "2026-03-05", "longer"); !errors.As(err, new(*book.Invalid)) {
		t.Errorf("an end that comes after the end: %v", err)
	}
	if _, err := d.EndRight(t.Context(), d.officer, r.ID(), "2026-03-01", "sooner"); err != nil {
		t.Errorf("an end that comes before the end: %v", err)
	}
	v, err := d.Entry(t.Context(), d.officer, r.ID())
	d.ok(err)
	if strings.Contains(v.Canonical, "another team") {
		t.Error("the words of the reason stand in the entry's bytes")
	}
}

func TestRightsThatAreRefused(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	d.grant(book.RightForm{Person: "P1", Zone: "III", From: "2026-03-01"})
	for name, c := range map[string]struct {
		form  book.RightForm
		field string
	}{
		"nobody":                {book.RightForm{Person: "P9", Zone: "IV", From: "2026-03-01"}, "person"},
		"no such zone":          {book.RightForm{Person: "P1", Zone: "V", From: "2026-03-01"}, "zone"},
		"no beginning":          {book.RightForm{Person: "P1", Zone: "IV"}, "from"},
		"no day":                {book.RightForm{Person: "P1", Zone: "IV", From: "2026-02-29"}, "from"},
		"no end":                {book.RightForm{Person: "P1", Zone: "IV", From: "2026-03-01", To: "later"}, "to"},
		"an end before":         {book.RightForm{Person: "P1", Zone: "IV", From: "2026-03-01", To: "2026-02-28"}, "to"},
		"an empty span":         {book.RightForm{Person: "P1", Zone: "IV", From: "2026-03-01T10:00:00Z", To: "2026-03-01T10:00:00Z"}, "to"},
		"before they joined":    {book.RightForm{Person: "P1", Zone: "IV", From: "2025-01-31"}, "from"},
		"one that they have":    {book.RightForm{Person: "P1", Zone: "III", From: "2026-04-01"}, "zone"},
		"one that overlaps one": {book.RightForm{Person: "P1", Zone: "III", From: "2026-02-01", To: "2026-03-01"}, "zone"},
	} {
		_, err := d.Grant(t.Context(), d.officer, site, c.form, book.Correction{})
		var invalid *book.Invalid
		if !errors.As(err, &invalid) || invalid.Faults[0].Field != c.field || invalid.Faults[0].Accepted == "" {
			t.Errorf("%s: %v", name, err)
		}
	}
	d.grant(book.RightForm{Person: "P1", Zone: "III", From: "2026-02-01", To: "2026-02-28"}) // they touch and do not overlap
	self := d.account("runa", book.SafetyOfficer, "P1")
	if _, err := d.Grant(t.Context(), self, site, book.RightForm{Person: "P1", Zone: "IV", From: "2026-03-01"}, book.Correction{}); !errors.As(err, new(*book.Denied)) {
		t.Errorf("a right that somebody grants to themselves: %v", err)
	}
	for _, role := range []book.Role{book.Administrator, book.Facilities, book.Member, book.Reader} {
		if _, err := d.Grant(t.Context(), d.account("a-"+string(role), role, ""), site, book.RightForm{Person: "P1", Zone: "IV", From: "2026-03-01"}, book.Correction{}); !errors.As(err, new(*book.Denied)) {
			t.Errorf("granted by %s: %v", role, err)
		}
	}
}

func TestRightsAreImported(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	d.person("P2", "Teis Joensen", "L1")
	csv := "person,zone,from,to,granted_by\nP1,III,2026-01-01,,Olga\nP1,IV,2026-01-01T08:00:00Z,2026-06-01T08:00:00Z,Olga\nP2,III,2026-01-01,2026-03-31,\n"
	if r := d.imp("rights", csv); r.Written != 3 {
		t.Fatalf("%+v", r)
	}
	if r := d.imp("rights", csv); r.Written != 0 || r.Unchanged != 3 || len(r.Kept) > 0 {
		t.Errorf("the second time: %+v", r)
	}
	list, err := d.Rights(t.Context(), d.officer, site, "P1")
	d.ok(err)
	if len(list) != 2 || !list[0].Imported {
		t.Errorf("on record is %+v", list)
	}
	// Withdrawn by hand: the next file, in which it is still open, does not open it again.
	_, err = d.EndRight(t.Context(), d.officer, list[0].Entry, "2026-03-01", "moved")
	d.ok(err)
	if r := d.imp("rights", strings.Replace(csv, "P1,III,2026-01-01,,Olga", "P1,III,2026-01-01,,Olga B", 1)); r.Written != 0 || len(r.Kept) != 1 || r.Kept[0].Line != 2 {
		t.Errorf("a row that would undo a withdrawal: %+v", r)
	}
	// A later file may say an end of what was imported.
	if r := d.imp("rights", "person,zone,from,to\nP2,III,2026-01-01,2026-03-15\n"); r.Written != 1 || d.rights("P2") != "III 2026-01-01T00:00:00Z 2026-03-16T00:00:00Z" {
		t.Errorf("%+v: on record is %s", r, d.rights("P2"))
	}
	bad := d.imp("rights", "person,zone,from,to\nP9,III,2026-01-01,\nP1,VI,2026-01-01,\nP1,IV,,\nP1,IV,01/02/2026,\nP1,IV,2026-02-01,2026-01-01\nP2,IV,2024-01-01,\n")
	if bad.Written != 0 || len(bad.Faults) != 6 {
		t.Errorf("%+v", bad)
	}
	for i, column := range []string{"person", "zone", "from", "from", "to", "from"} {
		if bad.Faults[i].Column != column || bad.Faults[i].Line != i+2 {
			t.Errorf("fault %d is of line %d, column %s", i, bad.Faults[i].Line, bad.Faults[i].Column)
		}
	}
}
