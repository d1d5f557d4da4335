package book_test

import (
	"bytes"
	"context"
	"crypto/rand"
	"database/sql"
	"errors"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"
	_ "time/tzdata"

	_ "github.com/mattn/go-sqlite3"

	"lodebook/migrations/scratch"
	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/standing"
)

// desk is a book on a test's desk: with one site, an officer and a clock that stands still until
// it is moved.
type desk struct {
	*testing.T
	*book.Book
	path    string
	now     time.Time
	officer book.Actor
	op      book.Actor
}

const site = "QUAY"

// newDesk's book is where books are tested; newFileDesk's is a file, for what is tested of files only.
func newDesk(t *testing.T) *desk { return deskAt(t, scratch.Book(t)) }

func newFileDesk(t *testing.T) *desk { return deskAt(t, filepath.Join(t.TempDir(), "site.book")) }

func deskAt(t *testing.T, address string) *desk {
	t.Helper()
	d := &desk{T: t, path: address, now: time.Date(2026, 3, 2, 8, 0, 0, 0, time.UTC), op: book.SystemOperator("ops")}
	b, err := book.Create(t.Context(), d.path, d.options())
	d.ok(err)
	d.Book = b
	t.Cleanup(func() { d.ok(b.Close()) })
	source, err := os.ReadFile("testdata/site.yaml")
	d.ok(err)
	_, err = d.OpenProgram(t.Context(), d.op, source, "")
	d.ok(err)
	d.officer = d.account("olga", book.SafetyOfficer, "")
	return d
}

func (d *desk) options() book.Options {
	return book.Options{Clock: func() time.Time { return d.now }, Random: rand.Reader}
}

func (d *desk) ok(err error) {
	d.Helper()
	if err != nil {
		d.Fatal(err)
	}
}

func (d *desk) account(name string, role book.Role, person string) book.Actor {
	d.Helper()
	form := book.AccountForm{Name: name, Role: role, Person: person}
	if role != book.Administrator {
		form.Sites = []string{site}
	}
	_, err := d.AddAccount(d.Context(), d.op, form)
	d.ok(err)
	actor, err := d.ActorNamed(d.Context(), name)
	d.ok(err)
	return actor
}

func (d *desk) person(code, name, level string) {
	d.Helper()
	_, err := d.KeepPerson(d.Context(), d.officer, site, book.PersonForm{Code: code, Name: name, Level: level, Crew: "early", Joined: "2025-02-01", Facts: map[string]string{"employer": "Skerry Works"}}, book.Correction{})
	d.ok(err)
}

func (d *desk) vent(code string) {
	d.Helper()
	_, err := d.KeepFixture(d.Context(), d.officer, site, book.FixtureForm{Code: code, Kind: "vent", Name: "North vent", Zone: "IV", Since: "2025-02-01", Facts: map[string]string{"outlet_height_m": "6.50"}}, book.Correction{})
	d.ok(err)
}

func (d *desk) record(what, subject, on, result string) string {
	d.Helper()
	r, err := d.Record(d.Context(), d.officer, site, book.RecordForm{Record: what, Subject: subject, On: on, Result: result}, book.Correction{})
	d.ok(err)
	return r.ID()
}

// word is the standing of one obligation on a day; empty: none.
func (d *desk) word(item, subject, on string) standing.Word {
	d.Helper()
	day, err := civil.ParseDay(on)
	d.ok(err)
	st, err := d.Standings(d.Context(), d.op, book.StandingQuery{Site: site, On: &day, Item: item, Subject: subject})
	d.ok(err)
	if len(st.Rows) == 0 {
		return ""
	}
	return st.Rows[0].Word
}

func (d *desk) imp(table, csv string) book.ImportReport {
	d.Helper()
	r, err := d.try(table, csv, book.ImportOptions{})
	d.ok(err)
	return r
}

func (d *desk) try(table, csv string, o book.ImportOptions) (book.ImportReport, error) {
	o.Table, o.Site, o.File, o.Size, o.FileName = table, site, strings.NewReader(csv), int64(len(csv)), table+".csv"
	return d.Import(d.Context(), d.op, o)
}

