package book_test

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
	"time"

	"lodebook/models/book"
)

// gate is a desk with a door into zone IV, the person P1 who is entitled to it from 2 February 2026 on, and their badge.
func gate(t *testing.T) *desk {
	d := newDesk(t)
	d.imp("people", "code,name,level,crew,badge,joined,employer\nP1,Runa Sandoy,L2,early,B-1,2025-02-01,Skerry Works\nP2,Teis Joensen,L2,early,B-2,2025-02-01,Skerry Works\n")
	d.imp("fixtures", "code,kind,name,zone,since\nD1,detector,Door,IV,2025-02-01\nD0,detector,Hall door,I,2025-02-01\n")
	d.record("training/level-2", "P1", "2026-02-01", "pass")
	d.record("screening/staff", "P1", "2026-02-01", "pass")
	d.grant(book.RightForm{Person: "P1", Zone: "IV", From: "2026-01-01"})
	d.now = time.Date(2026, 3, 10, 8, 0, 0, 0, time.UTC) // what was recorded on 2 March was known on the days between
	return d
}

// passages lists the verdicts between two moments: by all that is recorded, and as it was known then.
func (d *desk) passages(from, to string) string {
	d.Helper()
	a, err := time.Parse(time.RFC3339, from)
	d.ok(err)
	b, err := time.Parse(time.RFC3339, to)
	d.ok(err)
	var out []string
	_, err = d.Passages(d.Context(), d.officer, book.PassageQuery{Site: site, From: a, To: b}, func(p book.PassageView) error {
		var why []string
		for _, r := range p.Reasons {
			why = append(why, r.String())
		}
		out = append(out, strings.TrimSpace(fmt.Sprintf("%s %s %s %s/%s %s", p.At.Format("15:04"), p.Door, p.Badge, p.Verdict, p.Then, strings.Join(why, ", "))))
		return nil
	})
	d.ok(err)
	return strings.Join(out, "\n")
}

func (d *desk) wantPassages(day, want string) {
	d.Helper()
	if got := d.passages(day+"T00:00:00Z", day+"T23:59:59Z"); got != strings.TrimSpace(want) {
		d.Errorf("on %s:\n%s\nwant\n%s", day, got, strings.TrimSpace(want))
	}
}

// A failure that is typed in at 17:00 does not make a passage at nine o'clock anybody's fault: by hand.
func TestAPassageIsJudgedTwice(t *testing.T) {
	d := gate(t)
	d.now = time.Date(2026, 3, 3, 17, 0, 0, 0, time.UTC)
	_, err := d.Record(t.Context(), d.officer, site, book.RecordForm{Record: "training/level-2", Subject: "P1", On: "2026-03-03T08:00:00Z", Result: "fail"}, book.Correction{})
	d.ok(err)
	d.now = d.now.Add(3 * time.Hour)
	r := d.imp("passages", "at,door,badge,direction\n2026-03-03 09:00,D1,B-1,in\n2026-03-03T07:00:00Z,D1,B-1,in\n2026-03-03T18:00:00Z,D1,B-1,in\n2026-03-03T18:30:00Z,D1,B-1,out\n2026-03-03T10:00:00Z,D0,B-2,in\n2026-03-03T10:30:00Z,D1,B-2,\n2026-03-03T11:00:00Z,D1,B-9,in\n2026-03-03T11:30:00Z,D7,B-1,in\n")
	if r.Written != 8 || r.Batch == "" {
		t.Fatalf("%+v", r)
	}
	d.wantPassages("2026-03-03", `
07:00 D1 B-1 entitled/entitled
09:00 D1 B-1 not-entitled/entitled TRAIN-L2 failed
10:00 D0 B-2 entitled/entitled
10:30 D1 B-2 not-entitled/not-entitled no-right, TRAIN-L2 missing, SCREEN missing
11:00 D1 B-9 unknown-badge/unknown-badge
11:30 D7 B-1 unknown-door/unknown-door
18:00 D1 B-1 not-entitled/not-entitled TRAIN-L2 failed
18:30 D1 B-1 entitled/entitled`)
}

