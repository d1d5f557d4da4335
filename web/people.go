package web

import (
	"fmt"
	"html/template"
	"strings"

	"lodebook/models/book"
	"lodebook/models/standing"
)

// personLine is one line of the list of people.
type personLine struct {
	Disc              template.HTML
	Name, URL, Note   string
	Crew, Level, Held string
	Standing, Next    string
	Here              bool
}

type peopleLeaf struct {
	page
	Say, Sum            string
	Lines, Former       []personLine
	Finder              finder
	Pager               pager
	Crews               []spineLink
	MayKeep             bool
	KeepURL, SessionURL string
	When                *asOf
}

var peopleSheet = leafOf[peopleLeaf]("people")

// peoplePage lists everybody of the site, those on staff first.
func peoplePage(v *visit) error {
	sv, all, err := v.b.People(v.ctx(), v.actor, v.site.Code, v.on)
	if err != nil {
		return err
	}
	p := &peopleLeaf{page: page{Title: "People", Section: secPeople, AsOf: v.asOf()}, MayKeep: v.acts(book.KeepPeople), KeepURL: v.url("keep-person"), SessionURL: v.url("session")}
	p.When = p.AsOf
	p.Say = peopleSay(sv, all)
	all = v.ofCrew(all, p, sv)
	list, f := find(v, all, "Name, crew or word", func(x book.PersonSummary) string {
		return strings.Join([]string{x.Name, x.Code, x.Crew, x.Employer, x.Level, word(x.Worst)}, " ")
	})
	p.Finder = f
	shown, pg := paged(v, list)
	p.Pager = pg
	for _, x := range shown {
		l := v.personLine(x)
		if x.Here {
			p.Lines = append(p.Lines, l)
		} else {
			p.Former = append(p.Former, l)
		}
	}
	return peopleSheet.show(v, 200, p)
}

// ofCrew keeps one crew where the address names one, and makes the tabs.
func (v *visit) ofCrew(all []book.PersonSummary, p *peopleLeaf, sv book.SiteView) []book.PersonSummary {
	crew := v.query("crew")
	here := v.c.Request.URL.EscapedPath()
	p.Crews = []spineLink{{Name: "Everybody", URL: with(here, "on", onQuery(v.on)), Current: crew == ""}}
	for _, c := range sv.Program.Crews {
		p.Crews = append(p.Crews, spineLink{Name: orCode(c.Name, c.Code), URL: with(here, "crew", c.Code, "on", onQuery(v.on)), Current: crew == c.Code})
	}
	if crew == "" {
		return all
	}
	var out []book.PersonSummary
	for _, x := range all {
		if x.Crew == crew && x.Here {
			out = append(out, x)
		}
	}
	return out
}

func orCode(name, code string) string {
	if name == "" {
		return code
	}
	return name
}

func peopleSay(sv book.SiteView, all []book.PersonSummary) string {
	gaps, closing, below := 0, 0, 0
	for _, x := range all {
		if !x.Here {
			continue
		}
		if x.Gaps > 0 {
			gaps++
		} else if x.Closing > 0 {
			closing++
		}
		if x.Level != "" && x.Held != x.Level {
			below++
		}
	}
	if sv.People == 0 {
		return "Nobody is on staff here yet. Add a person, or import a table of people."
	}
	s := upperFirst(count(sv.People, "person is", "people are")) + " on staff. "
	if gaps == 0 && closing == 0 {
		return s + "Nothing of theirs has run out and nothing is running low."
	}
	s += upperFirst(count(gaps, "has a gap", "have a gap")) + ", " + number(closing) + " more have something running low."
	if below > 0 {
		s += " " + upperFirst(count(below, "holds a lower level than the assigned one.", "hold a lower level than the assigned one."))
	}
	return s
}

func (v *visit) personLine(x book.PersonSummary) personLine {
	left := 0.5
	if x.Worst == standing.Met {
		left = 1
	}
	l := personLine{Disc: disc(x.Worst, left), Name: x.Name, URL: v.url("people", x.Code), Note: x.Employer, Crew: v.crewName(x.Crew), Level: x.Level, Held: x.Held, Here: x.Here}
	switch {
	case x.Gaps > 0:
		l.Standing = count(x.Gaps, "gap", "gaps")
	case x.Worst != "":
		l.Standing = word(x.Worst)
	}
	if x.NextDue != nil {
		l.Next = shortDay(*x.NextDue, v.today())
	}
	if !x.Here {
		l.Next = "left " + shortDayOr(x.Left, v.today(), "")
		l.Standing = ""
	}
	return l
}

