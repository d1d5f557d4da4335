package web

import (
	"errors"
	"net/http"
	"net/url"
	"slices"
	"strings"

	"lodebook/models/book"
)

// correctable tells whether entries of the kind have a form of their own to be corrected by.
func correctable(kind string) bool {
	return slices.Contains([]string{"record", "event", "excusal", "pause", "right", "duty", "plan"}, kind)
}

func reasonOptions(need bool) []option {
	out := []option{{Value: "", Words: "A slip, put right at once"}}
	if need {
		out[0].Words = "Choose"
	}
	for _, r := range book.Reasons {
		out = append(out, option{Value: r.Code, Words: r.Words})
	}
	return out
}

func correctionOf(f *Form, id string) book.Correction {
	return book.Correction{Supersedes: id, Reason: f.Get("reason"), ReasonText: f.Get("reason_text")}
}

// bothSides is an entry that was to be corrected and what took its place meanwhile.
type bothSides struct {
	Words    string
	Old, Now entrySide
}

// late finds what stands in the place of an entry that somebody else was faster to correct.
func (v *visit) late(stale *book.Stale) (*bothSides, book.EntryView, error) {
	old, err := v.b.Entry(v.ctx(), v.actor, stale.ID)
	if err != nil {
		return nil, old, err
	}
	now := old
	for now.New != nil {
		if now, err = v.b.Entry(v.ctx(), v.actor, now.New.ID); err != nil {
			return nil, now, err
		}
	}
	b := &bothSides{Old: *v.side(old), Now: *v.side(now)}
	who := now.Actor + " was faster"
	if now.ActorID == v.actor.Account {
		who = "This account did that already"
	}
	b.Words = who + ", on " + moment(now.At, v.site.Location, v.today()) + ". Nothing was kept this time."
	return b, now, nil
}

func withdraw(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	id := v.param("id")
	_, err = v.b.Withdraw(v.ctx(), v.actor, id, correctionOf(f, id))
	var stale *book.Stale
	if errors.As(err, &stale) {
		return v.withdrawnLate(stale, f)
	}
	if f.Take(err) {
		p, err := v.entryLeaf(id, f)
		if err != nil {
			return err
		}
		return entrySheet.show(v, http.StatusUnprocessableEntity, p)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("book", id), "Withdrawn. It counts no more and stays readable.", "")
}

// withdrawnLate shows the entry with what took its place, and what was about to be said of it.
func (v *visit) withdrawnLate(stale *book.Stale, f *Form) error {
	both, _, err := v.late(stale)
	if err != nil {
		return err
	}
	p, err := v.entryLeaf(stale.ID, f)
	if err != nil {
		return err
	}
	said := strings.Trim(book.ReasonWords(f.Get("reason"))+": "+f.Get("reason_text"), ": ")
	p.Late = both.Words
	if said != "" {
		p.Late += " You were about to withdraw it: " + said + "."
	}
	return entrySheet.show(v, http.StatusConflict, p)
}

func undoImport(v *visit) error {
	id := v.param("id")
	if _, err := v.b.UndoImport(v.ctx(), v.actor, id); err != nil {
		return err
	}
	return v.kept(v.url("book", id), "The whole import was taken back.", "")
}

// correctForm is the entry's own form, filled in with what it says.
func correctForm(v *visit, id string, x book.Correctable, f *Form) *formLeaf {
	p := &formLeaf{page: page{Title: "Correct", Section: secBook}, Head: "Correct: " + x.Summary, Action: v.url("correct", id), Form: f, Button: "Put it right"}
	p.Say = "A new entry takes the place of this one. The old one stays readable, and the page shows both."
	on := f.Date("on", "Day").UpTo(v.today().String())
	if x.Timed {
		on = f.Text("on", "Day and time")
	}
	whom := f.Text("subject", "For whom or what").Need().Help("A code, or kind:code")
	switch x.Kind {
	case "record":
		p.Fields = []field{
			whom, on.Need(),
			f.Picks("result", "Result", []option{{Value: book.Pass, Words: "Passed"}, {Value: book.Fail, Words: "Not passed", Bad: true}}).Need(),
			f.Date("until", "Good until"), f.Text("limit", "Only for zones").Help("Their codes, with blanks between"), f.Text("by", "By"),
		}
		if strings.HasPrefix(x.Values["record"], "screening/") {
			p.Cautions = []string{"No reason and nothing medical belongs here, in no field."}
		} else {
			p.Fields = append(p.Fields, f.Long("note", "Note"))
		}
	case "event":
		p.Fields = []field{f.Choice("event", "What happened", v.eventsOf("")).Need(), whom, on.Need(), f.Text("note", "Note")}
	case "excusal":
		p.Fields = []field{f.Choice("item", "What is excused", v.itemsFor("")).Need(), whom, f.Date("from", "First day").Need(), f.Date("to", "Last day").Need(), f.Long("because", "Why").Need(), f.YesNo("opens", "Does it also open the zones that this guards?", "")}
	case "pause":
		p.Fields = []field{whom, f.Date("from", "First day").Need(), f.Date("to", "Last day"), f.Text("because", "Why")}
	case "right":
		p.Fields = append([]field{f.Text("person", "Whom").Need().Help("The code of a person")}, v.rightFields(f)...)
	case "duty":
		p.Fields = append([]field{f.Text("person", "Who").Need().Help("The code of a person")}, v.dutyFields(f)...)
	case "plan":
		p.Fields = v.planFields(f)
	}
	why := f.Choice("reason", "Why it is corrected", reasonOptions(x.NeedReason))
	if x.NeedReason {
		why = why.Need()
	}
	p.Fields = append(p.Fields, why, f.Text("reason_text", "More, in a sentence"))
	return p
}

