package main

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"runtime"
	"slices"
	"strings"
	"sync"

	"lodebook/models/civil"
)

// database is a SQL database with the world in its tables, asked over as many connections as there are
// cores, each for its share of the sites.
//
//	ob(ob, site, item)   every obligation, numbered in order of site and item
//	change(ob, point)    the days on which its standing turned; see point
//	now(site, item, ob, d0, w0, d1, w1, d2, w2, d3, w3)
//	                     the maintained last-record column: the words that follow the last record, and the
//	                     days from which they hold
//
// All arithmetic of the rules is done already: what is left to SQL is to look up and to count.
type database struct {
	name   string
	db     *sql.DB
	shards []shard
}

// shard is a connection's share: sites and obligations from and to, all included.
type shard struct {
	conn                           *sql.Conn
	fromSite, toSite, fromOb, toOb int
}

// form is one way to put a question in SQL. Its parameters are, in order: a day or point, the first and
// last site, the first and last obligation.
type form struct {
	name, query string
	parameters  string // which of the five are used, as in "123"
}

// count is one row of an answer, as SQL gives it.
type count struct{ site, item, word, n int }

// share gives each connection its sites.
func (d *database) share(ctx context.Context, w *world) error {
	cores := min(runtime.GOMAXPROCS(0), len(w.sites))
	d.db.SetMaxOpenConns(cores)
	for i := range cores {
		s := shard{fromSite: len(w.sites) * i / cores, toSite: len(w.sites)*(i+1)/cores - 1}
		s.fromOb, _ = slices.BinarySearchFunc(w.obligations, s.fromSite, compareSite)
		s.toOb, _ = slices.BinarySearchFunc(w.obligations, s.toSite+1, compareSite)
		s.toOb--
		conn, err := d.db.Conn(ctx)
		if err != nil {
			return err
		}
		s.conn = conn
		d.shards = append(d.shards, s)
	}
	return nil
}

func compareSite(o obligation, site int) int { return int(o.site) - site }

// ask puts the question on all connections at once and gives the rows of all.
func (d *database) ask(ctx context.Context, f form, at int) ([]count, error) {
	parts := make([][]count, len(d.shards))
	errs := make([]error, len(d.shards))
	var all sync.WaitGroup
	for i, s := range d.shards {
		all.Go(func() { parts[i], errs[i] = s.ask(ctx, f, at) })
	}
	all.Wait()
	return slices.Concat(parts...), errors.Join(errs...)
}

func (s shard) ask(ctx context.Context, f form, at int) (out []count, err error) {
	given := []any{at, s.fromSite, s.toSite, s.fromOb, s.toOb}
	var args []any
	for _, p := range f.parameters {
		args = append(args, given[p-'1'])
	}
	rows, err := s.conn.QueryContext(ctx, f.query, args...)
	if err != nil {
		return nil, err
	}
	defer func() { err = errors.Join(err, rows.Close()) }()
	for rows.Next() {
		var c count
		if err := rows.Scan(&c.site, &c.item, &c.word, &c.n); err != nil {
			return nil, err
		}
		out = append(out, c)
	}
	return out, rows.Err()
}

// answerOfRows drops what says that there is no obligation.
func answerOfRows(rows []count) answer {
	out := answer{}
	for _, c := range rows {
		if c.word != nothing {
			out[cell{c.site, c.item, c.word}] += c.n
		}
	}
	return out
}

// best runs each form, asserts that its answer is the right one, and gives the quickest, which alone goes
// into the rounds.
func (b *bench) best(d *database, forms []form, at int, right answer) (form, error) {
	var best form
	least := 0.0
	for _, f := range forms {
		rows, err := d.ask(b.ctx, f, at)
		if err != nil {
			return best, fmt.Errorf("%s, %s: %w", d.name, f.name, err)
		}
		if err := agree(d.name+", "+f.name, right, answerOfRows(rows)); err != nil {
			return best, err
		}
		took, err := b.timed(1, func() error { _, err := d.ask(b.ctx, f, at); return err })()
		if err != nil {
			return best, err
		}
		b.say("  %s, %s: %.1f ms", d.name, f.name, took/1e6)
		if best.name == "" || took < least {
			best, least = f, took
		}
	}
	return best, nil
}

// versus makes the contest of ours against the best form of a database.
func (b *bench) versus(d *database, work string, asked float64, forms []form, at int, right answer, ours func() (float64, error)) (*contest, error) {
	f, err := b.best(d, forms, at, right)
	if err != nil {
		return nil, err
	}
	return &contest{
		work: work, against: d.name + ", " + f.name, asked: asked, ours: ours,
		theirs: b.timed(1, func() error { _, err := d.ask(b.ctx, f, at); return err }),
	}, nil
}

func (d *database) close() error {
	var errs []error
	for _, s := range d.shards {
		errs = append(errs, s.conn.Close())
	}
	return errors.Join(append(errs, d.db.Close())...)
}

// nowRow is the row of the table now of an obligation: its points from the one that holds today on, and one
// or two before it, so that four are there where the course has as many.
func nowRow(course []point, today civil.Day) [8]int {
	at := 0
	for i, p := range course {
		if p <= pointOf(today, 15) {
			at = i
		}
	}
	at = max(0, min(at, len(course)-4))
	var out [8]int
	for i := range 4 {
		out[2*i], out[2*i+1] = int(civil.LastDay)+1, nothing
		if at+i < len(course) {
			out[2*i], out[2*i+1] = int(course[at+i]>>4), int(course[at+i]&15)
		}
	}
	return out
}

// placeholders is so many rows of so many question marks.
func placeholders(rows, columns int) string {
	one := "(" + strings.TrimSuffix(strings.Repeat("?,", columns), ",") + ")"
	return strings.TrimSuffix(strings.Repeat(one+",", rows), ",")
}

// eachPoint calls fn with every point, and whose it is.
func (w *world) eachPoint(fn func(ob int, p point) error) error {
	for i := range w.obligations {
		for _, p := range w.course(i) {
			if err := fn(i, p); err != nil {
				return err
			}
		}
	}
	return nil
}
