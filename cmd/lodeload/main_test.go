package main

import (
	"bytes"
	"crypto/rand"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"lodebook/models/book"
)

func TestWrongUsage(t *testing.T) {
	path := filepath.Join(t.TempDir(), "b.book")
	for _, x := range []struct {
		args   []string
		status int
		says   string
	}{
		{nil, exitUsage, "make"},
		{[]string{"make"}, exitUsage, "--book"},
		{[]string{"make", "--book", path, "--sites", "0"}, exitUsage, "--sites: found 0; write a number from 1"},
		{[]string{"make", "--book", path, "--days", "many"}, exitUsage, "days"},
		{[]string{"make", "--book", t.TempDir()}, exitRefused, "exists"},
		{[]string{"bench", "--rounds", "0"}, exitUsage, "--rounds: found 0"},
		{[]string{"bench", "--format", "xml"}, exitUsage, "table"},
		{[]string{"bench", "--quick", "--dir", filepath.Join(t.TempDir(), "nowhere")}, exitRefused, "--dir"},
		{[]string{"race"}, exitUsage, "race"},
		{[]string{"--help"}, exitDone, ""},
	} {
		var out, words bytes.Buffer
		a := &app{ctx: t.Context(), stdout: &out, stderr: &words, clock: time.Now}
		if got := a.run(x.args); got != x.status || !strings.Contains(words.String(), x.says) {
			t.Errorf("%v: status %d, expected %d with %q; said %s", x.args, got, x.status, x.says, words.String())
		}
	}
}

func TestMakeIsTheSameEachTime(t *testing.T) {
	dir := t.TempDir()
	make := func(name string, more ...string) {
		var words bytes.Buffer
		a := &app{ctx: t.Context(), stdout: &bytes.Buffer{}, stderr: &words, clock: time.Now}
		args := append([]string{"make", "--book", filepath.Join(dir, name), "--sites", "2", "--people", "20", "--fixtures", "16", "--days", "120"}, more...)
		if status := a.run(args); status != exitDone || !strings.Contains(words.String(), "records a second") {
			t.Fatalf("status %d: %s", status, words.String())
		}
	}
	make("doors.book", "--doors")
	b, err := book.Open(t.Context(), filepath.Join(dir, "doors.book"), book.Options{Clock: time.Now, Random: rand.Reader})
	if err != nil {
		t.Fatal(err)
	}
	counts, err := b.Passages(t.Context(), book.SystemOperator("ops"), book.PassageQuery{Site: "N0001", From: time.Date(2021, 1, 1, 0, 0, 0, 0, time.UTC), To: time.Date(2022, 1, 1, 0, 0, 0, 0, time.UTC)}, func(book.PassageView) error { return nil })
	if err = errors.Join(err, b.Close()); err != nil || counts[book.NotEntitled] == 0 {
		t.Errorf("passages in the book: %v, %v", counts, err)
	}
	make("one.book", "--passages", filepath.Join(dir, "passages.csv"), "--csv", dir)
	make("two.book")
	if a, b := headOf(t, filepath.Join(dir, "one.book")), headOf(t, filepath.Join(dir, "two.book")); a == "" || a != b {
		t.Errorf("heads %s and %s", a, b)
	}
	for name, header := range map[string]string{"passages.csv": "at,door,badge,direction\n", "N0002-records.csv": "record,subject,on,"} {
		text := readFile(t, filepath.Join(dir, name))
		if !strings.HasPrefix(text, header) || strings.Count(text, "\n") < 50 {
			t.Errorf("%s: %.200s", name, text)
		}
	}
}

// headOf verifies a book and gives the root of its tree.
func headOf(t *testing.T, path string) string {
	t.Helper()
	b, err := book.Open(t.Context(), path, book.Options{Clock: time.Now, Random: rand.Reader})
	if err != nil {
		t.Fatal(err)
	}
	r, err := b.Verify(t.Context(), nil)
	if err = errors.Join(err, b.Close()); err != nil || r.FirstFault != "" {
		t.Fatal(err, r)
	}
	return fmt.Sprintf("%d entries, %x", r.Entries, r.Head)
}

func readFile(t *testing.T, path string) string {
	t.Helper()
	text, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return string(text)
}
