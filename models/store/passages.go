package store

import (
	"context"
	"errors"
	"fmt"
	"strings"
	"time"
)

// PassageRow is one door event of a site's access-control system. It is no part of the book: it can be lost without
// losing what was recorded.
type PassageRow struct {
	Site                   string
	At                     time.Time // to the microsecond
	Door, Badge, Direction string
	Batch                  string // the import that it came in
}

// HolderRow says that a badge can open a door, by the list of one import.
type HolderRow struct{ Badge, Door string }

// PassageWriter adds passages, many to a statement. It is good within the transaction that made it.
type PassageWriter struct {
	w *bulkWriter
	t *Tx
}

// PassageWriter makes ready to add passages. Close ends it.
func (t *Tx) PassageWriter(ctx context.Context) (*PassageWriter, error) {
	if err := t.settle(); err != nil {
		return nil, err
	}
	return &PassageWriter{newBulkWriter(ctx, t), t}, nil
}

// Add adds passages and tells how many were not there yet.
func (p *PassageWriter) Add(rows []PassageRow) (int, error) {
	added := 0
	for _, size := range bulkSizes {
		for len(rows) >= size {
			p.w.values = p.w.values[:0]
			for _, r := range rows[:size] {
				p.w.values = append(p.w.values, r.Site, r.At.UnixMicro(), r.Door, r.Badge, r.Direction, r.Batch)
			}
			n, err := p.w.insert("passages", "site, at_micro, door, badge, direction, batch", size, " ON CONFLICT DO NOTHING")
			if err != nil {
				return added, err
			}
			added += n
			rows = rows[size:]
		}
	}
	return added, nil
}

// Close frees what the writer holds.
func (p *PassageWriter) Close() error { return p.w.close() }

// EachPassage calls fn with the passages of a site from a moment on and before another, in order of time, door and
// badge.
func (t *Tx) EachPassage(site string, from, to time.Time, fn func(PassageRow) error) (err error) {
	if err := t.settle(); err != nil {
		return err
	}
	rows, err := t.db.Raw("SELECT at_micro, door, badge, direction, batch FROM passages WHERE site = ? AND at_micro >= ? AND at_micro < ? ORDER BY at_micro, door, badge, direction",
		site, from.UnixMicro(), to.UnixMicro()).Rows()
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, rows.Close()) }()
	for rows.Next() {
		r := PassageRow{Site: site}
		var at int64
		if err := rows.Scan(&at, &r.Door, &r.Badge, &r.Direction, &r.Batch); err != nil {
			return err
		}
		r.At = time.UnixMicro(at).UTC()
		if err := fn(r); err != nil {
			return err
		}
	}
	return rows.Err()
}

// HasPassage tells whether such a passage is there, in whichever direction.
func (t *Tx) HasPassage(site string, at time.Time, door, badge string) (bool, error) {
	var n int64
	err := t.db.Raw("SELECT COUNT(*) FROM passages WHERE site = ? AND at_micro = ? AND door = ? AND badge = ?", site, at.UnixMicro(), door, badge).Scan(&n).Error
	return n > 0, err
}

// PutHolders keeps the list of an import.
func (t *Tx) PutHolders(ctx context.Context, batch string, rows []HolderRow) (err error) {
	if err := t.settle(); err != nil {
		return err
	}
	w := newBulkWriter(ctx, t)
	defer func() { err = errors.Join(err, w.close()) }()
	for _, size := range bulkSizes {
		for len(rows) >= size {
			w.values = w.values[:0]
			for _, r := range rows[:size] {
				w.values = append(w.values, batch, r.Badge, r.Door)
			}
			if _, err := w.insert("holders", "batch, badge, door", size, " ON CONFLICT DO NOTHING"); err != nil {
				return err
			}
			rows = rows[size:]
		}
	}
	return nil
}

// Holders is the list of an import, by door and badge.
func (t *Tx) Holders(batch string) ([]HolderRow, error) {
	var out []HolderRow
	err := t.db.Raw("SELECT badge, door FROM holders WHERE batch = ? ORDER BY door, badge", batch).Scan(&out).Error
	return out, err
}

// RemoveImported takes away the passages and holders that an import brought.
func (t *Tx) RemoveImported(batch string) error {
	t.ends()
	if err := t.settle(); err != nil {
		return err
	}
	for _, table := range []string{"passages", "holders"} {
		if err := t.db.Exec("DELETE FROM "+table+" WHERE batch = ?", batch).Error; err != nil {
			return err
		}
	}
	return nil
}

// BlankBadge puts a token in the place of a badge in the passages of a site in a span of time (a zero to is open; then also in
// all lists of holders): nothing tells any more whose they were.
func (t *Tx) BlankBadge(site, badge, token string, from, to time.Time) error {
	t.ends()
	if err := t.settle(); err != nil {
		return err
	}
	until := int64(1<<63 - 1)
	if !to.IsZero() {
		until = to.UnixMicro()
	}
	err := t.db.Exec("UPDATE passages SET badge = ? WHERE site = ? AND badge = ? AND at_micro >= ? AND at_micro < ?", token, site, badge, from.UnixMicro(), until).Error
	if err == nil && to.IsZero() {
		err = t.db.Exec("UPDATE holders SET badge = ? WHERE badge = ?", token, badge).Error
	}
	return err
}

// Recorded is when an entry was recorded.
type Recorded struct {
	Seq int64
	At  time.Time
}

// RecordedBetween gives when the entries of a time were recorded, in order: after from and up to to.
func (t *Tx) RecordedBetween(from, to time.Time) (out []Recorded, err error) {
	first, err := t.SeqAt(from)
	if err != nil {
		return nil, err
	}
	last, err := t.SeqAt(to)
	if err != nil {
		return nil, err
	}
	rows, err := t.db.Raw("SELECT seq, recorded_at FROM entries WHERE seq > ? AND seq <= ? ORDER BY seq", first, last).Rows()
	if err != nil {
		return nil, err
	}
	defer func() { err = errors.Join(err, rows.Close()) }()
	for rows.Next() {
		var r Recorded
		var at instant
		if err := rows.Scan(&r.Seq, &at); err != nil {
			return nil, err
		}
		r.At = time.Time(at)
		out = append(out, r)
	}
	return out, rows.Err()
}

// insert writes so many rows of the waiting values and tells how many were kept.
func (w *bulkWriter) insert(table, columns string, rows int, ending string) (int, error) {
	key := fmt.Sprintf("%s %d", table, rows)
	statement, ok := w.statements[key]
	if !ok {
		var err error
		text := "INSERT INTO " + table + " (" + columns + ") VALUES " + w.places(rows, strings.Count(columns, ",")+1) + ending
		statement, err = w.tx.db.Statement.ConnPool.PrepareContext(w.ctx, text)
		if err != nil {
			return 0, err
		}
		w.statements[key] = statement
	}
	result, err := statement.ExecContext(w.ctx, w.values...)
	if err != nil {
		return 0, err
	}
	n, err := result.RowsAffected()
	return int(n), err
}
