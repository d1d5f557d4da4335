package book_test

import (
	"errors"
	"fmt"
	"os"
	"slices"
	"strings"
	"testing"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/standing"
)

// demand opens a version of the program that asks for people on duty, in force from the first of the year.
func (d *desk) demand(items ...string) {
	d.Helper()
	source, err := os.ReadFile("testdata/site.yaml")
	d.ok(err)
	text := strings.Replace(string(source), "in_force_from: 2025-01-01", "in_force_from: 2026-01-01", 1)
	text = strings.Replace(text, "  closed:", "  hours: {mon-fri: \"08:00-18:00\"}\n  closed:", 1)
	_, err = d.OpenProgram(d.Context(), d.op, []byte(text+strings.Join(items, "\n")+"\n"), "")
	d.ok(err)
}

const (
	coverL2   = "  - {code: COVER-L2, title: Somebody of level 2 is there, asks: site, cover: {level: L2}, basis: Site rule}"
	coverMRSO = "  - {code: COVER-MRSO, title: The safety officer can be reached, asks: site, cover: {post: MRSO}, basis: Site rule}"
	doorsItem = "  - {code: DOORS, title: The list of doors is clean, asks: site, holds: \"subject.door_list_age >= 0 && subject.door_list_age <= 30 && subject.door_list_open == 0\", basis: Site rule}"
)

// fillRoster puts a roster on record and with it what the book reckons of it.
func (d *desk) fillRoster() {
	d.Helper()
	d.now = d.now.Add(time.Minute)
	d.demand(coverL2)
	_, err := d.KeepDuty(d.Context(), d.officer, site, book.DutyForm{Person: "P1", From: "2026-03-02 07:00", To: "2026-03-02 12:30", Duty: "early"}, book.Correction{})
	d.ok(err)
	d.ok(d.TakeStock(d.Context()))
}

// uncovered is what stands on record from one day to another, as known at a moment: item, span, how many.
func (d *desk) uncovered(from, to string, knownAt *time.Time) []string {
	d.Helper()
	q := book.CoverQuery{Site: site, KnownAt: knownAt}
	var err error
	q.From, err = time.Parse(time.DateOnly, from)
	d.ok(err)
	q.To, err = time.Parse(time.DateOnly, to)
	d.ok(err)
	c, err := d.Coverage(d.Context(), d.officer, q)
	d.ok(err)
	out := []string{}
	for _, u := range c.Rows {
		out = append(out, fmt.Sprintf("%s %s %s %d/%d", u.Item, u.From.UTC().Format("01-02 15:04"), u.To.UTC().Format("01-02 15:04"), u.There, u.Needed))
	}
	return out
}

func (d *desk) wantUncovered(from, to string, want ...string) {
	d.Helper()
	if got := d.uncovered(from, to, nil); !slices.Equal(got, want) {
		d.Errorf("uncovered from %s to %s: %q, want %q", from, to, got, want)
	}
}

func (d *desk) size() int {
	d.Helper()
	list, err := d.Entries(d.Context(), d.op, book.EntryQuery{Limit: 500})
	d.ok(err)
	return len(list)
}

