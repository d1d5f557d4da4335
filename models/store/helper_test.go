package store

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"lodebook/migrations"
	"lodebook/models/ledger"
)

// helperName is the environment variable that makes the test program run one of the helpers in
// place of the tests: what another process does to a book is tested with another process.
const helperName = "LODEBOOK_STORE_TEST_HELPER"

var helpers = map[string]func(args []string) error{
	"append": helpAppend,
	"open":   helpOpen,
}

func TestMain(m *testing.M) {
	name := os.Getenv(helperName)
	if name == "" {
		os.Exit(m.Run())
	}
	err := helpers[name](os.Args[1:])
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
}

// process is another process that runs a helper.
func process(t *testing.T, helper string, args ...string) *exec.Cmd {
	t.Helper()
	self, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	c := exec.Command(self, args...)
	c.Env = append(os.Environ(), helperName+"="+helper)
	return c
}

var (
	background = context.Background()
	began      = time.Date(2026, 3, 1, 6, 30, 0, 0, time.UTC)
)

// quick are the usual settings, with little patience.
func quick() settings {
	return settings{busy: 100 * time.Millisecond, schema: migrations.SQLite(), onServer: migrations.Postgres()}
}

// somefile is a path where there is no file yet, for what is tested of files only.
func somefile(t testing.TB) string { return filepath.Join(t.TempDir(), "site.book") }

// newBook is an empty book on the home that is tested; newFile one in a file.
func newBook(t *testing.T) *Store { return bookAt(t, somewhere(t)) }

func newFile(t *testing.T) *Store { return bookAt(t, somefile(t)) }

func bookAt(t *testing.T, address string) *Store {
	t.Helper()
	s, err := create(background, address, quick())
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { must(t, s.Close()) })
	return s
}

// address is what a book is opened by.
func address(s *Store) string {
	if s.set.address != "" {
		return s.set.address
	}
	return s.path
}

func reopened(t *testing.T, path string) *Store {
	t.Helper()
	s, err := open(background, path, quick())
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { must(t, s.Close()) })
	return s
}

func must(t *testing.T, err error) {
	t.Helper()
	if err != nil {
		t.Fatal(err)
	}
}

func write(t *testing.T, s *Store, fn func(*Tx) error) {
	t.Helper()
	must(t, s.Write(background, fn))
}

func read(t *testing.T, s *Store, fn func(*Tx) error) {
	t.Helper()
	must(t, s.Read(background, fn))
}

// entry is the i-th entry of a test's book.
func entry(i int) Entry {
	return Entry{
		ID: fmt.Sprintf("id-%06d", i), Kind: "record", V: 1, Site: "TERN", Actor: "account-1",
		RecordedAt: began.Add(time.Duration(i) * time.Second),
		Bytes:      fmt.Appendf(nil, `{"body":{"n":%d},"id":"id-%06d"}`, i, i),
	}
}

func entriesUpTo(from, to int) []Entry {
	var all []Entry
	for i := from; i < to; i++ {
		all = append(all, entry(i))
	}
	return all
}

// filled appends n entries to a new book, filledFile to one in a file.
func filled(t *testing.T, n int) *Store { return withEntries(t, newBook(t), n) }

func filledFile(t *testing.T, n int) *Store { return withEntries(t, newFile(t), n) }

func withEntries(t *testing.T, s *Store, n int) *Store {
	t.Helper()
	write(t, s, func(tx *Tx) error {
		_, err := tx.Append(entriesUpTo(0, n), nil)
		return err
	})
	return s
}

// veiledEntry is an entry with an erasable value at "name".
func veiledEntry(i int, person, name string) (Entry, []Veil) {
	salt := bytes.Repeat([]byte{byte(i + 1)}, ledger.SaltSize)
	e := entry(i)
	e.Bytes = fmt.Appendf(nil, `{"body":{"code":%q,"name":"veil:%s"},"id":%q}`, person, ledger.Commit(salt, []byte(name)), e.ID)
	return e, []Veil{{Path: "name", Person: person, Salt: salt, Value: []byte(name)}}
}

// root is the head of a book's tree at its present size.
func root(t *testing.T, s *Store) (size int64, head ledger.Hash) {
	t.Helper()
	read(t, s, func(tx *Tx) error {
		var err error
		size, err = tx.Size()
		if err != nil {
			return err
		}
		head, err = ledger.Root(size, tx)
		return err
	})
	return size, head
}

// refused checks that an error is a refusal that a person can read and that says these words.
func refused(t *testing.T, err error, words string) {
	t.Helper()
	var r *Refusal
	if !errors.As(err, &r) {
		t.Fatalf("not refused, but: %v", err)
	}
	if !strings.Contains(r.Reason, words) {
		t.Errorf("the refusal %q does not say %q", r.Reason, words)
	}
	if !strings.HasSuffix(r.Reason, ".") || strings.ContainsAny(r.Reason, "\n\t") || strings.Contains(r.Reason, "goroutine") {
		t.Errorf("the refusal %q is no sentence", r.Reason)
	}
}

func sound(t *testing.T, s *Store) Report {
	t.Helper()
	report, err := s.Verify(background, nil)
	must(t, err)
	if report.FirstFault != "" {
		t.Errorf("the book has a fault: %s", report.FirstFault)
	}
	return report
}
