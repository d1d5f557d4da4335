package web

import (
	"html/template"
	"slices"
	"strings"

	"lodebook/models/book"
	"lodebook/models/program"
	"lodebook/models/standing"
)

type planLine struct {
	Title, Crew, When, Off string
	Late, Ahead            bool
	URL, RecordURL         string
}

// drillGrid is what each crew has rehearsed: a line for each item, a cell for each crew.
type drillGrid struct {
	Crews []string
	Rows  []drillRow
}

type drillRow struct {
	What, URL, Cadence string
	Cells              []drillCell
}

// drillCell is where one crew is with one item; the zero value: nothing is asked of it.
type drillCell struct {
	Crew, When, PlanURL string
	Word                standing.Word
	Disc                template.HTML
}

type drillsLeaf struct {
	page
	Say        string
	Grid       drillGrid
	People     []rowLine // gaps only
	PeopleMore int
	Plans      []planLine
	Held       []recordLine
	Older      []recordLine
	MayPlan    bool
	MayRecord  bool
	PlanURL    string
	DrillURL   string
	When       *asOf
}

var drillsSheet = leafOf[drillsLeaf]("drills")

const (
	drillPeople = 30
	heldShown   = 12
)

// drillsPage says which crew has rehearsed what.
func drillsPage(v *visit) error {
	x, err := v.b.Drills(v.ctx(), v.actor, v.site.Code, v.on)
	if err != nil {
		return err
	}
	p := &drillsLeaf{page: page{Title: "Drills", Section: secDrills, AsOf: v.asOf()}, MayPlan: v.acts(book.PlanDrills), MayRecord: v.acts(book.RecordDone), PlanURL: v.url("plan"), DrillURL: v.url("drill")}
	p.When = p.AsOf
	planned := map[string]string{} // record and crew -> day
	for _, pl := range x.Plans {
		if !pl.Done {
			p.Plans = append(p.Plans, v.planLine(pl))
			planned[pl.What+" "+pl.Crew] = shortDay(pl.Day, v.today())
		}
	}
	p.Grid = v.drillGrid(x.Rows, planned)
	for _, r := range x.Rows {
		switch {
		case r.Subject.Asks != program.AsksPerson || !r.Word.IsGap():
		case len(p.People) < drillPeople:
			p.People = append(p.People, v.rowLine(r))
		default:
			p.PeopleMore++
		}
	}
	p.Say = drillsSay(x, p.Plans, planned)
	if p.Held, p.Older, err = v.heldLines(x.Held); err != nil {
		return err
	}
	return drillsSheet.show(v, 200, p)
}

func (v *visit) drillGrid(rows []book.Row, planned map[string]string) drillGrid {
	var g drillGrid
	at := map[string]int{}
	for _, c := range v.site.Program.Crews {
		at[c.Code] = len(g.Crews)
		g.Crews = append(g.Crews, orCode(c.Name, c.Code))
	}
	var items []string
	for _, r := range rows {
		col, ok := at[r.Subject.Code]
		if r.Subject.Asks != program.AsksCrew || !ok {
			continue
		}
		i := slices.Index(items, r.Item)
		if i < 0 {
			i = len(items)
			items = append(items, r.Item)
			g.Rows = append(g.Rows, drillRow{What: orCode(r.Title, r.Item), URL: v.url("checklist", r.Item), Cadence: r.Cadence, Cells: make([]drillCell, len(g.Crews))})
		}
		g.Rows[i].Cells[col] = v.drillCell(r, planned)
	}
	return g
}

func (v *visit) drillCell(r book.Row, planned map[string]string) drillCell {
	c := drillCell{Crew: r.SubjectName, Word: r.Word, Disc: disc(r.Word, r.Left), When: v.whenWords(r)}
	if !r.Word.IsGap() && r.Word != standing.Closing {
		return c
	}
	for _, what := range r.Records {
		if day := planned[what+" "+r.Subject.Code]; day != "" {
			c.When = strings.TrimPrefix(c.When+"; planned for "+day, "; ")
			return c
		}
	}
	if v.acts(book.PlanDrills) {
		c.PlanURL = with(v.url("plan"), "record", first(r.Records), "crew", r.Subject.Code)
	}
	return c
}