// The book's clock stands at 2 March 2026, a Monday, 08:00; the Faroes' clocks are UTC's in winter.
func TestTheRosterMakesTheStanding(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	d.record("training/level-2", "P1", "2025-06-01", "pass")
	d.demand(coverL2)
	if got := d.word("COVER-L2", site, "2026-03-02"); got != standing.DataFault {
		t.Errorf("without a roster it stands as %s", got)
	}
	report := d.imp("roster", "person,from,to,duty\nP1,2026-03-02 07:00,2026-03-02 18:00,day\nP1,2026-03-03T08:00:00Z,2026-03-03T15:00:00Z,\nP1,2026-03-03 17:00,2026-03-04 18:00,late\n")
	d.wantUncovered("2026-03-01", "2026-03-06", "COVER-L2 03-03 15:00 03-03 17:00 0/1", "COVER-L2 03-05 08:00 03-05 18:00 0/1")
	for day, want := range map[string]standing.Word{"2026-03-02": standing.Met, "2026-03-03": standing.Failed, "2026-03-04": standing.Met, "2026-03-05": standing.Failed, "2026-03-07": standing.Met} {
		if got := d.word("COVER-L2", site, day); got != want {
			t.Errorf("on %s it stands as %s, want %s", day, got, want)
		}
	}
	if again := d.imp("roster", "person,from,to,duty\nP1,2026-03-02 07:00,2026-03-02 18:00,day\n"); again.Written != 0 || again.Unchanged != 1 {
		t.Errorf("the same row again: %+v", again)
	}
	before, was := d.size(), d.now
	d.now = d.now.Add(time.Minute)
	d.ok(d.TakeStock(t.Context()))
	if d.size() != before {
		t.Error("stock of an unchanged book was written")
	}
	// What was reckoned then is still known when the roster is taken back.
	_, err := d.UndoImport(t.Context(), d.op, report.Batch)
	d.ok(err)
	d.wantUncovered("2026-03-01", "2026-03-04", "COVER-L2 03-02 08:00 03-02 18:00 0/1", "COVER-L2 03-03 08:00 03-03 18:00 0/1")
	if got := d.uncovered("2026-03-01", "2026-03-04", &was); !slices.Equal(got, []string{"COVER-L2 03-03 15:00 03-03 17:00 0/1"}) {
		t.Errorf("as known before it was taken back: %q", got)
	}
	if got := d.word("COVER-L2", site, "2026-03-04"); got != standing.Failed {
		t.Errorf("with the roster taken back it stands as %s", got)
	}
}

// A training that is typed in late changes what is reckoned of the past, and not what was known of it then.
func TestStockFollowsWhatBearsOnIt(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	d.demand(coverL2)
	d.imp("roster", "person,from,to,duty\nP1,2026-03-02 07:00,2026-03-02 18:00,day\n")
	d.wantUncovered("2026-03-02", "2026-03-03", "COVER-L2 03-02 08:00 03-02 18:00 0/1")
	was := d.now
	d.now = d.now.Add(time.Hour)
	d.record("training/level-2", "P1", "2026-02-01", "pass")
	d.wantUncovered("2026-03-02", "2026-03-03")
	if got := d.uncovered("2026-03-02", "2026-03-03", &was); len(got) != 1 {
		t.Errorf("as known before: %q", got)
	}
	_, err := d.Pause(t.Context(), d.officer, site, book.PauseForm{Subject: "person:P1", From: "2026-03-02", To: "2026-03-02"}, book.Correction{})
	d.ok(err)
	d.wantUncovered("2026-03-02", "2026-03-03", "COVER-L2 03-02 08:00 03-02 18:00 0/1")
	before := d.size()
	d.record("training/induction", "P1", "2026-02-01", "pass")
	if got := d.size(); got != before+1 {
		t.Errorf("a record that changes nothing made %d entries", got-before)
	}
}

func TestTheHorizon(t *testing.T) {
	d := newDesk(t)
	d.demand(coverMRSO)
	d.person("P1", "Runa Sandoy", "L2")
	d.imp("roster", "person,from,to,duty\nP1,2026-03-02 07:00,2026-03-02 18:00,day\n")
	last := func() string {
		list := d.uncovered("2026-01-01", "2027-01-01", nil)
		return list[len(list)-1]
	}
	// Four weeks from 2 March are 30 March, a Monday; Friday before it is the 27th.
	if got := last(); got != "COVER-MRSO 03-27 08:00 03-27 18:00 0/1" {
		t.Errorf("the last uncovered time is %s", got)
	}
	if got := d.word("COVER-MRSO", site, "2026-03-30"); got != standing.DataFault {
		t.Errorf("behind the horizon it stands as %s", got)
	}
	before := d.size()
	d.now = d.now.AddDate(0, 0, 7) // 30 March is in summer time, an hour ahead
	d.ok(d.Turn(t.Context()))
	if got := last(); got != "COVER-MRSO 04-03 07:00 04-03 17:00 0/1" {
		t.Errorf("a week later the last uncovered time is %s", got)
	}
	if got := d.size(); got != before+1 {
		t.Errorf("the turn of a week made %d entries", got-before)
	}
	d.imp("roster", "person,from,to,duty\nP1,2026-12-01 07:00,2026-12-01 18:00,day\n")
	if got := last(); got != "COVER-MRSO 05-01 07:00 05-01 17:00 0/1" { // eight weeks from 9 March are 4 May
		t.Errorf("with a long roster the last uncovered time is %s", got)
	}
}