// bytesOf reads the book's file and its side files, or every table of its database.
func (d *desk) bytesOf() []byte {
	d.Helper()
	if driverOf(d.path) == "pgx" {
		return d.tables()
	}
	var all []byte
	for _, p := range []string{d.path, d.path + "-wal", d.path + "-shm"} {
		b, err := os.ReadFile(p)
		if errors.Is(err, os.ErrNotExist) {
			continue
		}
		d.ok(err)
		all = append(all, b...)
	}
	return all
}

// fill puts something of every kind on record.
func (d *desk) fill() {
	d.Helper()
	ctx := d.Context()
	d.person("P1", "Runa Sandoy", "L2")
	d.person("P2", "Teis Joensen", "L1")
	d.vent("V1")
	d.record("training/level-2", "P1", "2026-01-15", "pass")
	d.record("screening/staff", "P1", "2026-02-01T09:30:00Z", "pass")
	bad := d.record("training/induction", "P1", "2025-02-01", "fail")
	_, err := d.Record(ctx, d.officer, site, book.RecordForm{Record: "training/induction", Subject: "P1", On: "2025-02-01", By: "Teis Joensen", Note: "in the small room"}, book.Correction{Supersedes: bad, Reason: "wrong-result"})
	d.ok(err)
	_, _, err = d.FillSheet(ctx, d.officer, site, book.SheetForm{Record: "inspection/vent-yearly", Fixture: "V1", On: "2026-02-10", Values: map[string]string{"outlet_clear": "yes", "clear_of_path_m": "3.50", "remark": "gulls about"}}, book.Correction{})
	d.ok(err)
	_, err = d.ReportEvent(ctx, d.officer, site, book.EventForm{Event: "roof-work", Subject: "V1", On: "2026-02-27", Note: "gutter"}, book.Correction{})
	d.ok(err)
	_, err = d.Excuse(ctx, d.officer, site, book.ExcusalForm{Item: "INDUCTION", Subject: "P2", From: "2026-02-01", To: "2026-04-01", Reason: "joins in April"}, book.Correction{})
	d.ok(err)
	_, err = d.Pause(ctx, d.officer, site, book.PauseForm{Subject: "P2", From: "2026-03-01", Reason: "leave"}, book.Correction{})
	d.ok(err)
	_, err = d.PlanDrill(ctx, d.officer, site, book.PlanForm{Record: "drill/quench", Crew: "early", Day: "2026-03-12", At: "14:00"}, book.Correction{})
	d.ok(err)
	_, err = d.RecordDrill(ctx, d.officer, site, book.DrillForm{Record: "drill/quench", Crew: "early", On: "2026-02-20", People: []string{"P1", "P2"}})
	d.ok(err)
	gone := d.record("drill/quench", "crew:night", "2026-02-21", "pass")
	_, err = d.Withdraw(ctx, d.officer, gone, book.Correction{Reason: "not-done"})
	d.ok(err)
	d.imp("people", "code,name,level,joined\nP3,Sanna Holm,L1,2025-06-01\n")
	report := d.imp("records", "record,subject,on,note\ntraining/induction,P3,2025-06-02,with Runa\n")
	_, err = d.UndoImport(ctx, d.op, report.Batch)
	d.ok(err)
}

// fillMore puts on record what fill does not: the bytes of its entries hang on all that was written before, so
// a kind that is new comes last.
func (d *desk) fillMore() {
	d.Helper()
	right := d.grant(book.RightForm{Person: "P1", Zone: "IV", From: "2026-02-01", Reason: "leads the early crew"})
	_, err := d.EndRight(d.Context(), d.officer, right, "2026-03-01 12:00", "works elsewhere now")
	d.ok(err)
	d.fillRemedies()
	d.now = d.now.Add(time.Second)
	d.imp("passages", "at,door,badge,direction\n2026-03-01T09:00:00Z,D9,B-17,in\n")
	_, err = d.Explain(d.Context(), d.officer, site, book.MarkForm{At: "2026-03-01T09:00:00Z", Door: "D9", Badge: "B-17", Note: "a delivery, seen in by Runa"})
	d.ok(err)
	d.now = d.now.Add(time.Second)
	r, err := d.Announce(d.Context(), d.officer, site, book.VisitForm{Visitor: "Ada Lund", Employer: "Skerry Magnets", Kind: "vendor", Zones: []string{"II"}, To: "2026-03-02 16:00", Tool: "torch"})
	d.ok(err)
	_, err = d.StepVisit(d.Context(), d.officer, book.StepForm{Visit: r.ID(), Step: book.Arrived, Tools: []string{"torch"}})
	d.ok(err)
	d.fillRoster()
}

