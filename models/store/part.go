package store

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"maps"
	"slices"
	"strings"

	"lodebook/models/ledger"
)

// part is a part of a transaction that is under way: what it began with, to come back to.
type part struct {
	pending pending
	held    map[string]func() // puts what a table holds back to what it was
	tables  []string          // that held anything
	builder *ledger.Builder
	last    string
	saved   bool // the database has a savepoint, before which all that came before the part is written
	ended   bool
}

// pending are rows of new entries that parts hold back, so that many parts write them together.
type pending struct {
	entries []entryRow
	tree    []treeRow
	veils   []veilRow
}

// Part runs fn as a part of the transaction that stands or falls by itself: if fn gives an error or
// panics, what it did is undone and the transaction can go on. Within, Append holds its rows back; they
// are written together with those of other parts, at the latest when the transaction ends, and are
// found by identifier and number before then. Ended tells whether the part ended or blanked rows that were
// there. An error that is broken says that the transaction cannot be kept.
func (t *Tx) Part(fn func() error) (ended bool, err error, broken error) {
	if t.failed != nil {
		return false, nil, t.failed
	}
	t.begin()
	defer func() {
		if p := recover(); p != nil {
			broken = t.undo()
			err = &Panic{p}
		}
		t.part = nil
	}()
	err = fn()
	if err == nil {
		err = t.failed
	}
	if err != nil {
		return false, err, t.undo()
	}
	if t.part.saved {
		broken = t.db.Exec("RELEASE SAVEPOINT part").Error
	}
	return t.part.ended, nil, broken
}

// Panic is what a part panicked with.
type Panic struct{ Value any }

func (p *Panic) Error() string { return fmt.Sprintf("panic: %v", p.Value) }

func (t *Tx) begin() {
	p := &part{pending: t.pending, held: map[string]func(){}, tables: slices.Collect(maps.Keys(t.held)), last: t.last}
	for name, h := range t.held {
		p.held[name] = h.mark()
	}
	if t.builder != nil {
		p.builder = t.builder.Clone()
	}
	t.part = p
}

// undo takes back what the part under way did.
func (t *Tx) undo() error {
	p := t.part
	for name := range t.held {
		if !slices.Contains(p.tables, name) {
			delete(t.held, name)
		}
	}
	t.builder, t.last, t.failed = p.builder, p.last, nil
	if !p.saved {
		t.pending = p.pending
		for _, back := range p.held {
			back()
		}
		return nil
	}
	// What was held back before was written before the savepoint.
	t.pending = pending{}
	for name, h := range t.held {
		p.held[name]()
		h.drop()
	}
	t.flushing = true
	defer func() { t.flushing = false }()
	err := t.db.Exec("ROLLBACK TO SAVEPOINT part").Error
	return errors.Join(err, t.db.Exec("RELEASE SAVEPOINT part").Error)
}

// save sees to it that the part under way can be undone in the database too, before it writes there.
func (t *Tx) save() error {
	p := t.part
	if p == nil || p.saved || t.flushing {
		return nil
	}
	after := t.pending
	t.pending = p.pending
	since := map[string]func() error{}
	for name, h := range t.held {
		since[name] = h.splitAt(p.held[name])
	}
	err := t.flush()
	p.saved = err == nil
	if err == nil {
		t.flushing = true
		err = t.db.Exec("SAVEPOINT part").Error
		t.flushing = false
	}
	t.pending = after.since(p.pending)
	for _, restore := range since {
		err = errors.Join(err, restore())
	}
	return t.fail(err)
}

// since is what came after.
func (p pending) since(before pending) pending {
	return pending{p.entries[len(before.entries):], p.tree[len(before.tree):], p.veils[len(before.veils):]}
}

// flush writes the rows that are held back.
func (t *Tx) flush() error {
	was := t.flushing
	t.flushing = true
	defer func() { t.flushing = was }()
	p := t.pending
	t.pending = pending{}
	err := t.insertEntries(p.entries, p.tree, p.veils)
	if err != nil {
		return err
	}
	for _, h := range t.held {
		if err := h.flush(t); err != nil {
			return err
		}
	}
	return nil
}

// find looks an entry up among those that are held back.
func (p *pending) find(is func(*entryRow) bool) (Entry, bool) {
	for i := len(p.entries) - 1; i >= 0; i-- {
		if is(&p.entries[i]) {
			return p.entries[i].entry(), true
		}
	}
	return Entry{}, false
}

// watched is the connection of a transaction: a part that writes through it saves first.
type watched struct {
	*sql.Tx
	t *Tx
}

// ExecContext runs a statement that writes.
func (w *watched) ExecContext(ctx context.Context, query string, args ...any) (sql.Result, error) {
	if err := w.t.sendable(args); err != nil {
		return nil, err
	}
	if err := w.t.save(); err != nil {
		return nil, err
	}
	return w.Tx.ExecContext(ctx, query, args...)
}

// QueryContext runs a statement that gives rows; some write too.
func (w *watched) QueryContext(ctx context.Context, query string, args ...any) (*sql.Rows, error) {
	if err := w.t.sendable(args); err != nil {
		return nil, err
	}
	if writes(query) {
		if err := w.t.save(); err != nil {
			return nil, err
		}
	}
	return w.Tx.QueryContext(ctx, query, args...)
}

func writes(query string) bool {
	verb, _, _ := strings.Cut(strings.TrimSpace(query), " ")
	return !strings.EqualFold(verb, "SELECT") && !strings.EqualFold(verb, "PRAGMA")
}

// Ended tells whether the transaction ended or blanked rows that were there.
func (t *Tx) Ended() bool { return t.ended }
