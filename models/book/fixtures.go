package book

import (
	"context"
	"strings"

	"lodebook/models/program"
)

// FixtureForm is what a form or a row of a table says of a fixture, as typed.
type FixtureForm struct {
	ID                     string
	Code, Kind, Name, Zone string
	Since, Until           string
	From                   string
	Facts                  map[string]string
}

// KeepFixture puts on record what a fixture is, since when, and facts from a day.
func (b *Book) KeepFixture(ctx context.Context, actor Actor, site string, f FixtureForm, fix Correction) (Receipt, error) {
	if err := actor.may(KeepFixtures, site); err != nil {
		return Receipt{}, err
	}
	return b.write(ctx, actor, func(s *session) error {
		body, faults := s.check(site).fixtureBody(f)
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		if body.saysNothing(s.m, site) && fix.Supersedes == "" {
			return nil
		}
		fix.fill(&body.common)
		return s.add(draft{id: f.ID, site: site, supersedes: fix.Supersedes, body: body})
	})
}

// saysNothing tells that the form held nothing new.
func (b *fixtureBody) saysNothing(m *model, site string) bool {
	_, known := m.fixture(site, b.Code)
	return known && b.Name == "" && b.Stint == nil && len(b.Facts) == 0
}

// fixtureBody reads the form and leaves out what is on record already.
func (c *check) fixtureBody(f FixtureForm) (*fixtureBody, []Fault) {
	if c.m.site(c.site) == nil {
		return nil, []Fault{{"site", c.site, "is no site of this book", "one of " + strings.Join(c.m.siteCodes(), ", ")}}
	}
	old, known := c.m.fixture(c.site, f.Code)
	body := &fixtureBody{Code: f.Code, Kind: f.Kind}
	if body.Kind == "" {
		body.Kind = old.Kind
	}
	if f.Name != "" && f.Name != old.Name {
		body.Name = f.Name
	}
	stint, faults := c.stint(program.AsksFixture, f.Code, stintForm{f.Since, f.Until, "since", "until"})
	body.Stint = stint
	values, more := c.factValues(c.fixtureFacts(body.Kind), withBuiltins(f.Facts, map[string]string{factZone: f.Zone}), "")
	faults = append(faults, more...)
	from, fault := c.factsFrom(f.From, stint, c.pastStint(program.AsksFixture, f.Code, f.Since), known)
	if fault != nil {
		faults = append(faults, *fault)
	}
	body.Facts = c.newFacts(factKey(c.site, program.AsksFixture, f.Code), values, from)
	if len(body.Facts) > 0 {
		body.From = &from
	}
	return body, faults
}