func TestADeputyCoversAPostAndDoesNotHoldIt(t *testing.T) {
	d := newDesk(t)
	d.demand(coverMRSO)
	d.person("P1", "Runa Sandoy", "L2")
	d.person("P2", "Jona Vik", "L2")
	d.imp("roster", "person,from,to,duty\nP1,2026-03-02 07:00,2026-03-02 12:00,day\nP2,2026-03-02 12:00,2026-03-02 18:00,on-call\n")
	d.wantUncovered("2026-03-02", "2026-03-03", "COVER-MRSO 03-02 08:00 03-02 18:00 0/1")
	_, err := d.Appoint(t.Context(), d.officer, site, book.AppointForm{Post: "MRSO", Person: "P1", From: "2026-02-01"})
	d.ok(err)
	d.wantUncovered("2026-03-02", "2026-03-03", "COVER-MRSO 03-02 12:00 03-02 18:00 0/1")
	deputy, err := d.Appoint(t.Context(), d.officer, site, book.AppointForm{Post: "MRSO", Person: "P2", From: "2026-02-01", Deputy: true})
	d.ok(err)
	d.wantUncovered("2026-03-02", "2026-03-03")
	_, err = d.EndAppointment(t.Context(), d.officer, deputy.ID(), "2026-03-01")
	d.ok(err)
	d.wantUncovered("2026-03-02", "2026-03-03", "COVER-MRSO 03-02 12:00 03-02 18:00 0/1")
	var invalid *book.Invalid
	if _, err := d.Appoint(t.Context(), d.officer, site, book.AppointForm{Post: "MRSX", Person: "P1", From: "2026-02-01"}); !errors.As(err, &invalid) || invalid.Faults[0].Field != "record" {
		t.Errorf("a post that is none: %v", err)
	}
	if _, err := d.EndAppointment(t.Context(), d.officer, deputy.ID(), ""); err == nil {
		t.Error("an appointment was ended on no day")
	}
	self := d.account("runa", book.SafetyOfficer, "P1")
	var denied *book.Denied
	if _, err := d.Appoint(t.Context(), self, site, book.AppointForm{Post: "MRSO", Person: "P1", From: "2026-02-01", Deputy: true}); !errors.As(err, &denied) {
		t.Errorf("an officer appointed themselves: %v", err)
	}
}

func TestRowsOfARosterThatAreRefused(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	report, err := d.try("roster", "person,from,to,duty\n"+
		"P9,2026-03-02 07:00,2026-03-02 18:00,day\n"+
		"P1,2026-03-02 07:00,2026-03-02 07:00,day\n"+
		"P1,2026-03-02 07:00,2026-03-04 07:01,day\n"+
		"P1,2026-03-02,2026-03-03 07:00,day\n"+
		"P1,2026-03-02 07:00,,day\n"+
		"P1,2026-10-25 01:30,2026-10-25 07:00,day\n"+
		"P1,2026-03-02 07:00,2026-03-02 08:00,day shift\n"+
		"P1,2026-03-29 01:30,2026-03-29 08:00,day\n", book.ImportOptions{})
	d.ok(err)
	got := []string{}
	for _, f := range report.Faults {
		got = append(got, fmt.Sprintf("%d %s %s", f.Line, f.Column, f.Problem))
	}
	want := []string{
		"2 person is no person on record at this site", "3 to is not after the beginning, 2026-03-02T07:00:00Z", "4 to is more than 48 hours after the beginning, 2026-03-02T07:00:00Z",
		"5 from is no instant", "6 to is empty", "7 from ", "8 duty is no code", "9 from ",
	}
	for i, f := range got {
		if i >= len(want) || !strings.HasPrefix(f, want[i]) {
			t.Errorf("fault %d is %q", i, f)
		}
	}
	if len(got) != len(want) || report.Written != 0 {
		t.Errorf("%d faults, %d written; want %d and none", len(got), report.Written, len(want))
	}
}

