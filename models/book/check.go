package book

import (
	"regexp"
	"slices"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// check is what a body is validated against: what is on record, who writes, and when.
type check struct {
	m        *model
	actor    Actor
	site     string
	now      time.Time
	imported bool
	old      body  // the body that is superseded, or nil
	oldSeq   int64 // its entry's sequence number
}

// zone is the time zone of the site that is written to; UTC for the whole book.
func (c *check) zone() *time.Location { return c.m.zone(c.site) }

// today is the civil day at the site.
func (c *check) today() civil.Day { return civil.DayOf(c.now, c.zone()) }

var codePattern = regexp.MustCompile(`^[\p{L}\p{N}][\p{L}\p{N}._-]{0,63}$`)

// checkCode checks the form of a code that the site gives to a person or thing.
func checkCode(field, code string) []Fault {
	if codePattern.MatchString(code) {
		return nil
	}
	return []Fault{{field, code, "is no code", "1 to 64 letters, digits, dots, dashes and underscores, a letter or digit first"}}
}

// checkWhat checks the kind and code of a record.
func (c *check) checkWhat(field, what string) []Fault {
	kind, code, ok := strings.Cut(what, "/")
	if kind == "appointment" {
		code = strings.TrimSuffix(code, deputySuffix)
	}
	if !ok || !slices.Contains(program.RecordKinds, kind) || !codePattern.MatchString(code) {
		return []Fault{{field, what, "is no kind and code of a record", "kind/code, the kind one of " + strings.Join(program.RecordKinds, ", ")}}
	}
	if s := c.m.site(c.site); kind == "appointment" && s != nil && !s.declares(func(p *program.Program) bool { _, ok := p.Post(code); return ok }) {
		return []Fault{{field, what, "names no post of this site", "appointment/ and the code of a post, and behind it /deputy for its deputy"}}
	}
	return nil
}

// checkSubject checks that the subject is on record.
func (c *check) checkSubject(field string, s subjectBody) []Fault {
	if c.m.hasSubject(c.site, s) {
		return nil
	}
	return []Fault{{field, s.Code, "is no " + s.Kind + " on record at this site", "the code of a " + s.Kind + " that is on record"}}
}

// checkItem checks that some version of the checklist has the item.
func (c *check) checkItem(field, code string) []Fault {
	s := c.m.site(c.site)
	if s != nil && s.declares(func(p *program.Program) bool { _, ok := p.Item(code); return ok }) {
		return nil
	}
	return []Fault{{field, code, "is no item of this site's checklist", "the code of an item"}}
}

// checkZones checks the codes of zones.
func (c *check) checkZones(field string, zones []string) []Fault {
	known := c.m.site(c.site).zoneCodes()
	for _, z := range zones {
		if !slices.Contains(known, z) {
			return []Fault{{field, z, "is no zone of this site", "one of " + strings.Join(known, ", ")}}
		}
	}
	return nil
}

// checkStint checks that the span is one, and that it overlaps none of the subject's others. One
// that begins on the same day as one on record takes its place.
func checkStint(c *check, kind, code string, s *stintBody, first, last string) []Fault {
	if s == nil {
		return nil
	}
	if s.First != nil && s.Last != nil && *s.Last < *s.First {
		return []Fault{{last, s.Last.String(), "lies before " + first + ", " + s.First.String(), "a day on or after it"}}
	}
	for _, o := range c.m.stintsAt(c.site, kind, code) {
		if sameDay(o.First, s.First) || c.supersedesSeq(o.Seq) {
			continue
		}
		if overlap(o.First, o.Last, s.First, s.Last) {
			return []Fault{{first, dayOr(s.First, "(empty)"), "overlaps the span on record from " + dayOr(o.First, "the beginning") + " to " + dayOr(o.Last, "no end"), "spans that do not overlap; end the earlier one first"}}
		}
	}
	return nil
}

func (c *check) supersedesSeq(seq int64) bool {
	return c.old != nil && c.oldSeq == seq
}

func sameDay(a, b *civil.Day) bool {
	if a == nil || b == nil {
		return a == b
	}
	return *a == *b
}

func overlap(aFirst, aLast, bFirst, bLast *civil.Day) bool {
	before := func(last, first *civil.Day) bool { return last != nil && first != nil && *last < *first }
	return !before(aLast, bFirst) && !before(bLast, aFirst)
}

func dayOr(d *civil.Day, otherwise string) string {
	if d == nil {
		return otherwise
	}
	return d.String()
}

// personFacts are the facts that may stand on record about a person of the site.
func (c *check) personFacts() map[string]program.Fact {
	facts := map[string]program.Fact{factLevel: {Code: factLevel}, factCrew: {Code: factCrew}}
	c.m.site(c.site).eachProgram(func(p *program.Program) {
		for _, f := range p.PersonFacts {
			facts[f.Code] = f
		}
	})
	return facts
}

// fixtureFacts are the facts that may stand on record about a fixture of the kind.
func (c *check) fixtureFacts(kind string) map[string]program.Fact {
	facts := map[string]program.Fact{factZone: {Code: factZone}, factKind: {Code: factKind}}
	c.m.site(c.site).eachProgram(func(p *program.Program) {
		if k, ok := p.FixtureKind(kind); ok {
			for _, f := range k.Facts {
				facts[f.Code] = f
			}
		}
	})
	return facts
}

// checkFacts checks that facts have a day and are declared, and that the built-in ones name what
// the site has. Declared values were read by parseFact.
func (c *check) checkFacts(facts map[string]factValue, from *civil.Day, declared map[string]program.Fact) []Fault {
	var faults []Fault
	if len(facts) > 0 && from == nil {
		faults = append(faults, Fault{"from", "", "is empty", "the day from which the facts hold"})
	}
	site := c.m.site(c.site)
	lists := map[string][]string{factLevel: site.levelCodes(), factCrew: site.crewCodes(), factZone: site.zoneCodes()}
	for _, k := range sortedKeys(facts) {
		v := facts[k]
		if _, ok := declared[k]; !ok {
			faults = append(faults, Fault{k, v.Value, "is no declared fact", "declare it in the program, or one of " + strings.Join(sortedKeys(declared), ", ")})
			continue
		}
		if list, ok := lists[k]; ok && v.Type != noFact && !slices.Contains(list, v.Value) {
			faults = append(faults, Fault{k, v.Value, "is no " + k + " of this site", "one of " + strings.Join(list, ", ")})
		}
	}
	return faults
}
