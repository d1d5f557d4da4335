package book_test

import (
	"context"
	"crypto/rand"
	"database/sql"
	"fmt"
	"os"
	"path/filepath"
	"sync"
	"sync/atomic"
	"testing"
	"time"

	"lodebook/models/book"
)

const durableWriters = 64

// Records through the whole path by 64 writers at once, beside the same rows written by hand, each record in
// a transaction of its own.
func BenchmarkDurable(b *testing.B) {
	b.Run("Book", func(b *testing.B) {
		k := durableBook(b)
		eachOf(b, durableWriters, func(i int) error {
			_, err := k.Record(b.Context(), k.officer, site, book.RecordForm{Record: "training/level-2", Subject: fmt.Sprintf("W%02d", i%durableWriters), On: "2026-03-01"}, book.Correction{})
			return err
		})
	})
	b.Run("ByHand", func(b *testing.B) {
		w := handWriter(b)
		eachOf(b, durableWriters, w.write)
	})
}

func eachOf(b *testing.B, writers int, write func(i int) error) {
	var next atomic.Int64
	var all sync.WaitGroup
	b.ResetTimer()
	for range writers {
		all.Go(func() {
			for i := next.Add(1) - 1; i < int64(b.N); i = next.Add(1) - 1 {
				if err := write(int(i)); err != nil {
					b.Error(err)
					return
				}
			}
		})
	}
	all.Wait()
	b.ReportMetric(float64(b.N)/b.Elapsed().Seconds(), "records/s")
}

type durable struct {
	*book.Book
	officer book.Actor
}

func durableBook(b *testing.B) durable {
	ok := func(err error) {
		if err != nil {
			b.Fatal(err)
		}
	}
	ctx := context.Background()
	now := time.Date(2026, 3, 2, 8, 0, 0, 0, time.UTC)
	k, err := book.Create(ctx, filepath.Join(b.TempDir(), "site.book"), book.Options{Clock: func() time.Time { return now }, Random: rand.Reader})
	ok(err)
	b.Cleanup(func() { ok(k.Close()) })
	source, err := os.ReadFile("testdata/site.yaml")
	ok(err)
	op := book.SystemOperator("ops")
	_, err = k.OpenProgram(ctx, op, source, "")
	ok(err)
	_, err = k.AddAccount(ctx, op, book.AccountForm{Name: "olga", Role: book.SafetyOfficer, Sites: []string{site}})
	ok(err)
	officer, err := k.ActorNamed(ctx, "olga")
	ok(err)
	for i := range durableWriters {
		_, err := k.KeepPerson(ctx, officer, site, book.PersonForm{Code: fmt.Sprintf("W%02d", i), Name: "A Writer", Level: "L1", Crew: "early", Joined: "2025-02-01", Facts: map[string]string{"employer": "Skerry Works"}}, book.Correction{})
		ok(err)
	}
	ok(k.Turn(ctx))
	return durable{k, officer}
}

// byHand writes an entry, two hashes and a record, as they are, by prepared statements.
type byHand struct {
	db         *sql.DB
	statements [3]*sql.Stmt
	seq        atomic.Int64
	bytes      []byte
	hash       []byte
}

func handWriter(b *testing.B) *byHand {
	ok := func(err error) {
		if err != nil {
			b.Fatal(err)
		}
	}
	db, err := sql.Open("sqlite3", "file:"+filepath.Join(b.TempDir(), "hand.db")+"?_journal_mode=WAL&_synchronous=FULL&_busy_timeout=60000&_txlock=immediate&_foreign_keys=on")
	ok(err)
	b.Cleanup(func() { ok(db.Close()) })
	schema, err := os.ReadFile("../../migrations/sqlite/00001_book.sql")
	ok(err)
	_, err = db.Exec(string(schema))
	ok(err)
	w := &byHand{db: db, bytes: make([]byte, 330), hash: make([]byte, 32)}
	for i, text := range []string{
		"INSERT INTO entries (seq, id, kind, v, site, batch, supersedes, actor, recorded_at, bytes) VALUES (?, ?, 'record', 1, 'QUAY', '', '', 'a', '2026-03-02T08:00:00.000000Z', ?)",
		"INSERT INTO tree (idx, hash) VALUES (?, ?), (?, ?)",
		"INSERT INTO records (seq, n, ended, entry, batch, ord, site, subject_site, subject_kind, subject_code, what, on_day, at_time, passed, remark, until_day, open_zones, session) VALUES (?, 0, 0, ?, '', ?, 'QUAY', '', 'person', ?, 'training/level-2', '2026-03-01', NULL, 1, 0, NULL, '', '')",
	} {
		w.statements[i], err = db.Prepare(text)
		ok(err)
	}
	return w
}

func (w *byHand) write(i int) error {
	tx, err := w.db.Begin()
	if err != nil {
		return err
	}
	seq := w.seq.Add(1)
	id := fmt.Sprintf("019cb0de-0000-7000-8000-%012d", seq)
	for n, args := range [][]any{{seq, id, w.bytes}, {2 * seq, w.hash, 2*seq + 1, w.hash}, {seq, id, seq, fmt.Sprintf("W%02d", i%durableWriters)}} {
		if _, err := tx.Stmt(w.statements[n]).Exec(args...); err != nil {
			return err
		}
	}
	return tx.Commit()
}
