package web

import (
	"slices"

	"lodebook/models/book"
	"lodebook/models/program"
)

// eventsOf are the declared events that happen to a subject; without one, all.
func (v *visit) eventsOf(key string) []option {
	s, chosen := subjectOf(key)
	kind := ""
	if s.Asks == program.AsksFixture {
		if x, err := v.b.Subject(v.ctx(), v.actor, v.site.Code, s, nil); err == nil {
			kind = x.Kind
		}
	}
	var out []option
	for _, e := range v.site.Program.Events {
		if !chosen || e.Of == string(s.Asks) || kind != "" && e.Of == kind {
			out = append(out, option{Value: e.Code, Words: v.eventWords(e)})
		}
	}
	return out
}

func (v *visit) eventWords(e program.Event) string {
	if e.Name != "" {
		return upperFirst(e.Name)
	}
	return upperFirst(spaced(e.Code))
}

// befalls are the kinds of subject, and among fixtures the kinds of fixture (none: all), to which a
// declared event can happen: the one asked for, or any.
func (v *visit) befalls(event string) (asks []program.Asks, fixtures []string) {
	all := false
	for _, e := range v.site.Program.Events {
		if event != "" && e.Code != event {
			continue
		}
		of := program.Asks(e.Of)
		if !slices.Contains(program.AllAsks, of) {
			of, fixtures = program.AsksFixture, append(fixtures, e.Of)
		} else if of == program.AsksFixture {
			all = true
		}
		if !slices.Contains(asks, of) {
			asks = append(asks, of)
		}
	}
	if all {
		fixtures = nil
	}
	return asks, fixtures
}

func eventForm(v *visit, f *Form) (*formLeaf, error) {
	f.Default("on", v.today().String())
	p := &formLeaf{page: page{Title: "Report an event", Section: secRounds}, Head: "Report an event", Action: v.url("event"), Form: f, Button: "Keep this event"}
	p.Say = "Something happened that asks for an answer: work on the roof, an alarm, a repair. What the checklist asks after it is due from that day."
	id, err := v.formID(f)
	p.Hidden = []hidden{id}
	p.Fields = []field{
		f.Choice("event", "What happened", choose(v.eventsOf(f.Get("subject")))).Need(),
		f.Date("on", "Day").Need().UpTo(v.today().String()),
		f.Text("note", "Note").Help("Nothing medical belongs here"),
	}
	p.about(v, f, "subject", "To whom or what")
	return p, err
}

func eventPage(v *visit) error {
	if v.unchosen("subject") {
		asks, fixtures := v.befalls(v.query("event"))
		p := &chooseLeaf{page: page{Title: "Report an event", Section: secRounds}, Head: "Report an event", Say: "To what, or to whom, did it happen?", only: fixtures}
		return v.chooseSubject(p, "subject", asks...)
	}
	return v.showEvent(v.asked())
}

func (v *visit) showEvent(f *Form) error {
	p, err := eventForm(v, f)
	if err != nil {
		return err
	}
	return v.showForm(p)
}

func reportEvent(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.ReportEvent(v.ctx(), v.actor, v.site.Code, book.EventForm{ID: f.Get("id"), Event: f.Get("event"), Subject: f.Get("subject"), On: f.Get("on"), Note: f.Get("note")}, book.Correction{})
	if f.Take(err) {
		return v.showEvent(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.backTo(f.Get("subject")), "Kept: the event.", r.ID())
}
