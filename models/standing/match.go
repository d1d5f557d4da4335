package standing

import (
	"encoding/binary"
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// answers remembers what a selector said of each profile of the fields that it reads.
type answers struct {
	reads []string
	known bool // every field read is one that a key can be made of
	of    map[string]answer
}

type answer struct {
	yes bool
	err error
}

func (v *view) answersOf(sel *program.Selector) *answers {
	a := v.answers[sel]
	if a == nil {
		a = &answers{reads: sel.Reads(), known: true, of: map[string]answer{}}
		for _, field := range a.reads {
			a.known = a.known && isField(field)
		}
		v.answers[sel] = a
	}
	return a
}

// matches tells whether the item asks the subject on the day: whether the subject is there at all
// (for those that a version declares) and its selector takes it. The error is the selector's.
func (v *view) matches(item *program.Item, l *local, on civil.Day) (bool, error) {
	if !hasStints(l.subject.Asks) {
		if ed := v.edition(on); ed == nil || !ed.declared[l.subject] {
			return false, nil
		}
	}
	if item.When == nil {
		return true, nil
	}
	return v.match(item.When, l, on)
}

func (v *view) match(sel *program.Selector, l *local, on civil.Day) (bool, error) {
	a := v.answersOf(sel)
	if !a.known {
		return sel.Match(v.profile(l, on, nil))
	}
	var buf [96]byte
	key := buf[:0]
	for _, field := range a.reads {
		key = appendValue(key, v.field(l, field, on))
	}
	if got, ok := a.of[string(key)]; ok {
		return got.yes, got.err
	}
	yes, err := sel.Match(v.profile(l, on, a.reads))
	var missing *program.MissingFact
	if err == nil || errors.As(err, &missing) { // any other error names the subject
		a.of[string(key)] = answer{yes, err}
	}
	return yes, err
}

const factsPrefix = "facts."

func isField(field string) bool {
	switch field {
	case "code", "name", "kind", "level", "held", "crew", "zone", "posts", "zones", "holders", "deputies", program.FactDoorListAge, program.FactDoorListOpen:
		return true
	}
	return strings.HasPrefix(field, factsPrefix)
}

// field is the value of one field that a selector can read: nil, a string, a float64, a bool or a
// list of strings.
func (v *view) field(l *local, field string, on civil.Day) any {
	switch field {
	case "code":
		return l.subject.Code
	case "held":
		return v.heldLevel(l, on)
	case "posts":
		return v.posts(l, on)
	case "holders":
		return v.holders(l.subject.Code, on)
	case "deputies":
		return v.holders(l.subject.Code+deputy, on)
	case "zones":
		return v.zones(l, on)
	case program.FactDoorListAge:
		return v.doorListAge(l, on)
	}
	if fact, ok := strings.CutPrefix(field, factsPrefix); ok {
		return v.fact(l, fact, on)
	}
	return v.fact(l, field, on)
}

// appendValue writes a value so that no two sequences of values are written alike.
func appendValue(key []byte, value any) []byte {
	switch x := value.(type) {
	case string:
		key = binary.AppendUvarint(append(key, 's'), uint64(len(x)))
		return append(key, x...)
	case float64:
		return binary.BigEndian.AppendUint64(append(key, 'f'), math.Float64bits(x))
	case bool:
		if x {
			return append(key, 't')
		}
		return append(key, 'u')
	case []string:
		key = binary.AppendUvarint(append(key, 'l'), uint64(len(x)))
		for _, s := range x {
			key = appendValue(key, s)
		}
		return key
	case nil:
		return append(key, 'n')
	}
	return appendValue(append(key, 'x'), fmt.Sprintf("%T %v", value, value))
}

// began is the latest day from the floor to the day on which the subject began to match the item;
// it matches on the day itself. A day whose answer hangs on a missing fact does not match.
func (v *view) began(item *program.Item, l *local, floor, on civil.Day) civil.Day {
	var reads []string
	if item.When != nil {
		reads = item.When.Reads()
	}
	for _, turn := range v.turns(l, reads, floor, on) {
		if yes, err := v.matches(item, l, turn-1); !yes || err != nil {
			return turn
		}
	}
	return floor
}

// turns lists, latest first, the days after the floor and up to the day on which one of the fields
// may have changed, or on which the version that declares the subject did.
func (v *view) turns(l *local, reads []string, floor, on civil.Day) []civil.Day {
	t := turns{after: floor, upTo: on}
	if !hasStints(l.subject.Asks) {
		v.reignTurns(&t)
	}
	for _, field := range reads {
		v.fieldTurns(&t, l, field)
	}
	slices.Sort(t.days)
	days := slices.Compact(t.days)
	slices.Reverse(days)
	return days
}

// turns gathers days of a span.
type turns struct {
	after, upTo civil.Day
	days        []civil.Day
}

func (t *turns) add(d civil.Day) {
	if d > t.after && d <= t.upTo {
		t.days = append(t.days, d)
	}
}

func (t *turns) addSpan(first, last *civil.Day) {
	if first != nil {
		t.add(*first)
	}
	if last != nil {
		t.add(*last + 1)
	}
}

func (v *view) reignTurns(t *turns) {
	for _, r := range v.reigns {
		t.add(r.from)
	}
}

func (v *view) fieldTurns(t *turns, l *local, field string) {
	switch {
	case field == "code":
	case field == "zones":
		v.rightTurns(t, l)
	case field == program.FactDoorListAge:
		v.ageTurns(t, l)
	case field == "held":
		v.heldTurns(t, l)
	case field == "posts":
		v.postTurns(t, l, "")
	case field == "holders" || field == "deputies":
		post := l.subject.Code
		if field == "deputies" {
			post += deputy
		}
		for _, person := range v.site.appointed[post] {
			v.postTurns(t, v.site.locals[person], post)
		}
	case isField(field):
		v.factTurns(t, l, strings.TrimPrefix(field, factsPrefix))
	default: // not a field that we know: whatever may have changed
		v.allTurns(t, l)
	}
}

func (v *view) allTurns(t *turns, l *local) {
	for i := range l.facts {
		v.factTurns(t, l, l.facts[i].code)
	}
	for _, field := range []string{"held", "posts", "zones", "holders", "deputies"} {
		v.fieldTurns(t, l, field)
	}
}

func (v *view) factTurns(t *turns, l *local, code string) {
	list := l.values(code)
	for i := range list {
		if f := &list[i]; f.KnownAt(v.k) {
			t.add(f.From)
		}
	}
}

// postTurns adds the days on which the person may have begun or ceased to hold the post, or any
// post where it is empty.
func (v *view) postTurns(t *turns, person *local, post string) {
	deeds := v.past(person).deeds
	for i := range deeds {
		held := v.e.kinds.post[deeds[i].kind]
		if held == "" || post != "" && held != post {
			continue
		}
		v.recordTurns(t, deeds[i].list)
	}
	v.stintTurns(t, person)
	v.reignTurns(t) // a version may bring another time zone
}

// recordTurns adds the days of the records in every zone that the site has had, and the days after
// their last good ones.
func (v *view) recordTurns(t *turns, records []record) {
	for i := range records {
		r := &records[i]
		if !r.knownAt(v.k) {
			continue
		}
		for j := range v.reigns {
			t.add(r.in(v.reigns[j].loc))
		}
		if r.until != noDay {
			t.add(r.until + 1)
		}
	}
}

func (v *view) stintTurns(t *turns, l *local) {
	for i := range l.stints {
		if s := &l.stints[i]; s.KnownAt(v.k) {
			t.addSpan(s.First, s.Last)
		}
	}
}
