package book

import (
	"slices"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
	"lodebook/models/store"
)

const (
	kindVisit     = "visit"
	kindVisitStep = "visit-step"
)

// VisitKinds are the kinds of visit with their words.
var VisitKinds = []struct{ Code, Words string }{
	{"vendor", "Vendor or service engineer"}, {"trade", "Trade"}, {"cleaner", "Cleaner after hours"},
	{"companion", "Companion of a patient"}, {"emergency", "Emergency crew"}, {"guest", "Guest"},
}

// emergencyVisit is the kind that may come before it is announced, and without an escort.
const emergencyVisit = "emergency"

// visitBody announces the presence of somebody without reach: who, what for, where, from when to when, and who goes with
// them. A companion is named, never the patient.
type visitBody struct {
	common
	Visitor  Veiled   `json:"visitor,omitzero"`
	Employer Veiled   `json:"employer,omitzero"`
	Badge    Veiled   `json:"badge,omitzero"` // lent for the visit
	Visit    string   `json:"visit"`          // one of VisitKinds
	Purpose  Veiled   `json:"purpose,omitzero"`
	Zones    []string `json:"zones"`
	From     string   `json:"from"` // RFC 3339 in UTC
	To       string   `json:"to"`
	Escort   string   `json:"escort,omitempty"` // code of a person
	Person   string   `json:"person,omitempty"` // the visitor's own code, once they have one
	Tools    Veiled   `json:"tools,omitzero"`   // one a line
	Late     bool     `json:"late,omitempty"`   // announced after it began
}

func (b *visitBody) kind() string { return kindVisit }
func (b *visitBody) version() int { return 1 }

// longestVisit is how long a visit may be announced for at once.
const longestVisit = 31 * 24 * time.Hour

func (b *visitBody) validate(c *check) []Fault {
	var faults []Fault
	if b.Visitor.IsZero() {
		faults = append(faults, Fault{"visitor", "", "is empty", "the visitor's name"})
	}
	if !slices.ContainsFunc(VisitKinds, func(k struct{ Code, Words string }) bool { return k.Code == b.Visit }) {
		faults = append(faults, Fault{"kind", b.Visit, "is no kind of visit", "one of " + visitKindCodes()})
	}
	if len(b.Zones) == 0 {
		faults = append(faults, Fault{"zones", "", "are not named", "the zones that the visitor will be in"})
	}
	faults = append(faults, c.checkZones("zones", b.Zones)...)
	from, to := b.span()
	switch {
	case !to.After(from):
		faults = append(faults, Fault{"to", b.To, "is not after the beginning", "a moment after it"})
	case to.Sub(from) > longestVisit:
		faults = append(faults, Fault{"to", b.To, "is more than 31 days after the beginning", "an earlier moment; who is here for so long becomes a person of the book"})
	case from.Before(c.now.Add(-lateVisit)) && b.Visit != emergencyVisit && !to.After(c.now):
		faults = append(faults, Fault{"from", b.From, "is over already, and only an emergency crew may be announced after the fact", "a visit that goes on, or will"})
	}
	if b.Person != "" {
		faults = append(faults, c.checkSubject("person", subjectBody{"person", b.Person})...)
	}
	if len(faults) > 0 {
		return faults
	}
	return c.checkEscort(b, from)
}

// lateVisit is how long after its beginning a visit is still announced in time: somebody types it in at the door.
const lateVisit = 15 * time.Minute

func visitKindCodes() string {
	codes := make([]string, len(VisitKinds))
	for i, k := range VisitKinds {
		codes[i] = k.Code
	}
	return strings.Join(codes, ", ")
}

func (b *visitBody) span() (from, to time.Time) {
	from, _ = time.Parse(time.RFC3339, b.From)
	to, _ = time.Parse(time.RFC3339, b.To)
	return from, to
}

