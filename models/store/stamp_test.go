package store

import "testing"

// A stamp changes with every commit, of this or another open book over the same file, in any table; not
// by reading, nor by what is rolled back.
func TestStampTellsOfEveryCommit(t *testing.T) {
	path := somewhere(t)
	s, err := create(background, path, quick())
	if err != nil {
		t.Fatal(err)
	}
	other, err := open(background, path, quick())
	if err != nil {
		t.Fatal(err)
	}
	stamp := func() string {
		t.Helper()
		now, err := s.Stamp(background)
		if err != nil {
			t.Fatal(err)
		}
		return now
	}
	last := stamp()
	for i, write := range []func() error{
		func() error { return s.Write(background, func(tx *Tx) error { return tx.SetMeta("a", "1") }) },
		func() error { return other.Write(background, func(tx *Tx) error { return tx.SetMeta("a", "2") }) },
		func() error {
			return other.Write(background, func(tx *Tx) error { return tx.PutAttempt(AttemptRow{Key: "k", Last: began}) })
		},
	} {
		if err := write(); err != nil {
			t.Fatal(err)
		}
		now := stamp()
		if now == last {
			t.Errorf("write %d left the stamp at %s", i, now)
		}
		last = now
	}
	if _, err := other.Size(background); err != nil {
		t.Fatal(err)
	}
	failed := other.Write(background, func(tx *Tx) error {
		if err := tx.SetMeta("a", "3"); err != nil {
			return err
		}
		return ErrMissing
	})
	if failed == nil {
		t.Fatal("nothing failed")
	}
	// What others do on the same server may move the stamp of a book that stayed as it was.
	if now := stamp(); now != last && s.set.address == "" {
		t.Errorf("reading and rolling back moved the stamp from %s to %s", last, now)
	}
	if err := other.Close(); err != nil {
		t.Fatal(err)
	}
	if err := s.Close(); err != nil {
		t.Fatal(err)
	}
}

func BenchmarkStamp(b *testing.B) {
	s := benchBook(b)
	for b.Loop() {
		if _, err := s.Stamp(background); err != nil {
			b.Fatal(err)
		}
	}
}
