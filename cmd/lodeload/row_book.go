package main

import (
	"crypto/rand"
	"database/sql"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"sync"
	"sync/atomic"

	"lodebook/cmd/lodeload/network"
	"lodebook/migrations"
	"lodebook/models/book"
)

// makeBook makes a book of a network by the bulk path.
func (b *bench) makeBook(name string, s network.Size) (string, *network.Network, error) {
	path := filepath.Join(b.dir, name)
	n, err := network.New(s)
	if err != nil {
		return "", nil, err
	}
	b.say("Making a book of %d sites with %d people ...", n.Sites, n.People)
	k, err := book.Create(b.ctx, path, syntheticOptions(s))
	if err != nil {
		return "", nil, err
	}
	actor, err := openNetwork(b.app, k, n)
	if err == nil {
		err = bulkNetwork(b.app, k, n, actor, func(*network.Site) error { return nil })
	}
	return path, n, errors.Join(err, k.Close())
}

// bookRows start a book from its snapshot and from its rows, and then write to it.
func bookRows(b *bench) ([]*contest, error) {
	path, n, err := b.makeBook("start.book", b.book)
	if err != nil {
		return nil, err
	}
	size, err := b.keepSnapshot(path, n.Size)
	if err != nil {
		return nil, err
	}
	start, err := b.startRow(path, n, size)
	if err != nil {
		return nil, err
	}
	durable, err := b.durableRow(path, n)
	return []*contest{start, durable}, err
}

// keepSnapshot writes the snapshot as serving does at its end, with what standings are counted from.
func (b *bench) keepSnapshot(path string, s network.Size) (int64, error) {
	k, err := book.Open(b.ctx, path, syntheticOptions(s))
	if err != nil {
		return 0, err
	}
	err = k.Turn(b.ctx)
	if err == nil {
		_, err = k.KeepSnapshot(b.ctx, 1)
	}
	size, failed := k.Size(b.ctx)
	return size, errors.Join(err, failed, k.Close())
}

func (b *bench) startRow(path string, n *network.Network, size int64) (*contest, error) {
	elsewhere := filepath.Join(b.dir, "none")
	if err := os.Mkdir(elsewhere, 0o700); err != nil {
		return nil, err
	}
	open := func(o book.Options) error {
		told := ""
		o.Tell = func(sentence string) { told = sentence }
		k, err := book.Open(b.ctx, path, o)
		if err != nil {
			return err
		}
		err = errors.Join(k.Turn(b.ctx), k.Close())
		if told != "" {
			err = errors.Join(err, errors.New(told))
		}
		return err
	}
	with, without := syntheticOptions(n.Size), syntheticOptions(n.Size)
	without.Snapshots = elsewhere
	return &contest{
		work: fmt.Sprintf("start from a snapshot, %d entries", size), against: "reading the rows", asked: 20,
		check:  func() error { return b.sameStandings(path, with, without, n) },
		ours:   b.timed(1, func() error { return open(with) }),
		theirs: b.timed(1, func() error { return open(without) }),
	}, nil
}

// sameStandings asserts that both ways to open a book answer alike.
func (b *bench) sameStandings(path string, with, without book.Options, n *network.Network) error {
	var said [2]string
	for i, o := range []book.Options{with, without} {
		k, err := book.Open(b.ctx, path, o)
		if err != nil {
			return err
		}
		for site := range n.Sites {
			st, err := k.Standings(b.ctx, maker, book.StandingQuery{Site: network.SiteCode(site)})
			if err != nil {
				return errors.Join(err, k.Close())
			}
			for _, r := range st.Rows {
				said[i] += fmt.Sprint(r.Item, r.Subject, r.Word, r.Record)
			}
		}
		if err := k.Close(); err != nil {
			return err
		}
	}
	if said[0] != said[1] || said[0] == "" {
		return errors.New("the snapshot and the rows answer differently")
	}
	return nil
}

// goingOn are the options for writing to a book that was made before: what is random is so.
func goingOn(s network.Size) book.Options {
	o := syntheticOptions(s)
	o.Random = rand.Reader
	return o
}

const writers = 64

