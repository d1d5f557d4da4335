package store

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"lodebook/models/ledger"
)

// flip turns one bit of a file.
func flip(t *testing.T, path string, offset int64) {
	t.Helper()
	f, err := os.OpenFile(path, os.O_RDWR, 0)
	must(t, err)
	b := make([]byte, 1)
	_, err = f.ReadAt(b, offset)
	must(t, err)
	b[0] ^= 0x10
	_, err = f.WriteAt(b, offset)
	must(t, errors.Join(err, f.Close()))
}

// folderHolds checks what is in a folder.
func folderHolds(t *testing.T, folder string, want ...string) {
	t.Helper()
	files, err := os.ReadDir(folder)
	must(t, err)
	var got []string
	for _, f := range files {
		got = append(got, f.Name())
	}
	if fmt.Sprint(got) != fmt.Sprint(want) {
		t.Errorf("the folder holds %v, want %v", got, want)
	}
}

func TestBackupWhileWritesGoOn(t *testing.T) {
	s := filled(t, 3000)
	folder := t.TempDir()
	ctx, stop := context.WithCancel(background)
	done := make(chan int)
	go func() {
		n := 0
		for ctx.Err() == nil {
			err := s.Write(background, func(tx *Tx) error { return appendNow(tx, fmt.Sprint("live-", n)) })
			if err != nil {
				t.Error(err)
				break
			}
			n++
		}
		done <- n
	}()
	before, err := s.Size(background)
	must(t, err)
	for i := range 3 {
		must(t, s.Backup(background, filepath.Join(folder, fmt.Sprint(i))))
	}
	after, err := s.Size(background)
	must(t, err)
	stop()
	if n := <-done; n == 0 || after <= before {
		t.Errorf("%d entries were written meanwhile, the size went from %d to %d", n, before, after)
	}
	folderHolds(t, folder, "0", "1", "2")
	for i := range 3 {
		copied := reopened(t, filepath.Join(folder, fmt.Sprint(i)))
		size, head := root(t, copied)
		if size < before || size > after {
			t.Errorf("the copy has %d entries, the book had %d to %d", size, before, after)
		}
		read(t, s, func(tx *Tx) error {
			want, err := ledger.Root(size, tx)
			if want != head {
				t.Error("the copy has another head")
			}
			return err
		})
		sound(t, copied)
	}
}

func TestBackupIsOneFileForItsUserOnly(t *testing.T) {
	s := veiledFile(t, 20)
	folder := t.TempDir()
	out := filepath.Join(folder, "copy")
	must(t, s.Backup(background, out))
	folderHolds(t, folder, "copy")
	info, err := os.Stat(out)
	must(t, err)
	if info.Mode().Perm() != 0o600 {
		t.Errorf("the copy has the mode %v", info.Mode())
	}
	// It can be restored from a medium that cannot be written.
	must(t, errors.Join(os.Chmod(out, 0o400), os.Chmod(folder, 0o500)))
	back := somefile(t)
	must(t, Restore(background, out, back))
	folderHolds(t, filepath.Dir(back), "site.book")
	must(t, os.Chmod(folder, 0o700))
	folderHolds(t, folder, "copy")
	restored := reopened(t, back)
	size, head := root(t, restored)
	if wantSize, want := root(t, s); size != wantSize || head != want {
		t.Errorf("%d entries and head %s came back", size, ledger.Hex(head))
	}
	one, err1 := s.Dump(background)
	two, err2 := restored.Dump(background)
	must(t, errors.Join(err1, err2))
	if fmt.Sprint(one) != fmt.Sprint(two) {
		t.Error("other projections came back")
	}
	write(t, restored, func(tx *Tx) error { return appendNow(tx, "goes on") })
}

func TestCopiesLeaveWhatIsThere(t *testing.T) {
	s := filled(t, 3)
	out := filepath.Join(t.TempDir(), "copy")
	must(t, s.Backup(background, out))
	for name, do := range map[string]func(string) error{
		"backup":  func(to string) error { return s.Backup(background, to) },
		"restore": func(to string) error { return Restore(background, out, to) },
	} {
		for _, end := range []string{"", "-wal"} {
			folder := t.TempDir()
			to := filepath.Join(folder, "mine")
			must(t, os.WriteFile(to+end, []byte("mine"), 0o600))
			refused(t, do(to), "exists already")
			kept, err := os.ReadFile(to + end)
			if err != nil || string(kept) != "mine" {
				t.Errorf("%s: the file is now %q (%v)", name, kept, err)
			}
			folderHolds(t, folder, "mine"+end)
		}
		refused(t, do(filepath.Join(t.TempDir(), "no", "folder")), "cannot be made")
	}
}

// Somebody makes a file of that name while the copy is being made.
func TestACopyOverwritesNobody(t *testing.T) {
	folder := t.TempDir()
	out := filepath.Join(folder, "copy")
	err := withCopy(out, func(temporary string) error {
		return errors.Join(os.WriteFile(temporary, []byte("copy"), 0o600), os.WriteFile(out, []byte("mine"), 0o600))
	})
	refused(t, err, "exists already")
	folderHolds(t, folder, "copy")
	kept, err := os.ReadFile(out)
	if err != nil || string(kept) != "mine" {
		t.Errorf("the file is now %q (%v)", kept, err)
	}
	// A copy that is not all in its file is not kept.
	half := filepath.Join(folder, "half")
	err = withCopy(half, func(temporary string) error { return os.WriteFile(temporary+"-wal", nil, 0o600) })
	refused(t, err, "-wal exists already")
	folderHolds(t, folder, "copy")
}

