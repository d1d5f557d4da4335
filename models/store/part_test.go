package store

import (
	"errors"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"testing"

	"pgregory.net/rapid"
)

// Parts of a transaction that fail leave nothing, whatever they did and however far it had been written;
// the others leave the same book as if they had been transactions of their own.
func TestPartsStandAloneOrFall(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		rng := rand.New(rand.NewPCG(rapid.Uint64().Draw(t, "seed"), 1))
		together, apart := partBook(t), partBook(t)
		defer together.close(t)
		defer apart.close(t)
		for range 1 + rng.IntN(3) {
			var parts []partPlan
			for range 1 + rng.IntN(6) {
				parts = append(parts, planPart(rng, together, len(parts)))
			}
			if err := together.Write(background, func(tx *Tx) error { return runParts(tx, parts) }); err != nil {
				t.Fatal(err)
			}
			for _, p := range parts {
				if p.fails == "" {
					if err := apart.Write(background, func(tx *Tx) error { return p.do(tx) }); err != nil {
						t.Fatal(err)
					}
				}
			}
			together.same(t, apart)
		}
	})
}

type bookOfParts struct {
	*Store
	next int
}

func partBook(t *rapid.T) *bookOfParts {
	s, err := create(background, partPath(t), quick())
	if err != nil {
		t.Fatal(err)
	}
	return &bookOfParts{Store: s}
}

func (b *bookOfParts) close(t *rapid.T) {
	if err := b.Close(); err != nil {
		t.Error(err)
	}
}

func (b *bookOfParts) same(t *rapid.T, other *bookOfParts) {
	for _, s := range []*bookOfParts{b, other} {
		report, err := s.Verify(background, nil)
		if err != nil || report.FirstFault != "" {
			t.Fatal(report.FirstFault, err)
		}
	}
	a, errA := b.Dump(background)
	o, errO := other.Dump(background)
	if err := errors.Join(errA, errO); err != nil {
		t.Fatal(err)
	}
	for table := range a {
		for i := range max(len(a[table]), len(o[table])) {
			if i >= len(a[table]) || i >= len(o[table]) || a[table][i] != o[table][i] {
				t.Fatalf("%s differs at row %d of %d and %d: %v and %v", table, i, len(a[table]), len(o[table]), a[table][i:], o[table][i:])
			}
		}
	}
}

// partPlan is what a part does: entries with rows, and perhaps an end, a value beside the book, and more
// entries after that, before it fails.
type partPlan struct {
	entries, more  []int
	ends           int64
	meta, rowsMany bool
	fails          string // how: error, panic, clash
}

func planPart(rng *rand.Rand, b *bookOfParts, no int) partPlan {
	p := partPlan{meta: rng.IntN(3) == 0, rowsMany: rng.IntN(8) == 0}
	take := func(n int) (out []int) {
		for range n {
			out = append(out, b.next)
			b.next++
		}
		return out
	}
	p.entries, p.more = take(1+rng.IntN(3)), take(rng.IntN(3))
	if rng.IntN(3) == 0 {
		p.ends = 1 + int64(rng.IntN(3))
	}
	if rng.IntN(2) == 0 && no > 0 {
		p.fails = []string{"error", "panic", "clash"}[rng.IntN(3)]
	}
	return p
}

func runParts(tx *Tx, parts []partPlan) error {
	for _, p := range parts {
		ended, err, broken := tx.Part(func() error { return p.do(tx) })
		switch {
		case broken != nil:
			return broken
		case (err != nil) != (p.fails != ""):
			return fmt.Errorf("%+v: %w", p, err)
		case err == nil && ended != (p.ends > 0):
			return fmt.Errorf("%+v says that it ended rows: %v", p, ended)
		}
	}
	return nil
}

func (p partPlan) do(tx *Tx) error {
	if err := p.write(tx, p.entries); err != nil {
		return err
	}
	if e, ok, err := tx.EntryByID(entry(p.entries[0]).ID); err != nil || !ok {
		return fmt.Errorf("entry %s is not found: %w", e.ID, err)
	}
	if p.ends > 0 {
		size, err := tx.Size()
		if err != nil {
			return err
		}
		if err := tx.End(p.ends-1, size-1); err != nil && size > 1 {
			return err
		}
	}
	if p.meta {
		if err := tx.SetMeta("part", fmt.Sprint(p.entries)); err != nil {
			return err
		}
	}
	if err := p.write(tx, p.more); err != nil {
		return err
	}
	switch p.fails {
	case "error":
		return ErrMissing
	case "panic":
		panic("a part")
	case "clash":
		_, err := tx.Append([]Entry{entry(p.entries[0])}, nil)
		if err == nil {
			err = tx.settle()
		}
		return err
	}
	return nil
}

func (p partPlan) write(tx *Tx, entries []int) error {
	for _, n := range entries {
		e := entry(n)
		e.RecordedAt = began
		first, err := tx.Append([]Entry{e}, nil)
		if err != nil {
			return err
		}
		rows := 1
		if p.rowsMany {
			rows = batchRows + 10
		}
		for range rows {
			if err := tx.Put(StintRow{Line: Line{Seq: first, ID: e.ID}, Site: "S", Kind: "person", Code: fmt.Sprint(n)}); err != nil {
				return err
			}
		}
	}
	return nil
}

// partPath is where no book is yet.
func partPath(t *rapid.T) string {
	dir, err := os.MkdirTemp("", "parts")
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := os.RemoveAll(dir); err != nil {
			t.Error(err)
		}
	})
	return filepath.Join(dir, "site.book")
}
