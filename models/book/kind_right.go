package book

import (
	"time"

	"lodebook/models/civil"
	"lodebook/models/store"
)

const kindRight = "right"

// rightBody is a person's standing permission to enter one zone; it implies none in another. From and To are
// days (both included, by the site's clocks) or instants (To excluded); without To it holds until it is withdrawn.
type rightBody struct {
	common
	Person    string `json:"person"`
	Zone      string `json:"zone"`
	From      string `json:"from"`
	To        string `json:"to,omitempty"`
	Because   Veiled `json:"because,omitzero"`
	Ended     Veiled `json:"ended,omitzero"`      // why it was withdrawn
	GrantedBy Veiled `json:"granted_by,omitzero"` // of an import: a claim
}

func (b *rightBody) kind() string { return kindRight }
func (b *rightBody) version() int { return 1 }

func (b *rightBody) validate(c *check) []Fault {
	faults := c.checkSubject("person", subjectBody{"person", b.Person})
	faults = append(faults, c.checkZones("zone", []string{b.Zone})...)
	if c.actor.Person != "" && c.actor.Person == b.Person {
		faults = append(faults, Fault{"person", b.Person, "nobody grants a right to themselves", "ask another safety officer"})
	}
	from, to, more := b.span(c.zone())
	if faults = append(faults, more...); len(faults) > 0 {
		return faults
	}
	if to != nil && !to.After(from) {
		faults = append(faults, Fault{"to", b.To, "lies before the beginning, " + b.From, "a day or an instant after it, or nothing"})
	}
	day := civil.DayOf(from, c.zone())
	if !c.m.onStaff(c.site, b.Person, day) {
		faults = append(faults, Fault{"from", b.From, "is no day on which this person is on staff here; a right ends with the stint in which it is granted", "a day of one of their stints"})
	}
	return faults
}

// span is when the right holds: from is included, to is not; nil: until it is withdrawn.
func (b *rightBody) span(loc *time.Location) (from time.Time, to *time.Time, faults []Fault) {
	begins, ends := parseMoment(b.From, loc), parseMoment(b.To, loc)
	if begins == (moment{}) {
		faults = append(faults, Fault{"from", b.From, "is neither a day nor an instant", "write YYYY-MM-DD, or an instant such as 2026-03-01T08:30:00Z"})
	}
	if b.To != "" && ends == (moment{}) {
		faults = append(faults, Fault{"to", b.To, "is neither a day nor an instant", "write YYYY-MM-DD, or an instant such as 2026-03-01T08:30:00Z, or nothing"})
	}
	from = begins.begins(loc)
	if b.To != "" {
		end := ends.ends(loc)
		to = &end
	}
	return from, to, faults
}

func (b *rightBody) apply(at applied) []any {
	from, to, _ := b.span(at.zone(at.site))
	return []any{store.RightRow{Line: at.line, Site: at.site, Person: b.Person, Zone: b.Zone, From: from, To: to}}
}
