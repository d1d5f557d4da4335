package store

import (
	"errors"
	"fmt"
	"reflect"
	"slices"
	"testing"
	"time"

	"lodebook/models/ledger"
)

func TestAppendNumbersAndKeeps(t *testing.T) {
	s := newBook(t)
	plain := entry(0)
	veiled, veils := veiledEntry(1, "P1", "Ada Example")
	veiled.Site, veiled.Batch, veiled.Supersedes, veiled.Actor, veiled.V = "", "batch-1", plain.ID, "operator", 3
	entries := []Entry{plain, veiled}
	write(t, s, func(tx *Tx) error {
		first, err := tx.Append(entries, [][]Veil{nil, veils})
		if first != 0 || entries[1].Seq != 1 || veils[0].Seq != 1 {
			t.Errorf("numbered from %d: %d, %d", first, entries[1].Seq, veils[0].Seq)
		}
		got, err2 := tx.EntryAt(1)
		if !reflect.DeepEqual(got, entries[1]) {
			t.Errorf("in the same transaction: %+v, want %+v", got, entries[1])
		}
		return errors.Join(err, err2)
	})
	read(t, s, func(tx *Tx) error {
		got, ok, err := tx.EntryByID(veiled.ID)
		must(t, err)
		if !ok || !reflect.DeepEqual(got, entries[1]) {
			t.Errorf("%+v, want %+v", got, entries[1])
		}
		by, ok, err := tx.SupersededBy(plain.ID)
		must(t, err)
		if !ok || by.ID != veiled.ID {
			t.Errorf("superseded by %q, %v", by.ID, ok)
		}
		kept, err := tx.Veils(0, 1)
		if len(kept) != 1 || !reflect.DeepEqual(kept[1], veils) {
			t.Errorf("%+v, want %+v", kept, veils)
		}
		return err
	})
}

func TestWhatIsNotThereIsNotFound(t *testing.T) {
	s := filled(t, 2)
	read(t, s, func(tx *Tx) error {
		_, byID, err1 := tx.EntryByID("nobody")
		_, superseded, err2 := tx.SupersededBy(entry(0).ID)
		_, nothing, err3 := tx.SupersededBy("")
		if byID || superseded || nothing {
			t.Error("found what is not there")
		}
		_, err := tx.EntryAt(2)
		if !errors.Is(err, ErrMissing) {
			t.Errorf("entry 2: %v", err)
		}
		return errors.Join(err1, err2, err3)
	})
	empty := newBook(t)
	read(t, empty, func(tx *Tx) error {
		_, ok, err := tx.LastRecordedAt()
		if ok {
			t.Error("an empty book has a last entry")
		}
		seq, err2 := tx.SeqAt(began)
		if seq != -1 {
			t.Errorf("an empty book was at %d", seq)
		}
		return errors.Join(err, err2)
	})
}

func TestAppendRefuses(t *testing.T) {
	s := filled(t, 3)
	with := func(change func(*Entry)) Entry {
		e := entry(3)
		change(&e)
		return e
	}
	_, short := veiledEntry(3, "P1", "Ada Example")
	short[0].Salt = short[0].Salt[:8]
	for name, c := range map[string]struct {
		e     Entry
		veils []Veil
		want  error
	}{
		"an identifier twice":      {with(func(e *Entry) { e.ID = entry(1).ID }), nil, ErrExists},
		"no identifier":            {with(func(e *Entry) { e.ID = "" }), nil, nil},
		"no kind":                  {with(func(e *Entry) { e.Kind = "" }), nil, nil},
		"no bytes":                 {with(func(e *Entry) { e.Bytes = nil }), nil, nil},
		"a time before the last's": {with(func(e *Entry) { e.RecordedAt = began }), nil, nil},
		"a salt that is short":     {entry(3), short, nil},
		"a value without a path":   {entry(3), []Veil{{Salt: make([]byte, ledger.SaltSize)}}, nil},
		"a value that is erased":   {entry(3), []Veil{{Path: "a", Salt: make([]byte, ledger.SaltSize), Erased: true}}, nil},
	} {
		err := s.Write(background, func(tx *Tx) error {
			_, err := tx.Append([]Entry{c.e}, [][]Veil{c.veils})
			return err
		})
		if err == nil || c.want != nil && !errors.Is(err, c.want) {
			t.Errorf("%s: %v", name, err)
		}
	}
	if r := sound(t, s); r.Entries != 3 {
		t.Errorf("%d entries are there", r.Entries)
	}
}

