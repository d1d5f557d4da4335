package web

import (
	"lodebook/models/book"
	"lodebook/models/program"
)

func (v *visit) dutyFields(f *Form) []field {
	return []field{
		f.Text("from", "From").Need().Help("A day and time such as 2026-03-02 07:30"),
		f.Text("to", "To").Need().Help("A day and time, at most 48 hours later"),
		f.Text("duty", "Which duty").Help("A word of the roster such as duty or on-call; empty: duty"),
	}
}

func dutyOf(f *Form) book.DutyForm {
	return book.DutyForm{ID: f.Get("id"), Person: f.Get("person"), From: f.Get("from"), To: f.Get("to"), Duty: f.Get("duty")}
}

func (v *visit) showDuty(f *Form) error {
	p := &formLeaf{page: page{Title: "Put on duty", Section: secCoverage}, Head: "Put on duty", Action: v.url("duty"), Form: f, Button: "Keep it"}
	p.Say = "One turn of the roster. A person may have several at once and counts once."
	id, err := v.formID(f)
	if err != nil {
		return err
	}
	p.Hidden = []hidden{id}
	p.Fields = v.dutyFields(f)
	p.about(v, f, "person", "Who")
	return v.showForm(p)
}

func dutyPage(v *visit) error {
	if v.unchosen("person") {
		return v.chooseSubject(&chooseLeaf{page: page{Title: "Put on duty", Section: secCoverage}, Head: "Put on duty", Say: "Who?"}, "person", program.AsksPerson)
	}
	return v.showDuty(v.asked())
}

func keepDuty(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.KeepDuty(v.ctx(), v.actor, v.site.Code, dutyOf(f), book.Correction{})
	if f.Take(err) {
		return v.showDuty(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("coverage"), "Kept: the turn of the roster.", r.ID())
}

func (v *visit) appointFields(f *Form) []field {
	posts := make([]option, 0, len(v.site.Program.Posts))
	for _, x := range v.site.Program.Posts {
		posts = append(posts, option{Value: x.Code, Words: orCode(x.Name, x.Code)})
	}
	return []field{
		f.Choice("post", "Which post", posts).Need(),
		f.YesNo("deputy", "As its deputy?", ""),
		f.Date("from", "First day").Need(),
		f.Date("until", "Last day").Help("Empty: until it is ended"),
	}
}

func (v *visit) showAppoint(f *Form) error {
	f.Default("from", v.today().String())
	p := &formLeaf{page: page{Title: "Appoint", Section: secPeople}, Head: "Appoint", Action: v.url("appoint"), Form: f, Button: "Appoint"}
	p.Say = "A post is held by whoever was appointed, while they are on staff. Its deputy covers it and does not hold it."
	id, err := v.formID(f)
	if err != nil {
		return err
	}
	p.Hidden = []hidden{id}
	p.Fields = v.appointFields(f)
	p.about(v, f, "person", "Whom")
	return v.showForm(p)
}

func appointPage(v *visit) error {
	if v.unchosen("person") {
		return v.chooseSubject(&chooseLeaf{page: page{Title: "Appoint", Section: secPeople}, Head: "Appoint", Say: "Whom?"}, "person", program.AsksPerson)
	}
	return v.showAppoint(v.asked())
}

// postLine is a time in which somebody held a post.
type postLine struct {
	Name, URL, When, As string
	EndURL              string
}

// holders are those of a post, and its deputies.
func (v *visit) holders(post string) ([]postLine, error) {
	list, err := v.b.Holders(v.ctx(), v.actor, v.site.Code, post)
	var out []postLine
	for _, x := range list {
		l := postLine{Name: x.Name, URL: v.url("people", x.Person), When: "from " + shortDay(x.First, v.today()), As: "holds it"}
		if x.Deputy {
			l.As = "deputy"
		}
		if x.Last != nil {
			l.When += " to " + shortDay(*x.Last, v.today())
		}
		if v.acts(book.RecordDone) && x.Person != v.actor.Person && (x.Last == nil || *x.Last >= v.today()) {
			l.EndURL = with(v.url("end-appointment"), "entry", x.Entry, "post", post)
		}
		out = append(out, l)
	}
	return out, err
}

func (v *visit) showEndAppointment(f *Form) error {
	f.Default("until", v.today().String())
	p := &formLeaf{page: page{Title: "End an appointment", Section: secPeople}, Head: "End an appointment", Action: v.url("end-appointment"), Form: f, Button: "End it", Risk: true}
	p.Say = "It holds through the day that you name, and no longer."
	p.Hidden = []hidden{{"entry", f.Get("entry")}, {"post", f.Get("post")}}
	p.Fields = []field{f.Date("until", "Last day").Need()}
	return v.showForm(p)
}

func endAppointmentPage(v *visit) error { return v.showEndAppointment(v.asked()) }

func endAppointment(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.EndAppointment(v.ctx(), v.actor, f.Get("entry"), f.Get("until"))
	if f.Take(err) {
		return v.showEndAppointment(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("subjects", string(program.AsksPost), f.Get("post")), "The appointment has an end.", r.ID())
}

func appoint(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	a := book.AppointForm{ID: f.Get("id"), Post: f.Get("post"), Person: f.Get("person"), From: f.Get("from"), Until: f.Get("until"), Deputy: f.Get("deputy") == "yes"}
	r, err := v.b.Appoint(v.ctx(), v.actor, v.site.Code, a)
	if f.Take(err) {
		return v.showAppoint(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("subjects", string(program.AsksPost), a.Post), "Kept: the appointment.", r.ID())
}