func TestRebuildMakesTheSameProjections(t *testing.T) {
	d := newDesk(t)
	d.fill()
	_, err := d.KeepPerson(t.Context(), d.officer, site, book.PersonForm{Code: "P3", Left: "2026-02-28"}, book.Correction{})
	d.ok(err)
	_, err = d.ErasePerson(t.Context(), d.officer, "P3")
	d.ok(err)
	d.fillMore()
	before, err := d.Dump(t.Context())
	d.ok(err)
	rows := 0
	for _, lines := range before {
		rows += len(lines)
	}
	if rows < 30 {
		t.Fatalf("only %d projected rows: the test fills too little", rows)
	}
	d.ok(d.Rebuild(t.Context()))
	after, err := d.Dump(t.Context())
	d.ok(err)
	for table, lines := range before {
		if !slices.Equal(lines, after[table]) {
			t.Errorf("table %s differs after a rebuild\nbefore: %s\nafter:  %s", table, strings.Join(lines, "\n        "), strings.Join(after[table], "\n        "))
		}
	}
}

func TestWritingTwiceIsWritingOnce(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	f := book.RecordForm{ID: "01890a5d-ac96-774b-bcce-b302099a8057", Record: "training/level-2", Subject: "P1", On: "2026-02-01", Note: "with slides"}
	first, err := d.Record(t.Context(), d.officer, site, f, book.Correction{})
	d.ok(err)
	size, err := d.Size(t.Context())
	d.ok(err)
	again, err := d.Record(t.Context(), d.officer, site, f, book.Correction{})
	d.ok(err)
	if len(first.Written) != 1 || len(again.Written) != 0 || len(again.Unchanged) != 1 {
		t.Fatalf("first %+v, again %+v", first, again)
	}
	if now, err := d.Size(t.Context()); err != nil || now != size {
		t.Fatalf("the second write made the book grow from %d to %d (%v)", size, now, err)
	}
	f.Note = "without slides"
	_, err = d.Record(t.Context(), d.officer, site, f, book.Correction{})
	var conflict *book.Conflict
	if !errors.As(err, &conflict) || !strings.Contains(conflict.Recorded, "with slides") || !strings.Contains(conflict.Given, "without slides") {
		t.Fatalf("other content under the same identifier: %v", err)
	}
}

func TestErasedPersonIsGoneAndHashesVerify(t *testing.T) {
	d := newDesk(t)
	d.fill()
	d.account("runa.sandoy", book.Member, "P1")
	_, err := d.KeepPerson(t.Context(), d.officer, site, book.PersonForm{Code: "P1", Email: "runa@skerry.example", Badge: "B-77120"}, book.Correction{})
	d.ok(err)
	var invalid *book.Invalid
	if _, err = d.ErasePerson(t.Context(), d.officer, "P1"); !errors.As(err, &invalid) {
		t.Fatalf("somebody on staff was erased: %v", err)
	}
	_, err = d.KeepPerson(t.Context(), d.officer, site, book.PersonForm{Code: "P1", Left: "2026-03-01"}, book.Correction{})
	d.ok(err)
	if !bytes.Contains(d.bytesOf(), []byte("Runa Sandoy")) {
		t.Fatal("the name is not in the file before it is erased: the test looks in the wrong place")
	}
	_, err = d.ErasePerson(t.Context(), d.officer, "P1")
	d.ok(err)
	all := d.bytesOf()
	for _, s := range []string{"Runa Sandoy", "runa@skerry", "B-77120", "in the small room", "runa.sandoy"} {
		if bytes.Contains(all, []byte(s)) {
			t.Errorf("%q is still in the file", s)
		}
	}
	report, err := d.Verify(t.Context(), nil)
	d.ok(err)
	if report.FirstFault != "" || report.Erased == 0 || report.Checked != report.Entries {
		t.Fatalf("after the erasure: %+v", report)
	}
	view, err := d.Person(t.Context(), d.officer, site, "P1", nil)
	d.ok(err)
	if !view.Erased || !strings.Contains(view.Name, "(erased)") || len(view.Records) == 0 {
		t.Fatalf("the erased person reads %q with %d records", view.Name, len(view.Records))
	}
}

