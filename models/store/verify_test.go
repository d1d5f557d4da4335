package store

import (
	"errors"
	"fmt"
	"slices"
	"strings"
	"testing"

	"gorm.io/gorm"

	"lodebook/models/ledger"
)

// veiledBook has n entries, each with an erasable value.
func veiledBook(t *testing.T, n int) *Store { return withVeils(t, newBook(t), n) }

func veiledFile(t *testing.T, n int) *Store { return withVeils(t, newFile(t), n) }

func withVeils(t *testing.T, s *Store, n int) *Store {
	t.Helper()
	write(t, s, func(tx *Tx) error {
		var all []Entry
		var veils [][]Veil
		for i := range n {
			e, v := veiledEntry(i, fmt.Sprint("P", i), fmt.Sprint("name ", i))
			all, veils = append(all, e), append(veils, v)
		}
		_, err := tx.Append(all, veils)
		must(t, err)
		return tx.Put(SiteRow{Line: Line{Seq: 2}})
	})
	return s
}

func TestVerifyReportsAWholeBook(t *testing.T) {
	const n = 2*batchRows + 3
	s := filled(t, n)
	var told []int64
	called := 0
	report, err := s.Verify(background,
		func(done, total int64) {
			if total != n {
				t.Errorf("progress is of %d", total)
			}
			told = append(told, done)
		},
		func(e Entry, _ []Veil) error { called++; return nil })
	must(t, err)
	_, head := root(t, s)
	if report != (Report{Entries: n, Checked: n, Head: head}) {
		t.Errorf("reported %+v", report)
	}
	if !slices.Equal(told, []int64{batchRows, 2 * batchRows, n}) || called != n {
		t.Errorf("progress was told as %v, and the check was called %d times", told, called)
	}
	nothing := sound(t, newBook(t))
	empty, err := ledger.Root(0, nil)
	if err != nil || nothing.Head != empty {
		t.Errorf("an empty book has the head %s", ledger.Hex(nothing.Head))
	}
}

func TestVerifyFindsTampering(t *testing.T) {
	for name, c := range map[string]struct{ statement, words string }{
		"a byte of an entry":      {"UPDATE entries SET bytes = CAST(replace(CAST(bytes AS TEXT), 'P3', 'P4') AS BLOB) WHERE seq = 3", "Entry 3 is not what was written"},
		"no JSON":                 {"UPDATE entries SET bytes = x'00' WHERE seq = 3", "Entry 3 is not JSON"},
		"a leaf's hash":           {"UPDATE tree SET hash = zeroblob(32) WHERE idx = 4", "Entry 3 is not what was written"},
		"a node's hash":           {"UPDATE tree SET hash = zeroblob(32) WHERE idx = 6", "Entry 3 is not what was written: its bytes do not give hash 6"},
		"a hash is missing":       {"DELETE FROM tree WHERE idx = 4", "Hash 4 of the tree is missing; it belongs to entry 3"},
		"a hash too many":         {"INSERT INTO tree VALUES (999, zeroblob(32))", "1 hashes more than 9 entries need"},
		"an entry is missing":     {"DELETE FROM veils WHERE seq = 3; DELETE FROM entries WHERE seq = 3", "Entry 3 is missing"},
		"the last is missing":     {"DELETE FROM veils WHERE seq = 8; DELETE FROM entries WHERE seq = 8", "entries are missing at the end"},
		"the first has moved":     {"DELETE FROM veils WHERE seq = 0; UPDATE entries SET seq = -1 WHERE seq = 0", "Entry 0 is missing"},
		"two have changed places": {"UPDATE entries SET bytes = (SELECT bytes FROM entries WHERE seq = 4), id = 'x' WHERE seq = 3", "of entry 3 is not the one"},
		"a time":                  {"UPDATE entries SET recorded_at = '2000-01-01T00:00:00.000000Z' WHERE seq = 3", "Entry 3 is recorded at 2000"},
		"a value":                 {"UPDATE veils SET value = CAST('name 4' AS BLOB) WHERE seq = 3", `The value at "name" of entry 3 is not the one`},
		"a salt":                  {"UPDATE veils SET salt = zeroblob(32) WHERE seq = 3", `The value at "name" of entry 3 is not the one`},
		"a path":                  {"UPDATE veils SET path = 'nom' WHERE seq = 3", `Entry 3 has a value at "nom" that it did not commit to`},
		"a value is missing":      {"DELETE FROM veils WHERE seq = 3", `The value at "name" of entry 3 is missing`},
		"a row of nothing":        {"PRAGMA foreign_keys = OFF; UPDATE sites SET seq = 77", "A row of sites belongs to an entry that is not in the book"},
		"an index that disagrees": {"PRAGMA writable_schema = ON; UPDATE sqlite_master SET sql = replace(sql, '(kind, seq)', '(actor, seq)') WHERE name = 'entries_kind'", "file is damaged"},
	} {
		t.Run(name, func(t *testing.T) {
			s := veiledFile(t, 9)
			db, err := s.w.DB()
			must(t, err)
			_, err = db.ExecContext(background, c.statement)
			must(t, err)
			report, err := reopenedAnyway(t, s.Path()).Verify(background, nil)
			must(t, err)
			if !strings.Contains(report.FirstFault, c.words) {
				t.Errorf("found %q, want %q", report.FirstFault, c.words)
			}
		})
	}
}

