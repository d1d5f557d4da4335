package web

import (
	"slices"
	"strings"

	"lodebook/models/book"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// formLeaf is a page with one form: a heading, what it is for, its fields and its button.
type formLeaf struct {
	page
	Head, Say string
	Action    string
	Form      *Form
	Fields    []field
	Hidden    []hidden
	Button    string
	After     string // what happens next, under the button
	Cautions  []string
	Risk      bool
	Crew      []spineLink // tabs that choose whom the list shows
}

var formSheet = leafOf[formLeaf]("form")

// showForm shows a form page; with faults it is answered as one that was not kept.
func (v *visit) showForm(p *formLeaf) error {
	status := 200
	if len(p.Form.Faults) > 0 {
		status = 422
	}
	return formSheet.show(v, status, p)
}

// whats are the records of some kinds that the checklist asks for, as choices.
func (v *visit) whats(kinds ...string) []option {
	var out []option
	var seen []string
	for _, i := range v.site.Program.Items {
		for _, what := range i.Records {
			kind, code, _ := strings.Cut(what, "/")
			if slices.Contains(kinds, kind) && !slices.Contains(seen, what) {
				seen = append(seen, what)
				out = append(out, option{Value: what, Words: upperFirst(kind) + ": " + strings.ReplaceAll(code, "-", " ")})
			}
		}
	}
	if slices.Contains(kinds, "appointment") {
		for _, p := range v.site.Program.Posts {
			if what := "appointment/" + p.Code; !slices.Contains(seen, what) {
				out = append(out, option{Value: what, Words: "Appointment: " + orCode(p.Name, p.Code)})
			}
		}
	}
	return out
}

func choose(list []option) []option { return append([]option{{Value: "", Words: "Choose"}}, list...) }

// ticks are the people on staff, to tick.
func (v *visit) ticks(keep func(book.PersonSummary) bool) ([]tick, error) {
	_, people, err := v.b.People(v.ctx(), v.actor, v.site.Code, nil)
	if err != nil {
		return nil, err
	}
	var out []tick
	for _, x := range people {
		if x.Here && keep(x) {
			note := v.crewName(x.Crew)
			if x.Level != "" {
				note = strings.TrimPrefix(note+", "+x.Level, ", ")
			}
			out = append(out, tick{Value: x.Code, Name: x.Name, Note: note})
		}
	}
	return out, nil
}

// subjectName is the name of kind:code, for headings.
func (v *visit) subjectName(key string) string {
	kind, code, ok := strings.Cut(key, ":")
	if !ok {
		return key
	}
	x, err := v.b.Subject(v.ctx(), v.actor, v.site.Code, standing.Subject{Asks: program.Asks(kind), Code: code}, nil)
	if err != nil {
		return code
	}
	return x.Name
}

func recordForm(v *visit, f *Form) *formLeaf {
	f.Default("on", v.today().String()).Default("result", book.Pass)
	subject := f.Get("subject")
	p := &formLeaf{page: page{Title: "Record", Section: secPeople}, Head: "Record something done", Action: v.url("record"), Form: f, Button: "Keep this record"}
	p.Say = "One training, review or appointment, for one person or thing."
	if subject != "" {
		p.Head = "Record something done: " + v.subjectName(subject)
	}
	p.Fields = []field{
		f.Choice("record", "What was done", choose(v.whats("training", "review", "acknowledgement", "appointment", "drill", "inspection", "check"))).Need(),
		f.Text("subject", "For whom or what").Need().Help("The code of a person, or kind:code, as in person:S01 or zone:IV"),
		f.Date("on", "Day").Need().UpTo(v.today().String()),
		f.Picks("result", "Result", []option{{Value: book.Pass, Words: "Passed"}, {Value: book.Fail, Words: "Not passed", Bad: true}}).Need(),
		f.Date("until", "A certificate's own last good day"),
		f.Text("by", "Done by").Help("Who taught, looked or decided"),
		f.Long("note", "Note").Help("Nothing medical belongs here"),
	}
	p.After = "It becomes an entry of the book. A slip can be put right from its page within ten minutes without a reason."
	return p
}

func recordPage(v *visit) error { return v.showForm(recordForm(v, v.asked())) }

func recordOne(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.Record(v.ctx(), v.actor, v.site.Code, book.RecordForm{
		ID: f.Get("id"), Record: f.Get("record"), Subject: f.Get("subject"), On: f.Get("on"), Result: f.Get("result"), Until: f.Get("until"), By: f.Get("by"), Note: f.Get("note"),
	}, book.Correction{})
	if f.Take(err) {
		return v.showForm(recordForm(v, f))
	}
	if err != nil {
		return err
	}
	return v.kept(v.backTo(f.Get("subject")), "Kept: "+f.Get("record")+" for "+v.subjectName(f.Get("subject"))+".", r.ID())
}

// backTo is the page of a subject, for after a record about it.
func (v *visit) backTo(key string) string {
	if kind, code, ok := strings.Cut(key, ":"); ok {
		return v.subjectURL(standing.Subject{Asks: program.Asks(kind), Code: code})
	}
	return v.url("today")
}

func screeningForm(v *visit, f *Form) (*formLeaf, error) {
	f.Default("on", v.today().String())
	whats := v.whats("screening")
	if len(whats) == 1 {
		f.Default("record", whats[0].Value)
	}
	people, err := v.ticks(func(x book.PersonSummary) bool { return x.Code != v.actor.Person })
	if err != nil {
		return nil, err
	}
	who := []option{{Value: "", Words: "Choose"}}
	for _, t := range people {
		who = append(who, option{Value: t.Value, Words: t.Name})
	}
	var zones []tick
	for _, z := range v.site.Program.Zones {
		if z.Restricted {
			zones = append(zones, tick{Value: z.Code, Name: "Zone " + z.Code})
		}
	}
	p := &formLeaf{page: page{Title: "Screening", Section: secPeople}, Head: "Record a screening", Action: v.url("screening"), Form: f, Button: "Keep this outcome"}
	p.Say = "Only the outcome is kept: cleared, cleared with a restriction, or not cleared, and until when."
	p.Cautions = []string{"No reason and nothing medical belongs here, in no field. Reasons stay where they were told, with who screened."}
	p.Fields = []field{
		f.Choice("person", "Who was screened", who).Need(),
		f.Choice("record", "Kind of screening", choose(whats)).Need(),
		f.Date("on", "Day").Need().UpTo(v.today().String()),
		f.Picks("outcome", "Outcome", []option{{Value: "cleared", Words: "Cleared"}, {Value: "restricted", Words: "With a restriction"}, {Value: "not", Words: "Not cleared", Bad: true}}).Need(),
		f.Ticks("limit", "With a restriction: the zones that it still opens", zones),
		f.Date("until", "Good until, if sooner than the usual span"),
		f.Text("by", "Screened by"),
	}
	p.After = "A clearance is a record and no permission to walk in: everybody is screened at the door, each time."
	return p, nil
}

func screeningPage(v *visit) error {
	p, err := screeningForm(v, v.asked())
	if err != nil {
		return err
	}
	return v.showForm(p)
}

func recordScreening(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	again := func() error {
		p, err := screeningForm(v, f)
		if err != nil {
			return err
		}
		return v.showForm(p)
	}
	form := book.RecordForm{Record: f.Get("record"), Subject: "person:" + f.Get("person"), On: f.Get("on"), Until: f.Get("until"), By: f.Get("by"), Result: book.Pass}
	switch f.Get("outcome") {
	case "cleared":
	case "restricted":
		form.Limit = strings.Join(f.All("limit"), " ")
		if form.Limit == "" {
			f.Loose("limit", "tick the zones that the clearance still opens, or choose another outcome")
			return again()
		}
	case "not":
		form.Result = book.Fail
	default:
		f.Loose("outcome", "choose what the screening came to")
		return again()
	}
	r, err := v.b.Record(v.ctx(), v.actor, v.site.Code, form, book.Correction{})
	if f.Take(err) {
		f.Rename("subject", "person")
		return again()
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("people", f.Get("person")), "Kept: the outcome of the screening.", r.ID())
}

func sessionForm(v *visit, f *Form) (*formLeaf, error) {
	f.Default("on", v.today().String())
	crew := f.Get("crew")
	people, err := v.ticks(func(x book.PersonSummary) bool { return crew == "" || x.Crew == crew || f.Has("people", x.Code) })
	if err != nil {
		return nil, err
	}
	if err := v.noteStandings(people, f.Get("record")); err != nil {
		return nil, err
	}
	p := &formLeaf{page: page{Title: "Record a session", Section: secPeople}, Head: "Record a session", Action: v.url("session"), Form: f, Button: "Keep for everybody ticked"}
	p.Say = "One training, review or reading that many took part in: choose what it was, tick who was there, and keep it once."
	p.Crew = v.crewTabs(f)
	p.Fields = []field{
		f.Choice("record", "What was held", choose(v.whats("training", "review", "acknowledgement"))).Need(),
		f.Date("on", "Day").Need().UpTo(v.today().String()),
		f.Text("by", "Held by"),
		f.Date("until", "Good until, if a certificate says so"),
		f.Text("note", "Note"),
		f.Ticks("people", "Who took part and passed", people),
		f.Ticks("failed", "Who took part and did not pass", people).Fold(),
	}
	p.After = "Each person gets a record of their own; all of them are written together or not at all."
	return p, nil
}

// crewTabs choose whom a list of people shows.
func (v *visit) crewTabs(f *Form) []spineLink {
	here := v.c.Request.URL.EscapedPath()
	link := func(name, crew string) spineLink {
		return spineLink{Name: name, URL: with(here, "record", f.Get("record"), "on", f.Get("on"), "crew", crew), Current: f.Get("crew") == crew}
	}
	out := []spineLink{link("Everybody", "")}
	for _, c := range v.site.Program.Crews {
		out = append(out, link(orCode(c.Name, c.Code), c.Code))
	}
	return out
}

// noteStandings writes beside each person where they stand with what the session answers.
func (v *visit) noteStandings(people []tick, what string) error {
	if what == "" {
		return nil
	}
	st, err := v.b.Standings(v.ctx(), v.actor, book.StandingQuery{Site: v.site.Code})
	if err != nil {
		return err
	}
	words := map[string]string{}
	for _, r := range st.Rows {
		if r.Subject.Asks == program.AsksPerson && slices.Contains(r.Records, what) && (r.Word.IsGap() || r.Word == standing.Closing) {
			words[r.Subject.Code] = string(r.Word)
		}
	}
	for i := range people {
		if w := words[people[i].Value]; w != "" {
			people[i].Note += ", " + w
		}
	}
	return nil
}

func sessionPage(v *visit) error {
	p, err := sessionForm(v, v.asked())
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
	form := book.SessionForm{Record: f.Get("record"), On: f.Get("on"), Until: f.Get("until"), By: f.Get("by"), Note: f.Get("note"), People: f.All("people"), Failed: f.All("failed")}
	for _, code := range form.Failed {
		if slices.Contains(form.People, code) {
			f.Loose("failed", v.subjectName("person:"+code)+" is ticked twice; tick them once")
		}
	}
	var r book.Receipt
	if len(f.Faults) == 0 {
		r, err = v.b.RecordSession(v.ctx(), v.actor, v.site.Code, form)
		f.Take(err)
	}
	if len(f.Faults) > 0 {
		p, err := sessionForm(v, f)
		if err != nil {
			return err
		}
		return v.showForm(p)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("people"), "Kept: "+form.Record+" for "+count(len(r.Written), "person", "people")+".", r.ID())
}

func acknowledgeForm(v *visit, f *Form) *formLeaf {
	code := f.Get("document")
	title := code
	if d, ok := v.site.Program.Document(code); ok {
		title = orCode(d.Title, code)
	}
	p := &formLeaf{page: page{Title: "Acknowledge", Section: secToday}, Head: title, Action: v.url("acknowledge"), Form: f, Button: "I have read it and will keep to it", Hidden: []hidden{{"document", code}}}
	p.Say = "Read the document where your site keeps it. With the button you say, in your own name and for today, that you have."
	return p
}

func acknowledgePage(v *visit) error { return v.showForm(acknowledgeForm(v, v.asked())) }

func acknowledge(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.Record(v.ctx(), v.actor, v.site.Code, book.RecordForm{Record: "acknowledgement/" + f.Get("document"), Subject: "person:" + v.actor.Person, On: v.today().String()}, book.Correction{})
	if f.Take(err) {
		return v.showForm(acknowledgeForm(v, f))
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("today"), "Kept: you have read it.", r.ID())
}
