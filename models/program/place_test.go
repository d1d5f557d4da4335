package program

import (
	"errors"
	"testing"
)

// A fault inside an expression lies at its own characters, however YAML wraps the expression.
func TestFaultsInsideScalars(t *testing.T) {
	for _, c := range []struct {
		name, item string
		line, col  int
	}{
		{"plain", "    when: subject.levl == 'L2'\n", 5, 19},
		{"plain over two lines", "    when: subject.code == 'L2' ||\n      subject.levl == 'L1'\n", 6, 15},
		{"double-quoted", "    when: \"subject.levl == 'L2'\"\n", 5, 20},
		{"double-quoted with escapes", "    when: \"'\\\"\\u00e9\\x41' == '' || subject.levl == 'L2'\"\n", 5, 44},
		{"double-quoted over lines", "    when: \"true ||\n\n       subject.levl == 'L2'\"\n", 7, 16},
		{"double-quoted with an escaped line break", "    when: \"true || \\\n       subject.levl == 'L2'\"\n", 6, 16},
		{"single-quoted", "    when: '''a'' == ''a'' && subject.levl == ''L2'''\n", 5, 38},
		{"literal block", "    when: |\n      true ||\n      subject.levl == 'L2'\n", 7, 15},
		{"literal block with deeper lines", "    when: |-\n      true\n\n        || subject.levl == 'L2'\n", 8, 20},
		{"folded block", "    when: >-\n      true ||\n\n      true ||\n      subject.levl == 'L2'\n", 9, 15},
		{"folded block with its indentation", "    when: >2-\n      subject.levl == 'L2'\n", 6, 15},
		{"non-ASCII before it", "    when: \"'Ärztin' == 'x' || subject.levl == 'L2'\"\n", 5, 39},
	} {
		src := head + "items:\n  - code: X\n" + c.item + "    title: T\n    asks: person\n    record: training/x\n    once: true\n"
		_, err := Parse([]byte(src))
		var faults Faults
		if !errors.As(err, &faults) || len(faults) != 1 {
			t.Errorf("%s: got %v, want one fault in\n%s", c.name, err, src)
			continue
		}
		if f := faults[0]; f.Line != c.line || f.Column != c.col || f.Found != `"subject.levl"` {
			t.Errorf("%s: got %d:%d %s, want %d:%d in\n%s", c.name, f.Line, f.Column, f.Found, c.line, c.col, src)
		}
	}
}
