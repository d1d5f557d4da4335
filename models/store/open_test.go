package store

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"testing/fstest"

	"github.com/mattn/go-sqlite3"

	"lodebook/migrations"
)

// Before 3.51.3 two writers could corrupt a WAL (SQLite's own release notes; taken over from the
// design of this program).
func TestSQLiteIsNewEnough(t *testing.T) {
	version, number, _ := sqlite3.Version()
	if number < 3051003 {
		t.Errorf("SQLite is %s", version)
	}
}

func TestCreateMakesABookForItsUserOnly(t *testing.T) {
	path := somefile(t)
	s, err := Create(background, path)
	must(t, err)
	for _, f := range []string{path, path + "-wal", path + "-shm"} {
		info, err := os.Stat(f)
		must(t, err)
		if info.Mode().Perm() != 0o600 {
			t.Errorf("%s has the mode %v", f, info.Mode())
		}
	}
	write(t, s, func(tx *Tx) error { return tx.SetMeta(MetaBookID, "b-1") })
	must(t, s.Close())
	head := make([]byte, 72)
	f, err := os.Open(path)
	must(t, err)
	_, err = io.ReadFull(f, head)
	must(t, errors.Join(err, f.Close()))
	if string(head[68:]) != "Lodb" {
		t.Errorf("the file is marked %q", head[68:])
	}
	again := reopened(t, path)
	read(t, again, func(tx *Tx) error {
		id, ok, err := tx.Meta(MetaBookID)
		if id != "b-1" || !ok {
			t.Errorf("the book's identity is %q, %v", id, ok)
		}
		_, ok, err2 := tx.Meta("else")
		if ok {
			t.Error("there is a meta value that nobody set")
		}
		return errors.Join(err, err2)
	})
}

func TestCreateLeavesWhatIsThere(t *testing.T) {
	for _, end := range []string{"", "-wal", "-journal"} {
		path := somefile(t)
		must(t, os.WriteFile(path+end, []byte("mine"), 0o600))
		_, err := Create(background, path)
		refused(t, err, "exists already")
		kept, err := os.ReadFile(path + end)
		if err != nil || string(kept) != "mine" {
			t.Errorf("%s is now %q (%v)", path+end, kept, err)
		}
	}
	_, err := Create(background, filepath.Join(t.TempDir(), "no", "such", "site.book"))
	refused(t, err, "cannot be made: no such file or directory")
}

func TestPathsMayHaveAnyName(t *testing.T) {
	for _, name := range []string{"a b.book", "a?mode=memory.book", "a#b.book", "100%41.book", "Überblick.book"} {
		path := filepath.Join(t.TempDir(), name)
		s, err := Create(background, path)
		must(t, err)
		must(t, s.Close())
		_, err = os.Stat(path)
		must(t, err)
		s, err = Open(background, path)
		must(t, err)
		must(t, s.Close())
	}
}

func TestOpenRefuses(t *testing.T) {
	for name, c := range map[string]struct {
		make  func(path string) error
		words string
	}{
		"nothing":           {func(string) error { return nil }, "There is no book at"},
		"a folder":          {func(p string) error { return os.Mkdir(p, 0o700) }, "is a folder"},
		"an empty file":     {func(p string) error { return os.WriteFile(p, nil, 0o600) }, "is empty"},
		"a text file":       {func(p string) error { return os.WriteFile(p, []byte(strings.Repeat("Dear diary,\n", 999)), 0o600) }, "is not a book"},
		"a short file":      {func(p string) error { return os.WriteFile(p, []byte(magic[:9]), 0o600) }, "is not a book"},
		"another's file":    {func(p string) error { return sqliteFile(p, "CREATE TABLE mine (x)") }, "of another program"},
		"a half-made book":  {func(p string) error { return sqliteFile(p, fmt.Sprintf("PRAGMA application_id=%d", applicationID)) }, "broken off"},
		"only a header":     {func(p string) error { return bookOf(p, 100) }, "is damaged"},
		"half a book":       {func(p string) error { return bookOf(p, 8*4096) }, "is damaged"},
		"a page too little": {func(p string) error { return bookOf(p, -4096) }, "is damaged"},
		"part of a page":    {func(p string) error { return bookOf(p, -100) }, "is damaged"},
	} {
		t.Run(name, func(t *testing.T) {
			path := somefile(t)
			must(t, c.make(path))
			s, err := open(background, path, quick())
			if err == nil {
				must(t, s.Close())
			}
			refused(t, err, c.words)
		})
	}
}