func TestCorrections(t *testing.T) {
	d := newDesk(t)
	ctx := t.Context()
	d.person("P1", "Runa Sandoy", "L2")
	id := d.record("training/level-2", "P1", "2026-02-01", "pass")
	if w := d.word("TRAIN-L2", "P1", "2026-03-02"); w != standing.Met {
		t.Fatalf("before: %s", w)
	}
	fix := book.RecordForm{Record: "training/level-2", Subject: "P1", On: "2026-02-01", Result: "fail"}

	d.now = d.now.Add(9 * time.Minute)
	second, err := d.Record(ctx, d.officer, site, fix, book.Correction{Supersedes: id})
	d.ok(err) // a slip of one's own within ten minutes needs no reason
	if w := d.word("TRAIN-L2", "P1", "2026-03-02"); w != standing.Failed {
		t.Fatalf("after the correction: %s", w)
	}
	var stale *book.Stale
	if _, err = d.Record(ctx, d.officer, site, fix, book.Correction{Supersedes: id}); !errors.As(err, &stale) || stale.By != second.ID() {
		t.Fatalf("a stale correction: %v", err)
	}
	d.now = d.now.Add(11 * time.Minute)
	fix.Result = "pass"
	var invalid *book.Invalid
	if _, err = d.Record(ctx, d.officer, site, fix, book.Correction{Supersedes: second.ID()}); !errors.As(err, &invalid) || invalid.Faults[0].Field != "reason" {
		t.Fatalf("no reason after ten minutes: %v", err)
	}
	if _, err = d.Record(ctx, d.officer, site, fix, book.Correction{Supersedes: second.ID(), Reason: "other"}); !errors.As(err, &invalid) || invalid.Faults[0].Field != "reason_text" {
		t.Fatalf("another reason without its text: %v", err)
	}
	third, err := d.Record(ctx, d.officer, site, fix, book.Correction{Supersedes: second.ID(), Reason: "wrong-result"})
	d.ok(err)
	view, err := d.Entry(ctx, d.officer, second.ID())
	d.ok(err)
	if view.Old == nil || view.Old.ID != id || view.New == nil || view.New.ID != third.ID() || !strings.Contains(view.Canonical, `"result":"fail"`) {
		t.Fatalf("the corrected entry is not readable beside both: %+v", view.EntryLine)
	}
	colleague := d.account("otto", book.SafetyOfficer, "")
	if _, err = d.Withdraw(ctx, colleague, third.ID(), book.Correction{}); !errors.As(err, &invalid) {
		t.Fatalf("another's entry withdrawn without a reason: %v", err)
	}
	_, err = d.Withdraw(ctx, colleague, third.ID(), book.Correction{Reason: "not-done"})
	d.ok(err)
	if w := d.word("TRAIN-L2", "P1", "2026-03-02"); w != standing.Missing {
		t.Fatalf("after the withdrawal: %s", w)
	}
}

func TestKnownAt(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	day := civil.Of(2026, 3, 2)
	before := d.now
	d.now = d.now.Add(time.Hour)
	d.record("training/level-2", "P1", "2026-02-01", "pass")
	at := func(k *time.Time) standing.Word {
		st, err := d.Standings(t.Context(), d.op, book.StandingQuery{Site: site, On: &day, KnownAt: k, Item: "TRAIN-L2"})
		d.ok(err)
		return st.Rows[0].Word
	}
	if a, b := at(&before), at(nil); a != standing.Missing || b != standing.Met {
		t.Fatalf("known before: %s, known now: %s", a, b)
	}
}