// Exports overlap: only what is new is added, and an import is taken back whole.
func TestOverlappingExports(t *testing.T) {
	d := gate(t)
	one := "at,door,badge,direction\n2026-03-09T08:00:00Z,D1,B-1,in\n2026-03-09T08:00:00Z,D1,B-1,in\n2026-03-09T09:00:00Z,D1,B-1,out\n"
	first := d.imp("passages", one)
	if first.Written != 2 || first.Unchanged != 1 {
		t.Fatalf("%+v", first)
	}
	if r := d.imp("passages", one); r.Written != 0 || r.Batch != "" || r.Unchanged != 3 {
		t.Errorf("the same again: %+v", r)
	}
	second := d.imp("passages", "at,door,badge,direction\n2026-03-09T09:00:00Z,D1,B-1,out\n2026-03-09T10:00:00Z,D1,B-1,in\n")
	if second.Written != 1 {
		t.Errorf("%+v", second)
	}
	_, err := d.UndoImport(t.Context(), d.op, first.Batch)
	d.ok(err)
	d.wantPassages("2026-03-09", "10:00 D1 B-1 entitled/entitled")
	if r := d.imp("passages", one); r.Written != 2 {
		t.Errorf("taken back and brought in again: %+v", r)
	}
	if r, err := d.try("passages", "at,door,badge\n2026-03-09T11:00:00Z,D1,B-1\n", book.ImportOptions{DryRun: true}); err != nil || r.Written != 1 || r.Batch != "" {
		t.Errorf("tried: %+v, %v", r, err)
	}
	if got := strings.Count(d.passages("2026-03-09T00:00:00Z", "2026-03-10T00:00:00Z"), "\n"); got != 2 {
		t.Errorf("%d passages and one are there", got)
	}
}

// A badge goes from one person to another on a day; the day before it is still the first one's.
func TestABadgeGoesToAnotherPerson(t *testing.T) {
	d := gate(t)
	d.imp("people", "code,badge,from\nP2,B-1,2026-03-05\n")
	d.imp("passages", "at,door,badge,direction\n2026-03-04T23:59:59Z,D1,B-1,in\n2026-03-05T00:00:00Z,D1,B-1,in\n2026-03-05T08:00:00Z,D1,B-2,in\n2026-03-04T08:00:00Z,D1,B-2,in\n")
	if got := d.passages("2026-03-04T00:00:00Z", "2026-03-06T00:00:00Z"); got != strings.TrimSpace(`
08:00 D1 B-2 not-entitled/not-entitled no-right, TRAIN-L2 missing, SCREEN missing
23:59 D1 B-1 entitled/entitled
00:00 D1 B-1 not-entitled/entitled no-right, TRAIN-L2 missing, SCREEN missing
08:00 D1 B-2 unknown-badge/not-entitled`) {
		t.Error(got)
	}
	// It goes back.
	d.imp("people", "code,badge,from\nP1,B-1,2026-03-08\n")
	d.imp("passages", "at,door,badge,direction\n2026-03-08T06:00:00Z,D1,B-1,in\n")
	d.wantPassages("2026-03-08", "06:00 D1 B-1 entitled/entitled") // both changes were recorded after it
}