func TestWhoMayKeepAndSeeTheRoster(t *testing.T) {
	d := newDesk(t)
	d.demand(coverL2)
	d.person("P1", "Runa Sandoy", "L2")
	member := d.account("runa", book.Member, "P1")
	var denied *book.Denied
	if _, err := d.KeepDuty(t.Context(), member, site, book.DutyForm{Person: "P1", From: "2026-03-02 07:00", To: "2026-03-02 18:00"}, book.Correction{}); !errors.As(err, &denied) {
		t.Errorf("a member kept the roster: %v", err)
	}
	for _, person := range []string{"P1", "P2"} {
		if person == "P2" {
			d.person("P2", "Jona Vik", "L1")
		}
		_, err := d.KeepDuty(t.Context(), d.officer, site, book.DutyForm{Person: person, From: "2026-03-02 07:00", To: "2026-03-02 18:00"}, book.Correction{})
		d.ok(err)
	}
	q := book.DutyQuery{Site: site, From: d.now, To: d.now.Add(time.Hour)}
	if _, err := d.Roster(t.Context(), member, q); !errors.As(err, &denied) {
		t.Errorf("a member saw the whole roster: %v", err)
	}
	q.Person = "P1"
	list, err := d.Roster(t.Context(), member, q)
	d.ok(err)
	if len(list) != 1 || list[0].Person != "P1" || list[0].Duty != "duty" {
		t.Errorf("a member sees %+v", list)
	}
	if _, err := d.Uncovered(t.Context(), member, site, d.now, d.now.Add(time.Hour)); !errors.As(err, &denied) {
		t.Errorf("a member saw the coverage: %v", err)
	}
	cut, err := d.Uncovered(t.Context(), d.officer, site, d.now.Add(time.Hour), d.now.Add(2*time.Hour))
	d.ok(err)
	if len(cut) != 1 || !cut[0].From.Equal(d.now.Add(time.Hour)) || !cut[0].To.Equal(d.now.Add(2*time.Hour)) {
		t.Errorf("cut to an hour it is %+v", cut)
	}
	var invalid *book.Invalid
	if _, err := d.Coverage(t.Context(), d.officer, book.CoverQuery{Site: site, Item: "VENT", From: d.now, To: d.now.Add(time.Hour)}); !errors.As(err, &invalid) || invalid.Faults[0].Field != "item" {
		t.Errorf("an item without cover: %v", err)
	}
}

func TestTheListOfDoorsIsAFact(t *testing.T) {
	d := newDesk(t)
	imported, open, known := civil.Day(0), 0, false
	defer book.SetDoorList(func() (civil.Day, int, bool) { return imported, open, known })()
	d.demand(doorsItem)
	want := func(day string, word standing.Word) {
		t.Helper()
		if got := d.word("DOORS", site, day); got != word {
			t.Errorf("on %s it stands as %s, want %s", day, got, word)
		}
	}
	d.ok(d.TakeStock(t.Context()))
	want("2026-03-02", standing.Failed)
	want("2026-01-05", standing.Failed)
	at := func(hours int) { d.now = d.now.Add(time.Duration(hours) * time.Hour); d.ok(d.TakeStock(t.Context())) }
	imported, known = civil.Of(2026, 3, 2), true
	at(1)
	want("2026-03-01", standing.Failed)
	want("2026-03-02", standing.Met)
	want("2026-04-01", standing.Met)
	want("2026-04-02", standing.Failed) // 31 days old
	before := d.size()
	at(24)
	if d.size() != before {
		t.Error("a day later there was something to write")
	}
	open = 2
	at(1)
	want("2026-03-02", standing.Met)
	want("2026-03-03", standing.Failed)
	open, imported = 0, civil.Of(2026, 3, 3)
	at(1)
	want("2026-04-02", standing.Met)
	known = false // the import is taken back
	at(1)
	want("2026-03-03", standing.Failed)
	want("2026-04-02", standing.Failed)
	want("2026-03-02", standing.Met)
}