func TestRestoreRefusesABackupWithAFault(t *testing.T) {
	for name, c := range map[string]struct {
		spoil func(path string) error
		words string
	}{
		"a tampered entry": {func(p string) error {
			return sqliteFile(p, "UPDATE entries SET bytes = CAST('{}' AS BLOB) WHERE seq = 5")
		}, "is not whole and is not kept. Entry 5"},
		"a cut file":     {func(p string) error { return os.Truncate(p, 8*4096) }, "is damaged"},
		"a text file":    {func(p string) error { return os.WriteFile(p, []byte(strings.Repeat("Dear diary,\n", 999)), 0o600) }, "is not a book"},
		"another's file": {func(p string) error { return errors.Join(os.Remove(p), sqliteFile(p, "CREATE TABLE mine (x)")) }, "of another program"},
		"nothing":        {os.Remove, "There is no book at"},
		"a newer schema": {func(p string) error {
			return sqliteFile(p, "INSERT INTO goose_db_version (version_id, is_applied) VALUES (99, 1)")
		}, "by a newer version"},
	} {
		t.Run(name, func(t *testing.T) {
			out := filepath.Join(t.TempDir(), "copy")
			must(t, filledFile(t, 500).Backup(background, out))
			must(t, c.spoil(out))
			to := somefile(t)
			refused(t, restore(background, out, to, quick()), c.words)
			folderHolds(t, filepath.Dir(to))
		})
	}
}

func TestABackupThatFailsLeavesNothing(t *testing.T) {
	s := filledFile(t, 10)
	write(t, s, func(tx *Tx) error { return tx.db.Exec("UPDATE tree SET hash = zeroblob(32) WHERE idx = 0").Error })
	folder := t.TempDir()
	refused(t, s.Backup(background, filepath.Join(folder, "copy")), "is not whole and is not kept. Entry 0")
	ctx, cancel := context.WithCancel(background)
	cancel()
	err := s.Backup(ctx, filepath.Join(folder, "copy"))
	if !errors.Is(err, context.Canceled) {
		t.Errorf("a cancelled backup gave %v", err)
	}
	folderHolds(t, folder)
}

func TestAnOlderBackupIsBroughtUp(t *testing.T) {
	out := filepath.Join(t.TempDir(), "copy")
	must(t, filledFile(t, 50).Backup(background, out))
	newer := quick()
	newer.schema = nextSchema(t)
	to := somefile(t)
	must(t, restore(background, out, to, newer))
	s, err := open(background, to, newer)
	must(t, err)
	var note string
	read(t, s, func(tx *Tx) error {
		return tx.db.Raw("SELECT COALESCE(MAX(note), 'the column is there') FROM meta").Row().Scan(&note)
	})
	must(t, s.Close())
	// The backup itself stays as it was.
	sound(t, reopened(t, out))
}

// No byte of an erased value is left in any file of the book: not in its pages, not in its journal.
func TestScrubLeavesNoByteOfWhatWasErased(t *testing.T) {
	s := newFile(t)
	const secret, other = "Zzyzx Quillfeather", "Somebody Else"
	write(t, s, func(tx *Tx) error {
		for i := range 300 {
			name := other
			person := "P2"
			if i%3 == 0 {
				name, person = secret, "P1"
			}
			e, v := veiledEntry(i%200, person, name)
			e.ID, e.RecordedAt = fmt.Sprint("id-", i), began
			seq, err := tx.Append([]Entry{e}, [][]Veil{v})
			must(t, err)
			must(t, tx.Put(PersonRow{Line: Line{Seq: seq}, Code: person, Name: name, Email: name + "@example.org"}))
		}
		return nil
	})
	if !leaves(t, s.Path(), secret) {
		t.Fatal("the value is not in the file to begin with")
	}
	write(t, s, func(tx *Tx) error {
		veils, err := tx.VeilsOfPerson("P1")
		must(t, err)
		return errors.Join(tx.EraseVeils(veils), tx.BlankPerson("P1", 299))
	})
	must(t, s.Scrub(background))
	if leaves(t, s.Path(), secret) {
		t.Error("the erased value is still in the book's files")
	}
	if !leaves(t, s.Path(), other) {
		t.Error("what was not erased is gone too")
	}
	if r := sound(t, s); r.Erased != 100 || r.Entries != 300 {
		t.Errorf("after the erasure: %+v", r)
	}
}

// leaves tells whether a value is anywhere in the book's files.
func leaves(t *testing.T, path, value string) bool {
	t.Helper()
	for _, end := range []string{"", "-wal", "-shm", "-journal"} {
		b, err := os.ReadFile(path + end)
		if err != nil && !errors.Is(err, os.ErrNotExist) {
			t.Fatal(err)
		}
		if bytes.Contains(b, []byte(value)) {
			return true
		}
	}
	return false
}

func TestScrubSaysWhenItCannot(t *testing.T) {
	s := filledFile(t, 10)
	other := reopened(t, address(s))
	read(t, other, func(tx *Tx) error {
		_, err := tx.Size()
		must(t, err)
		write(t, s, func(w *Tx) error { _, err := w.Append([]Entry{entry(10)}, nil); return err })
		err = s.Scrub(background)
		refused(t, err, "by another program")
		if !errors.Is(err, ErrBusy) {
			t.Errorf("%v is not ErrBusy", err)
		}
		return nil
	})
	must(t, s.Scrub(background))
}

func TestACopyWithAnotherHeadIsRefused(t *testing.T) {
	s := filled(t, 10)
	refused(t, s.agrees(background, "copy", Report{Entries: 5}), "does not have the head of the book")
}
