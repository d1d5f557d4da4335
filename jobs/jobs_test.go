package jobs

import (
	"context"
	"crypto/rand"
	"errors"
	"log/slog"
	"slices"
	"strings"
	"testing"
	"time"
	_ "time/tzdata"

	"lodebook/migrations/scratch"
	"lodebook/models/book"
)

// The site lies on the Faroe Islands: WET in winter, WEST in summer.
const source = `
lodebook: 1
in_force_from: 2025-01-01
site: {code: QUAY, name: North Quay, time_zone: Atlantic/Faroe}
zones: [{code: I}]
levels: [{code: L1}]
crews: [{code: early}]
items:
  - {code: INDUCTION, title: Induction, asks: person, record: training/induction, every: P1Y, basis: Site rule}
`

type bench struct {
	*testing.T
	b    *book.Book
	path string
	now  time.Time
}

func newBench(t *testing.T, now time.Time) *bench { return benchAt(t, now, scratch.Book(t)) }

func benchAt(t *testing.T, now time.Time, address string) *bench {
	t.Helper()
	x := &bench{T: t, now: now, path: address}
	b, err := book.Create(t.Context(), x.path, x.options())
	x.ok(err)
	x.b = b
	t.Cleanup(func() { x.ok(b.Close()) })
	_, err = b.OpenProgram(t.Context(), book.SystemOperator("ops"), []byte(source), "")
	x.ok(err)
	x.imp("people", "code,name,joined\nP1,Runa Sandoy,2025-02-01\n")
	x.imp("records", "record,subject,on\ntraining/induction,P1,2025-02-10\n")
	return x
}

func (x *bench) options() book.Options {
	return book.Options{Clock: func() time.Time { return x.now }, Random: rand.Reader}
}

func (x *bench) ok(err error) {
	x.Helper()
	if err != nil {
		x.Fatal(err)
	}
}

func (x *bench) imp(table, csv string) {
	x.Helper()
	r, err := x.b.Import(x.Context(), book.SystemOperator("ops"), book.ImportOptions{Table: table, Site: "QUAY", File: strings.NewReader(csv), Size: int64(len(csv))})
	x.ok(err)
	if len(r.Faults) > 0 {
		x.Fatal(r.Faults)
	}
}

func (x *bench) turn() {
	x.Helper()
	x.ok(NewRunner(x.b, slog.New(slog.DiscardHandler)).Turn(x.Context()))
}

func (x *bench) flags() []book.FlagView {
	x.Helper()
	list, err := x.b.Flags(x.Context(), book.SystemOperator("ops"), "QUAY")
	x.ok(err)
	return list
}

// runs are those of the morning job.
func (x *bench) runs() []book.RunView { return x.runsOf("morning") }

func (x *bench) runsOf(job string) []book.RunView {
	x.Helper()
	list, err := x.b.Runs(x.Context(), book.SystemOperator("ops"), 100)
	x.ok(err)
	return slices.DeleteFunc(list, func(r book.RunView) bool { return r.Job != job })
}

func TestMissedRunsAreCaughtUpOnce(t *testing.T) {
	x := newBench(t, time.Date(2026, 3, 2, 9, 0, 0, 0, time.UTC))
	x.turn()
	x.turn()
	if n := len(x.runs()); n != 1 {
		t.Fatalf("%d runs after two turns of one morning, want 1", n)
	}
	x.now = x.now.AddDate(0, 0, 3) // the program was down for three mornings
	x.turn()
	x.turn()
	runs := x.runs()
	if len(runs) != 2 || runs[0].Outcome != "done" || !runs[0].Due.Equal(time.Date(2026, 3, 5, 5, 30, 0, 0, time.UTC)) {
		t.Fatalf("after three mornings down: %+v", runs)
	}
	x.now = time.Date(2026, 3, 6, 5, 29, 59, 0, time.UTC)
	x.turn()
	if n := len(x.runs()); n != 2 {
		t.Fatalf("ran before it was due: %d runs", n)
	}
}

func TestMorningIsTheSites(t *testing.T) {
	// On 2026-03-29 at 01:00 UTC the Faroe Islands put their clocks forward to 02:00 (the EU's rule,
	// which the IANA database gives for Atlantic/Faroe): 05:30 there is 04:30 UTC from then on.
	x := newBench(t, time.Date(2026, 3, 29, 4, 30, 0, 0, time.UTC))
	x.turn()
	if due := x.runs()[0].Due; !due.Equal(time.Date(2026, 3, 29, 4, 30, 0, 0, time.UTC)) {
		t.Errorf("summer morning due at %s", due)
	}
	next, err := morning.Next(mustZone(t), time.Date(2026, 10, 24, 12, 0, 0, 0, time.UTC))
	x.ok(err)
	if !next.Equal(time.Date(2026, 10, 25, 5, 30, 0, 0, time.UTC)) {
		t.Errorf("the morning of the day with 25 hours is at %s", next.UTC())
	}
}

