package web

import (
	"strconv"

	"lodebook/models/book"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// outageLine is something that is out of service.
type outageLine struct {
	Name, URL, Since, Why, Passed string
	RecordURL, BackURL, RemedyURL string
	Another                       bool
}

// outages are the things that are out of service now, for pages that show today.
func (v *visit) outages() ([]outageLine, error) {
	if v.elsewhen() || !v.may(book.SeeSite) && !v.may(book.FillSheet) {
		return nil, nil
	}
	list, err := v.b.OutOfService(v.ctx(), v.actor, v.site.Code)
	var out []outageLine
	for _, x := range list {
		out = append(out, v.outageLine(x))
	}
	return out, err
}

// outagesOf are those of one subject.
func (v *visit) outagesOf(s standing.Subject) ([]outageLine, error) {
	if v.elsewhen() || s.Asks != program.AsksFixture && s.Asks != program.AsksZone {
		return nil, nil
	}
	list, err := v.b.OutOfService(v.ctx(), v.actor, v.site.Code)
	var out []outageLine
	for _, x := range list {
		if x.Subject == s {
			out = append(out, v.outageLine(x))
		}
	}
	return out, err
}

func (v *visit) outageLine(x book.OutageLine) outageLine {
	l := outageLine{Name: x.Name, Since: moment(x.From, v.site.Location, v.today()), Why: x.Why, Another: x.Another}
	if v.may(book.SeeSite) {
		l.URL = v.subjectURL(x.Subject)
	}
	if x.Passed != nil {
		l.Passed = shortDay(*x.Passed, v.today())
	}
	if x.Record != "" {
		l.RecordURL = v.entryURL("record", x.Record, false)
		if v.may(book.KeepRemedies) {
			l.RemedyURL = with(v.url("remedy"), "record", x.Record)
		}
	}
	if x.MaySign {
		l.BackURL = with(v.url("back-in-service"), "subject", subjectKey(x.Subject))
	}
	return l
}

func (v *visit) showTakeOut(f *Form) error {
	id, err := v.formID(f)
	if err != nil {
		return err
	}
	p := &formLeaf{page: page{Title: "Out of service", Section: secRounds}, Head: "Take out of service", Action: v.url("out-of-service"), Form: f, Button: "Take it out of service", Risk: true, Hidden: []hidden{id}}
	p.Say = "It stays out until a safety officer signs it back. What is asked of it goes on being asked: people must keep looking at it."
	p.Fields = []field{
		f.Long("because", "Why").Need(),
		f.Text("from", "From when").Help("A day and time such as 2026-03-02 14:30; empty: now"),
	}
	p.about(v, f, "subject", "What")
	return v.showForm(p)
}

func takeOutPage(v *visit) error {
	if v.unchosen("subject") {
		return v.chooseSubject(&chooseLeaf{page: page{Title: "Out of service", Section: secRounds}, Head: "Take out of service", Say: "Which fixture, or which zone?"}, "subject", program.AsksFixture, program.AsksZone)
	}
	return v.showTakeOut(v.asked())
}

func takeOut(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.TakeOut(v.ctx(), v.actor, v.site.Code, book.OutageForm{ID: f.Get("id"), Subject: f.Get("subject"), From: f.Get("from"), Because: f.Get("because")})
	if f.Take(err) {
		return v.showTakeOut(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.backTo(f.Get("subject")), "It is out of service.", r.ID())
}

func (v *visit) showSignBack(f *Form) error {
	id, err := v.formID(f)
	if err != nil {
		return err
	}
	p := &formLeaf{page: page{Title: "Back in service", Section: secRounds}, Head: "Sign back in service", Action: v.url("back-in-service"), Form: f, Button: "Sign it back in my name", Hidden: []hidden{id}}
	p.Say = "You say, in your own name, that it may be used again. With a fixture goes the zone that its failure closed."
	p.Cautions = []string{"The record keeps who signed; local rules, the manufacturer's instructions and your own look decide."}
	p.Fields = []field{f.Long("note", "What was done, and what was looked at").Need()}
	p.about(v, f, "subject", "What")
	return v.showForm(p)
}

func signBackPage(v *visit) error { return v.showSignBack(v.asked()) }

func signBack(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.SignBack(v.ctx(), v.actor, v.site.Code, book.ReturnForm{ID: f.Get("id"), Subject: f.Get("subject"), Note: f.Get("note")})
	if f.Take(err) {
		return v.showSignBack(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.backTo(f.Get("subject")), "It is back in service.", r.ID())
}

// todayRemedies adds what is out of service, and for a safety officer what is still to be told outside.
func (v *visit) todayRemedies(p *todayLeaf) error {
	var err error
	if p.Outages, err = v.outages(); err != nil {
		return err
	}
	if !v.acts(book.SeeIncidents) {
		return nil
	}
	list, err := v.b.ReportsWaiting(v.ctx(), v.actor, v.site.Code)
	for _, r := range list {
		at := strconv.Itoa(r.Incident)
		p.ToTell = append(p.ToTell, reportLine{Code: v.url("incidents", at), To: "Incident " + at + " to " + r.To, Due: shortDay(r.Due, v.today()), Left: leftWords(r.ReportDue), Late: r.Left < 0})
	}
	return err
}

// outWords says what a failed sheet takes out of service once it is kept.
func outWords(sh *program.Sheet, zone string) string {
	s := "Kept so, it is out of service"
	if sh.AlsoZone && zone != "" {
		s += ", and Zone " + zone + " with it,"
	}
	return s + " until a safety officer signs it back."
}
