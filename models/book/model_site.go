package book

import (
	"slices"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/store"
)

// siteModel is one site's program in its versions, in order of recording.
type siteModel struct {
	code     string
	versions []versionModel
}

type versionModel struct {
	row     store.VersionRow
	program *program.Program
}

// newest is the version recorded last.
func (s *siteModel) newest() versionModel { return s.versions[len(s.versions)-1] }

// on is the version in force on a day: of those from which it is in force, the last recorded; before
// all of them, the first in force.
func (s *siteModel) on(day civil.Day) versionModel {
	for i := len(s.versions) - 1; i >= 0; i-- {
		if s.versions[i].row.InForceFrom <= day {
			return s.versions[i]
		}
	}
	first := s.versions[0]
	for _, v := range s.versions {
		if v.row.InForceFrom < first.row.InForceFrom {
			first = v
		}
	}
	return first
}

// eachProgram visits every version, oldest first; a nil site has none.
func (s *siteModel) eachProgram(visit func(*program.Program)) {
	if s == nil {
		return
	}
	for _, v := range s.versions {
		visit(v.program)
	}
}

// declares tells whether some version has what test looks for.
func (s *siteModel) declares(test func(*program.Program) bool) bool {
	found := false
	s.eachProgram(func(p *program.Program) { found = found || test(p) })
	return found
}

// codes collects codes over all versions, each once, in the order of the newest version first.
func (s *siteModel) codes(of func(*program.Program) []string) []string {
	var out []string
	if s == nil {
		return nil
	}
	for i := len(s.versions) - 1; i >= 0; i-- {
		for _, c := range of(s.versions[i].program) {
			if !slices.Contains(out, c) {
				out = append(out, c)
			}
		}
	}
	return out
}

func codesOf[T any](list []T, code func(T) string) []string {
	out := make([]string, len(list))
	for i, v := range list {
		out[i] = code(v)
	}
	return out
}

func (s *siteModel) zoneCodes() []string {
	return s.codes(func(p *program.Program) []string {
		return codesOf(p.Zones, func(z program.Zone) string { return z.Code })
	})
}

func (s *siteModel) levelCodes() []string {
	return s.codes(func(p *program.Program) []string {
		return codesOf(p.Levels, func(l program.Level) string { return l.Code })
	})
}

func (s *siteModel) crewCodes() []string {
	return s.codes(func(p *program.Program) []string {
		return codesOf(p.Crews, func(c program.Crew) string { return c.Code })
	})
}

func (s *siteModel) kindCodes() []string {
	return s.codes(func(p *program.Program) []string {
		return codesOf(p.FixtureKinds, func(k program.FixtureKind) string { return k.Code })
	})
}

func (s *siteModel) eventCodes() []string {
	return s.codes(func(p *program.Program) []string {
		return codesOf(p.Events, func(e program.Event) string { return e.Code })
	})
}

// event finds a declared event, the newest version's first.
func (s *siteModel) event(code string) (program.Event, bool) {
	if s == nil {
		return program.Event{}, false
	}
	for i := len(s.versions) - 1; i >= 0; i-- {
		if e, ok := s.versions[i].program.Event(code); ok {
			return *e, true
		}
	}
	return program.Event{}, false
}

// subjectCodes lists the declared subjects of a kind other than person and fixture.
func (s *siteModel) subjectCodes(asks program.Asks) []string {
	switch asks {
	case program.AsksZone:
		return s.zoneCodes()
	case program.AsksCrew:
		return s.crewCodes()
	case program.AsksPost:
		return s.codes(func(p *program.Program) []string {
			return codesOf(p.Posts, func(x program.Post) string { return x.Code })
		})
	case program.AsksDocument:
		return s.codes(func(p *program.Program) []string {
			return codesOf(p.Documents, func(d program.Document) string { return d.Code })
		})
	case program.AsksSite:
		return []string{s.code}
	default:
		return nil
	}
}

// kindsOf lists the kinds of subject that bear the code at the site.
func (m *model) kindsOf(site, code string) []string {
	var kinds []string
	for _, a := range program.AllAsks {
		if m.hasSubject(site, subjectBody{string(a), code}) {
			kinds = append(kinds, string(a))
		}
	}
	return kinds
}
