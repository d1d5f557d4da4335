package web

import (
	"slices"

	"lodebook/models/book"
	"lodebook/models/program"
)

// chooseLine is one subject to choose.
type chooseLine struct{ Name, Note, URL string }

// chooseGroup is the subjects of one kind; More: there are others, to be found by name.
type chooseGroup struct {
	Head  string
	Lines []chooseLine
	More  bool
}

// chooseLeaf asks whom or what a form is about, before the form is opened.
type chooseLeaf struct {
	page
	Head, Say string
	Path      string
	Find      string
	Keep      []hidden // what else the address says
	only      []string // kinds of fixture, where not all are to be chosen from
	Groups    []chooseGroup
}

var chooseSheet = leafOf[chooseLeaf]("choose")

// How many subjects a choice shows: of one kind alone, and of each of several.
const (
	chooseMost = 90
	chooseEach = 24
)

var kindHeads = map[program.Asks]string{
	program.AsksPerson: "People", program.AsksFixture: "Fixtures", program.AsksZone: "Zones", program.AsksCrew: "Crews",
	program.AsksPost: "Posts", program.AsksDocument: "Documents", program.AsksSite: "The site",
}

// chooseSubject lists the subjects of some kinds; each leads to the form with the subject in its
// field, and the rest of the address kept.
func (v *visit) chooseSubject(p *chooseLeaf, field string, kinds ...program.Asks) error {
	p.Path, p.Find = v.c.Request.URL.EscapedPath(), v.query("find")
	var pairs []string
	for _, k := range v.keys("find", field, "choose", "on") {
		p.Keep = append(p.Keep, hidden{k, v.query(k)})
		pairs = append(pairs, k, v.query(k))
	}
	most := chooseEach
	if len(kinds) == 1 {
		most = chooseMost
	}
	for _, asks := range kinds {
		list, more, err := v.b.Subjects(v.ctx(), v.actor, v.site.Code, book.SubjectQuery{Asks: asks, FixtureKinds: p.only, Words: p.Find, Most: most})
		if err != nil {
			return err
		}
		g := chooseGroup{Head: kindHeads[asks], More: more}
		for _, s := range list {
			value := subjectKey(s.Subject)
			if field != "subject" {
				value = s.Subject.Code
			}
			g.Lines = append(g.Lines, chooseLine{s.Name, s.Note, with(p.Path, append(slices.Clone(pairs), field, value)...)})
		}
		if len(g.Lines) > 0 {
			p.Groups = append(p.Groups, g)
		}
	}
	return chooseSheet.show(v, 200, p)
}

// unchosen tells that a form was opened without what it is about.
func (v *visit) unchosen(field string) bool { return v.query(field) == "" || v.query("choose") != "" }