// The clocks of the Faroes went back on 25 October 2026 at 01:00 UTC, from 02:00 to 01:00 (the rule EU of the IANA
// database, which the test looks up): an hour comes twice. Where the rows of a door are in order and jump back, the file
// itself tells; where nothing tells, the row is refused.
func TestAnHourThatComesTwice(t *testing.T) {
	loc, err := time.LoadLocation("Atlantic/Faroe")
	if err != nil {
		t.Fatal(err)
	}
	back := time.Date(2026, 10, 25, 1, 0, 0, 0, time.UTC)
	if begin, _ := back.In(loc).ZoneBounds(); !begin.Equal(back) {
		t.Fatalf("the database has %v", begin)
	}
	d := gate(t)
	d.now = time.Date(2026, 10, 26, 8, 0, 0, 0, time.UTC)
	r := d.imp("passages", "at,door,badge,direction\n2026-10-25 00:50,D1,B-1,in\n2026-10-25 01:10,D1,B-1,in\n2026-10-25 01:50,D1,B-1,in\n2026-10-25 01:05,D1,B-1,in\n2026-10-25 01:55,D1,B-1,in\n2026-10-25 02:05,D1,B-1,in\n")
	if r.Written != 6 || len(r.Faults) > 0 {
		t.Fatalf("%+v", r)
	}
	if got := strings.ReplaceAll(d.passages("2026-10-24T23:00:00Z", "2026-10-25T12:00:00Z"), " D1 B-1 entitled/entitled", ""); got != "23:50\n00:10\n00:50\n01:05\n01:55\n02:05" {
		t.Errorf("in UTC: %s", got)
	}
	r = d.imp("passages", "at,door,badge,direction\n2026-10-25 00:55,D1,B-2,in\n2026-10-25 01:20,D1,B-2,in\n2026-10-25 02:30,D1,B-2,in\n")
	if r.Written != 0 || len(r.Faults) != 1 || r.Faults[0].Line != 3 || !strings.Contains(r.Faults[0].Accepted, "+01:00") {
		t.Errorf("nothing tells: %+v", r)
	}
	r = d.imp("passages", "at,door,badge,direction\n2026-10-25T01:20:00+01:00,D1,B-2,in\n")
	if r.Written != 1 {
		t.Errorf("with its offset: %+v", r)
	}
	r = d.imp("passages", "at,door,badge,direction\n2026-03-29 01:30,D1,B-2,in\n")
	if len(r.Faults) != 1 || !strings.Contains(r.Faults[0].Problem, "put forward") {
		t.Errorf("a time that there never was: %+v", r)
	}
}

func TestPassagesThatAreRefused(t *testing.T) {
	d := gate(t)
	bad := d.imp("passages", "at,door,badge,direction\n2026-03-09,D1,B-1,in\nnoon,D1,B-1,in\n,D1,B-1,in\n2026-03-09T08:00:00Z,,B-1,in\n2026-03-09T08:00:00Z,D1,B-1,up\n2027-03-01T08:00:00Z,D1,B-1,in\n2026-03-09T08:00:00Z,D1,B-1,IN\n")
	if bad.Written != 0 || bad.Batch != "" || len(bad.Faults) != 6 {
		t.Fatalf("%+v", bad)
	}
	for i, column := range []string{"at", "at", "at", "door", "direction", "at"} {
		if f := bad.Faults[i]; f.Column != column || f.Line != i+2 || f.Accepted == "" {
			t.Errorf("fault %d: %+v", i, f)
		}
	}
	part, err := d.try("passages", "at,door,badge,direction\n2026-03-09,D1,B-1,in\n2026-03-09T08:00:00Z,D1,B-1,in\n", book.ImportOptions{Partial: true})
	if err != nil || part.Written != 1 || len(part.Faults) != 1 {
		t.Errorf("in part: %+v, %v", part, err)
	}
	if r := d.imp("passages", "when,door\n2026-03-09,D1\n"); len(r.Faults) == 0 {
		t.Error("columns that are not there were taken")
	}
	for _, role := range []book.Role{book.Facilities, book.Member} {
		_, err := d.Passages(t.Context(), d.account("a-"+string(role), role, ""), book.PassageQuery{Site: site, From: d.now.Add(-time.Hour), To: d.now}, func(book.PassageView) error { return nil })
		if !errors.As(err, new(*book.Denied)) {
			t.Errorf("seen by %s: %v", role, err)
		}
	}
	if _, err := d.Passages(t.Context(), d.officer, book.PassageQuery{Site: site, From: d.now, To: d.now}, nil); !errors.As(err, new(*book.Invalid)) {
		t.Errorf("no time at all: %v", err)
	}
}