// A caller who passes over an error of Append or Put keeps nothing of the transaction: the tree would
// have hashes of entries that are not there.
func TestAnErrorThatIsPassedOverKeepsNothing(t *testing.T) {
	s := filled(t, 3)
	for name, fn := range map[string]func(*Tx) error{
		"append": func(tx *Tx) error { _, err := tx.Append([]Entry{entry(3), entry(1)}, nil); return err },
		"an entry without bytes": func(tx *Tx) error {
			e := entry(4)
			e.Bytes = nil
			_, err := tx.Append([]Entry{entry(3), e}, nil)
			return err
		},
		"put": func(tx *Tx) error { return tx.Put(make([]SiteRow, batchRows-1), []SiteRow{{Line: Line{Seq: 9}}}) },
	} {
		err := s.Write(background, func(tx *Tx) error {
			if fn(tx) == nil {
				t.Errorf("%s: gave no error", name)
			}
			_, err := tx.Append([]Entry{entry(5)}, nil)
			return err
		})
		if err == nil {
			t.Errorf("%s: the transaction was kept", name)
		}
	}
	if r := sound(t, s); r.Entries != 3 {
		t.Errorf("%d entries are there", r.Entries)
	}
}

func TestAnEntryIsSupersededOnce(t *testing.T) {
	s := filled(t, 1)
	for i := 1; i <= 2; i++ {
		e := entry(i)
		e.Supersedes = entry(0).ID
		err := s.Write(background, func(tx *Tx) error { _, err := tx.Append([]Entry{e}, nil); return err })
		if i == 1 && err != nil || i == 2 && !errors.Is(err, ErrSuperseded) {
			t.Errorf("superseding for the %d. time: %v", i, err)
		}
	}
}

// However the entries are cut into transactions and calls, the tree is that of RFC 6962 over all of
// them, and every entry can be proved.
func TestTheTreeIsOneHoweverItGrew(t *testing.T) {
	const n = 1000
	want := ledger.NewBuilder(0, nil)
	var stored hashList
	for i := range n {
		h, err := want.Add(ledger.LeafHash(entry(i).Bytes))
		must(t, err)
		stored = append(stored, h...)
	}
	head, err := ledger.Root(n, stored)
	must(t, err)
	for _, cut := range []int{1, 7, 400, 401, n} {
		s := newBook(t)
		write(t, s, func(tx *Tx) error {
			_, err := tx.Append(entriesUpTo(0, cut), nil)
			return err
		})
		write(t, s, func(tx *Tx) error {
			for from := cut; from < n; from += cut {
				_, err := tx.Append(entriesUpTo(from, min(n, from+cut)), nil)
				must(t, err)
			}
			return nil
		})
		if size, got := root(t, s); size != n || got != head {
			t.Errorf("cut by %d: %d entries and head %s, want %s", cut, size, ledger.Hex(got), ledger.Hex(head))
		}
		read(t, s, func(tx *Tx) error {
			proof, err := ledger.ProveInclusion(n, 500, tx)
			must(t, err)
			return ledger.CheckInclusion(proof, n, head, 500, ledger.LeafHash(entry(500).Bytes))
		})
	}
}

type hashList []ledger.Hash

func (l hashList) ReadHashes(indexes []int64) ([]ledger.Hash, error) {
	out := make([]ledger.Hash, len(indexes))
	for i, x := range indexes {
		out[i] = l[x]
	}
	return out, nil
}

func TestEntryIDsOfMany(t *testing.T) {
	s := filled(t, 950)
	var ids []string
	for i := range 1900 {
		ids = append(ids, entry(i).ID)
	}
	read(t, s, func(tx *Tx) error {
		found, err := tx.EntryIDs(ids)
		if len(found) != 950 || found[entry(949).ID] != 949 {
			t.Errorf("%d were found, the last at %d", len(found), found[entry(949).ID])
		}
		return err
	})
}

