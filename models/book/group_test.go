package book_test

import (
	"context"
	"errors"
	"fmt"
	"sync"
	"testing"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
)

// Sixty-four writers share transactions; a third of what they write is refused, each for a reason of its own.
// All the rest is in the book, in the tree, and in what a rebuild makes.
func TestWritersShareATransactionAndNoRefusal(t *testing.T) {
	d := newDesk(t)
	const writers, each = 64, 6
	for i := range writers {
		d.person(fmt.Sprintf("W%02d", i), "A Writer", "L1")
	}
	before, err := d.Size(t.Context())
	d.ok(err)
	member := d.account("mo", book.Member, "W00")
	refusals := []func(i int) error{
		func(i int) error {
			_, err := d.Record(t.Context(), d.officer, site, book.RecordForm{Record: "training/level-2", Subject: "nobody", On: "2026-03-01"}, book.Correction{})
			return err
		},
		func(i int) error {
			_, err := d.Record(t.Context(), member, site, book.RecordForm{Record: "training/level-2", Subject: "W01", On: "2026-03-01"}, book.Correction{})
			return err
		},
		func(i int) error {
			gone, cancel := context.WithCancel(t.Context())
			cancel()
			_, err := d.Record(gone, d.officer, site, book.RecordForm{Record: "training/level-2", Subject: "W01", On: "2026-03-01"}, book.Correction{})
			return err
		},
		func(i int) error {
			_, err := d.Withdraw(t.Context(), d.officer, "019cb0de-0000-7000-8000-000000000000", book.Correction{Reason: "slip"})
			return err
		},
	}
	var all sync.WaitGroup
	var mu sync.Mutex
	written := map[string]bool{}
	for i := range writers {
		all.Go(func() {
			for n := range each {
				if n%3 == 2 {
					if err := refusals[(i+n)%len(refusals)](i); err == nil {
						t.Error("what cannot be was written")
					}
					continue
				}
				r, err := d.Record(t.Context(), d.officer, site, book.RecordForm{Record: "training/level-2", Subject: fmt.Sprintf("W%02d", i), On: "2026-03-01"}, book.Correction{})
				if err != nil {
					t.Error(err)
					return
				}
				if _, err := d.Entry(t.Context(), d.officer, r.ID()); err != nil {
					t.Errorf("the writer does not see its own entry: %v", err)
				}
				mu.Lock()
				written[r.ID()] = true
				mu.Unlock()
			}
		})
	}
	all.Wait()
	after, err := d.Size(t.Context())
	d.ok(err)
	if want := int64(writers * each * 2 / 3); after-before != want+1 || int64(len(written)) != want { // and one account
		t.Errorf("%d entries more and %d written, want %d", after-before, len(written), want)
	}
	d.whole()
}

// whole verifies the book and holds what it knows against what is made anew from its rows and its entries.
func (d *desk) whole() {
	d.Helper()
	report, err := d.Verify(d.Context(), nil)
	d.ok(err)
	if report.FirstFault != "" {
		d.Fatal(report.FirstFault)
	}
	rows, err := d.Dump(d.Context())
	d.ok(err)
	known, err := d.Standings(d.Context(), d.op, book.StandingQuery{Site: site})
	d.ok(err)
	other, err := book.Open(d.Context(), d.path, d.options())
	d.ok(err)
	fresh, err := other.Standings(d.Context(), d.op, book.StandingQuery{Site: site})
	d.ok(err)
	if a, b := fmt.Sprintf("%+v", dressed(known)), fmt.Sprintf("%+v", dressed(fresh)); a != b {
		d.Errorf("known:\n%s\nfrom the rows:\n%s", a, b)
	}
	d.ok(other.Rebuild(d.Context()))
	again, err := other.Dump(d.Context())
	d.ok(err)
	if a, b := fmt.Sprint(rows), fmt.Sprint(again); a != b {
		d.Errorf("rows:\n%s\nfrom the entries:\n%s", a, b)
	}
	d.ok(other.Close())
}

// dressed are the rows of standings without what points into memory.
func dressed(s book.Standings) []string {
	var out []string
	for _, r := range s.Rows {
		due := civil.LastDay
		if r.Due != nil {
			due = *r.Due
		}
		out = append(out, fmt.Sprint(r.Item, r.Subject, r.Word, due, r.Record, r.SubjectName))
	}
	return out
}

// A writer that panics panics alone.
func TestAWriterThatPanicsPanicsAlone(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "A Person", "L1")
	var all sync.WaitGroup
	for range 8 {
		all.Go(func() {
			_, err := d.Record(t.Context(), d.officer, site, book.RecordForm{Record: "training/level-2", Subject: "P1", On: "2026-03-01"}, book.Correction{})
			if err != nil {
				t.Error(err)
			}
		})
		all.Go(func() {
			defer func() {
				if recover() == nil {
					t.Error("it did not panic")
				}
			}()
			_, _ = d.ChangeAccount(t.Context(), d.op, "olga", func(*book.AccountView) { panic("here") })
		})
	}
	all.Wait()
	d.whole()
}

// While imports and single writes go on, readers go on too, and each view of theirs agrees with itself.
func TestReadersGoOnWhileOthersWrite(t *testing.T) {
	d := bigSite(t, 300)
	stop := make(chan struct{})
	var readers, writers sync.WaitGroup
	for range 3 {
		readers.Go(func() {
			for {
				select {
				case <-stop:
					return
				default:
				}
				sv, people, err := d.People(t.Context(), d.officer, site, nil)
				if err != nil {
					t.Error(err)
					return
				}
				here := 0
				for _, p := range people {
					if p.Here {
						here++
					}
				}
				if sv.People != here {
					t.Errorf("the head says %d people and the list has %d", sv.People, here)
				}
			}
		})
	}
	writers.Go(func() {
		for i := range 3 {
			people, records := "code,name,level,crew,joined,employer\n", "record,subject,on\n"
			for n := range 100 {
				people += fmt.Sprintf("N%d-%02d,New %d,L1,early,2024-01-01,Yard\n", i, n, n)
			}
			for n := range 1000 {
				records += fmt.Sprintf("training/level-2,P%05d,2026-02-%02d\n", n%300, 1+i+n/300)
			}
			for table, csv := range map[string]string{"people": people, "records": records} {
				if r := d.imp(table, csv); len(r.Faults) > 0 || r.Written == 0 {
					t.Errorf("%+v", r)
				}
			}
		}
	})
	for i := range 4 {
		writers.Go(func() {
			for range 5 {
				_, err := d.Record(t.Context(), d.officer, site, book.RecordForm{Record: "training/level-2", Subject: fmt.Sprintf("P%05d", i), On: "2026-03-01"}, book.Correction{})
				if err != nil && !errors.Is(err, context.Canceled) {
					t.Error(err)
				}
			}
		})
	}
	writers.Go(func() {
		for range 5 {
			if err := d.Turn(t.Context()); err != nil {
				t.Error(err)
			}
		}
	})
	writers.Wait()
	close(stop)
	readers.Wait()
	d.whole()
}

// What is kept at hand for the present day stays right through writes and over midnight.
func TestTurnKeepsTheDay(t *testing.T) {
	d := bigSite(t, 50)
	d.ok(d.Turn(t.Context()))
	for range 3 {
		d.record("training/level-2", "P00007", "2026-03-01", "fail")
		d.record("training/level-2", "P00008", "2026-03-01", "pass")
		d.whole()
		d.now = d.now.Add(24 * time.Hour)
		d.ok(d.Turn(t.Context()))
		d.whole()
	}
}
