package web

import (
	"sync"
	"time"
)

// tray holds the file that each account has had checked and not yet brought in, so that it need not be
// chosen twice. It is small, and what lies in it too long is thrown away.
type tray struct {
	mu     sync.Mutex
	papers map[string]paper
}

// paper is one file that was checked.
type paper struct {
	Site, Table, Name, Sum string
	Data                   []byte
	At                     time.Time
}

const (
	trayLife = 15 * time.Minute
	trayRoom = 4
)

// put lays a file into the tray in place of the account's earlier one.
func (t *tray) put(account string, p paper) {
	t.mu.Lock()
	defer t.mu.Unlock()
	if t.papers == nil {
		t.papers = map[string]paper{}
	}
	delete(t.papers, account)
	for k, old := range t.papers {
		if p.At.Sub(old.At) > trayLife {
			delete(t.papers, k)
		}
	}
	if len(t.papers) >= trayRoom {
		t.dropOldest()
	}
	t.papers[account] = p
}

func (t *tray) dropOldest() {
	oldest := ""
	for k, p := range t.papers {
		if oldest == "" || p.At.Before(t.papers[oldest].At) {
			oldest = k
		}
	}
	delete(t.papers, oldest)
}

// get gives the account's file if it is the one of that sum and not too old.
func (t *tray) get(account, sum string, now time.Time) (paper, bool) {
	t.mu.Lock()
	defer t.mu.Unlock()
	p, ok := t.papers[account]
	return p, ok && p.Sum == sum && now.Sub(p.At) <= trayLife
}

// drop throws the account's file away.
func (t *tray) drop(account string) {
	t.mu.Lock()
	defer t.mu.Unlock()
	delete(t.papers, account)
}
