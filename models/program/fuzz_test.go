package program

import (
	"errors"
	"strings"
	"testing"
)

// FuzzParse feeds anything to the reader: it never panics, and what it refuses it refuses with
// faults that lie in the file and say something.
func FuzzParse(f *testing.F) {
	f.Add(example(f))
	for _, c := range append(faultyFiles, faultyItems...) {
		f.Add([]byte(c.src))
	}
	f.Add([]byte(head + "items: [{code: X, title: T, asks: site, when: \"subject.code == 'A'\", record: check/x, each: day}]"))
	f.Fuzz(func(t *testing.T, src []byte) {
		p, err := Parse(src)
		if err == nil {
			exercise(p)
			return
		}
		var faults Faults
		if p != nil || !errors.As(err, &faults) || len(faults) == 0 {
			t.Fatalf("refused with %v", err)
		}
		lines := strings.Count(strings.ReplaceAll(string(src), "\r", "\n"), "\n") + 1
		for _, fault := range faults {
			if fault.Line < 1 || fault.Line > lines || fault.Column < 1 || fault.Problem == "" {
				t.Fatalf("a fault lies nowhere or says nothing: %+v", fault)
			}
		}
	})
}

// exercise uses what was read.
func exercise(p *Program) {
	p.Warnings()
	for _, it := range p.Items {
		for _, s := range []*Selector{it.When, it.Cadence.Holds} {
			if s != nil {
				_, _ = s.Match(Subject{Asks: it.Asks, Code: "A", Kind: "vent"})
			}
		}
	}
}

// FuzzEditor adds to any text: it never panics, and where it says that it added something to a
// list, the list has it.
func FuzzEditor(f *testing.F) {
	f.Add(example(f), "zones")
	for _, src := range []string{"zones:\n- code: A\n", "zones: [{code: A}]", "zones: []", "zones:\n", "zones: ~ # x\r\n", "a: |\n  x\nzones:\n  - code: >\n      A\n# y\n...\n"} {
		f.Add([]byte(src), "zones")
	}
	f.Fuzz(func(t *testing.T, src []byte, name string) {
		e, err := NewEditor(src)
		if err != nil {
			return
		}
		_ = e.AddFacts("vent", NewFact{"a", "text"})
		_ = e.AddFacts("", NewFact{"a", "text"})
		_, _ = SetInForceFrom(src, 0)
		if name != "zones" || e.Append(name, newZone) != nil {
			return
		}
		root, err := e.root()
		if err != nil {
			return // Adopt reads the result and gives it up
		}
		if of, ok := root.entry(name); !ok || len(of.value.items) == 0 {
			t.Fatalf("nothing was added to\n%s", e.Bytes())
		}
	})
}
