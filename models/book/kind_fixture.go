package book

import (
	"strings"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/store"
)

const kindFixture = "fixture"

// fixtureBody is what one row or form says of a fixture of the entry's site.
type fixtureBody struct {
	common
	Code  string               `json:"code"`
	Kind  string               `json:"fixture_kind"`
	Name  string               `json:"name,omitempty"`
	Stint *stintBody           `json:"stint,omitempty"` // since and until
	From  *civil.Day           `json:"from,omitempty"`
	Facts map[string]factValue `json:"facts,omitempty"`
}

func (b *fixtureBody) kind() string { return kindFixture }
func (b *fixtureBody) version() int { return 1 }

func (b *fixtureBody) validate(c *check) []Fault {
	faults := checkCode("code", b.Code)
	kinds := c.m.site(c.site).kindCodes()
	if !c.m.site(c.site).declares(func(p *program.Program) bool { _, ok := p.FixtureKind(b.Kind); return ok }) {
		faults = append(faults, Fault{"kind", b.Kind, "is no fixture kind of this site", "one of " + strings.Join(kinds, ", ")})
	}
	if f, ok := c.m.fixture(c.site, b.Code); ok && f.Kind != b.Kind && c.old == nil {
		faults = append(faults, Fault{"kind", b.Kind, "this fixture is on record as a " + f.Kind, "use another code for another thing"})
	}
	faults = append(faults, checkStint(c, string(program.AsksFixture), b.Code, b.Stint, "since", "until")...)
	return append(faults, c.checkFacts(b.Facts, b.From, c.fixtureFacts(b.Kind))...)
}

func (b *fixtureBody) apply(at applied) []any {
	kind := string(program.AsksFixture)
	rows := []any{store.FixtureRow{Line: at.line, Site: at.site, Code: b.Code, Kind: b.Kind, Name: b.Name}}
	if b.Stint != nil {
		rows = append(rows, store.StintRow{Line: at.line, Site: at.site, Kind: kind, Code: b.Code, First: b.Stint.First, Last: b.Stint.Last})
	}
	if b.From != nil {
		rows = append(rows, factRows(at, kind, b.Code, *b.From, b.Facts)...)
	}
	return rows
}
