package book

import (
	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/store"
)

const kindPerson = "person"

// stintBody is a span of presence; both days are included, nil is open.
type stintBody struct {
	First *civil.Day `json:"first,omitempty"`
	Last  *civil.Day `json:"last,omitempty"`
}

// personBody is what one row or form says of a person: who they are, one stint at the entry's site,
// and facts from a day. What is absent is not said.
type personBody struct {
	common
	Code  string               `json:"code"`
	Name  Veiled               `json:"name,omitzero"`
	Email Veiled               `json:"email,omitzero"`
	Badge Veiled               `json:"badge,omitzero"`
	Stint *stintBody           `json:"stint,omitempty"`
	From  *civil.Day           `json:"from,omitempty"`
	Facts map[string]factValue `json:"facts,omitempty"`
}

func (b *personBody) kind() string { return kindPerson }
func (b *personBody) version() int { return 1 }

func (b *personBody) validate(c *check) []Fault {
	var faults []Fault
	faults = append(faults, checkCode("code", b.Code)...)
	p, known := c.m.person(b.Code)
	if b.Name.Value == "" && (!known || p.Name == "") {
		faults = append(faults, Fault{"name", "", "is empty", "write the person's name"})
	}
	if known && p.Erased {
		faults = append(faults, Fault{"code", b.Code, "belonged to a person who was erased", "use another code"})
	}
	faults = append(faults, checkStint(c, string(program.AsksPerson), b.Code, b.Stint, "joined", "left")...)
	return append(faults, c.checkFacts(b.Facts, b.From, c.personFacts())...)
}

// badgeFrom is the day from which the badge is the person's: the one from which facts hold, else the first of the
// stint, else the one on which it was recorded.
func (b *personBody) badgeFrom(at applied) *civil.Day {
	switch {
	case b.Badge.IsZero():
		return nil
	case b.From != nil:
		return b.From
	case b.Stint != nil && b.Stint.First != nil:
		return b.Stint.First
	}
	return dayPtr(civil.DayOf(at.at, at.zone(at.site)))
}

func (b *personBody) apply(at applied) []any {
	rows := []any{store.PersonRow{
		Line: at.line, Code: b.Code, Name: b.Name.Value, Email: b.Email.Value, Badge: b.Badge.Value, From: b.badgeFrom(at),
	}}
	kind := string(program.AsksPerson)
	if b.Stint != nil {
		rows = append(rows, store.StintRow{Line: at.line, Site: at.site, Kind: kind, Code: b.Code, First: b.Stint.First, Last: b.Stint.Last})
	}
	if b.From != nil {
		rows = append(rows, factRows(at, kind, b.Code, *b.From, b.Facts)...)
	}
	return rows
}
