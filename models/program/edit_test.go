package program

import (
	"bytes"
	"errors"
	"strings"
	"testing"

	"lodebook/models/civil"
)

func TestSetInForceFrom(t *testing.T) {
	day := civil.Of(2026, 3, 1)
	for _, c := range []struct{ name, src, want string }{
		{"has none", "# head\nlodebook: 1 # format\nsite: {}\n", "# head\nlodebook: 1 # format\nin_force_from: 2026-03-01\nsite: {}\n"},
		{"has one", "lodebook: 1\nin_force_from: 2025-01-01   # since\n", "lodebook: 1\nin_force_from: 2026-03-01   # since\n"},
		{"in quotes", "in_force_from: '2025-01-01'\nlodebook: 1\n", "in_force_from: 2026-03-01\nlodebook: 1\n"},
		{"in double quotes", "\"in_force_from\" : \"2025-01-01\"\n", "\"in_force_from\" : 2026-03-01\n"},
		{"nothing", "in_force_from:   # none\nlodebook: 1\n", "in_force_from: 2026-03-01   # none\nlodebook: 1\n"},
		{"null", "in_force_from: ~\nlodebook: 1\n", "in_force_from: 2026-03-01\nlodebook: 1\n"},
		{"not a day", "lodebook: 1\nin_force_from: soon\n", "lodebook: 1\nin_force_from: 2026-03-01\n"},
		{"CRLF and a mark", "\ufefflodebook: 1\r\nsite: {}\r\n", "\ufefflodebook: 1\r\nin_force_from: 2026-03-01\r\nsite: {}\r\n"},
		{"no line end", "lodebook: 1", "lodebook: 1\nin_force_from: 2026-03-01\n"},
		{"no version", "# c\nsite: {}\n", "# c\nin_force_from: 2026-03-01\nsite: {}\n"},
	} {
		got, err := SetInForceFrom([]byte(c.src), day)
		if err != nil {
			t.Errorf("%s: %v", c.name, err)
			continue
		}
		same(t, c.name, string(got), c.want)
		if again, err := SetInForceFrom(got, day); err != nil || !bytes.Equal(again, got) {
			t.Errorf("%s: a second time gives %q, %v", c.name, again, err)
		}
	}
	for name, src := range map[string]string{
		"a list":       "in_force_from: [2025-01-01]\n",
		"on two lines": "in_force_from: 2025\n  -01-01\n",
		"in braces":    "{lodebook: 1}\n",
		"no mapping":   "- a\n",
		"no YAML":      "a: [\n",
		"empty":        "",
	} {
		out, err := SetInForceFrom([]byte(src), day)
		var faults Faults
		if out != nil || !errors.As(err, &faults) {
			t.Errorf("%s: got %q, %v, want faults", name, out, err)
		}
	}
}

var newZone = Piece{Code: "X", Block: "- code: X\n  name: \"X, new\"\n", Flow: `{code: X, name: "X, new"}`}

