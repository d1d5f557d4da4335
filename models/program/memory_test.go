package program

import (
	"fmt"
	"testing"
)

const remembering = `
lodebook: 1
in_force_from: 2025-01-01
site: {code: QUAY, name: %s, time_zone: UTC}
levels: [{code: L1}, {code: %s}]
person_facts: {swing: %s}
items:
  - {code: A, title: Training, asks: person, when: "subject.level == 'L2' && subject.facts.swing == 'ja'", record: training/a, once: true, basis: Site rule}
`

// A selector is made once for programs in which it can read the same, and anew, or refused, where it cannot.
func TestSelectorsAreMadeOnce(t *testing.T) {
	parse := func(name, level, fact string) (*Selector, error) {
		p, err := Parse(fmt.Appendf(nil, remembering, name, level, fact))
		if err != nil {
			return nil, err
		}
		return p.Items[0].When, nil
	}
	first, err := parse("One", "L2", "text")
	if err != nil {
		t.Fatal(err)
	}
	second, err := parse("Two", "L2", "text")
	if err != nil || second != first {
		t.Errorf("the same words of another site are compiled again (%v)", err)
	}
	third, err := parse("Three", "L2", "{type: choice, choices: [ja, nei]}")
	if err != nil || third == first {
		t.Errorf("a fact with choices is read as one without (%v)", err)
	}
	for _, x := range [][2]string{{"L3", "text"}, {"L2", "number"}, {"L2", "{type: choice, choices: [nei]}"}, {"L2", "day"}} {
		if _, err := parse("Four", x[0], x[1]); err == nil {
			t.Errorf("with level %s and fact %s the selector is let stand", x[0], x[1])
		}
	}
}
