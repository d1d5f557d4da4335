package web

import (
	"net/url"
	"strconv"
	"strings"

	"lodebook/models/book"
	"lodebook/models/civil"
)

// entryLine is one entry in the list.
type entryLine struct {
	No, When, Who, Kind, Summary, URL string
	Over, Withdrawn, Imported         bool
}

type bookLeaf struct {
	page
	Say    string
	Lines  []entryLine
	Form   *Form
	Kinds  []option
	Older  string
	Newest string
}

var bookSheet = leafOf[bookLeaf]("book")

const entriesShown = 100

// bookPage lists entries, newest first.
func bookPage(v *visit) error {
	f := v.asked()
	q := book.EntryQuery{Site: v.site.Code, Kind: f.Get("kind"), Batch: f.Get("batch"), Actor: f.Get("actor"), Limit: entriesShown}
	if f.Get("all") != "" {
		q.Site = ""
	}
	if n, err := strconv.ParseInt(f.Get("before"), 10, 64); err == nil && n > 0 {
		q.Before = n
	}
	if d, err := civil.ParseDay(f.Get("day")); err == nil {
		q.From, q.To = d.Midnight(v.site.Location), (d + 1).Midnight(v.site.Location)
	} else if f.Get("day") != "" {
		f.Loose("day", "“"+f.Get("day")+"” is not a day; write it as YYYY-MM-DD")
	}
	list, err := v.b.Entries(v.ctx(), v.actor, q)
	if err != nil {
		return err
	}
	p := &bookLeaf{page: page{Title: "Book", Section: secBook}, Form: f, Newest: v.url("book")}
	p.Kinds = []option{{Value: "", Words: "Everything", Chosen: q.Kind == ""}}
	for _, k := range book.Kinds {
		p.Kinds = append(p.Kinds, option{Value: k.Kind, Words: k.Words, Chosen: q.Kind == k.Kind})
	}
	for _, e := range list {
		p.Lines = append(p.Lines, v.entryLine(e))
	}
	if len(list) == entriesShown {
		p.Older = with(v.url("book"), "kind", q.Kind, "day", f.Get("day"), "batch", q.Batch, "actor", q.Actor, "before", strconv.FormatInt(list[len(list)-1].Seq, 10))
	}
	p.Say = "Every line that was written, newest first. Nothing is edited or deleted: a later entry takes the place of an earlier one, and both stay readable."
	return bookSheet.show(v, 200, p)
}

func (v *visit) entryLine(e book.EntryLine) entryLine {
	return entryLine{
		No: grouped(e.Seq), When: moment(e.At, v.site.Location, v.today()), Who: e.Actor, Kind: kindWords(e.Kind), Summary: e.Summary,
		URL: v.url("book", e.ID), Over: e.SupersededBy != "" || e.Withdrawn, Withdrawn: e.Withdrawn, Imported: e.Batch != "",
	}
}

func kindWords(kind string) string {
	for _, k := range book.Kinds {
		if k.Kind == kind {
			return k.Words
		}
	}
	return kind
}

// entrySide is one entry as a column.
type entrySide struct {
	Head, When, Who, URL string
	Fields               []book.Field
	Reason               string
}

type entryLeaf struct {
	page
	Head, Say   string
	Here        entrySide
	Old, New    *entrySide
	Canonical   string
	ID          string
	BatchURL    string
	UndoURL     string
	CorrectURL  string
	WithdrawURL string
	Withdrawn   bool
	Reasons     []option
	NeedReason  bool
	Form        *Form
	SubjectURL  string
}

var entrySheet = leafOf[entryLeaf]("entry")

// entryPage shows one entry with what it superseded and what superseded it.
func entryPage(v *visit) error { return v.showEntry(v.param("id"), &Form{Values: url.Values{}}, 200) }

