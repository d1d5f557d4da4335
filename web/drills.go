package web

import (
	"slices"
	"strings"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

type planLine struct {
	Title, Crew, When, Off string
	Late                   bool
	URL, RecordURL         string
}

type drillsLeaf struct {
	page
	Say        string
	Rows       []rowLine // of crews
	People     []rowLine // of people, gaps only
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
	slices.SortStableFunc(x.Rows, func(a, b book.Row) int {
		switch {
		case book.Worse(a.Word, b.Word):
			return -1
		case book.Worse(b.Word, a.Word):
			return 1
		}
		return 0
	})
	for _, r := range x.Rows {
		switch {
		case r.Subject.Asks == program.AsksCrew:
			p.Rows = append(p.Rows, v.rowLine(r))
		case r.Word.IsGap() && len(p.People) < drillPeople:
			p.People = append(p.People, v.rowLine(r))
		case r.Word.IsGap():
			p.PeopleMore++
		}
	}
	for _, pl := range x.Plans {
		if !pl.Done {
			p.Plans = append(p.Plans, v.planLine(pl))
		}
	}
	p.Held = v.recordLines(x.Held)
	for i := range p.Held {
		p.Held[i].What += ", " + x.Held[i].SubjectName
	}
	if len(p.Held) > heldShown {
		p.Held, p.Older = p.Held[:heldShown], p.Held[heldShown:]
	}
	p.Say = drillsSay(x)
	return drillsSheet.show(v, 200, p)
}

func (v *visit) planLine(pl book.PlanLine) planLine {
	l := planLine{Title: pl.Title, Crew: pl.CrewName, When: shortDay(pl.Day, v.today()), Off: until(pl.Day, v.today()), Late: pl.Day < v.today(), URL: v.url("book", pl.Entry)}
	if pl.At != "" {
		l.When += ", " + pl.At
	}
	if v.acts(book.RecordDone) {
		l.RecordURL = with(v.url("drill"), "plan", pl.Entry, "record", pl.What, "crew", pl.Crew, "on", minDay(pl.Day, v.today()).String())
	}
	return l
}

func minDay(a, b civil.Day) civil.Day { return min(a, b) }

// drillsSay names what was never rehearsed first.
func drillsSay(x book.DrillView) string {
	var never, out []string
	for _, r := range x.Rows {
		if r.Subject.Asks != program.AsksCrew {
			continue
		}
		name := r.SubjectName
		if r.Word == standing.Missing {
			never = append(never, name+" ("+strings.ToLower(x.Titles[first(r.Records)])+")")
		} else if r.Word.IsGap() {
			out = append(out, name)
		}
	}
	if len(x.Codes) == 0 {
		return "The checklist asks for no drill yet. Adopt the group of drills on the Checklist page."
	}
	if len(never) == 0 && len(out) == 0 {
		return "Every crew has rehearsed what the checklist asks of it."
	}
	var parts []string
	if len(never) > 0 {
		parts = append(parts, "Never rehearsed: "+and(never)+".")
	}
	if len(out) > 0 {
		parts = append(parts, upperFirst(count(len(out), "drill of a crew has", "drills of crews have"))+" run out.")
	}
	return strings.Join(parts, " ")
}

func first(list []string) string {
	if len(list) == 0 {
		return ""
	}
	return list[0]
}

func (v *visit) crewChoices(none string) []option {
	return codesAsOptions(none, v.site.Program.Crews, func(c program.Crew) string { return c.Code }, func(c program.Crew) string { return c.Name })
}

func planForm(v *visit, f *Form) *formLeaf {
	p := &formLeaf{page: page{Title: "Plan a drill", Section: secDrills}, Head: "Plan a drill", Action: v.url("plan"), Form: f, Button: "Keep this plan"}
	p.Say = "It stands on Today and on the week until somebody records who took part."
	p.Cautions = []string{"A drill never takes a ferrous prop past the door, and never presses a quench button."}
	p.Fields = []field{
		f.Choice("record", "What is rehearsed", choose(v.whats("drill"))).Need(),
		f.Choice("crew", "With which crew", v.crewChoices("Nobody in particular")),
		f.Date("day", "Day").Need(),
		f.Time("at", "Time"),
		f.Long("note", "Scenario").Help("What shall happen, and who plays what"),
	}
	return p
}

func planPage(v *visit) error { return v.showForm(planForm(v, v.asked())) }

func planDrill(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.PlanDrill(v.ctx(), v.actor, v.site.Code, book.PlanForm{Record: f.Get("record"), Crew: f.Get("crew"), Day: f.Get("day"), At: f.Get("at"), Note: f.Get("note")}, book.Correction{})
	if f.Take(err) {
		return v.showForm(planForm(v, f))
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("drills"), "Kept: the plan.", r.ID())
}

func drillForm(v *visit, f *Form) (*formLeaf, error) {
	f.Default("on", v.today().String()).Default("result", book.Pass)
	crew := f.Get("crew")
	fresh := len(f.All("people")) == 0 && len(f.Faults) == 0
	people, err := v.ticks(func(book.PersonSummary) bool { return true })
	if err != nil {
		return nil, err
	}
	mine, guests := v.splitCrew(people, crew)
	if fresh && crew != "" {
		for _, t := range mine {
			f.Values.Add("people", t.Value)
		}
	}
	p := &formLeaf{page: page{Title: "Record a drill", Section: secDrills}, Head: "Record a drill", Action: v.url("drill"), Form: f, Button: "Keep this drill"}
	p.Say = "The crew gets a record, and so does everybody who took part. Choose the crew first: its people are then ticked."
	p.Cautions = []string{"A drill never takes a ferrous prop past the door."}
	p.Crew = v.crewTabs(f)
	p.Hidden = []hidden{{"plan", f.Get("plan")}, {"crew", crew}}
	p.Fields = []field{
		f.Choice("record", "What was rehearsed", choose(v.whats("drill"))).Need(),
		f.Date("on", "Day").Need().UpTo(v.today().String()),
		f.Picks("result", "How it went", []option{{Value: book.Pass, Words: "As it should"}, {Value: book.Fail, Words: "It failed", Bad: true}}).Need(),
		f.Text("by", "Led by"),
		f.Long("note", "What was learned"),
	}
	if len(mine) > 0 {
		p.Fields = append(p.Fields, f.Ticks("people", "Who took part", mine), f.Ticks("people", "Guests from elsewhere", guests).Fold())
	} else {
		p.Fields = append(p.Fields, f.Ticks("people", "Who took part", guests))
	}
	return p, nil
}

// splitCrew parts the people of a crew from the others.
func (v *visit) splitCrew(people []tick, crew string) (mine, others []tick) {
	name := v.crewName(crew)
	for _, t := range people {
		if crew != "" && (t.Note == name || strings.HasPrefix(t.Note, name+",")) {
			mine = append(mine, t)
		} else {
			others = append(others, t)
		}
	}
	return mine, others
}

func drillPage(v *visit) error {
	p, err := drillForm(v, v.asked())
	if err != nil {
		return err
	}
	return v.showForm(p)
}

func recordDrill(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.RecordDrill(v.ctx(), v.actor, v.site.Code, book.DrillForm{
		Plan: f.Get("plan"), Record: f.Get("record"), Crew: f.Get("crew"), On: f.Get("on"), People: f.All("people"), Result: f.Get("result"), By: f.Get("by"), Note: f.Get("note"),
	})
	if f.Take(err) {
		p, err := drillForm(v, f)
		if err != nil {
			return err
		}
		return v.showForm(p)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("drills"), "Kept: the drill, with "+count(len(f.All("people")), "person", "people")+".", r.ID())
}
