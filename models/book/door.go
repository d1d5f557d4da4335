package book

import (
	"context"
	"errors"
	"sync"
	"time"

	"lodebook/models/store"
)

// door remembers who is signed in, so that a request costs no look into the database while nothing was
// written, and when each was last seen, which is written once a minute for all of them together.
type door struct {
	mu      sync.Mutex
	known   map[string]guest     // by hash of the session's secret
	seen    map[string]time.Time // last use, of those who came since the last writing and the one before it
	written map[string]time.Time // what the last writing wrote
	minute  int64                // of the clock, in which that was begun
}

// guest is one session as the database held it at a stamp.
type guest struct {
	stamp string
	row   store.SessionRow
	actor Actor
}

// doorRoom is how many sessions are remembered; when there are more, all are read anew.
const doorRoom = 20_000

// guest gives the session if it is remembered from that stamp.
func (d *door) guest(hash, stamp string) (guest, bool) {
	d.mu.Lock()
	defer d.mu.Unlock()
	g, ok := d.known[hash]
	return d.late(g), ok && g.stamp == stamp
}

// remember keeps a session that was read after its stamp.
func (d *door) remember(g guest) {
	d.mu.Lock()
	defer d.mu.Unlock()
	if d.known == nil || len(d.known) >= doorRoom {
		d.known = map[string]guest{}
	}
	d.known[g.row.Hash] = g
}

// current fills in the last use where it is not written yet.
func (d *door) current(g guest) guest {
	d.mu.Lock()
	defer d.mu.Unlock()
	return d.late(g)
}

// late is current for who holds mu.
func (d *door) late(g guest) guest {
	if at := d.seen[g.row.Hash]; at.After(g.row.LastSeen) {
		g.row.LastSeen = at
	}
	return g
}

// pass notes that a session is used, and gives one caller of each minute the uses that are to be written.
func (d *door) pass(hash string, now time.Time) map[string]time.Time {
	d.mu.Lock()
	defer d.mu.Unlock()
	if d.seen == nil {
		d.seen = map[string]time.Time{}
	}
	d.seen[hash] = now
	if d.minute == minuteOf(now) {
		return nil
	}
	d.minute = minuteOf(now)
	due := map[string]time.Time{}
	for hash, at := range d.seen {
		if d.written[hash].Equal(at) {
			delete(d.seen, hash) // whoever still reads the row from before it was written began a minute ago
		} else {
			due[hash] = at
		}
	}
	return due
}

// writeSeen writes when sessions were last used. Those that have ended are passed over, and a later use
// that another process wrote stays. While another process holds the book it is left to the next minute.
func (b *Book) writeSeen(ctx context.Context, due map[string]time.Time) error {
	err := b.operate(ctx, func(tx *store.Tx, _ *model) error {
		for hash, at := range due {
			row, ok, err := tx.Session(hash)
			if err != nil {
				return err
			}
			if !ok || !at.After(row.LastSeen) {
				continue
			}
			if err := tx.TouchSession(hash, at); err != nil {
				return err
			}
		}
		return nil
	})
	if errors.Is(err, store.ErrBusy) {
		return nil
	}
	if err == nil {
		b.door.mu.Lock()
		b.door.written = due
		b.door.mu.Unlock()
	}
	return err
}
