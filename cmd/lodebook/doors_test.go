package main

import (
	"strings"
	"testing"
)

// TestDoorsFromTheCommandLine brings in what the doors' own system knows and holds it against who is entitled.
func TestDoorsFromTheCommandLine(t *testing.T) {
	s := newShell(t)
	b := s.path("doors.book")
	s.must(exitDone, "open", "--book", b, "--program", s.file("site.yaml", siteFile))
	in := func(table, csv string) {
		t.Helper()
		s.must(exitDone, "import", table, s.file(table+".csv", csv), "--book", b, "--site", "QUAY")
	}
	in("people", "code,name,level,joined,badge\nP1,Runa Sandoy,L2,2025-02-01,B-1\n")
	in("rights", "person,zone,from\nP1,IV,2026-01-01\n")
	in("passages", "at,door,badge,direction\n2026-02-01T09:00:00Z,D1,B-1,in\n")
	in("holders", "badge,door\nB-1,D1\n")
	out, words := s.must(exitDone, "passages", "--book", b, "--site", "QUAY", "--from", "2026-02-01T00:00:00Z", "--to", "2026-02-02T00:00:00Z", "--format", "csv")
	if !strings.Contains(out, "at,door,zone,badge,person,verdict,verdict_then,reasons\n2026-02-01T09:00:00Z,D1,,B-1,,unknown-door,unknown-door,\n") || !strings.HasPrefix(words, "1 passages: 1 door not known.") {
		t.Errorf("passages: %s%q", out, words)
	}
	out, _ = s.must(exitDone, "passages", "--book", b, "--site", "QUAY", "--from", "2026-02-01T00:00:00Z", "--to", "2026-02-01T01:00:00Z", "--format", "json")
	if out != "[]\n" {
		t.Errorf("none at all: %q", out)
	}
	out, _ = s.must(exitDone, "rights-diff", "--book", b, "--site", "QUAY", "--format", "json")
	if !strings.Contains(out, `"change": "unknown-door"`) {
		t.Errorf("rights-diff: %s", out)
	}
	out, _ = s.must(exitDone, "reach", "--book", b, "--site", "QUAY", "--zone", "IV", "--format", "csv")
	if !strings.Contains(out, "person,zone,entitled,until,reasons\nP1,IV,false,,") {
		t.Errorf("reach: %s", out)
	}
	out, words = s.must(exitDone, "visits", "--book", b, "--site", "QUAY", "--format", "json")
	if out != "[]\n" {
		t.Errorf("visits: %s%s", out, words)
	}
	s.must(exitRefused, "passages", "--book", b, "--site", "QUAY", "--from", "2026-02-02T00:00:00Z", "--to", "2026-02-01T00:00:00Z")
	s.must(exitUsage, "passages", "--book", b, "--site", "QUAY")
}