func TestAppend(t *testing.T) {
	added := "  - code: X\n    name: \"X, new\"\n"
	for _, c := range []struct{ name, src, want string }{
		{"block", "zones:\n  - {code: A} # a\n\n# later\nitems: []\n", "zones:\n  - {code: A} # a\n" + added + "\n# later\nitems: []\n"},
		{"block at the margin", "zones:\n- code: A\nlevels: []\n", "zones:\n- code: A\n- code: X\n  name: \"X, new\"\nlevels: []\n"},
		{"block at the end", "zones:\n    - code: A", "zones:\n    - code: A\n    - code: X\n      name: \"X, new\"\n"},
		{"block with a comment below", "zones:\n  - code: A\n  # of A\nlevels: []\n", "zones:\n  - code: A\n  # of A\n" + added + "levels: []\n"},
		{"block that ends in a literal", "zones:\n  - code: A\n    name: |\n      one\n\n      # two\n\nlevels: []\n", "zones:\n  - code: A\n    name: |\n      one\n\n      # two\n" + added + "\nlevels: []\n"},
		{"brackets", "zones: [{code: A}] # z\n", "zones: [{code: A}, {code: X, name: \"X, new\"}] # z\n"},
		{"brackets with a comma", "zones: [{code: \"]\"}, ]\n", "zones: [{code: \"]\"},  {code: X, name: \"X, new\"}]\n"},
		{"brackets on lines", "zones: [\n  {code: A}, # ]\n  {code: \"B]\"}\n]\n", "zones: [\n  {code: A}, # ]\n  {code: \"B]\"}\n, {code: X, name: \"X, new\"}]\n"},
		{"empty brackets", "zones: []   # none\nlevels: []\n", "zones:   # none\n" + added + "levels: []\n"},
		{"nothing", "zones:\n  # - {code: A}\nlevels: []\n", "zones:\n  # - {code: A}\n" + added + "levels: []\n"},
		{"null", "zones: null # n\n", "zones: # n\n" + added},
		{"not there, before the items", "lodebook: 1\n\n# the list\n# of items\nitems: []\n", "lodebook: 1\n\nzones:\n" + added + "\n# the list\n# of items\nitems: []\n"},
		{"not there, at the end", "lodebook: 1\n\n", "lodebook: 1\nzones:\n" + added + "\n"},
		{"not there, before the document's end", "lodebook: 1\n...\n", "lodebook: 1\nzones:\n" + added + "...\n"},
		{"CRLF", "zones:\r\n  - code: A\r\n", "zones:\r\n  - code: A\r\n" + strings.ReplaceAll(added, "\n", "\r\n")},
	} {
		e, err := NewEditor([]byte(c.src))
		if err != nil {
			t.Errorf("%s: %v", c.name, err)
			continue
		}
		if err := e.Append("zones", newZone); err != nil {
			t.Errorf("%s: %v", c.name, err)
			continue
		}
		same(t, c.name, string(e.Bytes()), c.want)
		if _, err := e.root(); err != nil {
			t.Errorf("%s: the result is not YAML: %v", c.name, err)
		}
	}
	e, err := NewEditor([]byte("zones: {code: A}\n"))
	if err != nil {
		t.Fatal(err)
	}
	if err := e.Append("zones", newZone); err == nil {
		t.Error("a mapping was taken for a list")
	}
}

// What is not touched comes back byte for byte, whatever its line ends.
func TestEditorKeepsBytes(t *testing.T) {
	for _, src := range []string{string(example(t)), "\ufeffa: 1\r\nb: 2\nc: 3\rd: 4", "a: 1\n\n\n"} {
		e, err := NewEditor([]byte(src))
		if err != nil {
			t.Fatal(err)
		}
		same(t, "bytes", string(e.Bytes()), src)
	}
}

func TestCut(t *testing.T) {
	pieces, err := Cut([]byte("zones:\n  # about A\n  - code: A\n    name: 'it''s'\n\n  # about B\n  - {code: B, name: \"a: b\", devices: false}\nlevels: [{code: L1}]\n"), "zones")
	if err != nil {
		t.Fatal(err)
	}
	same(t, "pieces", pieces, []Piece{
		{"A", "# about A\n- code: A\n  name: 'it''s'\n", `{code: A, name: "it's"}`},
		{"B", "# about B\n- {code: B, name: \"a: b\", devices: false}\n", `{code: B, name: "a: b", devices: false}`},
	})
	pieces, err = Cut([]byte("levels: [{code: L1, list: [a, 'b, c'], x: }]\n"), "levels")
	if err != nil {
		t.Fatal(err)
	}
	same(t, "in brackets", pieces, []Piece{{"L1", "- {code: L1, list: [a, \"b, c\"], x: null}\n", `{code: L1, list: [a, "b, c"], x: null}`}})
}