// reopenedAnyway opens a book without the check of every opening, which finds some faults before
// Verify can.
func reopenedAnyway(t *testing.T, path string) *Store {
	t.Helper()
	s, err := connectFile(background, path, quick(), func(*gorm.DB) error { return nil })
	must(t, err)
	t.Cleanup(func() { must(t, s.Close()) })
	return s
}

func TestVerifyCallsTheCallersChecks(t *testing.T) {
	s := veiledBook(t, 9)
	report, err := s.Verify(background, nil,
		func(e Entry, veils []Veil) error {
			if string(veils[0].Value) != fmt.Sprint("name ", e.Seq) {
				t.Errorf("entry %d came with %+v", e.Seq, veils)
			}
			return nil
		},
		func(e Entry, _ []Veil) error {
			if e.Seq == 5 {
				return errors.New("the columns say otherwise")
			}
			return nil
		})
	must(t, err)
	if report.FirstFault != "Entry 5: the columns say otherwise." {
		t.Errorf("found %q", report.FirstFault)
	}
}

// A bit that the disk turned is told as damage and not as an error.
func TestVerifyFindsDamage(t *testing.T) {
	s := filledFile(t, 2000)
	must(t, s.Scrub(background)) // everything is in the file
	flip(t, s.Path(), 40*4096)
	report, err := reopened(t, address(s)).Verify(background, nil)
	if err != nil || report.FirstFault == "" {
		t.Errorf("found %+v, %v", report, err)
	}
}

// Paths of values are the names on the way to them in the entry's body, joined by dots, whatever is
// in the names; and text that only looks like a commitment is none.
func TestCommitmentsAreFoundByPath(t *testing.T) {
	c := strings.Repeat("0123456789abcdef", 4)
	got, err := commitmentsOf(fmt.Appendf(nil, `{"a":"veil:%[1]s","body":{"name":"veil:%[1]s","facts":{"em.ployer":"veil:%[1]s","x":1},"list":[1,{"y":"veil:%[1]s"}],
		"short":"veil:12","long":"veil:%[1]s0","upper":"veil:%[2]s","in":"a veil:%[1]s"}}`, c, strings.ToUpper(c)))
	must(t, err)
	var paths []string
	for p, v := range got {
		if v != c {
			t.Errorf("at %s is %q", p, v)
		}
		paths = append(paths, p)
	}
	slices.Sort(paths)
	if want := []string{"facts.em.ployer", "list.1.y", "name"}; !slices.Equal(paths, want) {
		t.Errorf("%v, want %v", paths, want)
	}
}
