package book

import (
	"context"
	"errors"
	"io"
	"sync"
	"sync/atomic"
	"time"

	"github.com/google/uuid"

	"lodebook/models/civil"
	"lodebook/models/store"
)

// Options are what a book needs from outside: the clock and a source of random bytes. The rest may be left out.
type Options struct {
	Clock     func() time.Time
	Random    io.Reader
	Snapshots string                    // the folder that snapshots are kept in; default: a file's own folder, and none of an address
	Tell      func(sentence string)     // is told why a snapshot is not used
	Progress  func(rows, entries int64) // how many rows have been read of a book of so many entries, while it is read without a snapshot
	Site      string                    // narrows what is read to what answers about this site need; such a book is for reading
}

// Book is an open book. It may be used by many goroutines at once.
type Book struct {
	st     *store.Store
	clock  func() time.Time
	random io.Reader
	site   string // the only one of which is read; empty: all

	m       atomic.Pointer[model]      // what is known; never changed again
	seen    atomic.Pointer[string]     // a stamp of the store since which m has been all there is
	growing chan struct{}              // holds a token while the model is being taken further
	news    news                       // tells that m was replaced
	queue   queue                      // writes that wait to be done
	leading chan struct{}              // holds a token while writes are being done
	stock   atomic.Pointer[stockTaken] // as of when stock was taken last

	door      door // who is signed in
	snapshots snapshots
	progress  func(rows, entries int64)
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
	b := &Book{st: st, clock: o.Clock, random: o.Random, site: o.Site, growing: make(chan struct{}, 1), leading: make(chan struct{}, 1)}
	b.progress = o.Progress
	if err := b.firstModel(ctx, o); err != nil {
		return nil, errors.Join(err, b.Close())
	}
	return b, nil
}

// firstModel makes the first model: from the snapshot if there is one that fits, else from the rows.
func (b *Book) firstModel(ctx context.Context, o Options) error {
	if err := b.placeSnapshots(ctx, o); err != nil {
		return err
	}
	m, err := b.fromSnapshot(ctx)
	if err != nil {
		return err
	}
	if m == nil {
		m = b.emptyModel()
	}
	b.m.Store(m)
	_, err = b.current(ctx)
	return err
}

// Close closes the book's file.
func (b *Book) Close() error { return b.st.Close() }

// Now is the book's clock.
func (b *Book) Now() time.Time { return b.clock().UTC().Truncate(time.Microsecond) }

// emptyModel knows nothing yet.
func (b *Book) emptyModel() *model {
	m := newModel()
	m.st, m.only, m.progress = b.st, b.site, b.progress
	return m
}

// current gives the model with all that this or another process has written. It waits for no write that is
// under way: of such a write nothing is there yet.
func (b *Book) current(ctx context.Context) (*model, error) {
	stamp, err := b.st.Stamp(ctx)
	if err != nil {
		return nil, err
	}
	if seen := b.seen.Load(); seen != nil && *seen == stamp {
		return b.m.Load(), nil
	}
	size, err := b.st.Size(ctx)
	if err != nil {
		return nil, err
	}
	m, err := b.reach(ctx, size)
	if err == nil {
		b.seen.Store(&stamp)
	}
	return m, err
}

// reach gives a model that has taken in so many entries, at the least. Whoever wrote them publishes it; of
// what another process wrote, the first who asks takes it in.
func (b *Book) reach(ctx context.Context, size int64) (*model, error) {
	for {
		published := b.news.next()
		if m := b.m.Load(); m.head >= size {
			return m, nil
		}
		select {
		case b.growing <- struct{}{}:
			if err := b.grow(ctx); err != nil {
				return nil, err
			}
		case <-published:
		case <-ctx.Done():
			return nil, ctx.Err()
		}
	}
}

// grow catches up with what others wrote; the caller holds growing, which it gives back.
func (b *Book) grow(ctx context.Context) error {
	defer func() { <-b.growing }()
	return b.st.Read(ctx, b.catchUp)
}

// catchUp publishes the state that the transaction sees, if there is more in it than is known. The caller
// holds growing.
func (b *Book) catchUp(tx *store.Tx) error {
	m := b.m.Load()
	size, err := tx.Size()
	if err != nil || size == m.head {
		return err
	}
	next := m.fork()
	if m.only != "" {
		// Who is new at the one site brings along what happened to them elsewhere, long ago.
		next = b.emptyModel()
	}
	if err := next.takeAfter(tx, size); err != nil {
		return err
	}
	b.publish(next)
	if m.head == 0 {
		return nil
	}
	return b.forgetErased(tx, m.head)
}

// takeAfter takes in what the transaction sees behind the model's head.
func (m *model) takeAfter(tx *store.Tx, size int64) error {
	if err := knownKinds(tx, m.head-1); err != nil {
		return err
	}
	if m.head == 0 {
		return m.takeAll(tx, size)
	}
	delta, err := tx.Changed(m.head - 1)
	if err != nil {
		return err
	}
	if err := m.take(delta); err != nil {
		return err
	}
	m.head = size
	return nil
}

// takeAll takes in all that the transaction sees, a part of it at a time.
func (m *model) takeAll(tx *store.Tx, size int64) error {
	done := int64(0)
	err := tx.Stream(m.only, func(d *store.Delta) error {
		done += int64(d.Len())
		if m.progress != nil {
			m.progress(done, size)
		}
		return m.take(*d)
	})
	if err == nil {
		m.head = size
	}
	return err
}

// publish makes a model the one that readers are given.
func (b *Book) publish(m *model) {
	b.m.Store(m)
	b.news.tell()
}

// news tells those who wait that something has happened.
type news struct {
	mu sync.Mutex
	ch chan struct{}
}

// next is closed when news come after the call.
func (n *news) next() <-chan struct{} {
	n.mu.Lock()
	defer n.mu.Unlock()
	if n.ch == nil {
		n.ch = make(chan struct{})
	}
	return n.ch
}

func (n *news) tell() {
	n.mu.Lock()
	defer n.mu.Unlock()
	if n.ch != nil {
		close(n.ch)
		n.ch = nil
	}
}

// Turn makes today the present day of every site, so that what stands today is kept at hand. It is for a
// process that stays: the first time it makes all that standings are counted from.
func (b *Book) Turn(ctx context.Context) error {
	if err := b.TakeStock(ctx); err != nil {
		return err
	}
	if _, err := b.current(ctx); err != nil {
		return err
	}
	now := b.Now()
	if b.m.Load().turned(now) {
		return nil
	}
	b.growing <- struct{}{}
	defer func() { <-b.growing }()
	next := b.m.Load().fork()
	next.engine.Build()
	for code := range next.sites {
		next.engine.Turn(code, civil.DayOf(now, next.zone(code)))
	}
	b.publish(next)
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

// turned tells whether the present day of every site is that of the moment.
func (m *model) turned(now time.Time) bool {
	for code := range m.sites {
		if day, ok := m.engine.Present(code); !ok || day != civil.DayOf(now, m.zone(code)) {
			return false
		}
	}
	return true
}

// read runs a query against one consistent state of the model.
func (b *Book) read(ctx context.Context, fn func(m *model) error) error {
	m, err := b.current(ctx)
	if err != nil {
		return err
	}
	return fn(m)
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
