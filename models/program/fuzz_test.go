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
