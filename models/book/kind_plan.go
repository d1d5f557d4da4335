package book

import (
	"lodebook/models/civil"
	"lodebook/models/store"
)

const kindPlan = "plan"

// planBody is a drill or session that is planned for a crew (or for nobody in particular).
type planBody struct {
	common
	Record string    `json:"record"` // kind/code
	Crew   string    `json:"crew,omitempty"`
	Day    civil.Day `json:"day"`
	At     string    `json:"at,omitempty"` // HH:MM
	Note   Veiled    `json:"note,omitzero"`
}

func (b *planBody) kind() string { return kindPlan }
func (b *planBody) version() int { return 1 }

func (b *planBody) validate(c *check) []Fault {
	faults := c.checkWhat("record", b.Record)
	if b.Crew != "" {
		faults = append(faults, c.checkSubject("crew", subjectBody{"crew", b.Crew})...)
	}
	if b.At != "" && !isClock(b.At) {
		faults = append(faults, Fault{"at", b.At, "is not a time of day", "write it as 14:00"})
	}
	return faults
}

func isClock(s string) bool {
	return len(s) == 5 && s[2] == ':' && s[:2] >= "00" && s[:2] <= "23" && s[3:] >= "00" && s[3:] <= "59"
}

func (b *planBody) apply(at applied) []any {
	return []any{store.PlanRow{Line: at.line, Site: at.site, What: b.Record, Crew: b.Crew, Day: b.Day, At: b.At}}
}
