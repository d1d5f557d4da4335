package book_test

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"runtime"
	"strings"
	"sync"
	"testing"

	"lodebook/models/book"
)

// hold begins a write and keeps it inside its transaction until it is let go.
func (d *desk) hold(b *book.Book) (letGo func()) {
	d.Helper()
	inside, free, done := make(chan struct{}), make(chan struct{}), make(chan error, 1)
	go func() {
		_, err := b.ChangeAccount(d.Context(), d.op, "olga", func(*book.AccountView) { close(inside); <-free })
		done <- err
	}()
	select {
	case <-inside:
	case err := <-done:
		d.Fatalf("the write ended before it began: %v", err)
	}
	return func() {
		d.Helper()
		close(free)
		d.ok(<-done)
	}
}

// queued waits until so many writes wait to be taken up.
func (d *desk) queued(n int) {
	for d.Waiting() < n {
		runtime.Gosched()
	}
}

func trained(who string) book.RecordForm {
	return book.RecordForm{Record: "training/level-2", Subject: who, On: "2026-03-01"}
}

// reads asks what pages ask, and gives it as text.
func (d *desk) reads() string {
	d.Helper()
	sv, people, err := d.People(d.Context(), d.officer, site, nil)
	d.ok(err)
	st, err := d.Standings(d.Context(), d.officer, book.StandingQuery{Site: site})
	d.ok(err)
	p, err := d.Person(d.Context(), d.officer, site, "P1", nil)
	d.ok(err)
	return fmt.Sprint(sv.People, people, dressed(st), len(p.Records))
}

// While a write of this or of another program is under way, reads are answered, of what was before it and of
// all that was: here nobody lets the write go until the reads are done.
func TestReadsDoNotWaitForWrites(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "A Person", "L2")
	d.record("training/level-2", "P1", "2025-03-01", "pass")
	other := d.elsewhere()
	for _, b := range []*book.Book{d.Book, other} {
		was := d.reads()
		letGo := d.hold(b)
		if now := d.reads(); now != was {
			t.Errorf("during a write it says\n%s\nand said\n%s", now, was)
		}
		letGo()
	}
	// What another has written is seen though a write is under way that came after it.
	was := d.reads()
	_, err := other.Record(t.Context(), d.officer, site, trained("P1"), book.Correction{})
	d.ok(err)
	letGo := d.hold(d.Book)
	if now := d.reads(); now == was {
		t.Error("what another program wrote is not seen while a write is under way")
	}
	letGo()
	d.whole()
}

// Readers that are not done hold up no writer: here they end only after the writes have. What they see stays as
// it was.
func TestWritesDoNotWaitForReads(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "A Person", "L2")
	other := d.elsewhere()
	d.ok(d.LongView(t.Context(), site, func(count func() [3]int64) {
		before := count()
		letGo, verified := make(chan struct{}), make(chan error, 1)
		reading := make(chan struct{})
		go func() { // another kind of reader: in a transaction of the database
			var once sync.Once
			_, err := d.Verify(t.Context(), func(int64, int64) { once.Do(func() { close(reading) }); <-letGo })
			verified <- err
		}()
		<-reading
		d.record("training/level-2", "P1", "2026-03-01", "pass")
		d.imp("people", "code,name,level,crew,joined,employer\nP2,Another,L1,early,2024-01-01,Yard\n")
		_, err := other.Record(t.Context(), d.officer, site, trained("P2"), book.Correction{})
		d.ok(err)
		d.ok(d.Turn(t.Context()))
		if now := count(); now != before {
			t.Errorf("the view has %v entries, people and records and had %v", now, before)
		}
		d.ok(d.LongView(t.Context(), site, func(now func() [3]int64) {
			if got, want := now(), [3]int64{before[0] + 4, before[1] + 1, before[2] + 2}; got != want {
				t.Errorf("a view that begins now has %v entries, people and records, want %v", got, want)
			}
		}))
		close(letGo)
		d.ok(<-verified)
	}))
	d.whole()
}

// A commit that fails fails all who share it, and leaves nothing of them; then they can try again.
func TestACommitThatFailsFailsAllWhoShareIt(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "A Person", "L2")
	const doomed = "019cb0de-0000-7000-8000-000000000007"
	mend := d.doom(doomed)
	was := d.reads()
	before, err := d.Size(t.Context())
	d.ok(err)
	const writers = 16
	form := func(i int) book.RecordForm {
		f := trained("P1")
		f.ID = fmt.Sprintf("019cb0de-0000-7000-8000-%012d", i)
		return f
	}
	all := func(check func(i int, err error)) {
		letGo := d.hold(d.Book)
		var done sync.WaitGroup
		for i := range writers {
			done.Go(func() {
				_, err := d.Record(t.Context(), d.officer, site, form(i), book.Correction{})
				check(i, err)
			})
		}
		d.queued(writers)
		letGo()
		done.Wait()
	}
	all(func(i int, err error) {
		if err == nil {
			t.Errorf("writer %d was told that its record is kept", i)
		}
	})
	if after, err := d.Size(t.Context()); err != nil || after != before+1 { // the write that was held
		t.Errorf("%d entries, %v; there were %d", after, err, before)
	}
	if now := d.reads(); now != was {
		t.Errorf("it says\n%s\nand said\n%s", now, was)
	}
	mend()
	d.whole()
	all(func(i int, err error) {
		if err != nil {
			t.Errorf("writer %d: %v", i, err)
		}
	})
	if after, err := d.Size(t.Context()); err != nil || after != before+2+writers {
		t.Errorf("%d entries, %v; there were %d", after, err, before)
	}
	d.whole()
}

