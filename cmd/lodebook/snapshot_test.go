package main

import (
	"bytes"
	"context"
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"lodebook/models/book"
)

// A server leaves a snapshot when it stops, from which commands start; they write none of their own, unless it
// is the job that does.
func TestSnapshotIsLeftAtStop(t *testing.T) {
	s := newShell(t)
	path := filepath.Join(s.dir, "kept.book")
	s.must(exitDone, "open", "--book", path, "--program", s.file("site.yaml", siteFile))
	file := path + ".snapshot"
	if _, err := os.Stat(file); !errors.Is(err, fs.ErrNotExist) {
		t.Fatalf("a command left a snapshot: %v", err)
	}
	ctx, stop := context.WithCancel(t.Context())
	var words bytes.Buffer
	a := &app{ctx: ctx, stdout: &words, stderr: &words, clock: func() time.Time { return s.now }}
	err := a.open(bookFlag{Book: path}, func(b *book.Book) error {
		flags := &serveFlags{Listen: "127.0.0.1:0"}
		return flags.serve(a, b, func(string) error { stop(); return nil })
	})
	if err != nil {
		t.Fatal(err)
	}
	left, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	if _, words := s.must(exitDone, "job", "snapshot", "--book", path); !strings.Contains(words, "left as it is") {
		t.Errorf("the job said %q of a snapshot that was recent", words)
	}
	left[len(left)/2] ^= 1
	if err := os.WriteFile(file, left, 0o600); err != nil {
		t.Fatal(err)
	}
	if _, words := s.must(exitDone, "gaps", "--book", path, "--site", "QUAY"); strings.Contains(words, "snapshot") {
		t.Errorf("a command about one site, which reads that site's rows, said %q", words)
	}
	if _, words := s.must(exitDone, "user", "list", "--book", path); !strings.Contains(words, "The book is read from its rows: the snapshot is damaged.") {
		t.Errorf("of a damaged snapshot it said %q", words)
	}
	s.now = s.now.AddDate(0, 0, 1)
	if _, words := s.must(exitDone, "job", "snapshot", "--book", path); !strings.Contains(words, "snapshot at QUAY: written, of ") {
		t.Errorf("the job said %q of a damaged snapshot", words)
	}
}

// With --snapshots they lie in that folder and not beside the book; a folder that is not there is wrong usage.
func TestSnapshotsLieWhereTheyAreTold(t *testing.T) {
	s := newShell(t)
	path, dir := filepath.Join(s.dir, "kept.book"), t.TempDir()
	s.must(exitDone, "open", "--book", path, "--program", s.file("site.yaml", siteFile))
	s.must(exitUsage, "job", "snapshot", "--book", path, "--snapshots", filepath.Join(dir, "none"))
	s.must(exitDone, "job", "snapshot", "--book", path, "--snapshots", dir)
	if found, err := os.ReadDir(dir); err != nil || len(found) != 1 {
		t.Errorf("the folder holds %v: %v", found, err)
	}
	if _, err := os.Stat(path + ".snapshot"); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("there is one beside the book too: %v", err)
	}
}