func TestEntriesAreFilteredNewestFirst(t *testing.T) {
	s := newBook(t)
	all := entriesUpTo(0, 60)
	for i := range all {
		all[i].Kind = []string{"record", "person", "event"}[i%3]
		all[i].Site = []string{"TERN", ""}[i%2]
		all[i].Actor = fmt.Sprintf("account-%d", i%5)
		if i >= 30 && i < 40 {
			all[i].Batch = "batch-1"
		}
	}
	write(t, s, func(tx *Tx) error { _, err := tx.Append(all, nil); return err })
	for name, c := range map[string]struct {
		f    EntryFilter
		keep func(i int, e Entry) bool
	}{
		"all":       {EntryFilter{}, func(int, Entry) bool { return true }},
		"a kind":    {EntryFilter{Kinds: []string{"event"}}, func(i int, e Entry) bool { return e.Kind == "event" }},
		"two kinds": {EntryFilter{Kinds: []string{"event", "person"}}, func(i int, e Entry) bool { return e.Kind != "record" }},
		"a site":    {EntryFilter{Site: "TERN"}, func(i int, e Entry) bool { return e.Site == "TERN" }},
		"an import": {EntryFilter{Batch: "batch-1"}, func(i int, e Entry) bool { return e.Batch != "" }},
		"an actor":  {EntryFilter{Actor: "account-2"}, func(i int, e Entry) bool { return i%5 == 2 }},
		"a page":    {EntryFilter{Before: 50, Limit: 10}, func(i int, e Entry) bool { return i >= 40 && i < 50 }},
		"a page of two kinds": {EntryFilter{Before: 50, Limit: 4, Kinds: []string{"event", "person"}},
			func(i int, e Entry) bool { return i >= 44 && i < 50 && e.Kind != "record" }},
		"a time": {EntryFilter{From: began.Add(10 * time.Second), To: began.Add(20 * time.Second)},
			func(i int, e Entry) bool { return i >= 10 && i < 20 }},
		"everything at once": {EntryFilter{Kinds: []string{"record", "none"}, Site: "TERN", Batch: "batch-1", Actor: "account-1", Before: 59, From: began, To: began.Add(time.Hour), Limit: 9},
			func(i int, e Entry) bool { return i == 36 }},
	} {
		var want []string
		for i, e := range slices.Backward(all) {
			if c.keep(i, e) {
				want = append(want, e.ID)
			}
		}
		read(t, s, func(tx *Tx) error {
			entries, err := tx.Entries(c.f)
			var got []string
			for _, e := range entries {
				got = append(got, e.ID)
			}
			if !slices.Equal(got, want) {
				t.Errorf("%s: %v, want %v", name, got, want)
			}
			return err
		})
	}
}

func TestEachEntryComesInOrderWithItsValues(t *testing.T) {
	const n = 2*batchRows + 50
	s := newBook(t)
	write(t, s, func(tx *Tx) error {
		var all []Entry
		var veils [][]Veil
		for i := range n {
			e, v := veiledEntry(i%200, "P1", fmt.Sprint("name ", i))
			e.ID = fmt.Sprint("id-", i)
			e.RecordedAt = began
			if i%2 == 0 {
				v = nil
			}
			all, veils = append(all, e), append(veils, v)
		}
		_, err := tx.Append(all, veils)
		return err
	})
	for _, from := range []int64{0, 1, batchRows, n - 1, n} {
		next := from
		read(t, s, func(tx *Tx) error {
			return tx.EachEntry(from, func(e Entry, veils []Veil) error {
				if e.Seq != next || e.ID != fmt.Sprint("id-", next) {
					t.Fatalf("entry %d came where %d was due", e.Seq, next)
				}
				if len(veils) != int(next%2) || len(veils) == 1 && string(veils[0].Value) != fmt.Sprint("name ", next) {
					t.Fatalf("entry %d came with %+v", next, veils)
				}
				next++
				return nil
			})
		})
		if next != n {
			t.Errorf("from %d on, it ended before %d", from, next)
		}
	}
	stop := errors.New("stop")
	err := s.Read(background, func(tx *Tx) error {
		return tx.EachEntry(0, func(Entry, []Veil) error { return stop })
	})
	if !errors.Is(err, stop) {
		t.Errorf("it did not stop: %v", err)
	}
}