func TestNobodyActsForThemselves(t *testing.T) {
	d := newDesk(t)
	ctx := t.Context()
	d.person("P1", "Runa Sandoy", "L2")
	runa := d.account("runa", book.SafetyOfficer, "P1")
	var denied *book.Denied
	tries := map[string]error{}
	_, tries["clears themselves"] = d.Record(ctx, runa, site, book.RecordForm{Record: "screening/staff", Subject: "P1", On: "2026-03-01"}, book.Correction{})
	_, tries["appoints themselves"] = d.Record(ctx, runa, site, book.RecordForm{Record: "appointment/MRSO", Subject: "P1", On: "2026-03-01"}, book.Correction{})
	_, tries["excuses themselves"] = d.Excuse(ctx, runa, site, book.ExcusalForm{Item: "SCREEN", Subject: "P1", From: "2026-03-01", To: "2026-04-01", Reason: "busy"}, book.Correction{})
	_, tries["erases themselves"] = d.ErasePerson(ctx, runa, "P1")
	for what, err := range tries {
		if !errors.As(err, &denied) {
			t.Errorf("somebody %s: %v", what, err)
		}
	}
	admin := d.account("ada", book.Administrator, "")
	if _, err := d.ChangeAccount(ctx, admin, "ada", func(v *book.AccountView) { v.Role = book.SafetyOfficer }); !errors.As(err, &denied) {
		t.Errorf("an administrator changed their own role: %v", err)
	}
}

func TestRolesHoldInCommands(t *testing.T) {
	d := newDesk(t)
	ctx := t.Context()
	d.person("P1", "Runa Sandoy", "L2")
	d.vent("V1")
	member := d.account("m", book.Member, "P1")
	reader := d.account("r", book.Reader, "")
	var denied *book.Denied
	if _, err := d.Record(ctx, member, site, book.RecordForm{Record: "training/level-2", Subject: "P1", On: "2026-03-01"}, book.Correction{}); !errors.As(err, &denied) {
		t.Errorf("a member recorded a training: %v", err)
	}
	if _, err := d.Record(ctx, member, site, book.RecordForm{Record: "acknowledgement/POL-ACCESS", Subject: "P1", On: "2026-03-01"}, book.Correction{}); err != nil {
		t.Errorf("a member could not acknowledge for themselves: %v", err)
	}
	if _, _, err := d.FillSheet(ctx, member, site, book.SheetForm{Record: "inspection/vent-yearly", Fixture: "V1", On: "2026-03-01", Values: map[string]string{"outlet_clear": "yes", "clear_of_path_m": "5"}}, book.Correction{}); !errors.As(err, &denied) {
		t.Errorf("a member filled in a sheet that does not name them: %v", err)
	}
	if _, err := d.People_(ctx, member); !errors.As(err, &denied) {
		t.Errorf("a member saw everybody: %v", err)
	}
	st, err := d.Standings(ctx, member, book.StandingQuery{Site: site})
	d.ok(err)
	for _, r := range st.Rows {
		if r.Subject.Code != "P1" {
			t.Errorf("a member saw %s of %s", r.Item, r.Subject.Code)
		}
	}
	if _, err := d.Import(ctx, reader, book.ImportOptions{Table: "people", Site: site, File: strings.NewReader("code\n"), Size: 5}); !errors.As(err, &denied) {
		t.Errorf("a reader imported: %v", err)
	}
}

// People_ asks for the list of people.
func (d *desk) People_(ctx context.Context, a book.Actor) ([]book.PersonSummary, error) {
	_, list, err := d.People(ctx, a, site, nil)
	return list, err
}

