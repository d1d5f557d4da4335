package store

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"strings"

	"lodebook/models/ledger"
)

// moved are the tables that a move takes along, each with what its rows are ordered by; those of the
// projections stand between entries and what runs beside the book. Sessions, links and counts of failed
// sign-ins stay behind: whoever is signed in signs in again.
var moved = [][2]string{
	{"meta", "name"}, {"entries", "seq"}, {"tree", "idx"}, {"veils", "seq, path"},
	{"", "seq, n"},
	{"passages", "site, at_micro, door, badge, direction"}, {"holders", "batch, badge, door"},
	{"credentials", "account"}, {"flags", "site, item, kind, code"}, {"runs", "job, site, due"},
}

// Move copies the book at one address into a new book at another, between a file and a PostgreSQL
// database either way: entries, tree, erasable values, projections and what runs beside the book, as they
// are at one moment. The source is left as it is, and may be in use. The copy is verified, and kept only
// if its tree has the head of the source's; else nothing is left of it. Progress, if not nil, is told
// after every few thousand rows of a table.
func Move(ctx context.Context, from, to string, progress func(table string, rows int64)) (Report, error) {
	return move(ctx, from, to, usual(), progress)
}

func move(ctx context.Context, from, to string, set settings, progress func(string, int64)) (Report, error) {
	s, err := openSource(ctx, from, set)
	if err != nil {
		return Report{}, err
	}
	report, err := s.moveTo(ctx, to, progress)
	return report, errors.Join(err, s.Close())
}

// openSource connects to a book to read it only. Its schema must be the newest: bringing it up to date
// would change it.
func openSource(ctx context.Context, from string, set settings) (*Store, error) {
	s := &Store{path: from, set: set}
	var err error
	schema := set.schema
	if OnServer(from) {
		s.set.address = from
		s.path, schema = serverName(s.set), set.onServer
		s.r, err = serverReading(s.set).connect(ctx)
		if err == nil {
			err = explain(s.path, isServerBook(ctx, s.path, s.r, s.set))
		}
	} else if err = lookAt(from); err == nil {
		if err = recognise(ctx, from, set); err == nil {
			s.r, err = set.pool(reading(set.busy)).connect(ctx, from)
		}
	}
	if err != nil {
		return nil, errors.Join(err, s.Close())
	}
	have, err := schemaVersion(ctx, s.r)
	newest, err2 := newestVersion(s.r, schema)
	if err = errors.Join(explain(s.path, err), err2); err == nil && have < newest {
		err = refuse(nil, "%s has the schema %d of an older version of this program; open it once with this version, which brings it up to %d.", s.path, have, newest)
	}
	if err != nil {
		return nil, errors.Join(err, s.Close())
	}
	return s, nil
}

// moveTo copies the book into a new one.
func (s *Store) moveTo(ctx context.Context, to string, progress func(string, int64)) (Report, error) {
	set := s.set
	set.address = ""
	if OnServer(to) {
		set.address = to
		return s.moveToServer(ctx, set, progress)
	}
	var report Report
	err := withCopy(to, func(temporary string) error {
		target, err := begin(ctx, temporary, set)
		if err != nil {
			return err
		}
		report, err = s.moveInto(ctx, target, progress)
		return errors.Join(err, target.Close())
	})
	return report, err
}

func (s *Store) moveToServer(ctx context.Context, set settings, progress func(string, int64)) (Report, error) {
	target, err := createServer(ctx, set)
	if err != nil {
		return Report{}, err
	}
	report, err := s.moveInto(ctx, target, progress)
	if err != nil {
		err = errors.Join(err, emptyServer(context.WithoutCancel(ctx), target.w))
	}
	return report, errors.Join(err, target.Close())
}

// moveInto copies the book into an empty one and verifies that.
func (s *Store) moveInto(ctx context.Context, target *Store, progress func(string, int64)) (Report, error) {
	var head ledger.Hash
	err := s.Read(ctx, func(from *Tx) error {
		size, err := from.Size()
		if err != nil {
			return err
		}
		head, err = ledger.Root(size, from)
		if err != nil {
			return err
		}
		return target.Write(ctx, func(to *Tx) error { return moveTables(ctx, from, to, progress) })
	})
	if err != nil {
		return Report{}, err
	}
	report, err := target.Verify(ctx, nil)
	switch {
	case err != nil:
		return report, err
	case report.FirstFault != "":
		return report, refuse(ErrCorrupt, "The copy is not whole and is not kept. %s", report.FirstFault)
	case report.Head != head:
		return report, refuse(nil, "The copy of %s does not have the head of the book; it was thrown away.", s.path)
	}
	return report, nil
}

func moveTables(ctx context.Context, from, to *Tx, progress func(string, int64)) error {
	for _, m := range moved {
		names := []string{m[0]}
		if m[0] == "" {
			names = nil
			for _, p := range projections {
				names = append(names, p.title())
			}
		}
		for _, name := range names {
			if err := moveTable(ctx, from, to, name, m[1], progress); err != nil {
				return fmt.Errorf("copying %s: %w", name, err)
			}
		}
	}
	return nil
}

// moveRows is how many rows one INSERT of a move takes.
const moveRows = 100

// moveTable hands the rows of one table over as they are read, so that no more than a few of them are in
// memory.
func moveTable(ctx context.Context, from, to *Tx, name, order string, progress func(string, int64)) (err error) {
	rows, err := from.db.Table(name).Order(order).Rows()
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, rows.Close()) }()
	columns, err := rows.Columns()
	if err != nil {
		return err
	}
	w := newBulkWriter(ctx, to)
	defer func() { err = errors.Join(err, w.close()) }()
	err = w.copy(rows, name, columns, progress)
	return errors.Join(err, rows.Err())
}

func (w *bulkWriter) copy(rows *sql.Rows, name string, columns []string, progress func(string, int64)) error {
	list := strings.Join(columns, ", ")
	cells := make([]any, len(columns))
	into := make([]any, len(columns))
	for i := range cells {
		into[i] = &cells[i]
	}
	var done int64
	for rows.Next() {
		if err := rows.Scan(into...); err != nil {
			return err
		}
		w.values = append(w.values, cells...)
		done++
		if len(w.values) == moveRows*len(columns) {
			if err := w.write(name, list, moveRows); err != nil {
				return err
			}
			w.values = w.values[:0]
		}
		if progress != nil && done%batchRows == 0 {
			progress(name, done)
		}
	}
	if n := len(w.values) / len(columns); n > 0 {
		if err := w.write(name, list, n); err != nil {
			return err
		}
	}
	if progress != nil {
		progress(name, done)
	}
	return nil
}
