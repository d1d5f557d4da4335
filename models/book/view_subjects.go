package book

import (
	"context"
	"slices"
	"strings"

	"lodebook/models/program"
	"lodebook/models/standing"
)

// SubjectLine is one subject of a site to choose from.
type SubjectLine struct {
	Subject    standing.Subject
	Name, Note string
}

// Subjects lists the subjects of some kinds that exist today and in whose name, code or note every
// word stands, in the order of the kinds and then by name; most of them at the most. More tells that
// there are others.
func (b *Book) Subjects(ctx context.Context, actor Actor, site string, kinds []program.Asks, words string, most int) (out []SubjectLine, more bool, err error) {
	wanted := strings.Fields(strings.ToLower(words))
	err = b.at(ctx, actor, site, nil, func(v *siteOn) error {
		for _, asks := range kinds {
			out = append(out, v.subjectLines(asks, wanted)...)
		}
		return nil
	})
	if len(out) > most {
		out, more = out[:most], true
	}
	return out, more, err
}

func (v *siteOn) subjectLines(asks program.Asks, words []string) []SubjectLine {
	var out []SubjectLine
	for _, s := range v.m.engine.Subjects(v.Code, asks, v.on, v.k) {
		name, note := v.nameAndNote(s)
		text := strings.ToLower(name + " " + s.Code + " " + note)
		if slices.ContainsFunc(words, func(w string) bool { return !strings.Contains(text, w) }) {
			continue
		}
		out = append(out, SubjectLine{s, name, note})
	}
	slices.SortStableFunc(out, func(a, b SubjectLine) int { return strings.Compare(strings.ToLower(a.Name), strings.ToLower(b.Name)) })
	return out
}