func (v *visit) crewName(code string) string {
	if v.site.Program != nil {
		if c, ok := v.site.Program.Crew(code); ok {
			return orCode(c.Name, code)
		}
	}
	return code
}

// recordLine is one record of a history as a page shows it.
type recordLine struct {
	Day, What, More, Result, URL string
	Over                         bool
}

func (v *visit) recordLines(list []book.RecordLine) []recordLine {
	out := make([]recordLine, len(list))
	for i, r := range list {
		l := recordLine{Day: shortDay(r.Day, v.today()), What: r.Title, Result: "passed", URL: v.url("book", r.Entry), Over: r.Ended}
		if r.Time != nil {
			l.Day += ", " + r.Time.In(v.site.Location).Format("15:04")
		}
		switch {
		case !r.Passed:
			l.Result = "failed"
		case r.Remark:
			l.Result = "passed, with a remark"
		}
		var more []string
		if r.Until != nil {
			more = append(more, "good until "+shortDay(*r.Until, v.today()))
		}
		if r.Limit != "" {
			more = append(more, "only for "+strings.Join(strings.Fields(r.Limit), ", "))
		}
		if r.Imported {
			more = append(more, "imported")
		}
		if r.Site != v.site.Code {
			more = append(more, "at "+r.Site)
		}
		l.More = strings.Join(more, " · ")
		out[i] = l
	}
	return out
}

type factLine struct{ Label, Value, From, URL string }

type excusalLine struct {
	What, Span, Because, URL string
	Waiting, Over, Pause     bool
	Entry                    string
	Open                     bool
}

type personLeaf struct {
	page
	Name, Say      string
	Code           string
	Who            []faultLine // labelled values
	Bad, Low, Good []rowLine
	HeldWhy        []string
	Facts          []factLine
	Excusals       []excusalLine
	Events         []recordLine
	Records, Older []recordLine
	Do             []act
	MayEnd, Mine   bool
	ConfirmURL     string
	EndURL         string
	EraseURL       string
	Erased         bool
	When           *asOf
}

var personSheet = leafOf[personLeaf]("person")

// personPage shows one person. A member sees themselves.
func personPage(v *visit) error {
	x, err := v.b.Person(v.ctx(), v.actor, v.site.Code, v.param("code"), v.on)
	if err != nil {
		return err
	}
	section := secPeople
	if !v.may(book.SeeSite) {
		section = secMine
	}
	p := &personLeaf{page: page{Title: x.Name, Section: section, AsOf: v.asOf()}, Name: x.Name, Code: x.Subject.Code, Erased: x.Erased, HeldWhy: x.HeldWhy}
	p.When = p.AsOf
	p.Mine = x.Subject.Code == v.actor.Person
	p.Bad, p.Low, p.Good = v.parted(x.Rows)
	p.Say = personSay(x, p)
	p.Who = v.whoWords(x)
	v.personPast(p, x)
	if v.acts(book.RecordDone) {
		p.Do = v.personActs(x)
	}
	p.MayEnd = v.acts(book.Excuse)
	p.EndURL, p.ConfirmURL = v.url("pause-end"), v.url("confirm")
	if v.acts(book.Erase) && !p.Mine && !x.Erased && !presentNow(x) {
		p.EraseURL = with(v.url("erase"), "person", x.Subject.Code)
	}
	return personSheet.show(v, 200, p)
}

func presentNow(x book.SubjectView) bool {
	for _, s := range x.Stints {
		if s.Last == nil || *s.Last >= x.Site.Today {
			return true
		}
	}
	return false
}

// parted lists what has run out, what is running low or awaited, and the rest.
func (v *visit) parted(rows []book.Row) (bad, low, good []rowLine) {
	for _, r := range rows {
		l := v.rowLine(r)
		switch {
		case r.Word.IsGap() || r.Word == standing.DataFault:
			bad = append(bad, l)
		case r.Word == standing.Closing || r.Word == standing.Awaited:
			low = append(low, l)
		default:
			good = append(good, l)
		}
	}
	return bad, low, good
}

