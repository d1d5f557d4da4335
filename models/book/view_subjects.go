package book

import (
	"context"
	"slices"
	"strings"

	"lodebook/models/program"
	"lodebook/models/standing"
)

// SubjectQuery chooses subjects of one kind that exist today. A zero field asks for nothing.
type SubjectQuery struct {
	Asks         program.Asks
	FixtureKinds []string // of fixtures
	Words        string   // each stands in the name, code or note
	Most         int      // so many at the most
}

// SubjectLine is one subject of a site to choose from.
type SubjectLine struct {
	Subject    standing.Subject
	Name, Note string
}

// Subjects lists the subjects that the query chooses, by name. More tells that there are others.
func (b *Book) Subjects(ctx context.Context, actor Actor, site string, q SubjectQuery) (out []SubjectLine, more bool, err error) {
	err = b.at(ctx, actor, site, nil, func(v *siteOn) error {
		out = v.subjectLines(q)
		return nil
	})
	if len(out) > q.Most {
		out, more = out[:q.Most], true
	}
	return out, more, err
}

func (v *siteOn) subjectLines(q SubjectQuery) []SubjectLine {
	words := strings.Fields(strings.ToLower(q.Words))
	var out []SubjectLine
	for _, s := range v.m.engine.Subjects(v.Code, q.Asks, v.on, v.k) {
		name, note := v.nameAndNote(s)
		text := strings.ToLower(name + " " + s.Code + " " + note)
		if slices.ContainsFunc(words, func(w string) bool { return !strings.Contains(text, w) }) {
			continue
		}
		if f, ok := v.m.fixture(v.Code, s.Code); ok && s.Asks == program.AsksFixture && len(q.FixtureKinds) > 0 && !slices.Contains(q.FixtureKinds, f.Kind) {
			continue
		}
		out = append(out, SubjectLine{s, name, note})
	}
	slices.SortStableFunc(out, func(a, b SubjectLine) int { return strings.Compare(strings.ToLower(a.Name), strings.ToLower(b.Name)) })
	return out
}
