package book

import (
	"fmt"
	"strings"
)

// Fault is one thing in an input that a person can mend.
type Fault struct {
	Field    string `json:"field"`    // the field's name as the form or file has it
	Value    string `json:"value"`    // what was found
	Problem  string `json:"problem"`  // what is wrong with it
	Accepted string `json:"accepted"` // what would be accepted
}

func (f Fault) String() string {
	s := f.Field + ": " + f.Problem
	if f.Value != "" {
		s = fmt.Sprintf("%s: found %q; %s", f.Field, f.Value, f.Problem)
	}
	if f.Accepted != "" {
		s += "; " + f.Accepted
	}
	return s
}

// Invalid is an input that was refused whole: nothing was written.
type Invalid struct{ Faults []Fault }

func (e *Invalid) Error() string {
	lines := make([]string, len(e.Faults))
	for i, f := range e.Faults {
		lines[i] = f.String()
	}
	return strings.Join(lines, "\n")
}

// invalid makes an Invalid of one fault.
func invalid(field, value, problem, accepted string) error {
	return &Invalid{Faults: []Fault{{field, value, problem, accepted}}}
}

// Denied says that the actor's role does not allow the action, or not at this site.
type Denied struct {
	Action Action
	Role   Role
	Why    string // a sentence that says more, or empty
}

func (e *Denied) Error() string {
	if e.Why != "" {
		return e.Why
	}
	return fmt.Sprintf("%s may not %s", e.Role.somebody(), e.Action.Words())
}

// NotFound says that nothing of that name is on record.
type NotFound struct{ What, Code string }

func (e *NotFound) Error() string { return fmt.Sprintf("no %s %q is on record", e.What, e.Code) }

// Stale says that the entry to be corrected is no longer the current one.
type Stale struct {
	ID string // the entry that was to be corrected
	By string // the entry that has already taken its place
}

func (e *Stale) Error() string {
	return fmt.Sprintf("entry %s was already corrected or withdrawn by entry %s; open that one and start from it", e.ID, e.By)
}

// Conflict says that an identifier already stands for something else. Both are given as JSON.
type Conflict struct{ ID, Recorded, Given string }

func (e *Conflict) Error() string {
	return fmt.Sprintf("identifier %s already stands for another entry\nrecorded: %s\ngiven:    %s", e.ID, e.Recorded, e.Given)
}