func correctPage(v *visit) error {
	id := v.param("id")
	x, err := v.b.Correctable(v.ctx(), v.actor, id)
	if err != nil {
		return err
	}
	if x.Sheet {
		pairs := []string{"supersedes", id}
		for k, value := range x.Values {
			pairs = append(pairs, k, value)
		}
		return v.seeOther(with(v.url("sheet"), pairs...))
	}
	f := &Form{Values: url.Values{}}
	for k, value := range x.Values {
		f.Set(k, value)
	}
	return v.showForm(correctForm(v, id, x, f))
}

func correct(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	id := v.param("id")
	x, err := v.b.Correctable(v.ctx(), v.actor, id)
	var r book.Receipt
	if err == nil {
		r, err = v.putRight(f, id, x)
	}
	var stale *book.Stale
	switch {
	case errors.As(err, &stale):
		return v.correctedLate(stale, f)
	case f.Take(err):
		if x.Kind == "excusal" {
			f.renameWhy()
		}
		return v.showForm(correctForm(v, id, x, f))
	case err != nil:
		return err
	}
	return v.kept(v.url("book", r.ID()), "Put right.", "")
}

// renameWhy tells an excusal's own reason from that of its correction, which the book calls alike.
func (f *Form) renameWhy() {
	for i, x := range f.Faults {
		if x.Field == "reason" && strings.Contains(x.Accepted, "excused") {
			f.Faults[i].Field = "because"
		}
	}
}

// correctedLate shows both entries and what was typed; where what stands now can be corrected, the
// form goes on from there.
func (v *visit) correctedLate(stale *book.Stale, f *Form) error {
	both, now, err := v.late(stale)
	if err != nil {
		return err
	}
	x, err := v.b.Correctable(v.ctx(), v.actor, now.ID)
	onward := err == nil && correctable(x.Kind) && !x.Sheet
	if !onward {
		old, err := v.b.Entry(v.ctx(), v.actor, stale.ID)
		if err != nil {
			return err
		}
		x = book.Correctable{Kind: old.Kind, Summary: old.Summary}
	}
	p := correctForm(v, now.ID, x, f)
	p.Head, p.Both = "Somebody was faster", both
	p.Say, p.Button = "What you typed is still in the form below. Look at both entries, then put right what stands now.", "Put right what stands now"
	if !onward {
		p.Say, p.Button = "What stands now cannot be corrected from here. What you typed is below.", ""
	}
	return formSheet.show(v, http.StatusConflict, p)
}

func (v *visit) putRight(f *Form, id string, x book.Correctable) (book.Receipt, error) {
	fix := correctionOf(f, id)
	switch x.Kind {
	case "record":
		return v.b.Record(v.ctx(), v.actor, v.site.Code, book.RecordForm{Record: x.Values["record"], Subject: f.Get("subject"), On: f.Get("on"), Result: f.Get("result"), Until: f.Get("until"), Limit: f.Get("limit"), By: f.Get("by"), Note: f.Get("note")}, fix)
	case "event":
		return v.b.ReportEvent(v.ctx(), v.actor, v.site.Code, book.EventForm{Event: f.Get("event"), Subject: f.Get("subject"), On: f.Get("on"), Note: f.Get("note")}, fix)
	case "excusal":
		return v.b.Excuse(v.ctx(), v.actor, v.site.Code, book.ExcusalForm{Item: f.Get("item"), Subject: f.Get("subject"), From: f.Get("from"), To: f.Get("to"), Reason: f.Get("because"), Opens: f.Get("opens")}, fix)
	case "right":
		return v.b.Grant(v.ctx(), v.actor, v.site.Code, rightOf(f), fix)
	case "duty":
		return v.b.KeepDuty(v.ctx(), v.actor, v.site.Code, dutyOf(f), fix)
	case "plan":
		return v.b.PlanDrill(v.ctx(), v.actor, v.site.Code, planOf(f), fix)
	default:
		return v.b.Pause(v.ctx(), v.actor, v.site.Code, book.PauseForm{Subject: f.Get("subject"), From: f.Get("from"), To: f.Get("to"), Reason: f.Get("because")}, fix)
	}
}