func (v *visit) showEntry(id string, f *Form, status int) error {
	x, err := v.b.Entry(v.ctx(), v.actor, id)
	if err != nil {
		return err
	}
	p := &entryLeaf{page: page{Title: kindWords(x.Kind), Section: secBook}, Head: x.Summary, Here: *v.side(x), ID: x.ID, Canonical: x.Canonical, Form: f, Withdrawn: x.Withdrawn, NeedReason: x.NeedReason}
	p.Say = entrySay(x)
	if x.Old != nil {
		p.Old = v.side(*x.Old)
	}
	if x.New != nil {
		p.New = v.side(*x.New)
	}
	if x.SubjectRef != nil {
		p.SubjectURL = v.subjectURL(*x.SubjectRef)
	}
	if x.Batch != "" {
		p.BatchURL = v.url("book", x.Batch)
	}
	if x.Kind == "batch" {
		p.BatchURL = with(v.url("book"), "batch", x.ID)
		if v.may(book.ImportTables) && !x.Withdrawn {
			p.UndoURL = v.url("undo", x.ID)
		}
	}
	if x.MayCorrect {
		p.WithdrawURL = v.url("withdraw", x.ID)
		p.Reasons = reasonOptions(x.NeedReason)
		if correctable(x.Kind) {
			p.CorrectURL = v.url("correct", x.ID)
		}
	}
	return entrySheet.show(v, status, p)
}

func correctable(kind string) bool {
	return kind == "record" || kind == "event" || kind == "excusal" || kind == "pause"
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

func entrySay(x book.EntryView) string {
	switch {
	case x.Withdrawn && x.SupersededBy == "":
		return "It came in with an import that was taken back, and counts no more."
	case x.Withdrawn:
		return "It was withdrawn and counts no more. It stays readable."
	case x.SupersededBy != "":
		return "A later entry took its place. Both are below."
	case x.Supersedes != "":
		return "It took the place of an earlier entry. Both are below."
	default:
		return "It stands."
	}
}

func (v *visit) side(x book.EntryView) *entrySide {
	return &entrySide{
		Head: kindWords(x.Kind) + ", entry " + grouped(x.Seq), When: moment(x.At, v.site.Location, v.today()), Who: x.Actor, URL: v.url("book", x.ID), Fields: x.Fields, Reason: x.Reason,
	}
}

func withdraw(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	id := v.param("id")
	_, err = v.b.Withdraw(v.ctx(), v.actor, id, correctionOf(f, id))
	if f.Take(err) {
		return v.showEntry(id, f, 422)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("book", id), "Withdrawn.", "")
}

func correctionOf(f *Form, id string) book.Correction {
	return book.Correction{Supersedes: id, Reason: f.Get("reason"), ReasonText: f.Get("reason_text")}
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
	f.Default("reason", "")
	switch x.Kind {
	case "record":
		p.Fields = []field{f.Date("on", "Day").Need().UpTo(v.today().String())}
		if x.Timed {
			p.Fields = []field{f.Text("on", "When").Need()}
		}
		p.Fields = append(p.Fields,
			f.Text("subject", "For whom or what").Need(),
			f.Picks("result", "Result", []option{{Value: book.Pass, Words: "Passed"}, {Value: book.Fail, Words: "Not passed", Bad: true}}).Need(),
			f.Date("until", "Good until"), f.Text("limit", "Only for zones"), f.Text("by", "By"), f.Long("note", "Note"))
	case "event":
		p.Fields = []field{f.Text("event", "Event").Need(), f.Text("subject", "To whom or what").Need(), f.Text("on", "When").Need(), f.Text("note", "Note")}
	case "excusal":
		p.Fields = []field{f.Text("item", "Item").Need(), f.Text("subject", "For whom or what").Need(), f.Date("from", "First day").Need(), f.Date("to", "Last day").Need(), f.Long("because", "Why").Need(), f.YesNo("opens", "Does it also open zones?", "")}
	case "pause":
		p.Fields = []field{f.Text("subject", "Who or what").Need(), f.Date("from", "First day").Need(), f.Date("to", "Last day"), f.Text("because", "Why")}
	}
	p.Fields = append(p.Fields, f.Choice("reason", "Why it is corrected", reasonOptions(x.NeedReason)), f.Text("reason_text", "More, in a sentence"))
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
	if err != nil {
		return err
	}
	r, err := v.putRight(f, id, x)
	if f.Take(err) {
		if x.Kind == "excusal" {
			for i := range f.Faults {
				if f.Faults[i].Field == "reason" && strings.Contains(f.Faults[i].Accepted, "excused") {
					f.Faults[i].Field = "because"
				}
			}
		}
		return v.showForm(correctForm(v, id, x, f))
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("book", r.ID()), "Put right.", "")
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
	default:
		return v.b.Pause(v.ctx(), v.actor, v.site.Code, book.PauseForm{Subject: f.Get("subject"), From: f.Get("from"), To: f.Get("to"), Reason: f.Get("because")}, fix)
	}
}