func sqliteFile(path, statement string) error {
	db, err := sql.Open("sqlite3", "file:"+path)
	if err != nil {
		return err
	}
	_, err = db.Exec(statement)
	return errors.Join(err, db.Close())
}

// bookOf makes a book and cuts its file to a size, or by one.
func bookOf(path string, size int64) error {
	s, err := create(background, path, quick())
	if err != nil {
		return err
	}
	err = s.Write(background, func(tx *Tx) error {
		_, err := tx.Append(entriesUpTo(0, 2000), nil)
		return err
	})
	err = errors.Join(err, s.Close())
	if err != nil {
		return err
	}
	info, err := os.Stat(path)
	if err != nil {
		return err
	}
	if size < 0 {
		size += info.Size()
	}
	return os.Truncate(path, size)
}

// Looking at another program's database does not change it, not even its kind of journal.
func TestOpenLeavesAnothersFileAlone(t *testing.T) {
	path := somefile(t)
	must(t, sqliteFile(path, "CREATE TABLE mine (x)"))
	before, err := os.ReadFile(path)
	must(t, err)
	_, err = open(background, path, quick())
	refused(t, err, "of another program")
	after, err := os.ReadFile(path)
	must(t, err)
	if string(before) != string(after) {
		t.Error("the file was changed")
	}
}

func TestOpenRefusesATreeThatDoesNotFit(t *testing.T) {
	for _, statement := range []string{
		"DELETE FROM tree WHERE idx = (SELECT MAX(idx) FROM tree)",
		"DELETE FROM tree WHERE idx = 0; DELETE FROM tree WHERE idx = 2",
		"UPDATE tree SET hash = x'00'",
	} {
		s := filledFile(t, 3)
		write(t, s, func(tx *Tx) error { return tx.db.Exec(statement).Error })
		_, err := open(background, s.Path(), quick())
		refused(t, err, "is damaged")
		if !errors.Is(err, ErrCorrupt) {
			t.Errorf("%v is not ErrCorrupt", err)
		}
	}
}

func TestOpenRefusesReadOnly(t *testing.T) {
	for name, c := range map[string]struct {
		file, folder os.FileMode
		words        string
	}{
		"file":   {0o444, 0o777, "cannot be written by this user"},
		"folder": {0o666, 0o555, "folder"},
		"hidden": {0o000, 0o777, "cannot be written by this user"},
	} {
		t.Run(name, func(t *testing.T) {
			folder, err := os.MkdirTemp("", "lodebook-store-")
			must(t, err)
			t.Cleanup(func() { must(t, errors.Join(os.Chmod(folder, 0o700), os.RemoveAll(folder))) })
			path := filepath.Join(folder, "site.book")
			s, err := create(background, path, quick())
			must(t, err)
			must(t, s.Close())
			must(t, errors.Join(os.Chmod(path, c.file), os.Chmod(folder, c.folder)))
			said, err := process(t, "open", path).CombinedOutput()
			if err != nil || !strings.Contains(string(said), c.words) {
				t.Errorf("%s (%v), want %q", said, err, c.words)
			}
		})
	}
}

// helpOpen opens a book as a user who is not root, for whom modes count, and prints the refusal.
func helpOpen(args []string) error {
	if os.Getuid() == 0 {
		err := syscall.Setuid(65534)
		if err != nil {
			return err
		}
	}
	s, err := open(background, args[0], quick())
	var r *Refusal
	if errors.As(err, &r) {
		fmt.Println(r.Reason)
		return nil
	}
	if err != nil {
		return err
	}
	return errors.Join(errors.New("it was opened"), s.Close())
}

