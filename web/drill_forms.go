package web

import (
	"slices"

	"lodebook/models/book"
	"lodebook/models/program"
)

const drillCaution = "A drill never takes a ferrous prop past the door, and never presses a quench button."

func (v *visit) crewChoices(none string) []option {
	return codesAsOptions(none, v.site.Program.Crews, func(c program.Crew) string { return c.Code }, func(c program.Crew) string { return c.Name })
}

// planFields are those of a plan, new or corrected.
func (v *visit) planFields(f *Form) []field {
	return []field{
		f.Choice("record", "What is rehearsed", choose(v.whats("", "drill"))).Need(),
		f.Choice("crew", "With which crew", v.crewChoices("Nobody in particular")),
		f.Date("day", "Day").Need(),
		f.Time("at", "Time").Help("Nights too: a crew is on the day on which its drill begins"),
		f.Long("note", "Scenario").Help("What shall happen, and who plays what"),
	}
}

func planForm(v *visit, f *Form) (*formLeaf, error) {
	p := &formLeaf{page: page{Title: "Plan a drill", Section: secDrills}, Head: "Plan a drill", Action: v.url("plan"), Form: f, Button: "Keep this plan"}
	p.Say = "It stands on Today and on the week until somebody records who took part."
	p.Cautions = []string{drillCaution}
	id, err := v.formID(f)
	p.Hidden, p.Fields = []hidden{id}, v.planFields(f)
	return p, err
}

func planPage(v *visit) error { return v.showPlan(v.asked()) }

func (v *visit) showPlan(f *Form) error {
	p, err := planForm(v, f)
	if err != nil {
		return err
	}
	return v.showForm(p)
}

func planOf(f *Form) book.PlanForm {
	return book.PlanForm{ID: f.Get("id"), Record: f.Get("record"), Crew: f.Get("crew"), Day: f.Get("day"), At: f.Get("at"), Note: f.Get("note")}
}

func planDrill(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.PlanDrill(v.ctx(), v.actor, v.site.Code, planOf(f), book.Correction{})
	if f.Take(err) {
		return v.showPlan(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("drills"), "Kept: the plan.", r.ID())
}

// tickedFor names the field that says for which crew people are ticked: with another crew, its people
// are ticked instead.
const tickedFor = "ticked-for"

func drillForm(v *visit, f *Form) (*formLeaf, error) {
	f.Default("on", v.today().String()).Default("result", book.Pass)
	p := &formLeaf{page: page{Title: "Record a drill", Section: secDrills}, Head: "Record a drill", Action: v.url("drill"), Form: f, Button: "Keep this drill"}
	p.Say = "The crew gets a record, and so does everybody who took part. Choose the crew: its people are ticked; untick who was away."
	p.Cautions = []string{drillCaution}
	id, err := v.formID(f)
	if err != nil {
		return nil, err
	}
	people, err := v.b.Attendees(v.ctx(), v.actor, v.site.Code, f.Get("record"))
	if err != nil {
		return nil, err
	}
	crew := f.Get("crew")
	f.retick(people, f.Get(tickedFor), crew)
	p.Hidden = []hidden{id, {"plan", f.Get("plan")}}
	p.Fields = []field{
		f.Choice("record", "What was rehearsed", choose(v.whats("", "drill"))).Need(),
		f.Choice("crew", "Crew", v.crewChoices("None: people of several")),
		f.Date("on", "Day").Need().UpTo(v.today().String()).Help("Of a night, the day on which it began"),
		f.Text("by", "Led by"),
		f.Picks("result", "How it went", []option{{Value: book.Pass, Words: "As it should"}, {Value: book.Fail, Words: "It failed", Bad: true}}).Need(),
		f.Long("note", "What was learned"),
	}
	p.Crowd = v.newCrowd(f, "Who took part", people, false)
	p.Crowd.Hidden = []hidden{{tickedFor, crew}}
	p.Crowd.split(crew)
	return p, nil
}

// retick takes the ticks off the people of one crew and puts them on those of another who are not away.
func (f *Form) retick(people []book.Attendee, from, to string) {
	if from == to {
		return
	}
	ticked := slices.Clone(f.All("people"))
	for _, a := range people {
		at := slices.Index(ticked, a.Code)
		switch {
		case a.Crew == to && to != "" && at < 0 && !a.Away:
			ticked = append(ticked, a.Code)
		case a.Crew == from && from != "" && at >= 0:
			ticked = slices.Delete(ticked, at, at+1)
		}
	}
	f.Values["people"] = ticked
}

func drillPage(v *visit) error { return v.showDrill(v.asked()) }

func (v *visit) showDrill(f *Form) error {
	p, err := drillForm(v, f)
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
	if choosing(f) {
		return v.showDrill(f)
	}
	if _, asked := f.Values[tickedFor]; asked && f.Get(tickedFor) != f.Get("crew") {
		f.Loose("crew", "Another crew was chosen: look through who is ticked now, then keep it")
		return v.showDrill(f)
	}
	r, err := v.b.RecordDrill(v.ctx(), v.actor, v.site.Code, book.DrillForm{
		ID: f.Get("id"), Plan: f.Get("plan"), Record: f.Get("record"), Crew: f.Get("crew"), On: f.Get("on"), People: f.All("people"), Result: f.Get("result"), By: f.Get("by"), Note: f.Get("note"),
	})
	if f.Take(err) {
		return v.showDrill(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("drills"), "Kept: "+v.what(f.Get("record"))+", with "+count(len(f.All("people")), "person", "people")+".", r.ID())
}
