package program

import "strings"

// Subject is what a selector reads: one subject on one day. Facts that are not on record are
// absent from the map; the attributes of a kind that may be absent (level, held, crew, zone) are
// absent when empty.
type Subject struct {
	Asks     Asks
	Code     string
	Kind     string         // fixture
	Name     string         // person
	Level    string         // person: assigned level
	Held     string         // person: held level
	Crew     string         // person
	Zone     string         // fixture
	Posts    []string       // person
	Zones    []string       // person: zones of the rights in force
	Holders  []string       // post: codes of the people appointed
	Deputies []string       // post: codes of the people appointed as its deputy
	Facts    map[string]any // string, float64, bool as declared
}

// Selector is a compiled boolean CEL expression over one subject.
type Selector struct {
	source string
	reads  []string            // the fields read, as in "level" or "facts.swing"
	pins   map[string][]string // kind and code -> the only ones that it can match
	match  func(Subject) (bool, error)

	undeclared []string // fixture kinds that it names and that are not declared
}

// Kinds are the only fixture kinds that the expression can match; nil where it does not say. A nil
// selector matches all.
func (s *Selector) Kinds() []string { return s.pinned("kind") }

// Codes are the only codes of subjects that the expression can match; nil where it does not say. A
// nil selector matches all.
func (s *Selector) Codes() []string { return s.pinned("code") }

func (s *Selector) pinned(field string) []string {
	if s == nil {
		return nil
	}
	return s.pins[field]
}

// Facts of a site that the book reckons: the age in days of the list of who can open which door, -1 where there is
// none, and how many withdrawals or unknown badges it asks for.
const (
	FactDoorListAge  = "door_list_age"
	FactDoorListOpen = "door_list_open"
	// FactDoorListOf is what is on record: the day of the list as a text, or false where there is none. The age follows
	// from it, up to OldestDoorList.
	FactDoorListOf = "door_list_of"
	OldestDoorList = 400
)

// MissingFact is the error of a selector that needs a fact which is not on record.
type MissingFact struct{ Facts []string }

// NewSelector makes a selector from its parts. Parse makes them by compiling CEL; tests may make
// them from a plain function.
func NewSelector(source string, reads []string, match func(Subject) (bool, error)) *Selector {
	return &Selector{source: source, reads: reads, match: match}
}

// Source is the expression as written.
func (s *Selector) Source() string { return s.source }

// Reads lists the fields of the subject that the expression reads, as in "level", "held" or
// "facts.swing", sorted.
func (s *Selector) Reads() []string { return s.reads }

// Match evaluates the expression. The error is a *MissingFact when the answer hangs on a fact that
// is not on record; any other error is a fault of the program itself.
func (s *Selector) Match(sub Subject) (bool, error) { return s.match(sub) }

func (m *MissingFact) Error() string { return "not on record: " + strings.Join(m.Facts, ", ") }
