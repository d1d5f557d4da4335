package book

import (
	"context"
	"crypto/rand"
	"errors"
	"fmt"
	"os"
	"testing"
	"time"
	_ "time/tzdata"

	"lodebook/migrations/scratch"
	"lodebook/models/civil"
	"lodebook/models/store"
)

// Writes are done in the order in which they came: those that may share together, a long one by itself, and no
// more at once than a transaction shall hold.
func TestGroupsOfWrites(t *testing.T) {
	var q queue
	add := func(alone bool) *request {
		r := &request{alone: alone}
		q.add(r)
		return r
	}
	add(false)
	add(false).state.Store(givenUp)
	add(false)
	add(true)
	add(true)
	for range groupSize + 3 {
		add(false)
	}
	add(true).state.Store(givenUp)
	var sizes []int
	for group := q.next(); len(group) > 0; group = q.next() {
		sizes = append(sizes, len(group))
		for _, r := range group {
			if r.state.Load() != takenUp || r.alone && len(group) > 1 {
				t.Errorf("%+v in a group of %d", r, len(group))
			}
		}
	}
	if got, want := fmt.Sprint(sizes), fmt.Sprint([]int{2, 1, 1, groupSize, 3}); got != want {
		t.Errorf("groups of %s, want %s", got, want)
	}
}

// When what a write has done cannot be taken in, not even with a panic, nobody who shares its transaction is told
// that theirs is on the disk; and the book goes on.
func TestWhatCannotBeTakenInFailsAllWhoShareIt(t *testing.T) {
	now := time.Date(2026, 3, 2, 8, 0, 0, 0, time.UTC)
	b, err := Create(t.Context(), scratch.Book(t), Options{Clock: func() time.Time { return now }, Random: rand.Reader})
	if err != nil {
		t.Fatal(err)
	}
	defer func() {
		if err := b.Close(); err != nil {
			t.Error(err)
		}
	}()
	source, err := os.ReadFile("testdata/site.yaml")
	if err != nil {
		t.Fatal(err)
	}
	op := SystemOperator("ops")
	if _, err := b.OpenProgram(t.Context(), op, source, ""); err != nil {
		t.Fatal(err)
	}
	before := b.m.Load()
	write := func(spoil bool) *request {
		return &request{ctx: t.Context(), actor: op, done: make(chan struct{}), fn: func(s *session) error {
			first := dayPtr(civil.Of(2026, time.January, 1))
			code := fmt.Sprintf("P%d", s.m.head)
			err := s.add(draft{site: "QUAY", body: &personBody{Code: code, Name: veiled("A Person", code), Stint: &stintBody{First: first}}})
			if spoil {
				s.m.engine = nil
			}
			return err
		}}
	}
	group := []*request{write(false), write(true), write(false)}
	b.commit(group)
	for i, r := range group {
		var p *store.Panic
		if _, err := r.answer(); !errors.As(err, &p) || len(r.receipt.Written) > 0 {
			t.Errorf("write %d is answered with %+v and %v", i, r.receipt, err)
		}
		<-r.done
	}
	if size, err := b.Size(t.Context()); err != nil || size != before.head || b.m.Load() != before {
		t.Errorf("%d entries, %v; it had %d", size, err, before.head)
	}
	if _, err := b.submit(write(false)); err != nil {
		t.Errorf("the next write: %v", err)
	}
	if err := b.read(context.Background(), func(m *model) error {
		if m.head != before.head+1 || m.engine == nil {
			return fmt.Errorf("the model has %d entries", m.head)
		}
		return nil
	}); err != nil {
		t.Error(err)
	}
}
