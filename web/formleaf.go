package web

import (
	"slices"
	"strings"

	"lodebook/models/book"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// formLeaf is a page with one form: a heading, what it is for, its fields and its button.
type formLeaf struct {
	page
	Head, Say string
	Other     string // where another subject is chosen; empty: there is none to choose
	Action    string
	Form      *Form
	Fields    []field
	Crowd     *crowd
	Hidden    []hidden
	Button    string
	After     string // what happens next, under the button
	Cautions  []string
	Risk      bool
	Both      *bothSides // of a correction that came too late
}

var formSheet = leafOf[formLeaf]("form")

// showForm shows a form page; with faults it is answered as one that was not kept.
func (v *visit) showForm(p *formLeaf) error {
	status := 200
	if len(p.Form.Faults) > 0 {
		status = 422
	}
	return formSheet.show(v, status, p)
}

// formID gives a form the identifier of the entry that it will write, so that sent twice it is kept
// once.
func (v *visit) formID(f *Form) (hidden, error) {
	if f.Get("id") == "" {
		id, err := v.b.FreshID()
		if err != nil {
			return hidden{}, err
		}
		f.Set("id", id)
	}
	return hidden{"id", f.Get("id")}, nil
}

// about says whom or what a form is about, by the field that holds kind:code, or the code of a
// person. It is chosen before the form is opened and carried along; where it is at fault it is a field.
func (p *formLeaf) about(v *visit, f *Form, name, label string) {
	if f.Fault(name) != "" || f.Get(name) == "" {
		p.Fields = append([]field{f.Text(name, label).Need().Help("A code, or kind:code, as in person:S01 or zone:IV")}, p.Fields...)
		return
	}
	key := f.Get(name)
	if name == "person" {
		key = "person:" + key
	}
	p.Head += ": " + v.subjectName(key)
	p.Hidden = append(p.Hidden, hidden{name, f.Get(name)})
	p.Other = with(p.Action, "record", f.Get("record"), "event", f.Get("event"), "item", f.Get("item"), "choose", "yes")
}

// subjectName is the name of kind:code, for headings.
func (v *visit) subjectName(key string) string {
	s, ok := subjectOf(key)
	if !ok {
		return key
	}
	x, err := v.b.Subject(v.ctx(), v.actor, v.site.Code, s, nil)
	if err != nil {
		return s.Code
	}
	return x.Name
}

// subjectOf reads kind:code.
func subjectOf(key string) (standing.Subject, bool) {
	kind, code, ok := strings.Cut(key, ":")
	return standing.Subject{Asks: program.Asks(kind), Code: code}, ok
}

// backTo is the page of a subject, for after a record about it.
func (v *visit) backTo(key string) string {
	if s, ok := subjectOf(key); ok {
		return v.subjectURL(s)
	}
	return v.url("today")
}

// what names the kind/code of a record.
func (v *visit) what(record string) string { return book.WhatTitle(v.site.Program, record) }

// whats are the records of some kinds that the checklist asks for, as choices. Asks (empty: any) is
// the kind of subject that it asks them of.
func (v *visit) whats(asks program.Asks, kinds ...string) []option {
	var out []option
	add := func(what string) {
		if !slices.ContainsFunc(out, func(o option) bool { return o.Value == what }) {
			out = append(out, option{Value: what, Words: v.what(what)})
		}
	}
	for _, i := range v.site.Program.Items {
		for _, what := range i.Records {
			kind, _, _ := strings.Cut(what, "/")
			if slices.Contains(kinds, kind) && (asks == "" || i.Asks == asks) {
				add(what)
			}
		}
	}
	if slices.Contains(kinds, "appointment") && (asks == "" || asks == program.AsksPerson) {
		for _, p := range v.site.Program.Posts {
			add("appointment/" + p.Code)
		}
	}
	return out
}

// choose puts a choice of nothing before a list, unless there is just one to choose.
func choose(list []option) []option {
	if len(list) == 1 {
		return list
	}
	return append([]option{{Value: "", Words: "Choose"}}, list...)
}