func TestSignIn(t *testing.T) {
	d := newDesk(t)
	ctx := t.Context()
	d.ok(d.SetPassword(ctx, d.op, "olga", "a long enough secret"))
	in, err := d.SignIn(ctx, "OLGA", "a long enough secret", "127.0.0.1")
	d.ok(err)
	actor, err := d.BySession(ctx, in.Secret)
	d.ok(err)
	if actor.Name != "olga" || actor.Role != book.SafetyOfficer {
		t.Fatalf("signed in as %+v", actor)
	}
	if bytes.Contains(d.bytesOf(), []byte(in.Secret)) {
		t.Error("the session's secret is in the file")
	}
	d.now = d.now.Add(121 * time.Minute)
	var bad *book.BadSignIn
	if _, err := d.BySession(ctx, in.Secret); !errors.As(err, &bad) {
		t.Errorf("an idle session still works: %v", err)
	}
	for range 5 {
		if _, err := d.SignIn(ctx, "olga", "a wrong secret here", "127.0.0.1"); !errors.As(err, &bad) {
			t.Fatalf("a wrong password: %v", err)
		}
	}
	var many *book.TooMany
	if _, err := d.SignIn(ctx, "olga", "a long enough secret", "127.0.0.9"); !errors.As(err, &many) {
		t.Fatalf("sign-in was not held back after five failures: %v", err)
	}
	d.now = many.Until.Add(time.Second)
	_, err = d.SignIn(ctx, "olga", "a long enough secret", "127.0.0.9")
	d.ok(err)
	secret, err := d.NewLink(ctx, d.op, "olga")
	d.ok(err)
	_, err = d.SignInByLink(ctx, secret)
	d.ok(err)
	var denied *book.Denied
	if _, err := d.SignInByLink(ctx, secret); !errors.As(err, &denied) {
		t.Errorf("a one-time link worked twice: %v", err)
	}
}

func TestReopenedBookIsTheSame(t *testing.T) {
	d := newDesk(t)
	d.fill()
	day := civil.Of(2026, 3, 2)
	q := book.StandingQuery{Site: site, On: &day}
	live, err := d.Standings(t.Context(), d.op, q)
	d.ok(err)
	again, err := book.Open(t.Context(), d.path, d.options())
	d.ok(err)
	read, err := again.Standings(t.Context(), d.op, q)
	d.ok(err)
	d.ok(again.Close())
	if len(live.Rows) == 0 || len(live.Rows) != len(read.Rows) {
		t.Fatalf("live %d rows, reopened %d", len(live.Rows), len(read.Rows))
	}
	for i := range live.Rows {
		if a, b := live.Rows[i], read.Rows[i]; a.Item != b.Item || a.Word != b.Word || a.Subject != b.Subject || a.Record != b.Record {
			t.Errorf("row %d: live %s %s %s, reopened %s %s %s", i, a.Item, a.Subject.Code, a.Word, b.Item, b.Subject.Code, b.Word)
		}
	}
}

// rawSQL changes the file behind the book's back.
func (d *desk) rawSQL(statement string) {
	d.Helper()
	db, err := sql.Open(driverOf(d.path), d.path)
	d.ok(err)
	_, err = db.ExecContext(d.Context(), statement)
	d.ok(err)
	d.ok(db.Close())
}

func bookQuery() book.StandingQuery { return book.StandingQuery{Site: site} }

// tables are all rows of a book's database as text, with bytes as the characters that they are.
func (d *desk) tables() []byte {
	d.Helper()
	db, err := sql.Open("pgx", d.path)
	d.ok(err)
	db.SetMaxOpenConns(1)
	_, err = db.Exec("SET bytea_output = 'escape'")
	d.ok(err)
	var names string
	d.ok(db.QueryRow("SELECT string_agg(tablename, ' ') FROM pg_tables WHERE schemaname = 'public'").Scan(&names))
	var all []byte
	for _, name := range strings.Fields(names) {
		var text string
		d.ok(db.QueryRow("SELECT COALESCE(string_agg(CAST(t AS text), ' '), '') FROM " + name + " AS t").Scan(&text))
		all = append(all, text...)
	}
	d.ok(db.Close())
	return all
}

// driverOf is the database/sql driver for a book's address.
func driverOf(address string) string {
	if scratch.OnServer() && strings.HasPrefix(address, "postgres") {
		return "pgx"
	}
	return "sqlite3"
}
