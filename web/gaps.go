package web

import (
	"bytes"
	"cmp"
	"slices"
	"strings"

	"lodebook/models/book"
	"lodebook/models/program"
	"lodebook/models/standing"
	"lodebook/models/table"
)

// gapLine is one gap with its flag.
type gapLine struct {
	rowLine
	Reopened string
	Excuse   string
	Remedy   act      // the open one, or the form of a new one
	Spans    []string // of cover: when on the day somebody is missing
}

// gapGroup is the gaps of one item or of one who answers for them: the first few, or a page of all.
type gapGroup struct {
	Name    string
	Count   int
	Lines   []gapLine
	More    int    // gaps that are not shown
	MoreURL string // all of them

	key  string
	rows bunch
}

type gapsLeaf struct {
	page
	Say       string
	Tabs      []spineLink
	Groups    []gapGroup
	Told      []todayLine
	Pager     pager
	ExportURL string
	AllURL    string // of a page with one group: all groups
	When      *asOf
}

var gapsSheet = leafOf[gapsLeaf]("gaps")

// A group is shown whole up to groupWhole gaps. Of a larger one the page with all groups shows the first
// groupFew, those that have lasted longest; of an owner, of whom there are few, the first groupWhole.
const (
	groupWhole = 12
	groupFew   = 4
)

// gapsPage shows what falls short, by item or by who answers for it: the first few of each, or with ?of=
// one of them whole.
func gapsPage(v *visit) error {
	if v.query("format") == "csv" {
		return gapsCSV(v)
	}
	st, err := v.short()
	if err != nil {
		return err
	}
	by, of := v.query("by"), v.query("of")
	p := &gapsLeaf{page: page{Title: "Gaps", Section: secGaps, AsOf: v.asOf()}, ExportURL: with(v.url("gaps"), "format", "csv")}
	p.When = p.AsOf
	here := v.c.Request.URL.EscapedPath()
	p.Tabs = []spineLink{{Name: "By item", URL: with(here, "on", onQuery(v.on)), Current: by != "owner"}, {Name: "By owner", URL: with(here, "by", "owner", "on", onQuery(v.on)), Current: by == "owner"}}
	var bad, told []*book.Row
	for i := range st.Rows {
		switch r := &st.Rows[i]; {
		case r.Word.IsGap():
			bad = append(bad, r)
		case r.Word == standing.DataFault:
			told = append(told, r)
		}
	}
	longestFirst(bad)
	groups := v.gapGroups(bad, by)
	p.Say = gapsSay(bad, len(told), len(groups), by)
	if of != "" {
		groups = slices.DeleteFunc(groups, func(g gapGroup) bool { return g.key != of })
		p.AllURL, told = with(here, "by", by, "on", onQuery(v.on)), nil
	}
	if err := v.fillGroups(p, groups, of != ""); err != nil {
		return err
	}
	untold := bunches(told, true)
	if err := v.nameFirst(untold, namesShown); err != nil {
		return err
	}
	p.Told = v.todayLines(untold)
	return gapsSheet.show(v, 200, p)
}

// gapGroups groups gaps by item or owner, by name.
func (v *visit) gapGroups(gaps []*book.Row, by string) []gapGroup {
	var out []gapGroup
	at := map[string]int{}
	for _, r := range gaps {
		key := r.Item
		if by == "owner" {
			key = r.Owner
		}
		i, ok := at[key]
		if !ok {
			i = len(out)
			at[key] = i
			out = append(out, gapGroup{Name: orCode(r.Title, r.Item), key: key})
			if by == "owner" {
				out[i].Name = orCode(r.OwnerName, v.ownerName(key))
			}
		}
		out[i].rows = append(out[i].rows, r)
	}
	slices.SortFunc(out, func(a, b gapGroup) int { return cmp.Or(strings.Compare(a.Name, b.Name), strings.Compare(a.key, b.key)) })
	return out
}

// fillGroups cuts the groups to what is shown, names it, and dresses it.
func (v *visit) fillGroups(p *gapsLeaf, groups []gapGroup, whole bool) error {
	few := groupFew
	if v.query("by") == "owner" {
		few = groupWhole
	}
	var shown []bunch
	for i := range groups {
		g := &groups[i]
		g.Count = len(g.rows)
		switch {
		case whole:
			g.rows, p.Pager = paged(v, g.rows)
		case g.Count > groupWhole:
			g.rows, g.More = g.rows[:few], g.Count-few
			g.MoreURL = with(v.c.Request.URL.EscapedPath(), "by", v.query("by"), "of", g.key, "on", onQuery(v.on))
		}
		shown = append(shown, g.rows)
	}
	if err := v.nameFirst(shown, perPage); err != nil {
		return err
	}
	again, err := v.reopened()
	if err != nil {
		return err
	}
	spans, err := v.coverOf(v.day())
	if err != nil {
		return err
	}
	remedies, err := v.b.OpenRemedies(v.ctx(), v.actor, v.site.Code)
	if err != nil {
		return err
	}
	for i := range groups {
		g := &groups[i]
		for _, r := range g.rows {
			l := v.gapLine(*r, again)
			l.Remedy = v.gapRemedy(*r, remedies)
			l.Spans = spans[r.Item]
			if v.query("by") != "owner" {
				l.What = "" // the heading says it
			}
			g.Lines = append(g.Lines, l)
		}
	}
	p.Groups = groups
	return nil
}

func gapsSay(gaps []*book.Row, told, groups int, by string) string {
	if len(gaps) == 0 && told == 0 {
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
		s += " among " + count(groups, "owner", "owners") + "."
	} else {
		s += " in " + count(groups, "item", "items") + "."
	}
	if guarded > 0 {
		s += " " + upperFirst(count(guarded, "of them guards a restricted zone.", "of them guard a restricted zone."))
	}
	if told > 0 {
		s += " " + upperFirst(count(told, "more cannot be told.", "more cannot be told."))
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
	if overdueRow(r) {
		return l
	}
	if v.acts(book.Excuse) && !(r.Subject.Asks == program.AsksPerson && r.Subject.Code == v.actor.Person) {
		l.Excuse = with(v.url("excuse"), "item", r.Item, "subject", subjectKey(r.Subject))
	}
	return l
}

// reopened counts how often each flag came back, of those that did.
func (v *visit) reopened() (map[string]int, error) {
	return v.flags.get(v.ctx(), v.site.Code, v.b.Stamp, func() (made[map[string]int], error) {
		list, err := v.b.Flags(v.ctx(), v.actor, v.site.Code)
		out := map[string]int{}
		for _, f := range list {
			if f.Cleared == nil && f.Reopened > 0 {
				out[f.Item+" "+f.Kind+":"+f.Code] = f.Reopened
			}
		}
		return made[map[string]int]{out, 100 * (len(out) + 1)}, err
	})
}

// gapsCSV writes the gaps for a spreadsheet, harmless to open, with the question on it.
func gapsCSV(v *visit) error {
	st, err := v.b.Standings(v.ctx(), v.actor, book.StandingQuery{Site: v.site.Code, On: v.on})
	if err != nil {
		return err
	}
	gaps := st.Gaps()
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
