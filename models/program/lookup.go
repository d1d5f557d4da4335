package program

import (
	"slices"
	"strings"
)

// find gives a pointer to the first element that has the code.
func find[T any](all []T, has func(*T) bool) (*T, bool) {
	for i := range all {
		if has(&all[i]) {
			return &all[i], true
		}
	}
	return nil, false
}

// Item finds an item of the checklist by its code.
func (p *Program) Item(code string) (*Item, bool) {
	return find(p.Items, func(i *Item) bool { return i.Code == code })
}

// Sheet finds a sheet by its code.
func (p *Program) Sheet(code string) (*Sheet, bool) {
	return find(p.Sheets, func(s *Sheet) bool { return s.Code == code })
}

// Level finds a level by its code.
func (p *Program) Level(code string) (*Level, bool) {
	return find(p.Levels, func(l *Level) bool { return l.Code == code })
}

// FixtureKind finds a fixture kind by its code.
func (p *Program) FixtureKind(code string) (*FixtureKind, bool) {
	return find(p.FixtureKinds, func(k *FixtureKind) bool { return k.Code == code })
}

// Zone finds a zone by its code.
func (p *Program) Zone(code string) (*Zone, bool) {
	return find(p.Zones, func(z *Zone) bool { return z.Code == code })
}

// Crew finds a crew by its code.
func (p *Program) Crew(code string) (*Crew, bool) {
	return find(p.Crews, func(c *Crew) bool { return c.Code == code })
}

// Post finds a post by its code.
func (p *Program) Post(code string) (*Post, bool) {
	return find(p.Posts, func(x *Post) bool { return x.Code == code })
}

// Document finds a document by its code.
func (p *Program) Document(code string) (*Document, bool) {
	return find(p.Documents, func(d *Document) bool { return d.Code == code })
}

// Event finds an event by its code.
func (p *Program) Event(code string) (*Event, bool) {
	return find(p.Events, func(e *Event) bool { return e.Code == code })
}

// SheetFor finds the sheet on which a record of the kind/code is filled in: inspections and checks
// have one where a sheet of their code exists.
func (p *Program) SheetFor(record string) (*Sheet, bool) {
	kind, code, ok := strings.Cut(record, "/")
	if !ok || kind != "inspection" && kind != "check" {
		return nil, false
	}
	return p.Sheet(code)
}

// Recorders are the roles, crews and levels that may record on the sheet.
func (p *Program) Recorders(s *Sheet) []string {
	if len(s.RecordedBy) == 0 {
		return slices.Clone(recorderRoles)
	}
	return slices.Clone(s.RecordedBy)
}

// FactsOf are the facts declared for a kind of subject: those of people, or of all fixture kinds
// by the one type that a code has.
func (p *Program) FactsOf(asks Asks) []Fact {
	switch asks {
	case AsksPerson:
		return p.PersonFacts
	case AsksFixture:
		return p.fixtureFacts()
	}
	return nil
}

func (p *Program) fixtureFacts() []Fact {
	var out []Fact
	at := map[string]int{}
	for _, k := range p.FixtureKinds {
		for _, f := range k.Facts {
			i, known := at[f.Code]
			if !known {
				at[f.Code] = len(out)
				f.Choices = slices.Clone(f.Choices)
				out = append(out, f)
				continue
			}
			for _, c := range f.Choices {
				if !slices.Contains(out[i].Choices, c) {
					out[i].Choices = append(out[i].Choices, c)
				}
			}
		}
	}
	return out
}

func codes[T any](all []T, code func(T) string) []string {
	out := make([]string, len(all))
	for i, x := range all {
		out[i] = code(x)
	}
	return out
}

func (p *Program) zoneCodes() []string { return codes(p.Zones, func(z Zone) string { return z.Code }) }
func (p *Program) levelCodes() []string {
	return codes(p.Levels, func(l Level) string { return l.Code })
}
func (p *Program) crewCodes() []string { return codes(p.Crews, func(c Crew) string { return c.Code }) }
func (p *Program) postCodes() []string { return codes(p.Posts, func(x Post) string { return x.Code }) }

func (p *Program) kindCodes() []string {
	return codes(p.FixtureKinds, func(k FixtureKind) string { return k.Code })
}

func (p *Program) eventCodes() []string {
	return codes(p.Events, func(e Event) string { return e.Code })
}

func (p *Program) documentCodes() []string {
	return codes(p.Documents, func(d Document) string { return d.Code })
}

// codesOf are the codes that the program declares for subjects of the kind; people's and fixtures'
// are not in the program.
func (p *Program) codesOf(asks Asks) ([]string, bool) {
	switch asks {
	case AsksZone:
		return p.zoneCodes(), true
	case AsksCrew:
		return p.crewCodes(), true
	case AsksPost:
		return p.postCodes(), true
	case AsksDocument:
		return p.documentCodes(), true
	case AsksSite:
		return []string{p.Site.Code}, true
	}
	return nil, false
}
