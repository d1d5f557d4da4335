package web

import (
	"strings"

	"lodebook/models/book"
	"lodebook/models/program"
)

func (v *visit) itemsFor(key string) []option {
	kind, _, _ := strings.Cut(key, ":")
	out := []option{{Value: "", Words: "Choose"}}
	for _, i := range v.site.Program.Items {
		if kind == "" || string(i.Asks) == kind {
			out = append(out, option{Value: i.Code, Words: i.Title})
		}
	}
	return out
}

// excusable are the kinds of subject that items ask.
var excusable = []program.Asks{program.AsksPerson, program.AsksFixture, program.AsksCrew, program.AsksZone, program.AsksPost, program.AsksDocument, program.AsksSite}

func excuseForm(v *visit, f *Form) (*formLeaf, error) {
	f.Default("from", v.today().String())
	p := &formLeaf{page: page{Title: "Excuse", Section: secGaps}, Head: "Excuse", Action: v.url("excuse"), Form: f, Button: "Keep this excusal"}
	p.Say = "A dated exception for one thing that is asked, with a reason and an end. It stands in your name."
	id, err := v.formID(f)
	p.Hidden = []hidden{id}
	p.Fields = []field{
		f.Choice("item", "What is excused", v.itemsFor(f.Get("subject"))).Need(),
		f.Date("from", "First day").Need(),
		f.Date("to", "Last day").Need(),
		f.Long("reason", "Why").Need().Help("Nothing medical belongs here"),
		f.YesNo("opens", "Does it also open the zones that this guards?", "").Help("Only where the officer is sure; a failed record is never opened by it"),
	}
	p.about(v, f, "subject", "For whom or what")
	return p, err
}

func excusePage(v *visit) error {
	if v.unchosen("subject") {
		return v.chooseSubject(&chooseLeaf{page: page{Title: "Excuse", Section: secGaps}, Head: "Excuse", Say: "Whom, or what?"}, "subject", excusable...)
	}
	return v.showExcuse(v.asked())
}

func (v *visit) showExcuse(f *Form) error {
	p, err := excuseForm(v, f)
	if err != nil {
		return err
	}
	return v.showForm(p)
}

func excuse(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.Excuse(v.ctx(), v.actor, v.site.Code, book.ExcusalForm{ID: f.Get("id"), Item: f.Get("item"), Subject: f.Get("subject"), From: f.Get("from"), To: f.Get("to"), Reason: f.Get("reason"), Opens: f.Get("opens")}, book.Correction{})
	if f.Take(err) {
		return v.showExcuse(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.backTo(f.Get("subject")), "Kept: the excusal.", r.ID())
}

func pauseForm(v *visit, f *Form) (*formLeaf, error) {
	f.Default("from", v.today().String())
	p := &formLeaf{page: page{Title: "Pause", Section: secPeople}, Head: "Pause", Action: v.url("pause"), Form: f, Button: "Keep this pause"}
	p.Say = "A person who is away, or a thing that is out of service. Nothing is asked meanwhile, and no zone is open."
	id, err := v.formID(f)
	p.Hidden = []hidden{id}
	p.Fields = []field{
		f.Date("from", "First day").Need(),
		f.Date("to", "Last day").Help("Empty until it is known"),
		f.Text("reason", "Why").Help("A word will do; nothing medical belongs here"),
	}
	p.about(v, f, "subject", "Who or what")
	return p, err
}

func pausePage(v *visit) error {
	if v.unchosen("subject") {
		return v.chooseSubject(&chooseLeaf{page: page{Title: "Pause", Section: secPeople}, Head: "Pause", Say: "Who is away, or what is out of service?"}, "subject", program.AsksPerson, program.AsksFixture)
	}
	return v.showPause(v.asked())
}

func (v *visit) showPause(f *Form) error {
	p, err := pauseForm(v, f)
	if err != nil {
		return err
	}
	return v.showForm(p)
}

func pause(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.Pause(v.ctx(), v.actor, v.site.Code, book.PauseForm{ID: f.Get("id"), Subject: f.Get("subject"), From: f.Get("from"), To: f.Get("to"), Reason: f.Get("reason")}, book.Correction{})
	if f.Take(err) {
		return v.showPause(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.backTo(f.Get("subject")), "Kept: the pause.", r.ID())
}

func endPause(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.EndPause(v.ctx(), v.actor, f.Get("entry"), v.today())
	if err != nil {
		return err
	}
	return v.kept(v.url("book", r.ID()), "The pause ends today.", "")
}

func confirmExcusal(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.ConfirmExcusal(v.ctx(), v.actor, f.Get("entry"))
	if err != nil {
		return err
	}
	return v.kept(v.url("book", r.ID()), "You stand behind the excusal now.", "")
}
