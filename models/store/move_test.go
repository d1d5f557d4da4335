package store

import (
	"errors"
	"fmt"
	"path/filepath"
	"testing"

	"lodebook/migrations/scratch"
	"lodebook/models/civil"
)

// lived is a book with entries, values of which some are erased, rows, and what runs beside the book.
func lived(t *testing.T, s *Store) *Store {
	t.Helper()
	write(t, s, func(tx *Tx) error {
		must(t, tx.SetMeta(MetaBookID, "a-book"))
		for i := range 3*moveRows + 7 {
			person := fmt.Sprint("P", i%5)
			e, v := veiledEntry(i%200, person, "Ada Éxample "+person)
			e.ID, e.RecordedAt = fmt.Sprint("id-", i), entry(i).RecordedAt
			seq, err := tx.Append([]Entry{e}, [][]Veil{v})
			must(t, err)
			until := civil.Of(2027, 3, i%28+1)
			must(t, tx.Put(PersonRow{Line: Line{Seq: seq, ID: e.ID}, Code: person, Name: "Ada Éxample"},
				RecordRow{Line: Line{Seq: seq, ID: e.ID}, Order: int64(i), What: "training/level-2", Passed: i%2 == 0, Until: &until}))
		}
		must(t, tx.PutCredential(CredentialRow{"a-1", "hash", began}))
		must(t, tx.PutFlag(FlagRow{Site: "TERN", Item: "X", Kind: "person", Code: "P1", Standing: "lapsed", Opened: civil.Of(2026, 3, 1)}))
		_, err := tx.ClaimRun("morning", "TERN", began, began)
		return err
	})
	write(t, s, func(tx *Tx) error {
		veils, err := tx.VeilsOfPerson("P1")
		must(t, err)
		return errors.Join(tx.EraseVeils(veils), tx.BlankPerson("P1", 300), tx.End(4, 9))
	})
	return s
}

// everything is all that a move takes along, as text by table.
func everything(t *testing.T, s *Store) map[string][]string {
	t.Helper()
	all, err := s.Dump(background)
	must(t, err)
	read(t, s, func(tx *Tx) error {
		for _, m := range moved {
			if m[0] == "" {
				continue
			}
			all[m[0]], err = tx.dump(m[0])
			must(t, err)
		}
		return nil
	})
	return all
}

func sameBooks(t *testing.T, one, two *Store) {
	t.Helper()
	a, b := everything(t, one), everything(t, two)
	for name := range a {
		if fmt.Sprint(a[name]) != fmt.Sprint(b[name]) {
			t.Errorf("%s: %d rows and %d, or others", name, len(a[name]), len(b[name]))
		}
	}
	if len(a["veils"]) != 307 || len(a["records"]) != 307 || len(a["flags"]) != 1 || len(a["runs"]) != 1 || len(a["credentials"]) != 1 {
		t.Errorf("the books are empty: %d values, %d records", len(a["veils"]), len(a["records"]))
	}
}

// From wherever books are tested to a file, there again, and back: the same book.
func TestMoveThereAndBack(t *testing.T) {
	first := lived(t, newBook(t))
	size, head := root(t, first)
	from := first
	for _, to := range []string{somefile(t), somewhere(t), somefile(t)} {
		told := map[string]int64{}
		report, err := move(background, address(from), to, quick(), func(table string, rows int64) { told[table] = rows })
		must(t, err)
		if report.Entries != size || report.Head != head || report.Erased == 0 {
			t.Errorf("moved %+v", report)
		}
		if told["entries"] != size || told["meta"] != 1 {
			t.Errorf("told of %v", told)
		}
		next := reopened(t, to)
		sameBooks(t, first, next)
		if sound(t, next).Head != head {
			t.Error("it has another head")
		}
		from = next
	}
	write(t, from, func(tx *Tx) error { return appendNow(tx, "goes on") })
	if n, _ := root(t, first); n != size {
		t.Errorf("the source has %d entries now", n)
	}
}

func TestMoveRefuses(t *testing.T) {
	s := lived(t, newBook(t))
	_, err := move(background, address(s), address(newFile(t)), quick(), nil)
	refused(t, err, "exists already")
	_, err = move(background, filepath.Join(t.TempDir(), "none"), somewhere(t), quick(), nil)
	refused(t, err, "There is no book at")
	newer := quick()
	newer.schema, newer.onServer = nextSchema(t), nextSchema(t)
	_, err = move(background, address(s), somefile(t), newer, nil)
	refused(t, err, "open it once with this version")
}

// A book with a fault is not moved, and nothing of it is left; the same place takes a sound one.
func TestAMoveThatFailsLeavesNothing(t *testing.T) {
	s := lived(t, newBook(t))
	good := lived(t, newBook(t))
	write(t, s, func(tx *Tx) error { return tx.db.Exec("DELETE FROM veils WHERE seq = 5").Error })
	to := somewhere(t)
	_, err := move(background, address(s), to, quick(), nil)
	refused(t, err, "is not whole and is not kept")
	if !scratch.OnServer() {
		folderHolds(t, filepath.Dir(to))
	}
	_, err = move(background, address(good), to, quick(), nil)
	must(t, err)
	sameBooks(t, good, reopened(t, to))
}