// checkEscort checks that somebody goes with the visitor wherever the program restricts a zone, and may.
func (c *check) checkEscort(b *visitBody, at time.Time) []Fault {
	if b.Escort != "" {
		if faults := c.checkSubject("escort", subjectBody{"person", b.Escort}); len(faults) > 0 {
			return faults
		}
		if b.Escort == b.Person {
			return []Fault{{"escort", b.Escort, "is the visitor, and nobody escorts themselves", "somebody else"}}
		}
	}
	for _, zone := range b.Zones {
		z, level := c.escortLevel(zone, at)
		if z == nil || !z.Restricted || b.Visit == emergencyVisit && b.Escort == "" {
			continue
		}
		switch {
		case level == "":
			return []Fault{{"zones", zone, "is restricted, and the program names no level that may escort there", "a line escort: LEVEL on the zone in the program, or another zone"}}
		case b.Escort == "":
			return []Fault{{"escort", "", "is empty, and zone " + zone + " is restricted", "the code of a person who holds " + level + " or a higher level"}}
		case !c.m.holdsLevel(c.site, b.Escort, level, civil.DayOf(at, c.zone())):
			return []Fault{{"escort", b.Escort, "does not hold " + level + " then, which zone " + zone + " asks of whoever escorts there", "somebody who holds it"}}
		}
	}
	return nil
}

// escortLevel is a zone of the day's program, and the level that may escort there.
func (c *check) escortLevel(zone string, at time.Time) (*program.Zone, string) {
	z, ok := c.m.site(c.site).on(civil.DayOf(at, c.zone())).program.Zone(zone)
	if !ok {
		return nil, ""
	}
	return z, z.Escort
}

// holdsLevel tells whether a person holds a level or a higher one on a day.
func (m *model) holdsLevel(site, person, level string, on civil.Day) bool {
	if !m.onStaff(site, person, on) {
		return false
	}
	held, _ := m.engine.Held(site, person, on, standing.Always)
	p := m.site(site).on(on).program
	h, ok := p.Level(held)
	l, known := p.Level(level)
	return ok && known && h.Rank >= l.Rank
}

func (b *visitBody) apply(at applied) []any {
	from, to := b.span()
	return []any{store.VisitRow{
		Line: at.line, Site: at.site, Visitor: b.Visitor.Value, Employer: b.Employer.Value, Badge: b.Badge.Value, Kind: b.Visit, Zones: b.Zones,
		From: from.UTC(), To: to.UTC(), Escort: b.Escort, Person: b.Person, Tools: toolLines(b.Tools.Value), Late: b.Late,
	}}
}

// toolLines are the tools of a text, one a line.
func toolLines(text string) []string {
	var out []string
	for line := range strings.Lines(text) {
		if line = strings.TrimSpace(line); line != "" {
			out = append(out, line)
		}
	}
	return out
}

// VisitStep is what becomes of a visit.
type VisitStep string

// The steps.
const (
	Arrived    VisitStep = "arrived"
	Gone       VisitStep = "gone"
	TurnedAway VisitStep = "turned-away"
	CalledOff  VisitStep = "called-off"
)

// Outcome is what a screening at the door found; never why.
type Outcome string

// The outcomes.
const (
	Cleared         Outcome = "cleared"
	ClearedInPart   Outcome = "with-restriction"
	NotCleared      Outcome = "not-cleared"
	outcomesInWords         = "cleared, with-restriction or not-cleared"
)

// visitStepBody is a step of a visit: with arrived, who screened the visitor and with what outcome; with gone, the tools
// that stay behind and why.
type visitStepBody struct {
	common
	Announced string    `json:"announced"` // the entry of the visit
	Step      VisitStep `json:"step"`
	At        string    `json:"at"`
	Screener  string    `json:"screener,omitempty"` // code of a person
	Outcome   Outcome   `json:"outcome,omitempty"`
	Tools     Veiled    `json:"tools,omitzero"` // arrived: checked in; gone: left behind
	Note      Veiled    `json:"note,omitzero"`
}

func (b *visitStepBody) kind() string { return kindVisitStep }
func (b *visitStepBody) version() int { return 1 }

func (b *visitStepBody) validate(c *check) []Fault {
	_, faults := c.moment("at", b.At)
	return faults
}

func (b *visitStepBody) apply(at applied) []any {
	t, _ := time.Parse(time.RFC3339, b.At)
	return []any{store.VisitStepRow{
		Line: at.line, Site: at.site, Visit: b.Announced, Step: string(b.Step), At: t.UTC(), Screener: b.Screener, Outcome: string(b.Outcome), Account: at.actor,
	}}
}