func TestAPassageIsExplained(t *testing.T) {
	d := gate(t)
	d.imp("passages", "at,door,badge,direction\n2026-03-09T08:00:00Z,D1,B-2,in\n2026-03-09T09:00:00Z,D1,B-2,in\n")
	f := book.MarkForm{At: "2026-03-09T08:00:00Z", Door: "D1", Badge: "B-2", Note: "a fire drill"}
	self := d.account("teis", book.SafetyOfficer, "P2")
	if _, err := d.Explain(t.Context(), self, site, f); !errors.As(err, new(*book.Denied)) {
		t.Errorf("their own: %v", err)
	}
	if _, err := d.Explain(t.Context(), d.account("ada", book.Reader, ""), site, f); !errors.As(err, new(*book.Denied)) {
		t.Errorf("by a reader: %v", err)
	}
	if _, err := d.Explain(t.Context(), d.officer, site, book.MarkForm{At: f.At, Door: "D1", Badge: "B-3", Note: "x"}); !errors.As(err, new(*book.NotFound)) {
		t.Errorf("a passage that never was: %v", err)
	}
	if _, err := d.Explain(t.Context(), d.officer, site, book.MarkForm{At: f.At, Door: "D1", Badge: "B-2"}); !errors.As(err, new(*book.Invalid)) {
		t.Errorf("without a word: %v", err)
	}
	r, err := d.Explain(t.Context(), d.officer, site, f)
	d.ok(err)
	d.wantPassages("2026-03-09", `
08:00 D1 B-2 explained/not-entitled no-right, TRAIN-L2 missing, SCREEN missing
09:00 D1 B-2 not-entitled/not-entitled no-right, TRAIN-L2 missing, SCREEN missing`)
	if _, err := d.Explain(t.Context(), d.officer, site, f); !errors.As(err, new(*book.Invalid)) {
		t.Errorf("twice: %v", err)
	}
	open, n, err := d.Unexplained(t.Context(), d.officer, site, d.now.Add(-48*time.Hour), d.now, 10)
	if err != nil || n != 1 || len(open) != 1 || open[0].At.Hour() != 9 {
		t.Errorf("unexplained are %d: %+v, %v", n, open, err)
	}
	_, err = d.Withdraw(t.Context(), d.officer, r.ID(), book.Correction{Reason: "slip"})
	d.ok(err)
	if _, n, _ := d.Unexplained(t.Context(), d.officer, site, d.now.Add(-48*time.Hour), d.now, 1); n != 2 {
		t.Errorf("%d are unexplained once the mark is withdrawn", n)
	}
}

// What is to be changed at the doors: by hand. P1 is entitled and holds nothing; P2 holds a door and is not.
func TestRightsDiff(t *testing.T) {
	d := gate(t)
	if x, err := d.RightsDiff(t.Context(), d.officer, site, nil); err != nil || x.Listed != nil || len(x.Rows) > 0 {
		t.Errorf("without a list: %+v, %v", x, err)
	}
	list := "badge,door\nB-2,D1\nB-2,D0\nB-8,D1\nB-2,D9\n"
	if r := d.imp("holders", list); r.Written != 4 {
		t.Fatalf("%+v", r)
	}
	if r := d.imp("holders", list); r.Written != 0 || r.Unchanged != 4 {
		t.Errorf("the same again: %+v", r)
	}
	diff := func() string {
		t.Helper()
		x, err := d.RightsDiff(t.Context(), d.officer, site, nil)
		d.ok(err)
		var out []string
		for _, r := range x.Rows {
			out = append(out, strings.TrimSpace(fmt.Sprintf("%s %s %s %s %s", r.Change, r.Badge, r.Person, r.Door, r.Zone)))
		}
		return strings.Join(out, "\n")
	}
	if got, want := diff(), "withdraw B-2 P2 D1 IV\nunknown-badge B-8  D1 IV\nadd B-1 P1 D1 IV\nunknown-door B-2 P2 D9"; got != want {
		t.Errorf("got\n%s\nwant\n%s", got, want)
	}
	old := d.now
	d.now = d.now.Add(24 * time.Hour)
	if r := d.imp("holders", "badge,door\nB-1,D1\n"); r.Written != 1 {
		t.Fatalf("%+v", r)
	}
	if got := diff(); got != "" {
		t.Errorf("a list in order: %s", got)
	}
	x, err := d.RightsDiff(t.Context(), d.officer, site, &old)
	if err != nil || x.Withdrawals() != 3 {
		t.Errorf("by the list of the day before: %+v, %v", x, err)
	}
	if bad := d.imp("holders", "badge,door\n,D1\nB-1,\n"); len(bad.Faults) != 2 || bad.Written != 0 {
		t.Errorf("%+v", bad)
	}
}

