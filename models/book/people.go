package book

import (
	"context"
	"strings"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/store"
)

// Correction says that a command takes the place of an earlier entry, and why. The zero value
// corrects nothing.
type Correction struct {
	Supersedes string // the entry's identifier
	Reason     string // a code of Reasons; may be empty for a slip of one's own within ten minutes
	ReasonText string
}

func (c Correction) fill(b *common) {
	b.Reason = c.Reason
	b.ReasonText = veiled(strings.TrimSpace(c.ReasonText), "")
}

// PersonForm is what a form or a row of a table says of a person, as typed. What is empty is not
// said. Days are YYYY-MM-DD.
type PersonForm struct {
	ID                       string // the entry's identifier; empty: a new one
	Code, Name, Email, Badge string
	Level, Crew              string
	Joined, Left             string
	From                     string            // the day from which facts hold
	Facts                    map[string]string // declared facts by code
}

// KeepPerson puts on record who a person is at a site, a stint of theirs, and facts from a day.
// What is on record already is not written again; when nothing is new the receipt is empty.
func (b *Book) KeepPerson(ctx context.Context, actor Actor, site string, f PersonForm, fix Correction) (Receipt, error) {
	if err := actor.may(KeepPeople, site); err != nil {
		return Receipt{}, err
	}
	return b.write(ctx, actor, func(s *session) error {
		body, faults := s.check(site).personBody(f)
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		if body.saysNothing() && fix.Supersedes == "" {
			return nil
		}
		fix.fill(&body.common)
		return s.add(draft{id: f.ID, site: site, supersedes: fix.Supersedes, body: body})
	})
}

// saysNothing tells that the form held nothing new.
func (b *personBody) saysNothing() bool {
	return b.Name.IsZero() && b.Email.IsZero() && b.Badge.IsZero() && b.Stint == nil && len(b.Facts) == 0
}

// personBody reads the form and leaves out what is on record already.
func (c *check) personBody(f PersonForm) (*personBody, []Fault) {
	if c.m.site(c.site) == nil {
		return nil, []Fault{{"site", c.site, "is no site of this book", "one of " + strings.Join(c.m.siteCodes(), ", ")}}
	}
	old, known := c.m.person(f.Code)
	body := &personBody{Code: f.Code}
	for _, field := range []struct {
		to       *Veiled
		was, now string
	}{{&body.Name, old.Name, f.Name}, {&body.Email, old.Email, f.Email}} {
		if field.now != "" && field.now != field.was {
			*field.to = veiled(field.now, f.Code)
		}
	}
	stint, faults := c.stint(program.AsksPerson, f.Code, stintForm{f.Joined, f.Left, "joined", "left"})
	body.Stint = stint
	values, more := c.factValues(c.personFacts(), withBuiltins(f.Facts, map[string]string{factLevel: f.Level, factCrew: f.Crew}), f.Code)
	faults = append(faults, more...)
	from, fault := c.factsFrom(f.From, stint, c.pastStint(program.AsksPerson, f.Code, f.Joined), known)
	if fault != nil {
		faults = append(faults, *fault)
	}
	body.Facts = c.newFacts(factKey(c.site, program.AsksPerson, f.Code), values, from)
	if f.Badge != "" && (c.m.badgeOf(f.Code, from, always64) != f.Badge || c.m.badgeHolder(f.Badge, from, always64) != f.Code) {
		body.Badge = veiled(f.Badge, f.Code)
	}
	if len(body.Facts) > 0 || !body.Badge.IsZero() {
		body.From = &from
	}
	return body, faults
}

func withBuiltins(facts, builtin map[string]string) map[string]string {
	all := map[string]string{}
	for k, v := range facts {
		all[k] = v
	}
	for k, v := range builtin {
		if v != "" {
			all[k] = v
		}
	}
	return all
}

type stintForm struct{ first, last, firstName, lastName string }

// stint reads the two ends of a span. Nothing given means a span open at both ends for a subject
// that has none yet, and nothing new for one that has.
func (c *check) stint(asks program.Asks, code string, f stintForm) (*stintBody, []Fault) {
	var faults []Fault
	day := func(name, text string) *civil.Day {
		if text == "" {
			return nil
		}
		d, err := civil.ParseDay(text)
		if err != nil {
			faults = append(faults, Fault{name, text, "is not a day", "write it as YYYY-MM-DD"})
			return nil
		}
		return &d
	}
	s := &stintBody{First: day(f.firstName, f.first), Last: day(f.lastName, f.last)}
	on := c.m.stintsAt(c.site, string(asks), code)
	if f.first == "" && len(on) > 0 {
		if f.last == "" {
			return nil, faults
		}
		s.First = on[len(on)-1].First
	}
	for _, o := range on {
		if sameDay(o.First, s.First) && (s.Last == nil || sameDay(o.Last, s.Last)) {
			return nil, faults
		}
	}
	return s, faults
}

// factsFrom is the day from which the form's facts hold: the one given; else, for a new stint, its
// first day, as for a stint that is over; else today for a change, and the first of all days for
// somebody new without one.
func (c *check) factsFrom(text string, stint *stintBody, past *civil.Day, known bool) (civil.Day, *Fault) {
	switch {
	case text != "":
		d, err := civil.ParseDay(text)
		if err != nil {
			return 0, &Fault{"from", text, "is not a day", "write it as YYYY-MM-DD"}
		}
		return d, nil
	case stint != nil && stint.First != nil:
		return *stint.First, nil
	case past != nil:
		return *past, nil
	case known:
		return c.today(), nil
	default:
		return civil.FirstDay, nil
	}
}

// factValues reads the values typed for facts; undeclared ones are faults.
func (c *check) factValues(declared map[string]program.Fact, given map[string]string, person string) (map[string]factValue, []Fault) {
	values := map[string]factValue{}
	var faults []Fault
	people := func(code string) bool { _, ok := c.m.person(code); return ok }
	for _, k := range sortedKeys(given) {
		text := strings.TrimSpace(given[k])
		f, ok := declared[k]
		switch {
		case text == "":
			continue
		case !ok:
			faults = append(faults, Fault{k, text, "is no declared fact", "one of " + strings.Join(sortedKeys(declared), ", ")})
		case f.Type == "":
			values[k] = factValue{Type: "code", Value: text}
		default:
			v, fault := parseFact(f, text, person, people, c.m.site(c.site).zoneCodes())
			if fault != nil {
				faults = append(faults, *fault)
				continue
			}
			values[k] = v
		}
	}
	return values, faults
}

// newFacts leaves out what is on record with the same value on the day.
func (c *check) newFacts(key store.SubjectKey, values map[string]factValue, from civil.Day) map[string]factValue {
	fresh := map[string]factValue{}
	for k, v := range values {
		old, ok := c.m.factAt(key, k, func(r store.FactRow) bool { return r.From <= from })
		if !ok || old.Value != v.row() {
			fresh[k] = v
		}
	}
	return fresh
}

// pastStint gives the first day of the span on record that begins on the day typed, if it is over.
func (c *check) pastStint(asks program.Asks, code, first string) *civil.Day {
	for _, o := range c.m.stintsAt(c.site, string(asks), code) {
		if o.First != nil && o.First.String() == first && o.Last != nil && *o.Last < c.today() {
			return o.First
		}
	}
	return nil
}
