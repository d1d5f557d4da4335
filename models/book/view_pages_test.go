package book_test

import (
	"errors"
	"slices"
	"strings"
	"testing"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// TestSessionIsKeptOnce sends one form twice, and changed: writing twice is writing once.
func TestSessionIsKeptOnce(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	d.person("P2", "Teis Joensen", "L1")
	id, err := d.FreshID()
	d.ok(err)
	form := book.SessionForm{ID: id, Record: "training/level-2", On: "2026-02-20", People: []string{"P1"}}
	first, err := d.RecordSession(t.Context(), d.officer, site, form)
	d.ok(err)
	again, err := d.RecordSession(t.Context(), d.officer, site, form)
	d.ok(err)
	if len(first.Written) != 1 || len(again.Written) != 0 || !slices.Equal(again.Unchanged, first.Written) {
		t.Errorf("sent twice: wrote %v, then %v and found %v", first.Written, again.Written, again.Unchanged)
	}
	form.People = []string{"P1", "P2"}
	more, err := d.RecordSession(t.Context(), d.officer, site, form)
	d.ok(err)
	if len(more.Written) != 1 || len(more.Unchanged) != 1 {
		t.Errorf("with one more person: wrote %v, found %v", more.Written, more.Unchanged)
	}
	form.On = "2026-02-21"
	if _, err := d.RecordSession(t.Context(), d.officer, site, form); !errors.As(err, new(*book.Conflict)) {
		t.Errorf("with another day: %v, want a conflict", err)
	}
	form = book.SessionForm{Record: "training/level-2", On: "2026-02-20", People: []string{"P1"}, Failed: []string{"P1"}}
	if _, err := d.RecordSession(t.Context(), d.officer, site, form); !errors.As(err, new(*book.Invalid)) {
		t.Errorf("passed and not passed: %v, want a fault", err)
	}
	form = book.SessionForm{Record: "training/level-2", On: "never", People: []string{"P1", "P2"}}
	var invalid *book.Invalid
	if _, err := d.RecordSession(t.Context(), d.officer, site, form); !errors.As(err, &invalid) || len(invalid.Faults) != 1 {
		t.Errorf("a bad day for two people: %v, want it said once", err)
	}
}

// TestPlanIsOpenAgainWhenItsDrillIsWithdrawn holds a plan against the drill that answered it.
func TestPlanIsOpenAgainWhenItsDrillIsWithdrawn(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	plan, err := d.PlanDrill(t.Context(), d.officer, site, book.PlanForm{Record: "drill/quench", Crew: "early", Day: "2026-03-01"}, book.Correction{})
	d.ok(err)
	held, err := d.RecordDrill(t.Context(), d.officer, site, book.DrillForm{Plan: plan.ID(), Record: "drill/quench", Crew: "early", On: "2026-03-01", People: []string{"P1"}})
	d.ok(err)
	done := func() bool {
		x, err := d.Drills(t.Context(), d.officer, site, nil)
		d.ok(err)
		return x.Plans[0].Done
	}
	if !done() {
		t.Fatal("a plan whose drill was recorded is not done")
	}
	takers, err := d.TookPart(t.Context(), d.officer, site, held.Written)
	d.ok(err)
	if want := []string{"Runa Sandoy"}; !slices.Equal(takers[held.ID()], want) || len(takers) != 1 {
		t.Errorf("took part: %v, want %v for the crew's entry alone", takers, want)
	}
	fixed, err := d.Record(t.Context(), d.officer, site, book.RecordForm{Record: "drill/quench", Subject: "crew:early", On: "2026-02-27"}, book.Correction{Supersedes: held.ID()})
	d.ok(err)
	if takers, err = d.TookPart(t.Context(), d.officer, site, fixed.Written); err != nil || len(takers[fixed.ID()]) != 1 || !done() {
		t.Errorf("a corrected drill forgot who took part (%v, %v) or its plan (done: %v)", takers, err, done())
	}
	for _, id := range append(held.Written[1:], fixed.ID()) {
		_, err := d.Withdraw(t.Context(), d.officer, id, book.Correction{})
		d.ok(err)
	}
	if done() {
		t.Error("a plan whose drill was withdrawn is still done")
	}
}

// TestHeldUntil: the level lasts as long as the last item that confers it stays open, by hand: a
// training of 10 October 2025 renewed every year, kept to the month's end, is good to 31 October 2026.
func TestHeldUntil(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	d.record("training/level-2", "person:P1", "2025-10-10", book.Pass)
	d.record("screening/staff", "person:P1", "2025-12-20", book.Pass)
	x, err := d.Person(t.Context(), d.officer, site, "P1", nil)
	d.ok(err)
	if x.Held != "L2" || x.HeldUntil == nil || *x.HeldUntil != civil.Of(2026, time.October, 31) {
		t.Errorf("holds %q until %v, want L2 until 2026-10-31", x.Held, x.HeldUntil)
	}
	left := book.PersonForm{Code: "P1", Joined: "2025-02-01", Left: "2026-06-30"}
	_, err = d.KeepPerson(t.Context(), d.officer, site, left, book.Correction{})
	d.ok(err)
	x, err = d.Person(t.Context(), d.officer, site, "P1", nil)
	d.ok(err)
	if x.HeldUntil == nil || *x.HeldUntil != civil.Of(2026, time.June, 30) {
		t.Errorf("somebody who leaves on 30 June holds until %v", x.HeldUntil)
	}
}

func TestAttendeesSayWhereEachStands(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	d.person("P2", "Teis Joensen", "L2")
	d.record("training/level-2", "person:P1", "2026-02-10", book.Pass)
	list, err := d.Attendees(t.Context(), d.officer, site, "training/level-2")
	d.ok(err)
	words := map[string]standing.Word{}
	for _, a := range list {
		words[a.Code] = a.Word
	}
	if words["P1"] != standing.Met || !words["P2"].IsGap() || len(list) != 2 {
		t.Errorf("attendees stand at %v, want P1 met and P2 a gap", words)
	}
	_, err = d.Pause(t.Context(), d.officer, site, book.PauseForm{Subject: "person:P2", From: "2026-03-01", To: "2026-03-02"}, book.Correction{})
	d.ok(err)
	for day, away := range map[int]bool{2: true, 3: false} {
		d.now = time.Date(2026, 3, day, 8, 0, 0, 0, time.UTC)
		list, err = d.Attendees(t.Context(), d.officer, site, "training/level-2")
		d.ok(err)
		if list[0].Away || list[1].Away != away {
			t.Errorf("on %d March: away %v and %v, want only Teis Joensen: %v", day, list[0].Away, list[1].Away, away)
		}
	}
}

func TestSubjectsAreFoundByWords(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	d.person("P2", "Teis Joensen", "L2")
	d.vent("V1")
	find := func(q book.SubjectQuery) (string, bool) {
		list, more, err := d.Subjects(t.Context(), d.officer, site, q)
		d.ok(err)
		var codes []string
		for _, s := range list {
			codes = append(codes, s.Subject.Code)
		}
		return strings.Join(codes, " "), more
	}
	for _, c := range []struct {
		q    book.SubjectQuery
		want string
		more bool
	}{
		{book.SubjectQuery{Asks: program.AsksPerson, Words: "runa sand", Most: 9}, "P1", false},
		{book.SubjectQuery{Asks: program.AsksPerson, Words: "early", Most: 9}, "P1 P2", false},
		{book.SubjectQuery{Asks: program.AsksPerson, Most: 1}, "P1", true},
		{book.SubjectQuery{Asks: program.AsksFixture, Words: "north", Most: 9}, "V1", false},
		{book.SubjectQuery{Asks: program.AsksFixture, FixtureKinds: []string{"vent"}, Most: 9}, "V1", false},
		{book.SubjectQuery{Asks: program.AsksFixture, FixtureKinds: []string{"detector"}, Most: 9}, "", false},
		{book.SubjectQuery{Asks: program.AsksCrew, Most: 9}, "early night", false},
	} {
		if got, more := find(c.q); got != c.want || more != c.more {
			t.Errorf("%+v found %q, %v, want %q, %v", c.q, got, more, c.want, c.more)
		}
	}
}

// TestIdentifiersAreUUIDs: what a form sends as its identifier ends up in addresses and in entries.
func TestIdentifiersAreUUIDs(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	for _, id := range []string{"x", "{019cad8f-ac00-7a5b-9c5d-5e5f60616263}", "019CAD8F-AC00-7A5B-9C5D-5E5F60616263"} {
		_, err := d.Record(t.Context(), d.officer, site, book.RecordForm{ID: id, Record: "training/level-2", Subject: "P1", On: "2026-02-20"}, book.Correction{})
		if !errors.As(err, new(*book.Invalid)) {
			t.Errorf("identifier %q: %v, want a fault", id, err)
		}
	}
}
