package web

import (
	"slices"

	"lodebook/models/program"
)

// chooseLine is one subject to choose.
type chooseLine struct{ Name, Note, URL string }

// chooseLeaf asks whom or what a form is about, before the form is opened.
type chooseLeaf struct {
	page
	Head, Say string
	Path      string
	Find      string
	Keep      []hidden // what else the address says
	Lines     []chooseLine
	More      bool
}

var chooseSheet = leafOf[chooseLeaf]("choose")

const chooseMost = 60

// chooseSubject lists the subjects of some kinds; each leads to the form with the subject in its
// field, and the rest of the address kept.
func (v *visit) chooseSubject(p *chooseLeaf, field string, kinds ...program.Asks) error {
	p.Path, p.Find = v.c.Request.URL.EscapedPath(), v.query("find")
	var pairs []string
	for _, k := range v.keys("find", field, "choose", "on") {
		p.Keep = append(p.Keep, hidden{k, v.query(k)})
		pairs = append(pairs, k, v.query(k))
	}
	list, more, err := v.b.Subjects(v.ctx(), v.actor, v.site.Code, kinds, p.Find, chooseMost)
	if err != nil {
		return err
	}
	p.More = more
	for _, s := range list {
		note := s.Note
		if note == "" && s.Name != s.Subject.Code {
			note = s.Subject.Code
		}
		value := subjectKey(s.Subject)
		if field != "subject" {
			value = s.Subject.Code
		}
		p.Lines = append(p.Lines, chooseLine{s.Name, note, with(p.Path, append(slices.Clone(pairs), field, value)...)})
	}
	return chooseSheet.show(v, 200, p)
}

// unchosen tells that a form was opened without what it is about.
func (v *visit) unchosen(field string) bool { return v.query(field) == "" || v.query("choose") != "" }
