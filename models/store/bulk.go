package store

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"strings"
)

// WriteBulk is Write for very many entries: what fn appends and puts ends in the same tables, but is
// written by prepared statements of many rows each, and more of the book is held in memory meanwhile.
func (s *Store) WriteBulk(ctx context.Context, fn func(*Tx) error) error {
	return s.Write(ctx, func(t *Tx) error {
		err := t.cache(bulkCache)
		if err != nil {
			return err
		}
		t.bulk = newBulkWriter(ctx, t)
		err = fn(t)
		if err == nil {
			err = t.settle()
		}
		err = errors.Join(err, t.bulk.close())
		t.bulk = nil
		return errors.Join(err, t.cache(usualCache))
	})
}

// How much of a book a writing connection holds in memory, in KiB. In bulk it is most of the index of
// identifiers, whose places are spread at random.
const (
	usualCache = 65536
	bulkCache  = 1 << 20
)

// cache says how much SQLite holds in memory; other databases have a setting of their own.
func (t *Tx) cache(kib int) error {
	if t.db.Name() != "sqlite" {
		return nil
	}
	return t.db.Exec(fmt.Sprintf("PRAGMA cache_size = -%d", kib)).Error
}

// bulkWriter writes rows of the tables of bulkColumns.
type bulkWriter struct {
	ctx        context.Context
	tx         *Tx
	statements map[string]*sql.Stmt
	values     []any
}

func newBulkWriter(ctx context.Context, t *Tx) *bulkWriter {
	return &bulkWriter{ctx: ctx, tx: t, statements: make(map[string]*sql.Stmt)}
}

// bulkRow is a row that gives its columns in the order of bulkColumns.
type bulkRow interface{ values(to []any) []any }

const lineNames = "seq, n, ended, entry, batch, "

// bulkColumns are the columns of the tables of which a bulk has many rows.
var bulkColumns = map[string]string{
	"entries":  "seq, id, kind, v, site, batch, supersedes, actor, recorded_at, bytes",
	"tree":     "idx, hash",
	"veils":    "seq, path, person, salt, value, erased",
	"people":   lineNames + "code, name, email, badge, from_day, erased, touched",
	"fixtures": lineNames + "site, code, kind, name",
	"stints":   lineNames + "site, kind, code, first_day, last_day",
	"facts":    lineNames + "site, kind, code, fact, from_day, value, touched",
	"records":  lineNames + "ord, site, subject_site, subject_kind, subject_code, what, on_day, at_time, passed, remark, until_day, open_zones, session",
	"events":   lineNames + "site, subject_site, subject_kind, subject_code, event, on_day, at_time",
	"excusals": lineNames + "site, subject_site, subject_kind, subject_code, item, from_day, to_day, opens, waiting",
	"rights":   lineNames + "site, person, zone, from_time, to_time",
	"duties":   lineNames + "site, person, from_time, to_time, duty",
}

// bulkSizes are how many rows the prepared statements take: the largest first, the others for the rest.
var bulkSizes = []int{128, 16, 1}

// insertBulk writes rows if they are of a table of bulkColumns.
func insertBulk[R any](w *bulkWriter, table string, rows []R) (bool, error) {
	columns, ok := bulkColumns[table]
	if !ok {
		return false, nil
	}
	for _, size := range bulkSizes {
		for len(rows) >= size {
			w.values = w.values[:0]
			for i := range size {
				row, ok := any(&rows[i]).(bulkRow)
				if !ok {
					return false, nil
				}
				w.values = row.values(w.values)
			}
			err := w.write(table, columns, size)
			if err != nil {
				return true, err
			}
			rows = rows[size:]
		}
	}
	return true, nil
}

func (w *bulkWriter) write(table, columns string, rows int) error {
	_, err := w.insert(table, columns, rows, "")
	return err
}

// places is so many rows of so many placeholders, as the database writes them.
func (w *bulkWriter) places(rows, columns int) string {
	var b strings.Builder
	numbered := w.tx.db.Name() == "postgres"
	for i := range rows * columns {
		switch {
		case i == 0:
			b.WriteByte('(')
		case i%columns == 0:
			b.WriteString("),(")
		default:
			b.WriteByte(',')
		}
		if numbered {
			fmt.Fprintf(&b, "$%d", i+1)
		} else {
			b.WriteByte('?')
		}
	}
	return b.String() + ")"
}

func (w *bulkWriter) close() error {
	var errs []error
	for _, s := range w.statements {
		errs = append(errs, s.Close())
	}
	return errors.Join(errs...)
}

func (r *entryRow) values(to []any) []any {
	return append(to, r.Seq, r.ID, r.Kind, r.V, r.Site, r.Batch, r.Supersedes, r.Actor, r.RecordedAt, r.Bytes)
}

func (r *treeRow) values(to []any) []any { return append(to, r.Idx, r.Hash) }

func (r *veilRow) values(to []any) []any {
	return append(to, r.Seq, r.Path, r.Person, r.Salt, r.Value, r.Erased)
}

func (c *lineColumns) values(to []any) []any {
	return append(to, c.Seq, c.N, c.Ended, c.Entry, c.Batch)
}

func (c *subjectColumns) values(to []any) []any {
	return append(to, c.SubjectSite, c.SubjectKind, c.SubjectCode)
}

func (r *personLine) values(to []any) []any {
	return append(r.Line.values(to), r.Code, r.Name, r.Email, r.Badge, r.FromDay, r.Erased, r.Touched)
}

func (r *fixtureLine) values(to []any) []any {
	return append(r.Line.values(to), r.Site, r.Code, r.Kind, r.Name)
}

func (r *stintLine) values(to []any) []any {
	return append(r.Line.values(to), r.Site, r.Kind, r.Code, r.FirstDay, r.LastDay)
}

func (r *factLine) values(to []any) []any {
	return append(r.Line.values(to), r.Site, r.Kind, r.Code, r.Fact, r.FromDay, r.Value, r.Touched)
}

func (r *recordLine) values(to []any) []any {
	to = append(r.Line.values(to), r.Ord, r.Site)
	return append(r.Subject.values(to), r.What, r.OnDay, r.AtTime, r.Passed, r.Remark, r.UntilDay, r.OpenZones, r.Session)
}

func (r *eventLine) values(to []any) []any {
	to = append(r.Line.values(to), r.Site)
	return append(r.Subject.values(to), r.Event, r.OnDay, r.AtTime)
}

func (r *excusalLine) values(to []any) []any {
	to = append(r.Line.values(to), r.Site)
	return append(r.Subject.values(to), r.Item, r.FromDay, r.ToDay, r.Opens, r.Waiting)
}

func (r *dutyLine) values(to []any) []any {
	return append(r.Line.values(to), r.Site, r.Person, r.FromTime, r.ToTime, r.Duty)
}

func (r *rightLine) values(to []any) []any {
	return append(r.Line.values(to), r.Site, r.Person, r.Zone, r.FromTime, r.ToTime)
}
