package web

import (
	"slices"

	"lodebook/models/book"
	"lodebook/models/program"
)

// recordable are the records that the form takes of a kind of subject. Inspections and checks that
// have a sheet are filled in there.
func (v *visit) recordable(asks program.Asks) []option {
	list := v.whats(asks, "training", "review", "acknowledgement", "appointment", "drill", "inspection", "check")
	return slices.DeleteFunc(list, func(o option) bool { _, sheet := v.site.Program.SheetFor(o.Value); return sheet })
}

func recordForm(v *visit, f *Form) (*formLeaf, error) {
	f.Default("on", v.today().String()).Default("result", book.Pass)
	s, _ := subjectOf(f.Get("subject"))
	p := &formLeaf{page: page{Title: "Record", Section: secPeople}, Head: "Record something done", Action: v.url("record"), Form: f, Button: "Keep this record"}
	p.Say = "A training, review or appointment that took place."
	id, err := v.formID(f)
	if err != nil {
		return nil, err
	}
	p.Hidden = []hidden{id}
	p.Fields = []field{
		f.Choice("record", "What was done", choose(v.recordable(s.Asks))).Need(),
		f.Date("on", "Day").Need().UpTo(v.today().String()),
		f.Picks("result", "Result", []option{{Value: book.Pass, Words: "Passed"}, {Value: book.Fail, Words: "Not passed", Bad: true}}).Need(),
		f.Date("until", "Good until").Help("Only where a certificate names its own last good day"),
		f.Text("by", "Done by").Help("Who taught, looked or decided"),
		f.Long("note", "Note").Help("Nothing medical belongs here"),
	}
	p.about(v, f, "subject", "For whom or what")
	p.After = "It becomes an entry of the book. A slip can be put right from its page within ten minutes without a reason."
	return p, nil
}

func recordPage(v *visit) error {
	if v.unchosen("subject") {
		return v.chooseSubject(&chooseLeaf{page: page{Title: "Record", Section: secPeople}, Head: "Record something done", Say: "For whom, or for what?"}, "subject", v.askedOf(v.query("record"))...)
	}
	p, err := recordForm(v, v.asked())
	if err != nil {
		return err
	}
	return v.showForm(p)
}

// askedOf are the kinds of subject of which a record is asked; of none in particular, every kind that
// the form takes.
func (v *visit) askedOf(record string) []program.Asks {
	var out []program.Asks
	for _, asks := range program.AllAsks {
		answers := func(o option) bool { return record == "" || o.Value == record }
		if slices.ContainsFunc(v.recordable(asks), answers) {
			out = append(out, asks)
		}
	}
	return out
}

func recordOne(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.Record(v.ctx(), v.actor, v.site.Code, book.RecordForm{
		ID: f.Get("id"), Record: f.Get("record"), Subject: f.Get("subject"), On: f.Get("on"), Result: f.Get("result"), Until: f.Get("until"), By: f.Get("by"), Note: f.Get("note"),
	}, book.Correction{})
	if f.Take(err) {
		p, err := recordForm(v, f)
		if err != nil {
			return err
		}
		return v.showForm(p)
	}
	if err != nil {
		return err
	}
	return v.kept(v.backTo(f.Get("subject")), v.keptWords(f.Get("record"), f.Get("result"), v.subjectName(f.Get("subject"))), r.ID())
}

// keptWords says what was kept, and for whom.
func (v *visit) keptWords(record, result, whom string) string {
	s := "Kept: " + v.what(record)
	if result == book.Fail {
		s += ", not passed,"
	}
	return s + " for " + whom + "."
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
