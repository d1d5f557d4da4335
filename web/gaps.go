package web

import (
	"bytes"
	"slices"
	"strings"

	"lodebook/models/book"
	"lodebook/models/program"
	"lodebook/models/table"
)

// gapLine is one gap with its flag.
type gapLine struct {
	rowLine
	Reopened string
	Excuse   string
}

type gapGroup struct {
	Name  string
	Lines []gapLine
}

type gapsLeaf struct {
	page
	Say       string
	Tabs      []spineLink
	Groups    []gapGroup
	Told      []rowLine
	ExportURL string
	When      *asOf
}

var gapsSheet = leafOf[gapsLeaf]("gaps")

// gapsPage lists everything that falls short, by item or by who answers for it.
func gapsPage(v *visit) error {
	st, err := v.b.Standings(v.ctx(), v.actor, book.StandingQuery{Site: v.site.Code, On: v.on})
	if err != nil {
		return err
	}
	gaps := st.Gaps()
	if v.query("format") == "csv" {
		return v.gapsCSV(st, gaps)
	}
	flags, err := v.reopened()
	if err != nil {
		return err
	}
	by := v.query("by")
	p := &gapsLeaf{page: page{Title: "Gaps", Section: secGaps, AsOf: v.asOf()}, ExportURL: with(v.url("gaps"), "format", "csv")}
	p.When = p.AsOf
	here := v.c.Request.URL.EscapedPath()
	p.Tabs = []spineLink{{Name: "By item", URL: with(here, "on", onQuery(v.on)), Current: by != "owner"}, {Name: "By owner", URL: with(here, "by", "owner", "on", onQuery(v.on)), Current: by == "owner"}}
	names := map[string]*gapGroup{}
	var order []string
	for _, r := range gaps {
		name := r.Title
		if by == "owner" {
			name = v.ownerName(r.Owner)
		}
		if names[name] == nil {
			names[name] = &gapGroup{Name: name}
			order = append(order, name)
		}
		l := v.gapLine(r, flags)
		if by != "owner" {
			l.What = "" // the heading says it
		}
		names[name].Lines = append(names[name].Lines, l)
	}
	slices.Sort(order)
	for _, n := range order {
		p.Groups = append(p.Groups, *names[n])
	}
	p.Told = v.rowLines(st.Faults())
	p.Say = gapsSay(gaps, st.Faults(), order, by)
	return gapsSheet.show(v, 200, p)
}

func gapsSay(gaps, told []book.Row, order []string, by string) string {
	if len(gaps) == 0 && len(told) == 0 {
		return "Nothing falls short of the checklist."
	}
	guarded := 0
	for _, r := range gaps {
		if len(r.Guards) > 0 {
			guarded++
		}
	}
	s := upperFirst(count(len(gaps), "gap", "gaps"))
	if by == "owner" {
		s += " among " + count(len(order), "owner", "owners") + "."
	} else {
		s += " in " + count(len(order), "item", "items") + "."
	}
	if guarded > 0 {
		s += " " + upperFirst(count(guarded, "of them guards a restricted zone.", "of them guard a restricted zone."))
	}
	if len(told) > 0 {
		s += " " + upperFirst(count(len(told), "more cannot be told.", "more cannot be told."))
	}
	return s
}

func (v *visit) ownerName(owner string) string {
	if p, ok := v.site.Program.Post(owner); ok {
		return orCode(p.Name, owner)
	}
	return upperFirst(book.Role(owner).Words())
}

func (v *visit) gapLine(r book.Row, flags map[string]int) gapLine {
	l := gapLine{rowLine: v.rowLine(r)}
	if n := flags[r.Item+" "+subjectKey(r.Subject)]; n > 0 {
		l.Reopened = "reopened " + map[bool]string{true: "once", false: number(n) + " times"}[n == 1]
	}
	if v.acts(book.Excuse) && !(r.Subject.Asks == program.AsksPerson && r.Subject.Code == v.actor.Person) {
		l.Excuse = with(v.url("excuse"), "item", r.Item, "subject", subjectKey(r.Subject))
	}
	return l
}

// reopened counts how often each flag came back.
func (v *visit) reopened() (map[string]int, error) {
	list, err := v.b.Flags(v.ctx(), v.actor, v.site.Code)
	out := map[string]int{}
	for _, f := range list {
		if f.Cleared == nil {
			out[f.Item+" "+f.Kind+":"+f.Code] = f.Reopened
		}
	}
	return out, err
}

// gapsCSV writes the gaps for a spreadsheet, harmless to open, with the question on it.
func (v *visit) gapsCSV(st book.Standings, gaps []book.Row) error {
	var buf bytes.Buffer
	header := []string{"site", "day", "item", "title", "asks", "subject", "name", "standing", "since", "due", "owner"}
	rows := func(yield func([]string) bool) {
		for _, r := range gaps {
			cells := []string{r.Site, st.On.String(), r.Item, r.Title, string(r.Subject.Asks), r.Subject.Code, r.SubjectName, string(r.Word), shortISO(r.Since), shortISO(r.Due), r.Owner}
			if !yield(cells) {
				return
			}
		}
	}
	if err := table.Write(&buf, header, rows); err != nil {
		return err
	}
	v.c.Header("Content-Disposition", `attachment; filename="gaps-`+strings.Map(plainName, st.Site.Code)+"-"+st.On.String()+`.csv"`)
	v.c.Data(200, "text/csv; charset=utf-8", buf.Bytes())
	return nil
}

// plainName keeps what a file name can hold everywhere.
func plainName(r rune) rune {
	if r >= '0' && r <= '9' || r >= 'A' && r <= 'Z' || r >= 'a' && r <= 'z' || r == '-' {
		return r
	}
	return '_'
}