func TestAMomentIsASequenceNumber(t *testing.T) {
	s := newBook(t)
	at := []time.Duration{0, 1, 1, 1, 5, 9}
	var all []Entry
	for i, d := range at {
		e := entry(i)
		e.RecordedAt = began.Add(d * time.Microsecond)
		all = append(all, e)
	}
	write(t, s, func(tx *Tx) error { _, err := tx.Append(all, nil); return err })
	zone := time.FixedZone("", -3600)
	read(t, s, func(tx *Tx) error {
		for d, want := range map[time.Duration]int64{-1: -1, 0: 0, 1: 3, 2: 3, 4: 3, 5: 4, 8: 4, 9: 5, 1e6: 5} {
			seq, err := tx.SeqAt(began.Add(d * time.Microsecond).In(zone))
			must(t, err)
			if seq != want {
				t.Errorf("at %d microseconds the book was at %d, want %d", d, seq, want)
			}
		}
		last, ok, err := tx.LastRecordedAt()
		if !ok || !last.Equal(began.Add(9*time.Microsecond)) {
			t.Errorf("last recorded at %v, %v", last, ok)
		}
		return err
	})
}

func TestErasedValuesAreGone(t *testing.T) {
	s := newBook(t)
	write(t, s, func(tx *Tx) error {
		for i, p := range []string{"P1", "P2", "P1", ""} {
			e, v := veiledEntry(i, p, "name of "+p)
			_, err := tx.Append([]Entry{e}, [][]Veil{v})
			must(t, err)
		}
		return nil
	})
	write(t, s, func(tx *Tx) error {
		veils, err := tx.VeilsOfPerson("P1")
		must(t, err)
		if len(veils) != 2 {
			t.Errorf("P1 has %d values", len(veils))
		}
		nobody, err := tx.VeilsOfPerson("")
		must(t, err)
		if len(nobody) != 0 {
			t.Error("values about nobody in particular are somebody's")
		}
		return tx.EraseVeils(veils)
	})
	read(t, s, func(tx *Tx) error {
		veils, err := tx.Veils(0, 1, 2, 3)
		for seq, gone := range map[int64]bool{0: true, 1: false, 2: true, 3: false} {
			v := veils[seq][0]
			if v.Erased != gone || (v.Salt == nil) != gone || (v.Value == nil) != gone {
				t.Errorf("the value of entry %d: %+v", seq, v)
			}
		}
		return err
	})
	if r := sound(t, s); r.Erased != 2 {
		t.Errorf("%d values are erased", r.Erased)
	}
	err := s.Write(background, func(tx *Tx) error { return tx.EraseVeils([]Veil{{Seq: 1, Path: "nowhere"}}) })
	if !errors.Is(err, ErrMissing) {
		t.Errorf("a value that is not there was erased (%v)", err)
	}
}

func TestAnEmptyValueIsAValue(t *testing.T) {
	s := newBook(t)
	e, v := veiledEntry(0, "P1", "")
	v[0].Value = nil
	write(t, s, func(tx *Tx) error { _, err := tx.Append([]Entry{e}, [][]Veil{v}); return err })
	if r := sound(t, s); r.Erased != 0 {
		t.Error("an empty value counts as erased")
	}
}

func TestTheHighestVersionOfEachKind(t *testing.T) {
	s := newBook(t)
	all := entriesUpTo(0, 9)
	for i := range all {
		all[i].Kind = []string{"record", "person", "event"}[i%3]
		all[i].V = 1 + (9-i)/3 // the older ones have the higher version
	}
	ask := func(after int64, want string) {
		t.Helper()
		read(t, s, func(tx *Tx) error {
			kinds, err := tx.KindVersions(after)
			if got := fmt.Sprint(kinds); got != want {
				t.Errorf("after %d: %s, should be %s", after, got, want)
			}
			return err
		})
	}
	ask(-1, "map[]")
	write(t, s, func(tx *Tx) error { _, err := tx.Append(all, nil); return err })
	ask(-1, "map[event:3 person:3 record:4]")
	ask(3, "map[event:2 person:2 record:2]")
	ask(6, "map[event:1 person:1]")
	ask(8, "map[]")
}
