package web

import (
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
	Word              standing.Word
	More, Next        string
}

type peopleLeaf struct {
	page
	Say                 string
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
		return strings.Join([]string{x.Name, x.Code, x.Crew, v.crewName(x.Crew), x.Employer, x.Level, v.levelName(x.Level), word(x.Worst)}, " ")
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
	l := personLine{Name: x.Name, URL: v.url("people", x.Code), Note: x.Employer, Crew: v.crewName(x.Crew), Level: x.Level, Held: x.Held, Word: x.Worst}
	l.Disc, l.More = disc(x.Worst, roughly(x.Worst)), moreGaps(x.Gaps)
	if x.NextDue != nil {
		l.Next = shortDay(*x.NextDue, v.today())
	}
	if !x.Here {
		l.Next = "left " + shortDayOr(x.Left, v.today(), "")
	}
	return l
}

// roughly is how full the well of many obligations together is drawn.
func roughly(worst standing.Word) float64 {
	if worst == standing.Met {
		return 1
	}
	return 0.3
}

// moreGaps says how many gaps there are where it is more than the one that is named.
func moreGaps(n int) string {
	if n < 2 {
		return ""
	}
	return number(n) + " gaps"
}

func (v *visit) levelName(code string) string {
	if v.site.Program != nil {
		if l, ok := v.site.Program.Level(code); ok {
			return orCode(l.Name, code)
		}
	}
	return code
}

func (v *visit) crewName(code string) string {
	if v.site.Program != nil {
		if c, ok := v.site.Program.Crew(code); ok {
			return orCode(c.Name, code)
		}
	}
	return code
}