// doom sees to it that no transaction can be committed in which an entry of that identifier is.
func (d *desk) doom(id string) (mend func()) {
	d.Helper()
	db, err := sql.Open(driverOf(d.path), d.path)
	d.ok(err)
	do := func(statements ...string) {
		d.Helper()
		for _, s := range statements {
			_, err := db.Exec(s)
			d.ok(err)
		}
	}
	do("CREATE TABLE dangling (seq BIGINT REFERENCES entries (seq) DEFERRABLE INITIALLY DEFERRED)")
	drop := []string{"DROP TRIGGER doom ON entries", "DROP FUNCTION dangle", "DROP TABLE dangling"}
	if driverOf(d.path) == "pgx" {
		do("CREATE FUNCTION dangle() RETURNS trigger LANGUAGE plpgsql AS 'BEGIN INSERT INTO dangling VALUES (-1); RETURN NULL; END'",
			"CREATE TRIGGER doom AFTER INSERT ON entries FOR EACH ROW WHEN (NEW.id = '"+id+"') EXECUTE FUNCTION dangle()")
	} else {
		do("CREATE TRIGGER doom AFTER INSERT ON entries WHEN NEW.id = '" + id + "' BEGIN INSERT INTO dangling VALUES (-1); END")
		drop = []string{"DROP TRIGGER doom", "DROP TABLE dangling"}
	}
	return func() {
		d.Helper()
		do(drop...)
		d.ok(db.Close())
	}
}

// Who is called off while waiting is answered at once, and nothing of it is written; what is called off in the
// middle of a long write leaves nothing either.
func TestWritesThatAreCalledOff(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "A Person", "L2")
	before, err := d.Size(t.Context())
	d.ok(err)
	letGo := d.hold(d.Book)
	ctx, cancel := context.WithCancel(t.Context())
	gone := make(chan error, 1)
	go func() {
		_, err := d.Record(ctx, d.officer, site, trained("P1"), book.Correction{})
		gone <- err
	}()
	d.queued(1)
	cancel()
	if err := <-gone; !errors.Is(err, context.Canceled) {
		t.Errorf("called off while it waits: %v", err)
	}
	letGo()

	ctx, cancel = context.WithCancel(t.Context())
	rows := "code,name,level,crew,joined,employer\n"
	for i := range 2000 {
		rows += fmt.Sprintf("N%d,New,L1,early,2024-01-01,Yard\n", i)
	}
	r, err := d.Import(ctx, d.op, book.ImportOptions{
		Table: "people", Site: site, File: strings.NewReader(rows), Size: int64(len(rows)), FileName: "people",
		Progress: func(int, int64, int64) { cancel() },
	})
	if !errors.Is(err, context.Canceled) {
		t.Errorf("called off in the middle: %v, %+v", err, r)
	}
	if after, err := d.Size(t.Context()); err != nil || after != before+1 { // the write that was held
		t.Errorf("%d entries, %v; there were %d", after, err, before)
	}
	d.record("training/level-2", "P1", "2026-03-01", "pass")
	d.whole()
}

// A page of entries is of one moment too: what it reads from the store is what the model knows, no more and no
// less, while this and another program write.
func TestEntriesAreOfOneMoment(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "A Person", "L2")
	var writers, readers sync.WaitGroup
	for _, b := range []*book.Book{d.Book, d.elsewhere()} {
		writers.Go(func() {
			for range 60 {
				if _, err := b.Record(t.Context(), d.officer, site, trained("P1"), book.Correction{}); err != nil {
					t.Error(err)
				}
			}
		})
	}
	written := make(chan struct{})
	for range 2 {
		readers.Go(func() {
			for {
				err := d.EntriesView(t.Context(), func(seen, known int64) {
					if seen != known {
						t.Errorf("%d entries are seen and %d known", seen, known)
					}
				})
				if err != nil {
					t.Error(err)
				}
				select {
				case <-written:
					return
				default:
				}
			}
		})
	}
	writers.Wait()
	close(written)
	readers.Wait()
}