// durableRow writes records by many writers at once: through the whole path of the book, and the same rows by
// hand-written SQL in a transaction each.
func (b *bench) durableRow(path string, n *network.Network) (*contest, error) {
	k, err := book.Open(b.ctx, path, goingOn(n.Size))
	if err != nil {
		return nil, err
	}
	actor, err := k.ActorNamed(b.ctx, "loader")
	if err != nil {
		return nil, errors.Join(err, k.Close())
	}
	var people []string
	var site string
	for s := range n.Each() {
		site = s.Code
		for i := range s.People {
			people = append(people, s.People[i].Code)
		}
		break
	}
	hand, err := byHand(filepath.Join(b.dir, "hand.sqlite"))
	if err != nil {
		return nil, errors.Join(err, k.Close())
	}
	on := n.Last().String()
	before, err := k.Size(b.ctx)
	var written atomic.Int64
	return &contest{
		work: fmt.Sprintf("a durable record, %d writers", writers), against: "the same rows by hand, a transaction each", asked: 2,
		ours: b.each(func(i int) error {
			written.Add(1)
			_, err := k.Record(b.ctx, actor, site, book.RecordForm{Record: "training/fire", Subject: "person:" + people[i%len(people)], On: on}, book.Correction{})
			return err
		}),
		theirs: b.each(func(i int) error { return hand.write(site, people[i%len(people)], on) }),
		close: func() error {
			after, err := k.Size(b.ctx)
			if err == nil && after-before != written.Load() {
				err = fmt.Errorf("%d records were written and %d are in the book", written.Load(), after-before)
			}
			return errors.Join(err, k.Close(), hand.close())
		},
	}, err
}

// each is a side in which many writers do something b.loads times in all; its unit is one of them.
func (b *bench) each(write func(i int) error) func() (float64, error) {
	return func() (float64, error) {
		var next atomic.Int64
		var all sync.WaitGroup
		errs := make([]error, writers)
		began := b.clock()
		for w := range writers {
			all.Go(func() {
				for i := int(next.Add(1)) - 1; i < b.loads && errs[w] == nil; i = int(next.Add(1)) - 1 {
					errs[w] = write(i)
				}
			})
		}
		all.Wait()
		return nanoseconds(b.clock().Sub(began), b.loads), errors.Join(errs...)
	}
}

// handWriter writes an entry, two hashes and a record as a book has them, by prepared statements.
type handWriter struct {
	db         *sql.DB
	statements []*sql.Stmt
	seq        atomic.Int64
}

func byHand(path string) (*handWriter, error) {
	db, err := sql.Open("sqlite3", "file:"+path+"?_journal_mode=WAL&_synchronous=FULL&_busy_timeout=60000&_txlock=immediate&_foreign_keys=on")
	if err != nil {
		return nil, err
	}
	schema, err := fs.ReadFile(migrations.SQLite(), "00001_book.sql")
	if err == nil {
		_, err = db.Exec(string(schema))
	}
	h := &handWriter{db: db}
	for _, text := range []string{
		"INSERT INTO entries (seq, id, kind, v, site, batch, supersedes, actor, recorded_at, bytes) VALUES (?, ?, 'record', 1, ?, '', '', 'account', '2026-03-02T08:00:00.000000Z', ?)",
		"INSERT INTO tree (idx, hash) VALUES (?, ?), (?, ?)",
		"INSERT INTO records (seq, n, ended, entry, batch, ord, site, subject_site, subject_kind, subject_code, what, on_day, at_time, passed, remark, until_day, open_zones, session) VALUES (?, 0, 0, ?, '', ?, ?, '', 'person', ?, 'training/fire', ?, NULL, 1, 0, NULL, '', '')",
	} {
		if err != nil {
			break
		}
		var s *sql.Stmt
		s, err = db.Prepare(text) //nolint:sqlclosecheck // close closes it
		h.statements = append(h.statements, s)
	}
	if err != nil {
		return nil, errors.Join(err, h.close())
	}
	return h, nil
}

func (h *handWriter) close() error {
	var errs []error
	for _, s := range h.statements {
		if s != nil {
			errs = append(errs, s.Close())
		}
	}
	return errors.Join(append(errs, h.db.Close())...)
}

func (h *handWriter) write(site, person, on string) error {
	tx, err := h.db.Begin()
	if err != nil {
		return err
	}
	seq := h.seq.Add(1)
	id := fmt.Sprintf("019cb0de-0000-7000-8000-%012d", seq)
	for i, args := range [][]any{
		{seq, id, site, make([]byte, 330)},
		{2 * seq, make([]byte, 32), 2*seq + 1, make([]byte, 32)},
		{seq, id, seq, site, person, on},
	} {
		if _, err := tx.Stmt(h.statements[i]).Exec(args...); err != nil { //nolint:sqlclosecheck // it is closed with its transaction
			return errors.Join(err, tx.Rollback())
		}
	}
	return tx.Commit()
}
