package book

import (
	"strings"
	"time"

	"lodebook/models/reach"
	"lodebook/models/store"
)

const kindDuty = "duty"

// dutyBody is one turn of the roster: a person is on duty from an instant, which is included, up to one that is not.
// Turns of one person may overlap.
type dutyBody struct {
	common
	Person string `json:"person"`
	From   string `json:"from"`
	To     string `json:"to"`
	Duty   string `json:"duty"` // a word of the site's own, or on-call
}

// usualDuty stands where a roster does not say which duty it is.
const usualDuty = "duty"

func (b *dutyBody) kind() string { return kindDuty }
func (b *dutyBody) version() int { return 1 }

func (b *dutyBody) validate(c *check) []Fault {
	faults := c.checkSubject("person", subjectBody{"person", b.Person})
	from, f := b.instant("from", b.From)
	faults = append(faults, f...)
	to, f := b.instant("to", b.To)
	faults = append(faults, f...)
	if faults = append(faults, checkCode("duty", b.Duty)...); len(faults) > 0 {
		return faults
	}
	switch {
	case !to.After(from):
		faults = append(faults, Fault{"to", b.To, "is not after the beginning, " + b.From, "an instant after it"})
	case to.Sub(from) > reach.LongestDuty:
		faults = append(faults, Fault{"to", b.To, "is more than 48 hours after the beginning, " + b.From, "a row for each turn"})
	}
	return faults
}

// instant reads an instant as an entry holds it.
func (b *dutyBody) instant(field, text string) (time.Time, []Fault) {
	t, err := time.Parse(time.RFC3339, text)
	switch {
	case strings.TrimSpace(text) == "":
		return t, []Fault{{field, text, "is empty", "write an instant such as 2026-03-01T08:30:00Z, or local time as in 2026-03-01 08:30"}}
	case err != nil:
		return t, []Fault{{field, text, "is no instant", "add a time, as in 2026-03-01 08:30"}}
	}
	return t.UTC(), nil
}

func (b *dutyBody) apply(at applied) []any {
	from, _ := b.instant("from", b.From)
	to, _ := b.instant("to", b.To)
	return []any{store.DutyRow{Line: at.line, Site: at.site, Person: b.Person, From: from, To: to, Duty: b.Duty}}
}