func (v *visit) planLine(pl book.PlanLine) planLine {
	l := planLine{Title: pl.Title, Crew: pl.CrewName, When: shortDay(pl.Day, v.today()), Off: until(pl.Day, v.today()), Late: pl.Day < v.today(), Ahead: pl.Day > v.today(), URL: v.url("book", pl.Entry)}
	if pl.At != "" {
		l.When += ", " + pl.At
	}
	if v.acts(book.RecordDone) {
		l.RecordURL = with(v.url("drill"), "plan", pl.Entry, "record", pl.What, "crew", pl.Crew, "on", min(pl.Day, v.today()).String())
	}
	return l
}

// heldLines are the drills that were held, the newest with who took part.
func (v *visit) heldLines(held []book.RecordLine) (newest, older []recordLine, err error) {
	lines := v.recordLines(held)
	var entries []string
	for i, r := range held {
		lines[i].What += ", " + r.SubjectName
		if i < heldShown {
			entries = append(entries, r.Entry)
		}
	}
	takers, err := v.b.TookPart(v.ctx(), v.actor, v.site.Code, entries)
	if err != nil {
		return nil, nil, err
	}
	for i, id := range entries {
		if names := takers[id]; len(names) > 0 {
			lines[i].More = strings.TrimPrefix(lines[i].More+" · "+takerWords(names), " · ")
		}
	}
	n := min(heldShown, len(lines))
	return lines[:n], lines[n:], nil
}

const takersShown = 6

func takerWords(names []string) string {
	n := len(names)
	if n > takersShown+1 {
		names = append(slices.Clone(names[:takersShown]), number(n-takersShown)+" more")
	}
	return count(n, "person", "people") + ": " + and(names)
}

// drillsSay names what was never rehearsed first.
func drillsSay(x book.DrillView, plans []planLine, planned map[string]string) string {
	if len(x.Codes) == 0 {
		return "The checklist asks for no drill yet. Adopt the group of drills on the Checklist page."
	}
	var crews []string
	never := map[string][]string{}
	lapsed, late := 0, 0
	for _, r := range x.Rows {
		switch {
		case r.Subject.Asks != program.AsksCrew:
		case r.Word == standing.Missing:
			if never[r.SubjectName] == nil {
				crews = append(crews, r.SubjectName)
			}
			drill := withArticle(strings.ToLower(x.Titles[first(r.Records)]))
			if day := planned[first(r.Records)+" "+r.Subject.Code]; day != "" {
				drill += " (planned for " + day + ")"
			}
			never[r.SubjectName] = append(never[r.SubjectName], drill)
		case r.Word.IsGap():
			lapsed++
		}
	}
	for _, pl := range plans {
		if pl.Late {
			late++
		}
	}
	var parts []string
	for _, c := range crews {
		parts = append(parts, c+" has never held "+and(never[c])+".")
	}
	if lapsed > 0 {
		parts = append(parts, upperFirst(count(lapsed, "drill of a crew has run out or failed.", "drills of crews have run out or failed.")))
	}
	if len(parts) == 0 {
		parts = append(parts, "Every crew has rehearsed what the checklist asks of it.")
	}
	if late > 0 {
		parts = append(parts, upperFirst(count(late, "plan is past its day and nobody has recorded it.", "plans are past their day and nobody has recorded them.")))
	}
	return strings.Join(parts, " ")
}

// withArticle puts "a" or "an" before a name.
func withArticle(name string) string {
	if name != "" && strings.ContainsRune("aeiou", rune(name[0])) {
		return "an " + name
	}
	return "a " + name
}

func first(list []string) string {
	if len(list) == 0 {
		return ""
	}
	return list[0]
}
