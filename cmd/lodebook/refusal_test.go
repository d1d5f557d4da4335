package main

import (
	"os"
	"strings"
	"testing"
)

// TestBooksThatAreNone opens what is no book, or no longer one: a sentence each, never a trace.
func TestBooksThatAreNone(t *testing.T) {
	s := newShell(t)
	good := s.siteInFile()
	whole, err := os.ReadFile(good)
	if err != nil {
		t.Fatal(err)
	}
	if err := os.Mkdir(s.path("folder.book"), 0o700); err != nil {
		t.Fatal(err)
	}
	scribbled := append([]byte{}, whole...)
	for i := 4096; i < len(scribbled)-4096; i++ {
		scribbled[i] ^= 0x5a
	}
	for name, content := range map[string]string{
		"text.book":      "Dear diary,\n",
		"empty.book":     "",
		"cut.book":       string(whole[:len(whole)/2]),
		"scribbled.book": string(scribbled),
	} {
		s.file(name, content)
	}
	for _, name := range []string{"none.book", "folder.book", "text.book", "empty.book", "cut.book", "scribbled.book"} {
		status, out, words := s.run("", "gaps", "--book", s.path(name), "--site", "QUAY")
		if status != exitRefused || out != "" {
			t.Errorf("%s: left with %d and wrote %q", name, status, out)
		}
		if !strings.Contains(words, name) || strings.Contains(words, "goroutine") || strings.Count(words, "\n") > 2 {
			t.Errorf("%s: says %q", name, words)
		}
	}
}

// TestTamperedBookFailsVerify changes one byte of an entry behind the book's back.
func TestTamperedBookFailsVerify(t *testing.T) {
	s := newShell(t)
	b := s.siteInFile()
	s.must(0, "verify", b)
	whole, err := os.ReadFile(b)
	if err != nil {
		t.Fatal(err)
	}
	changed := strings.Replace(string(whole), `"record":"training/level-2"`, `"record":"training/level-1"`, 1)
	if changed == string(whole) {
		t.Fatal("the test found nothing to change")
	}
	s.file("site.book", changed)
	out, words := s.must(exitFailed, "verify", b)
	if !strings.Contains(out, `"first_fault": "`) || !strings.Contains(words, "Entry ") {
		t.Errorf("%s %s", out, words)
	}
}