func personSay(x book.SubjectView, p *personLeaf) string {
	var s string
	switch {
	case x.Erased:
		return "The name and the texts about this person were erased. What was done stays on record under the code."
	case x.Level == "":
		s = "No level is assigned. "
	case x.Held == x.Level:
		s = "Holds the assigned level, " + x.Level + ". "
	case x.Held != "":
		s = fmt.Sprintf("Is assigned %s and holds %s. ", x.Level, x.Held)
	default:
		s = fmt.Sprintf("Is assigned %s and holds no level. ", x.Level)
	}
	switch {
	case len(p.Bad) == 0 && len(p.Low) == 0 && len(p.Good) == 0:
		return s + "Nothing is asked on this day."
	case len(p.Bad) == 0:
		return s + "Nothing has run out; " + count(len(p.Low), "thing is", "things are") + " due soon."
	default:
		return s + upperFirst(count(len(p.Bad), "thing has", "things have")) + " run out or cannot be told."
	}
}

func (v *visit) whoWords(x book.SubjectView) []faultLine {
	var out []faultLine
	add := func(label, value string) {
		if value != "" {
			out = append(out, faultLine{label, value})
		}
	}
	add("Code", x.Subject.Code)
	add("Crew", v.crewName(x.Crew))
	add("Kind", x.Kind)
	add("Zone", x.Zone)
	add("E-mail", x.Email)
	add("Badge", x.Badge)
	for _, s := range x.Stints {
		add("Here", shortDayOr(s.First, v.today(), "from the beginning")+" to "+shortDayOr(s.Last, v.today(), "now"))
	}
	return out
}

// personPast fills in what is behind the standings.
func (v *visit) personPast(p *personLeaf, x book.SubjectView) {
	for _, f := range x.Facts {
		if !f.Ended {
			p.Facts = append(p.Facts, factLine{f.Label, f.Value, fromWords(f, v), v.url("book", f.Entry)})
		}
	}
	for _, e := range x.Excusals {
		p.Excusals = append(p.Excusals, v.excusalLine(e))
	}
	for _, e := range x.Events {
		p.Events = append(p.Events, recordLine{Day: shortDay(e.Day, v.today()), What: e.Name, URL: v.url("book", e.Entry), Over: e.Ended})
	}
	p.Records = v.recordLines(x.Records)
	if len(p.Records) > historyShown {
		p.Records, p.Older = p.Records[:historyShown], p.Records[historyShown:]
	}
}

// historyShown is how many records a history shows before it folds.
const historyShown = 25

func fromWords(f book.FactLine, v *visit) string {
	if f.From.Format("2006") < "1000" {
		return "always"
	}
	return "from " + shortDay(f.From, v.today())
}

func (v *visit) excusalLine(e book.ExcusalLine) excusalLine {
	l := excusalLine{What: orCode(e.Title, e.Item), Because: e.Because, URL: v.url("book", e.Entry), Waiting: e.Waiting, Over: e.Ended, Pause: e.Item == "", Entry: e.Entry}
	if l.Pause {
		l.What = "Everything paused"
	}
	l.Span = shortDay(e.From, v.today()) + " to " + shortDayOr(e.To, v.today(), "no end yet")
	l.Open = l.Pause && e.To == nil && !e.Ended
	if e.ApprovedBy != "" {
		l.Because += " (approved by " + e.ApprovedBy + ", as imported)"
	}
	return l
}

func (v *visit) personActs(x book.SubjectView) []act {
	key := subjectKey(x.Subject)
	return []act{
		{"Record something", with(v.url("record"), "subject", key)},
		{"Record a screening", with(v.url("screening"), "person", x.Subject.Code)},
		{"Change", with(v.url("keep-person"), "code", x.Subject.Code)},
		{"Excuse", with(v.url("excuse"), "subject", key)},
		{"Pause", with(v.url("pause"), "subject", key)},
		{"Report an event", with(v.url("event"), "subject", key)},
	}
}
