// Package store keeps a book in a SQLite file or a PostgreSQL database: its entries with their tree and erasable values,
// the projections made from them, and what the program needs to run. It is the only room that
// knows SQL; the row types of rows.go are its contract.
package store

import (
	"context"
	"database/sql"
	"errors"

	"gorm.io/gorm"

	"lodebook/models/ledger"
)

// Store is an open book. It may be used by many goroutines at once, beside other programs that
// have the same book open.
type Store struct {
	path string
	w, r *gorm.DB
	set  settings

	stamps stamps
}

// Path is where the book is.
func (s *Store) Path() string { return s.path }

// Close closes the book. Nothing may use it any more.
func (s *Store) Close() error {
	s.closeStamps()
	return errors.Join(disconnect(s.r), disconnect(s.w))
}

// Tx is one transaction. It is for one goroutine and ends with the function that it was given to.
type Tx struct {
	db       *gorm.DB
	builder  *ledger.Builder    // the tree that Append grows; nil until it does
	last     string             // recorded-at of the last entry, as stored; set with builder
	held     map[string]holding // projection rows that are not in the database yet, by table
	pending  pending            // rows of entries that parts hold back
	part     *part              // the part under way, or nil
	ended    bool               // rows that were there have been ended or blanked
	flushing bool               // rows held back are being written
	failed   error              // of an insert: what it was to write is in part forgotten
	bulk     *bulkWriter        // writes many rows at once; nil but in WriteBulk
}

// holding is what a transaction holds back of one table, so that rows put one by one are written
// in batches.
type holding interface {
	flush(t *Tx) error
	mark() (back func())
	splitAt(back func()) (restore func() error)
	drop()
}

// Write runs fn in a transaction that has the write lock from its first moment. If fn gives an
// error or panics, nothing of it is kept. When Write returns nil, what fn wrote is on the disk.
// fn must not call Write of the same store: there is one writer. If another program holds the lock for too
// long, the error is a *Refusal that is ErrBusy.
func (s *Store) Write(ctx context.Context, fn func(*Tx) error) error {
	db := s.w.WithContext(ctx).Begin()
	if db.Error != nil {
		return explain(s.path, db.Error)
	}
	committed := false
	defer func() {
		if !committed {
			db.Rollback() // its error could only be that the transaction has ended already
		}
	}()
	if err := lock(db); err != nil {
		return explain(s.path, err)
	}
	t := &Tx{db: db}
	if tx, ok := db.Statement.ConnPool.(*sql.Tx); ok {
		db.Statement.ConnPool = &watched{tx, t}
	}
	err := fn(t)
	if err == nil {
		err = t.settle()
	}
	if err == nil {
		err = db.Commit().Error
		committed = err == nil
	}
	return explain(s.path, err)
}

// Read runs fn in a transaction that sees the book as it was at fn's first look and never waits
// for a writer. fn must write nothing.
func (s *Store) Read(ctx context.Context, fn func(*Tx) error) error {
	db := s.r.WithContext(ctx).Begin()
	if db.Error != nil {
		return explain(s.path, db.Error)
	}
	defer db.Rollback() // there is nothing to keep
	return explain(s.path, fn(&Tx{db: db}))
}

// Size is the number of entries now, those of other programs included.
func (s *Store) Size(ctx context.Context) (int64, error) {
	t := &Tx{db: s.r.WithContext(ctx)}
	n, err := t.Size()
	return n, explain(s.path, err)
}

// settle writes the projection rows that are held back. After an insert has failed, it fails too, so
// that a caller who passed over the error does not keep half of the rest.
func (t *Tx) settle() error {
	if t.failed != nil {
		return t.failed
	}
	if err := t.save(); err != nil {
		return err
	}
	return t.flush()
}

// MetaBookID is the name under which a book's identity stands in its meta values.
const MetaBookID = "book_id"

type metaRow struct{ Name, Value string }

// Meta gives a value that the book keeps of itself, and whether there is one.
func (t *Tx) Meta(name string) (string, bool, error) {
	rows, err := find[metaRow](t.db.Table("meta").Where("name = ?", name))
	if err != nil || len(rows) == 0 {
		return "", false, err
	}
	return rows[0].Value, true, nil
}

// SetMeta sets a value that the book keeps of itself.
func (t *Tx) SetMeta(name, value string) error {
	return upsert(t, "meta", metaRow{name, value}, "name")
}

// find runs a query and gives its rows; none is no error.
func find[R any](q *gorm.DB) ([]R, error) {
	var rows []R
	err := q.Find(&rows).Error
	return rows, err
}
