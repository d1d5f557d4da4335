package scenario

import (
	"slices"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// span is a stretch of days over which nothing changes that a selector reads of a subject. Nobody
// records anything for a subject between its spans.
type span struct {
	first, last civil.Day
	what        program.Subject
}

// subject is one that items are asked of.
type subject struct {
	asks  program.Asks
	code  string
	spans []span
}

// ref names the subject in a table: codes of things other than people and fixtures are written with
// their kind, since a site may give one code to two of them.
func (s subject) ref() string {
	if s.asks == program.AsksPerson || s.asks == program.AsksFixture {
		return s.code
	}
	return string(s.asks) + ":" + s.code
}

// on is the subject as it is on the day; empty while it is away.
func (s subject) on(day civil.Day) program.Subject {
	for _, sp := range s.spans {
		if sp.first <= day && day <= sp.last {
			return sp.what
		}
	}
	return program.Subject{}
}

// subjects lists everything that the program may ask.
func subjects(a almanac, p *program.Program, t *tale) []subject {
	var all []subject
	for _, x := range staff {
		all = append(all, without(personSpans(a, x), t.away(x.code)))
	}
	for _, f := range fixtures {
		all = append(all, without(fixtureSpans(a, p, f), t.away(f.code)))
	}
	declared := func(asks program.Asks, code string) {
		whole := span{civil.FirstDay, civil.LastDay, program.Subject{Asks: asks, Code: code}}
		all = append(all, subject{asks, code, []span{whole}})
	}
	for _, z := range p.Zones {
		declared(program.AsksZone, z.Code)
	}
	for _, c := range p.Crews {
		declared(program.AsksCrew, c.Code)
	}
	for _, x := range p.Posts {
		declared(program.AsksPost, x.Code)
	}
	for _, d := range p.Documents {
		declared(program.AsksDocument, d.Code)
	}
	declared(program.AsksSite, p.Site.Code)
	return all
}

// personSpans are the stretches of a person's time at the site.
func personSpans(a almanac, x person) subject {
	s := subject{asks: program.AsksPerson, code: x.code}
	facts := map[string]any{}
	if worksWithCryogens(x) {
		facts["cryogen_work"] = true
	}
	for _, ph := range phases(a, x) {
		what := program.Subject{Asks: s.asks, Code: x.code, Name: x.name, Level: ph.level, Held: ph.level, Crew: ph.crew, Facts: facts}
		s.spans = append(s.spans, span{ph.first, ph.last, what})
	}
	return s
}

func fixtureSpans(a almanac, p *program.Program, f fixture) subject {
	s := subject{asks: program.AsksFixture, code: f.code}
	what := program.Subject{Asks: s.asks, Code: f.code, Kind: f.kind, Zone: f.zone, Facts: map[string]any{}}
	kind, _ := p.FixtureKind(f.kind)
	for _, fact := range kind.Facts {
		text, ok := f.facts[fact.Code]
		switch {
		case !ok:
		case fact.Type == program.FactYesNo:
			what.Facts[fact.Code] = text == "yes"
		case fact.Type != program.FactNumber: // no selector of the program reads a number
			what.Facts[fact.Code] = text
		}
	}
	last := civil.LastDay
	if f.until > 0 {
		last = a.ago(f.until)
	}
	s.spans = []span{{a.ago(f.since), last, what}}
	return s
}

// without cuts the days on which the subject is away out of its spans.
func without(s subject, away []pause) subject {
	for _, p := range away {
		var cut []span
		for _, sp := range s.spans {
			before, after := sp, sp
			before.last = min(sp.last, p.from-1)
			after.first = max(sp.first, p.end()+1)
			cut = append(cut, before, after)
		}
		s.spans = slices.DeleteFunc(cut, func(sp span) bool { return sp.last < sp.first })
	}
	return s
}
