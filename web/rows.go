package web

import (
	"html/template"
	"strings"

	"lodebook/models/book"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// act is a form that is one click away.
type act struct{ Words, URL string }

// rowLine is one standing as a list shows it.
type rowLine struct {
	Disc             template.HTML
	Word             standing.Word
	What, WhatURL    string
	Cadence          string
	Who, Note        string
	WhoURL           string
	When             string // "30 Nov · 1 day"
	Why              []string
	Do               []act
	Gap, Guards      bool
	Urgent           bool // a gap or something closing
	Item, SubjectKey string
}

// rowLine dresses a standing for a list.
func (v *visit) rowLine(r book.Row) rowLine {
	l := rowLine{
		Disc: disc(r.Word, r.Left), Word: r.Word, What: r.Title, Cadence: r.Cadence, Who: r.SubjectName, Note: r.SubjectNote,
		WhoURL: v.subjectURL(r.Subject), When: v.whenWords(r), Why: r.Why, Do: v.rowActs(r), Gap: r.Word.IsGap(), Urgent: r.Word.IsGap() || r.Word == standing.Closing,
		Guards: len(r.Guards) > 0, Item: r.Item, SubjectKey: subjectKey(r.Subject),
	}
	if l.What == "" {
		l.What = r.Item
	}
	if r.Subject.Asks == book.AsksRemedy || r.Subject.Asks == book.AsksReport {
		l.WhatURL = l.WhoURL
	} else if v.may(book.SeeSite) {
		l.WhatURL = v.url("checklist", r.Item)
	} else if r.Subject.Code != v.actor.Person {
		l.WhoURL = ""
	}
	return l
}

func (v *visit) rowLines(rows []book.Row) []rowLine {
	out := make([]rowLine, len(rows))
	for i, r := range rows {
		out[i] = v.rowLine(r)
	}
	return out
}

// pointers lead to the rows where they lie.
func pointers(rows []book.Row) []*book.Row {
	out := make([]*book.Row, len(rows))
	for i := range rows {
		out[i] = &rows[i]
	}
	return out
}

// subjectKey names a subject as forms and tables do: kind:code.
func subjectKey(s standing.Subject) string { return string(s.Asks) + ":" + s.Code }

// subjectURL leads to the page of a subject.
func (v *visit) subjectURL(s standing.Subject) string {
	switch s.Asks {
	case book.AsksRemedy:
		return v.url("remedies", s.Code)
	case book.AsksReport:
		return v.reportURL(s.Code)
	case program.AsksPerson:
		return v.url("people", s.Code)
	case program.AsksFixture:
		return v.url("fixtures", s.Code)
	default:
		return v.url("subjects", string(s.Asks), s.Code)
	}
}

// whenWords says the day that matters and how far off it is.
func (v *visit) whenWords(r book.Row) string {
	switch {
	case r.Word == standing.Excused:
		return "until " + shortDayOr(r.ExcusedUntil, v.today(), "it ends")
	case r.Word.IsGap() && r.Since != nil:
		return "since " + shortDay(*r.Since, v.today())
	case r.Due == nil:
		return ""
	case r.InGrace:
		return "was due " + shortDay(*r.Due, v.today()) + ", in grace"
	case *r.Due-v.day() > soon:
		return shortDay(*r.Due, v.today())
	default:
		return shortDay(*r.Due, v.today()) + ", " + until(*r.Due, v.day())
	}
}

// soon is how many days ahead a list counts the days.
const soon = 60

// rowActs are the forms that answer a standing, for who may fill them in.
func (v *visit) rowActs(r book.Row) []act {
	if v.elsewhen() || !r.Asked {
		return nil
	}
	for _, what := range r.Records {
		if a, ok := v.actFor(what, r.Subject); ok {
			return []act{a}
		}
	}
	return nil
}

// actFor is the form for a kind of record and its subject.
func (v *visit) actFor(what string, s standing.Subject) (act, bool) {
	kind, code, _ := strings.Cut(what, "/")
	switch {
	case (kind == "inspection" || kind == "check") && s.Asks == program.AsksFixture:
		return act{"Fill in", with(v.url("sheet"), "record", what, "fixture", s.Code)}, v.may(book.FillSheet) && v.hasSheet(code)
	case kind == "acknowledgement" && s.Asks == program.AsksPerson && s.Code == v.actor.Person:
		return act{"Read and acknowledge", with(v.url("acknowledge"), "document", code)}, v.may(book.Acknowledge)
	case !v.may(book.RecordDone) || v.actor.Person != "" && s.Asks == program.AsksPerson && s.Code == v.actor.Person && (kind == "screening" || kind == "appointment"):
		return act{}, false
	case kind == "screening" && s.Asks == program.AsksPerson:
		return act{"Record", with(v.url("screening"), "record", what, "person", s.Code)}, true
	case kind == "drill" && s.Asks == program.AsksCrew:
		return act{"Plan", with(v.url("plan"), "record", what, "crew", s.Code)}, true
	case kind == "drill":
		return act{"Record", with(v.url("drill"), "record", what, "people", s.Code)}, true
	default:
		return act{"Record", with(v.url("record"), "record", what, "subject", subjectKey(s))}, true
	}
}

// hasSheet tells whether the program of the day has a sheet of that code.
func (v *visit) hasSheet(code string) bool {
	if v.site.Program == nil {
		return false
	}
	_, ok := v.site.Program.Sheet(code)
	return ok
}
