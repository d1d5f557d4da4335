package main

import (
	"context"
	"database/sql"
	"errors"
	"path/filepath"

	_ "github.com/mattn/go-sqlite3" // the driver

	"lodebook/models/civil"
)

const sqliteTables = `
CREATE TABLE ob (site INTEGER NOT NULL, item INTEGER NOT NULL, ob INTEGER NOT NULL, PRIMARY KEY (site, item, ob)) WITHOUT ROWID;
CREATE UNIQUE INDEX ob_ob ON ob (ob, site, item);
CREATE TABLE change (ob INTEGER NOT NULL, point INTEGER NOT NULL, PRIMARY KEY (ob, point)) WITHOUT ROWID;
CREATE TABLE now (site INTEGER NOT NULL, item INTEGER NOT NULL, ob INTEGER NOT NULL,
    d0 INTEGER NOT NULL, w0 INTEGER NOT NULL, d1 INTEGER NOT NULL, w1 INTEGER NOT NULL,
    d2 INTEGER NOT NULL, w2 INTEGER NOT NULL, d3 INTEGER NOT NULL, w3 INTEGER NOT NULL, PRIMARY KEY (site, item, ob)) WITHOUT ROWID`

// sqlite fills a SQLite file with the world, once.
func (b *bench) sqlite() (*database, error) {
	if b.lite != nil {
		return b.lite, nil
	}
	w, err := b.load()
	if err != nil {
		return nil, err
	}
	b.say("Filling SQLite ...")
	path := filepath.Join(b.dir, "compare.sqlite")
	if err := fillSQLite(b.ctx, path, w); err != nil {
		return nil, err
	}
	db, err := sql.Open("sqlite3", "file:"+path+"?mode=ro&_query_only=on&_cache_size=-1000000")
	if err != nil {
		return nil, err
	}
	d := &database{name: "SQLite", db: db}
	if err := d.share(b.ctx, w); err != nil {
		return nil, errors.Join(err, db.Close())
	}
	for _, s := range d.shards {
		for _, pragma := range []string{"PRAGMA mmap_size = 8000000000", "PRAGMA temp_store = MEMORY"} {
			if _, err := s.conn.ExecContext(b.ctx, pragma); err != nil {
				return nil, errors.Join(err, d.close())
			}
		}
	}
	b.lite = d
	return d, nil
}

func fillSQLite(ctx context.Context, path string, w *world) error {
	db, err := sql.Open("sqlite3", "file:"+path+"?_journal_mode=OFF&_synchronous=OFF&_cache_size=-500000")
	if err != nil {
		return err
	}
	db.SetMaxOpenConns(1)
	err = func() error {
		if _, err := db.ExecContext(ctx, sqliteTables); err != nil {
			return err
		}
		tx, err := db.BeginTx(ctx, nil)
		if err != nil {
			return err
		}
		if err := errors.Join(fillTables(ctx, tx, w), tx.Commit()); err != nil {
			return err
		}
		_, err = db.ExecContext(ctx, "ANALYZE")
		return err
	}()
	return errors.Join(err, db.Close())
}

// fillTables writes the three tables in order of their keys.
func fillTables(ctx context.Context, tx *sql.Tx, w *world) error {
	obs := newInserter(tx, "ob", 3)
	now := newInserter(tx, "now", 11)
	today := w.today()
	for i, o := range w.obligations {
		r := nowRow(w.course(i), today)
		err := errors.Join(obs.put(ctx, int(o.site), int(o.item), i),
			now.put(ctx, int(o.site), int(o.item), i, r[0], r[1], r[2], r[3], r[4], r[5], r[6], r[7]))
		if err != nil {
			return err
		}
	}
	changes := newInserter(tx, "change", 2)
	err := w.eachPoint(func(ob int, p point) error { return changes.put(ctx, ob, int(p)) })
	return errors.Join(err, obs.close(ctx), now.close(ctx), changes.close(ctx))
}

// inserter writes rows of whole numbers many at a time.
type inserter struct {
	tx      *sql.Tx
	table   string
	columns int
	full    *sql.Stmt
	values  []any
}

const rowsAtOnce = 200

func newInserter(tx *sql.Tx, table string, columns int) *inserter {
	return &inserter{tx: tx, table: table, columns: columns}
}

func (i *inserter) put(ctx context.Context, values ...int) error {
	for _, v := range values {
		i.values = append(i.values, v)
	}
	if len(i.values) < rowsAtOnce*i.columns {
		return nil
	}
	if i.full == nil {
		full, err := i.tx.PrepareContext(ctx, i.statement(rowsAtOnce))
		if err != nil {
			return err
		}
		i.full = full
	}
	_, err := i.full.ExecContext(ctx, i.values...)
	i.values = i.values[:0]
	return err
}

func (i *inserter) statement(rows int) string {
	return "INSERT INTO " + i.table + " VALUES " + placeholders(rows, i.columns)
}

// close writes what is left.
func (i *inserter) close(ctx context.Context) error {
	var errs []error
	if n := len(i.values) / i.columns; n > 0 {
		_, err := i.tx.ExecContext(ctx, i.statement(n), i.values...)
		errs = append(errs, err)
	}
	if i.full != nil {
		errs = append(errs, i.full.Close())
	}
	return errors.Join(errs...)
}

// sqliteAsOf are the forms of the question for all standings as of a day. The point asked for is the last
// one that can be on the day.
var sqliteAsOf = []form{
	{"correlated maximum", `SELECT o.site, o.item, ifnull((SELECT max(c.point) & 15 FROM change c WHERE c.ob = o.ob AND c.point <= ?1), 8) AS word, count(*)
		FROM ob o WHERE o.site BETWEEN ?2 AND ?3 GROUP BY o.site, o.item, word`, "123"},
	{"correlated maximum, filtered", `SELECT site, item, word, count(*) FROM (
			SELECT o.site, o.item, (SELECT max(c.point) & 15 FROM change c WHERE c.ob = o.ob AND c.point <= ?1) AS word
			FROM ob o WHERE o.site BETWEEN ?2 AND ?3 LIMIT -1)
		WHERE word < 8 GROUP BY site, item, word`, "123"},
	{"grouped maximum", `SELECT o.site, o.item, g.word, count(*) FROM (
			SELECT ob, max(point) & 15 AS word FROM change WHERE point <= ?1 AND ob BETWEEN ?2 AND ?3 GROUP BY ob) g
		JOIN ob o ON o.ob = g.ob GROUP BY o.site, o.item, g.word`, "145"},
	{"window", `SELECT o.site, o.item, g.point & 15 AS word, count(*) FROM (
			SELECT ob, point, row_number() OVER (PARTITION BY ob ORDER BY point DESC) AS place FROM change WHERE point <= ?1 AND ob BETWEEN ?2 AND ?3) g
		JOIN ob o ON o.ob = g.ob WHERE g.place = 1 GROUP BY o.site, o.item, word`, "145"},
}

// sqliteToday are the forms of the question for all standings today.
var sqliteToday = []form{
	{"maintained column", `SELECT site, item, CASE WHEN ?1 >= d3 THEN w3 WHEN ?1 >= d2 THEN w2 WHEN ?1 >= d1 THEN w1 WHEN ?1 >= d0 THEN w0 ELSE 8 END AS word, count(*)
		FROM now WHERE site BETWEEN ?2 AND ?3 GROUP BY site, item, word`, "123"},
}

// lastPoint is the last point that can be on a day.
func lastPoint(d civil.Day) int { return int(pointOf(d, 15)) }
