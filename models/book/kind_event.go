package book

import (
	"strings"

	"lodebook/models/program"
	"lodebook/models/store"
)

const kindEvent = "event"

// eventBody is something that happened to a subject and asks for an answer.
type eventBody struct {
	common
	Event   string      `json:"event"`
	Subject subjectBody `json:"subject"`
	On      string      `json:"on"`
	Note    Veiled      `json:"note,omitzero"`
}

func (b *eventBody) kind() string { return kindEvent }
func (b *eventBody) version() int { return 1 }

func (b *eventBody) validate(c *check) []Fault {
	faults := c.checkSubject("subject", b.Subject)
	_, f := c.moment("on", b.On)
	faults = append(faults, f...)
	ev, ok := c.m.site(c.site).event(b.Event)
	if !ok {
		return append(faults, Fault{"event", b.Event, "is no event of this site", "one of " + strings.Join(c.m.site(c.site).eventCodes(), ", ")})
	}
	if !c.eventFits(ev, b.Subject) {
		faults = append(faults, Fault{"subject", b.Subject.Code, "is no " + ev.Of + ", and " + ev.Code + " happens to a " + ev.Of, "name a " + ev.Of})
	}
	return faults
}

// eventFits tells whether the subject is of the kind that the event happens to.
func (c *check) eventFits(ev program.Event, s subjectBody) bool {
	if s.Kind == ev.Of {
		return true
	}
	f, ok := c.m.fixture(c.site, s.Code)
	return s.Kind == string(program.AsksFixture) && ok && f.Kind == ev.Of
}

func (b *eventBody) apply(at applied) []any {
	m := parseMoment(b.On, at.zone(at.site))
	return []any{store.EventRow{Line: at.line, Site: at.site, Subject: b.Subject.key(at.site), Event: b.Event, Day: m.day, Time: m.time}}
}