func mustZone(t *testing.T) *time.Location {
	t.Helper()
	z, err := time.LoadLocation("Atlantic/Faroe")
	if err != nil {
		t.Fatal(err)
	}
	return z
}

func TestAGapThatLastsIsOneFlag(t *testing.T) {
	x := newBench(t, time.Date(2026, 2, 1, 9, 0, 0, 0, time.UTC))
	x.turn() // due 2026-02-10, notice 30 days: closing
	if f := x.flags(); len(f) != 1 || f[0].Standing != "closing" || f[0].Opened.String() != "2026-02-01" {
		t.Fatalf("closing: %+v", f)
	}
	x.now = time.Date(2026, 2, 11, 9, 0, 0, 0, time.UTC)
	x.turn()
	if f := x.flags(); len(f) != 1 || f[0].Standing != "lapsed" || f[0].Opened.String() != "2026-02-01" || f[0].Reopened != 0 {
		t.Fatalf("lapsed: %+v", f)
	}
	x.imp("records", "record,subject,on\ntraining/induction,P1,2026-02-11\n")
	x.now = x.now.AddDate(0, 0, 1)
	x.turn()
	if f := x.flags(); len(f) != 1 || f[0].Cleared == nil || f[0].Cleared.String() != "2026-02-12" {
		t.Fatalf("mended: %+v", f)
	}
	x.imp("records", "record,subject,on,result\ntraining/induction,P1,2026-02-12,fail\n")
	x.now = x.now.AddDate(0, 0, 1)
	x.turn()
	if f := x.flags(); len(f) != 1 || f[0].Cleared != nil || f[0].Reopened != 1 || f[0].Standing != "failed" {
		t.Fatalf("reopened: %+v", f)
	}
}

func TestTwoProgramsRunOnce(t *testing.T) {
	x := newBench(t, time.Date(2026, 3, 2, 9, 0, 0, 0, time.UTC))
	other, err := book.Open(t.Context(), x.path, x.options())
	x.ok(err)
	done := make(chan error, 2)
	for _, b := range []*book.Book{x.b, other} {
		go func() {
			done <- NewRunner(b, slog.New(slog.DiscardHandler)).Turn(context.WithoutCancel(t.Context()))
		}()
	}
	x.ok(errors.Join(<-done, <-done))
	x.ok(other.Close())
	if n := len(x.runs()); n != 1 {
		t.Errorf("two programs made %d runs", n)
	}
}

func TestFailedRunIsRecorded(t *testing.T) {
	x := newBench(t, time.Date(2026, 3, 2, 9, 0, 0, 0, time.UTC))
	bad := Job{Name: "bad", Schedule: "0 4 * * *", Run: func(context.Context, *book.Book, string, time.Time) (string, error) {
		return "", errors.New("the roof fell in")
	}}
	if _, err := bad.RunNow(t.Context(), x.b, "QUAY", x.now); err == nil {
		t.Fatal("no error")
	}
	if r := x.runsOf("bad")[0]; r.Outcome != "failed" || r.Message != "the roof fell in" || r.Ended == nil {
		t.Errorf("%+v", r)
	}
	bad.Run = func(context.Context, *book.Book, string, time.Time) (string, error) { return "mended", nil }
	if message, err := bad.RunNow(t.Context(), x.b, "QUAY", x.now); err != nil || message != "mended" {
		t.Errorf("a failed run made again: %q, %v", message, err)
	}
	if _, err := bad.RunNow(t.Context(), x.b, "QUAY", x.now); err == nil || !strings.Contains(err.Error(), "already") {
		t.Errorf("a good run made twice: %v", err)
	}
}

func TestRunThatWasCutOffIsMadeAgain(t *testing.T) {
	x := newBench(t, time.Date(2026, 3, 2, 9, 0, 0, 0, time.UTC))
	due := time.Date(2026, 3, 2, 5, 30, 0, 0, time.UTC)
	// What a killed program leaves behind: a run with a start and no end.
	func() {
		defer func() { _ = recover() }()
		_, _ = x.b.Claimed(t.Context(), "morning", "QUAY", due, func() (string, error) { panic("killed") })
	}()
	x.now = x.now.Add(10 * time.Minute)
	x.turn()
	if r := x.runs(); len(r) != 1 || r[0].Outcome != "running" {
		t.Fatalf("taken over at once: %+v", r)
	}
	x.now = x.now.Add(time.Hour)
	x.turn()
	if r := x.runs(); len(r) != 1 || r[0].Outcome != "done" {
		t.Fatalf("never made again: %+v", r)
	}
}

func TestEverySchedule(t *testing.T) {
	for _, j := range All {
		if _, err := j.Next(mustZone(t), time.Date(2026, 1, 1, 0, 0, 0, 0, time.UTC)); err != nil {
			t.Errorf("%s: %v", j.Name, err)
		}
		if got, err := Named(j.Name); err != nil || got.Name != j.Name {
			t.Errorf("%s is not found by its name", j.Name)
		}
	}
	if _, err := Named("evening"); err == nil || !strings.Contains(err.Error(), "morning") {
		t.Errorf("an unknown job: %v", err)
	}
}