func TestOpenRefusesALockedBook(t *testing.T) {
	book := filledFile(t, 3)
	path := book.Path()
	must(t, book.Close())
	// A lock of the write-ahead journal lets readers in, so the other program keeps the whole file.
	s, err := sql.Open("sqlite3", "file:"+path+"?_locking_mode=EXCLUSIVE")
	must(t, err)
	conn, err := s.Conn(background)
	must(t, err)
	_, err = conn.ExecContext(background, "BEGIN EXCLUSIVE")
	must(t, err)
	_, err = open(background, path, quick())
	refused(t, err, "in use by another program")
	if !errors.Is(err, ErrBusy) {
		t.Errorf("%v is not ErrBusy", err)
	}
	_, err = conn.ExecContext(background, "ROLLBACK")
	must(t, errors.Join(err, conn.Close(), s.Close()))
	must(t, reopened(t, path).Close())
}

// Beside a program that writes, a book can be opened and read; writing waits, and then says why not.
func TestAWriterKeepsNoReaderOut(t *testing.T) {
	path := filledFile(t, 3).Path()
	other, err := sql.Open("sqlite3", "file:"+path)
	must(t, err)
	conn, err := other.Conn(background)
	must(t, err)
	_, err = conn.ExecContext(background, "BEGIN EXCLUSIVE")
	must(t, err)
	s := reopened(t, path)
	n, err := s.Size(background)
	if n != 3 || err != nil {
		t.Errorf("size %d, %v", n, err)
	}
	sound(t, s)
	err = s.Write(background, func(*Tx) error { return nil })
	refused(t, err, "in use by another program")
	_, err = conn.ExecContext(background, "ROLLBACK")
	must(t, errors.Join(err, conn.Close(), other.Close()))
	write(t, s, func(tx *Tx) error { _, err := tx.Append([]Entry{entry(3)}, nil); return err })
}

func TestPragmasHoldOnEveryConnection(t *testing.T) {
	s := newFile(t)
	db, err := s.r.DB()
	must(t, err)
	checkConnections(t, "reading", db, 5, reading(s.set.busy).pragmas)
	for i := range 3 {
		db, err = reopened(t, address(s)).w.DB()
		must(t, err)
		checkConnections(t, fmt.Sprintf("writing %d", i), db, 1, writing(s.set.busy).pragmas)
	}
}

// checkConnections reads the pragmas on several connections that are open at once.
func checkConnections(t *testing.T, name string, db *sql.DB, n int, pragmas map[string]string) {
	t.Helper()
	for i := range n {
		conn, err := db.Conn(background)
		must(t, err)
		defer func() { must(t, conn.Close()) }()
		for p, want := range pragmas {
			var got string
			must(t, conn.QueryRowContext(background, "PRAGMA "+p).Scan(&got))
			if got != want {
				t.Errorf("%s connection %d: %s is %s, want %s", name, i, p, got, want)
			}
		}
	}
	if len(pragmas) < 5 {
		t.Errorf("%s: only %d pragmas are looked at", name, len(pragmas))
	}
}

func TestABadReferenceIsRefusedOnEveryConnection(t *testing.T) {
	s := newBook(t)
	for range 3 {
		other := reopened(t, address(s))
		for range 2 {
			err := other.Write(background, func(tx *Tx) error { return tx.Put(SiteRow{Line: Line{Seq: 7}}) })
			if err == nil || !strings.Contains(strings.ToLower(err.Error()), "foreign key") {
				t.Errorf("a row of an entry that is not there was taken (%v)", err)
			}
		}
	}
}

func TestAJournalThatDoesNotTakeIsRefused(t *testing.T) {
	set := quick()
	// A file system without shared memory, as a network share is, has no write-ahead journal.
	set.options = map[string]string{"vfs": "unix-dotfile"}
	path := somefile(t)
	_, err := create(background, path, set)
	refused(t, err, `journal_mode is "delete" and must be "wal"`)
	_, err = os.Stat(path)
	if !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("something was left at %s (%v)", path, err)
	}
}

// nextSchema is the schema with one migration more.
func nextSchema(t *testing.T) fs.FS {
	t.Helper()
	all := fstest.MapFS{}
	files, err := fs.Glob(migrations.SQLite(), "*")
	must(t, err)
	for _, f := range files {
		b, err := fs.ReadFile(migrations.SQLite(), f)
		must(t, err)
		all[f] = &fstest.MapFile{Data: b}
	}
	more := fmt.Sprintf("%05d_more.sql", len(files)+1)
	all[more] = &fstest.MapFile{Data: []byte("-- +goose Up\nALTER TABLE meta ADD COLUMN note TEXT NOT NULL DEFAULT 'new';\n")}
	return all
}

