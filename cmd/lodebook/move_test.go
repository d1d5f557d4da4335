package main

import (
	"strings"
	"testing"

	"lodebook/migrations/scratch"
)

// TestMove moves a book to a file, there again and back, and asks the last one what the first one says.
func TestMove(t *testing.T) {
	s := newShell(t)
	b := s.site()
	before, _ := s.must(0, "standing", "--book", b, "--site", "QUAY", "--format", "json", "--why")
	verdict, head := s.must(0, "verify", b)
	for _, to := range []string{s.path("out.book"), scratch.Book(t), s.path("back.book")} {
		_, words := s.must(0, "move", "--from", b, "--to", to)
		if !strings.Contains(words, "verified them there") {
			t.Errorf("it said %q", words)
		}
		b = to
	}
	if after, _ := s.must(0, "standing", "--book", b, "--site", "QUAY", "--format", "json", "--why"); after != before {
		t.Errorf("moved standings differ:\n%s\n%s", before, after)
	}
	if v, h := s.must(0, "verify", b); v != verdict || h != head {
		t.Errorf("verified %s%s, before %s%s", v, h, verdict, head)
	}
	s.must(exitRefused, "move", "--from", b, "--to", s.path("out.book"))
	s.must(exitUsage, "move", "--from", b, "--to", "")
}
