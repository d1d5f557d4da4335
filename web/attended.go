package web

import (
	"lodebook/models/book"
	"lodebook/models/program"
)

func sessionForm(v *visit, f *Form) (*formLeaf, error) {
	f.Default("on", v.today().String()).Default(crowdCrew, f.Get("crew"))
	p := &formLeaf{page: page{Title: "Record a session", Section: secPeople}, Head: "Record a session", Action: v.url("session"), Form: f, Button: "Keep for everybody ticked"}
	p.Say = "One training, review or reading that many took part in: choose what it was, tick who was there, and keep it once."
	id, err := v.formID(f)
	if err != nil {
		return nil, err
	}
	p.Hidden = []hidden{id}
	p.Fields = []field{
		f.Choice("record", "What was held", choose(v.whats(program.AsksPerson, "training", "review", "acknowledgement"))).Need(),
		f.Date("on", "Day").Need().UpTo(v.today().String()),
		f.Text("by", "Held by"),
		f.Date("until", "Good until").Help("Only where a certificate names its own last good day"),
		f.Text("note", "Note").Help("Nothing medical belongs here"),
	}
	people, err := v.b.Attendees(v.ctx(), v.actor, v.site.Code, f.Get("record"))
	if err != nil {
		return nil, err
	}
	p.Crowd = v.newCrowd(f, "Who took part", people, true)
	p.After = "Each person gets a record of their own; all of them are written together or not at all."
	return p, nil
}

func sessionPage(v *visit) error { return v.showSession(v.asked()) }

func (v *visit) showSession(f *Form) error {
	p, err := sessionForm(v, f)
	if err != nil {
		return err
	}
	return v.showForm(p)
}

func recordSession(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	if choosing(f) {
		return v.showSession(f)
	}
	form := book.SessionForm{ID: f.Get("id"), Record: f.Get("record"), On: f.Get("on"), Until: f.Get("until"), By: f.Get("by"), Note: f.Get("note")}
	form.People, form.Failed = passedAndFailed(f)
	r, err := v.b.RecordSession(v.ctx(), v.actor, v.site.Code, form)
	if f.Take(err) {
		return v.showSession(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("people"), v.keptWords(form.Record, "", sessionWords(len(form.People), len(form.Failed))), r.ID())
}

// sessionWords counts who took part: "twelve people", "eleven people, and one who did not pass".
func sessionWords(passed, failed int) string {
	switch {
	case failed == 0:
		return count(passed, "person", "people")
	case passed == 0:
		return count(failed, "person who did not pass", "people who did not pass")
	default:
		return count(passed, "person", "people") + ", and " + number(failed) + " who did not pass"
	}
}
