package book

import (
	"context"
	"time"

	"lodebook/models/civil"
	"lodebook/models/store"
)

// Waiting is how many writes have not been taken up yet.
func (b *Book) Waiting() int {
	b.queue.mu.Lock()
	defer b.queue.mu.Unlock()
	return len(b.queue.list)
}

// LongView runs fn as a query runs. Count gives what the query sees: entries, people and records.
func (b *Book) LongView(ctx context.Context, site string, fn func(count func() [3]int64)) error {
	return b.read(ctx, func(m *model) error {
		fn(func() [3]int64 {
			n := [3]int64{m.head}
			for code := range m.people.all() {
				n[1]++
				n[2] += int64(len(m.engine.Lines(site, subjectOf("person", code))))
			}
			return n
		})
		return nil
	})
}

// EntriesView runs fn as a query of entries runs, with how many the transaction sees and the model knows.
func (b *Book) EntriesView(ctx context.Context, fn func(seen, known int64)) error {
	return b.withEntries(ctx, func(tx *store.Tx, m *model) error {
		seen, err := tx.Size()
		fn(seen, m.head)
		return err
	})
}

// SetDoorList has the state of every site's list of doors told by a function, until what it gives back is called.
func SetDoorList(state func() (imported civil.Day, open int, ok bool)) (back func()) {
	was := doorListOf
	doorListOf = func(context.Context, *Book, string, time.Time) (s doorState, err error) {
		s.imported, s.open, s.ok = state()
		return s, nil
	}
	return func() { doorListOf = was }
}
