package store

import (
	"fmt"
	"testing"
)

// The benchmarks write to the folder for temporary files; on a disk the single writes are as slow
// as its sync is.

func benchBook(b *testing.B) *Store {
	s, err := create(background, b.TempDir()+"/site.book", usual())
	if err != nil {
		b.Fatal(err)
	}
	b.Cleanup(func() {
		err := s.Close()
		if err != nil {
			b.Error(err)
		}
	})
	return s
}

// benchEntries are n entries as an import has them, each with one erasable value.
func benchEntries(from, n int) ([]Entry, [][]Veil) {
	all, veils := make([]Entry, n), make([][]Veil, n)
	for i := range all {
		e, v := veiledEntry((from+i)%200, "P1", "Ada Example")
		e.ID = fmt.Sprintf("018f2c3e-0000-7000-8000-%012d", from+i)
		e.RecordedAt, e.Batch = began, "018f2c3e-0000-7000-8000-ffffffffffff"
		all[i], veils[i] = e, v
	}
	return all, veils
}

// An import: one transaction, one append, one projected row for each entry.
func BenchmarkAppendInBatches(b *testing.B) {
	const batch = 20000
	s := benchBook(b)
	for i := 0; b.Loop(); i++ {
		all, veils := benchEntries(i*batch, batch)
		err := s.Write(background, func(tx *Tx) error {
			first, err := tx.Append(all, veils)
			if err != nil {
				return err
			}
			for j := range all {
				err = tx.Put(RecordRow{Line: Line{Seq: first + int64(j), ID: all[j].ID}, What: "training/level-2"})
				if err != nil {
					return err
				}
			}
			return nil
		})
		if err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(batch*b.N)/b.Elapsed().Seconds(), "entries/s")
}

// A form: one acknowledged write each, and what it changed read back.
func BenchmarkAppendOneByOne(b *testing.B) {
	s := benchBook(b)
	all, veils := benchEntries(0, 20000)
	err := s.Write(background, func(tx *Tx) error { _, err := tx.Append(all, veils); return err })
	if err != nil {
		b.Fatal(err)
	}
	for i := 20000; b.Loop(); i++ {
		one, veils := benchEntries(i, 1)
		err := s.Write(background, func(tx *Tx) error {
			seq, err := tx.Append(one, veils)
			if err != nil {
				return err
			}
			err = tx.Put(RecordRow{Line: Line{Seq: seq}, What: "training/level-2"})
			if err != nil {
				return err
			}
			_, err = tx.Changed(seq - 1)
			return err
		})
		if err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(b.N)/b.Elapsed().Seconds(), "entries/s")
}

// What a server reads when it starts.
func BenchmarkChangedAll(b *testing.B) {
	const n = 50000
	s := benchBook(b)
	all, veils := benchEntries(0, n)
	err := s.Write(background, func(tx *Tx) error {
		_, err := tx.Append(all, veils)
		for j := range all {
			if err == nil {
				err = tx.Put(RecordRow{Line: Line{Seq: int64(j), ID: all[j].ID}, What: "training/level-2"})
			}
		}
		return err
	})
	if err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		err := s.Read(background, func(tx *Tx) error { _, err := tx.Changed(-1); return err })
		if err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(n*b.N)/b.Elapsed().Seconds(), "rows/s")
}
