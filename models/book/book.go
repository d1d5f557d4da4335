package book

import (
	"context"
	"errors"
	"io"
	"sync"
	"time"

	"github.com/google/uuid"

	"lodebook/models/civil"
	"lodebook/models/store"
)

// Options are what a book needs from outside: the clock and a source of random bytes.
type Options struct {
	Clock  func() time.Time
	Random io.Reader
}

// Book is an open book. It may be used by many goroutines at once.
type Book struct {
	st     *store.Store
	clock  func() time.Time
	random io.Reader

	door door // who is signed in

	writing sync.Mutex   // one write of this process at a time; the store's lock keeps other processes out
	mu      sync.RWMutex // guards m
	m       *model
}

// Create makes a new, empty book. It refuses a path that exists.
func Create(ctx context.Context, path string, o Options) (*Book, error) {
	st, err := store.Create(ctx, path)
	if err != nil {
		return nil, err
	}
	id, err := uuid.NewRandomFromReader(o.Random)
	if err != nil {
		return nil, errors.Join(err, st.Close())
	}
	err = st.Write(ctx, func(tx *store.Tx) error { return tx.SetMeta(store.MetaBookID, id.String()) })
	if err != nil {
		return nil, errors.Join(err, st.Close())
	}
	return start(ctx, st, o)
}

// Open opens a book; a file that is none, or that cannot be read or written, is a *store.Refusal.
func Open(ctx context.Context, path string, o Options) (*Book, error) {
	st, err := store.Open(ctx, path)
	if err != nil {
		return nil, err
	}
	return start(ctx, st, o)
}

func start(ctx context.Context, st *store.Store, o Options) (*Book, error) {
	b := &Book{st: st, clock: o.Clock, random: o.Random, m: newModel()}
	if err := b.sync(ctx); err != nil {
		return nil, errors.Join(err, st.Close())
	}
	return b, nil
}

// Close closes the book's file.
func (b *Book) Close() error { return b.st.Close() }

// Now is the book's clock.
func (b *Book) Now() time.Time { return b.clock().UTC().Truncate(time.Microsecond) }

// sync takes in what this or another process has written since.
func (b *Book) sync(ctx context.Context) error {
	size, err := b.st.Size(ctx)
	if err != nil {
		return err
	}
	b.mu.RLock()
	current := b.m.head == size
	b.mu.RUnlock()
	if current {
		return nil
	}
	b.mu.Lock()
	defer b.mu.Unlock()
	return b.st.Read(ctx, func(tx *store.Tx) error { return b.catchUp(tx) })
}

// catchUp brings the model to the state that the transaction sees. The caller holds mu.
func (b *Book) catchUp(tx *store.Tx) error {
	size, err := tx.Size()
	if err != nil {
		return err
	}
	if size == b.m.head {
		return nil
	}
	if err := knownKinds(tx, b.m.head-1); err != nil {
		return err
	}
	delta, err := tx.Changed(b.m.head - 1)
	if err != nil {
		return err
	}
	if err := b.m.take(delta); err != nil {
		return err
	}
	b.m.head = size
	return nil
}

// knownKinds refuses a book with entries that this program is too old to read.
func knownKinds(tx *store.Tx, after int64) error {
	kinds, err := tx.KindVersions(after)
	if err != nil {
		return err
	}
	for _, k := range sortedKeys(kinds) {
		if mk, ok := newBody[k]; !ok || mk().version() < kinds[k] {
			return &TooNew{k, kinds[k]}
		}
	}
	return nil
}

// read runs a query against one consistent state of the model.
func (b *Book) read(ctx context.Context, fn func(m *model) error) error {
	if err := b.sync(ctx); err != nil {
		return err
	}
	b.mu.RLock()
	defer b.mu.RUnlock()
	return fn(b.m)
}

// Today is the civil day at the site now.
func (b *Book) Today(ctx context.Context, site string) (civil.Day, error) {
	var day civil.Day
	err := b.read(ctx, func(m *model) error {
		if m.site(site) == nil {
			return &NotFound{"site", site}
		}
		day = civil.DayOf(b.Now(), m.zone(site))
		return nil
	})
	return day, err
}