// Whoever is erased leaves no badge behind, in no door event and no list of the time in which it was theirs.
func TestErasedBadges(t *testing.T) {
	d := gate(t)
	d.now = time.Date(2026, 3, 20, 8, 0, 0, 0, time.UTC)
	d.imp("people", "code,badge,from\nP2,B-1,2026-03-05\n")
	d.imp("passages", "at,door,badge,direction\n2026-03-03T08:00:00Z,D1,B-1,in\n2026-03-06T08:00:00Z,D1,B-1,in\n")
	_, err := d.Explain(t.Context(), d.officer, site, book.MarkForm{At: "2026-03-03T08:00:00Z", Door: "D1", Badge: "B-1", Note: "seen"})
	d.ok(err)
	_, err = d.KeepPerson(t.Context(), d.officer, site, book.PersonForm{Code: "P1", Left: "2026-03-15"}, book.Correction{})
	d.ok(err)
	_, err = d.ErasePerson(t.Context(), d.officer, "P1")
	d.ok(err)
	got := d.passages("2026-03-03T00:00:00Z", "2026-03-07T00:00:00Z")
	if !strings.HasPrefix(got, "08:00 D1 erased-") || !strings.Contains(got, "08:00 D1 B-1 not-entitled/") {
		t.Error(got)
	}
	d.ok(d.Rebuild(t.Context()))
	if after := d.passages("2026-03-03T00:00:00Z", "2026-03-07T00:00:00Z"); after != got {
		t.Errorf("after a rebuild\n%s\nbefore\n%s", after, got)
	}
}

// An export of many rows is read with little in memory: 300,000 of them in less than 48 MB more than 10,000 take.
func TestPassagesAreStreamed(t *testing.T) {
	d := gate(t)
	most := func(rows int, day string) uint64 {
		t.Helper()
		path := filepath.Join(t.TempDir(), "passages.csv")
		f, err := os.Create(path)
		d.ok(err)
		at, err := time.Parse(time.DateOnly, day)
		d.ok(err)
		_, err = f.WriteString("at,door,badge,direction\n")
		d.ok(err)
		for i := range rows {
			_, err = fmt.Fprintf(f, "%s,D%d,B-%d,in\n", at.Add(time.Duration(i)*time.Second).Format(time.RFC3339), i%40, i%900)
			d.ok(err)
		}
		info, err := f.Stat()
		d.ok(err)
		ctx, stop := context.WithCancel(t.Context())
		peak := make(chan uint64)
		go func() {
			var most uint64
			for ctx.Err() == nil {
				var m runtime.MemStats
				runtime.GC()
				runtime.ReadMemStats(&m)
				most = max(most, m.HeapAlloc)
				time.Sleep(20 * time.Millisecond)
			}
			peak <- most
		}()
		r, err := d.Import(t.Context(), d.op, book.ImportOptions{Table: "passages", Site: site, File: f, Size: info.Size(), FileName: "passages.csv"})
		stop()
		got := <-peak
		d.ok(errors.Join(err, f.Close()))
		if r.Written != rows {
			t.Fatalf("%+v", r)
		}
		return got
	}
	few := most(10_000, "2025-06-01")
	many := most(300_000, "2025-07-01")
	if many > few+48<<20 {
		t.Errorf("10,000 rows took %d MB at the most, 300,000 took %d MB", few>>20, many>>20)
	}
}

// An item of the site can ask that the doors' list is in order and no older than 30 days.
func TestAnItemAsksForTheDoorsList(t *testing.T) {
	d := gate(t)
	d.program("  - {code: INDUCTION,", "  - {code: DOORS, title: The doors let in who is entitled, asks: site, holds: \"subject.door_list_age >= 0 && subject.door_list_age <= 30 && subject.door_list_open == 0\", basis: Site rule}\n  - {code: INDUCTION,")
	word := func(after int) string {
		t.Helper()
		d.ok(d.TakeStock(t.Context()))
		return string(d.word("DOORS", "site:QUAY", d.now.AddDate(0, 0, after).Format(time.DateOnly)))
	}
	if got := word(0); got != "failed" {
		t.Errorf("without a list it is %q", got)
	}
	d.imp("holders", "badge,door\nB-2,D1\nB-1,D1\n")
	if got := word(0); got != "failed" {
		t.Errorf("with a list that lets P2 in it is %q", got)
	}
	d.imp("holders", "badge,door\nB-1,D1\n")
	for after, want := range map[int]string{0: "met", 30: "met", 31: "failed"} {
		if got := word(after); got != want {
			t.Errorf("%d days after a clean list it is %q, want %q", after, got, want)
		}
	}
}