func TestAnOlderSchemaIsBroughtUpAndANewerRefused(t *testing.T) {
	older := filledFile(t, 10)
	write(t, older, func(tx *Tx) error { return tx.SetMeta(MetaBookID, "b-1") })
	newer := quick()
	newer.schema = nextSchema(t)
	s, err := open(background, older.Path(), newer)
	must(t, err)
	var note string
	read(t, s, func(tx *Tx) error { return tx.db.Raw("SELECT note FROM meta").Row().Scan(&note) })
	if note != "new" {
		t.Errorf("the new column holds %q", note)
	}
	if r := sound(t, s); r.Entries != 10 {
		t.Errorf("%d entries came through", r.Entries)
	}
	must(t, s.Close())
	_, err = open(background, older.Path(), quick())
	refused(t, err, "written by a newer version of this program")
}

func TestAMigrationThatFailsLeavesTheBookAsItWas(t *testing.T) {
	s := filledFile(t, 3)
	bad := quick()
	bad.schema = nextSchema(t)
	for name, f := range bad.schema.(fstest.MapFS) {
		if strings.HasSuffix(name, "_more.sql") {
			f.Data = append(f.Data, []byte("ALTER TABLE nowhere ADD COLUMN x TEXT;\n")...)
		}
	}
	_, err := open(background, s.Path(), bad)
	if err == nil || !strings.Contains(err.Error(), "bringing the schema up to date") {
		t.Errorf("opened with a migration that fails: %v", err)
	}
	sound(t, reopened(t, address(s)))
}

func TestWriteKeepsAllOrNothing(t *testing.T) {
	s := newBook(t)
	no := errors.New("no")
	err := s.Write(background, func(tx *Tx) error {
		_, err := tx.Append([]Entry{entry(0)}, nil)
		return errors.Join(no, err, tx.SetMeta("a", "b"))
	})
	if !errors.Is(err, no) {
		t.Errorf("the error became %v", err)
	}
	func() {
		defer func() {
			if recover() == nil {
				t.Error("the panic did not come through")
			}
		}()
		write(t, s, func(tx *Tx) error {
			_, err := tx.Append([]Entry{entry(0)}, nil)
			must(t, err)
			panic("half-way")
		})
	}()
	size, err := s.Size(background)
	if size != 0 || err != nil {
		t.Errorf("%d entries were kept (%v)", size, err)
	}
	write(t, s, func(tx *Tx) error { _, err := tx.Append([]Entry{entry(0)}, nil); return err })
}

func TestACancelledWriteKeepsNothing(t *testing.T) {
	s := newBook(t)
	ctx, cancel := context.WithCancel(background)
	err := s.Write(ctx, func(tx *Tx) error {
		_, err := tx.Append([]Entry{entry(0)}, nil)
		cancel()
		return err
	})
	if err == nil {
		t.Error("a cancelled write was kept")
	}
	size, err := s.Size(background)
	if size != 0 || err != nil {
		t.Errorf("%d entries were kept (%v)", size, err)
	}
}

func TestAReadSeesOneMomentAndWritesNothing(t *testing.T) {
	s := filled(t, 3)
	read(t, s, func(tx *Tx) error {
		before, err := tx.Size()
		must(t, err)
		write(t, s, func(w *Tx) error { _, err := w.Append([]Entry{entry(3)}, nil); return err })
		after, err := tx.Size()
		if before != 3 || after != 3 {
			t.Errorf("the read saw %d and then %d entries", before, after)
		}
		return err
	})
	size, err := s.Size(background)
	if size != 4 || err != nil {
		t.Errorf("size is %d (%v)", size, err)
	}
	err = s.Read(background, func(tx *Tx) error { return tx.SetMeta("a", "b") })
	if err == nil {
		t.Error("a read wrote")
	}
}

func TestAFullDiskIsToldAndKeepsNothing(t *testing.T) {
	s := filledFile(t, 3)
	must(t, s.w.Exec("PRAGMA max_page_count = 100").Error)
	err := s.Write(background, func(tx *Tx) error { _, err := tx.Append(entriesUpTo(3, 5000), nil); return err })
	refused(t, err, "no room left on the disk")
	if r := sound(t, s); r.Entries != 3 {
		t.Errorf("%d entries are there", r.Entries)
	}
}
