package web

import (
	"net/url"
	"strconv"

	"lodebook/models/book"
	"lodebook/models/civil"
)

// entryLine is one entry in the list.
type entryLine struct {
	No, When, Who, Kind, Summary, URL string
	Over, Imported                    bool
}

type bookLeaf struct {
	page
	Say     string
	Lines   []entryLine
	Form    *Form
	Filters []field
	Batch   string // of which import only
	Older   string
	Newest  string
}

var bookSheet = leafOf[bookLeaf]("book")

const entriesShown = 100

// bookPage lists entries, newest first.
func bookPage(v *visit) error {
	f := v.asked()
	q := v.entryQuery(f)
	list, err := v.b.Entries(v.ctx(), v.actor, q)
	if err != nil {
		return err
	}
	p := &bookLeaf{page: page{Title: "Book", Section: secBook}, Form: f, Batch: q.Batch, Lines: v.entryLines(list)}
	if p.Filters, err = v.entryFilters(f); err != nil {
		return err
	}
	if q.Before > 0 || len(f.Faults) > 0 || f.Get("kind")+f.Get("day")+f.Get("actor")+f.Get("site")+q.Batch != "" {
		p.Newest = v.url("book")
	}
	if len(list) == entriesShown {
		p.Older = with(v.url("book"), "kind", q.Kind, "day", f.Get("day"), "batch", q.Batch, "actor", q.Actor, "site", f.Get("site"), "before", strconv.FormatInt(list[len(list)-1].Seq, 10))
	}
	p.Say = "Every line that was written, newest first. Nothing is edited or deleted: a later entry takes the place of an earlier one, and both stay readable."
	return bookSheet.show(v, 200, p)
}

// entryQuery reads what the address asks for.
func (v *visit) entryQuery(f *Form) book.EntryQuery {
	q := book.EntryQuery{Site: v.site.Code, Kind: f.Get("kind"), Batch: f.Get("batch"), Actor: f.Get("actor"), Limit: entriesShown}
	if f.Get("site") == "all" {
		q.Site = ""
	}
	if n, err := strconv.ParseInt(f.Get("before"), 10, 64); err == nil && n > 0 {
		q.Before = n
	}
	day := f.Get("day")
	if d, err := civil.ParseDay(day); err == nil {
		q.From, q.To = d.Midnight(v.site.Location), (d + 1).Midnight(v.site.Location)
	} else if day != "" {
		f.Loose("day", "“"+day+"” is not a day; write it as YYYY-MM-DD")
	}
	return q
}

func (v *visit) entryFilters(f *Form) ([]field, error) {
	kinds := []option{{Value: "", Words: "Everything"}}
	for _, k := range book.Kinds {
		kinds = append(kinds, option{Value: k.Kind, Words: k.Words})
	}
	writers, err := v.b.Writers(v.ctx(), v.actor, v.site.Code)
	if err != nil {
		return nil, err
	}
	who := []option{{Value: "", Words: "Everybody"}}
	for _, w := range writers {
		who = append(who, option{Value: w.ID, Words: w.Name})
	}
	return []field{
		f.Choice("kind", "Kind", kinds),
		f.Choice("actor", "By", who),
		f.Date("day", "Written on"),
		f.Choice("site", "Of", []option{{Value: "", Words: v.site.Name}, {Value: "all", Words: "All your sites and the whole book"}}),
	}, nil
}

func (v *visit) entryLines(list []book.EntryLine) []entryLine {
	out := make([]entryLine, len(list))
	for i, e := range list {
		out[i] = entryLine{
			No: grouped(e.Seq), When: moment(e.At, v.site.Location, v.today()), Who: e.Actor, Kind: kindWords(e.Kind), Summary: e.Summary,
			URL: v.url("book", e.ID), Over: e.SupersededBy != "" || e.Withdrawn, Imported: e.Batch != "",
		}
	}
	return out
}

// entryURL leads to an entry of a kind, or is empty where the visitor may not open it. Own tells that
// it is about the visitor.
func (v *visit) entryURL(kind, id string, own bool) string {
	open := v.may(book.SeeBook) || kind == "record" && own
	open = open || v.may(book.SeeSite) && (kind == "record" || kind == "event" || kind == "fixture")
	if !open {
		return ""
	}
	return v.url("book", id)
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
	Late        string // what somebody was about to do when another was faster
	Here        entrySide
	Old, New    *entrySide
	Canonical   string
	ID          string
	BatchURL    string
	Rows        []entryLine // of an import: the first of what it brought
	RowsURL     string
	UndoURL     string
	CorrectURL  string
	WithdrawURL string
	Reasons     []option
	Form        *Form
	SubjectURL  string
	RemedyURL   string // of a failed record: the form of a remedy
	Hidden      bool   // it is kept for safety officers
}

var entrySheet = leafOf[entryLeaf]("entry")

// entryPage shows one entry with what it superseded and what superseded it.
func entryPage(v *visit) error {
	p, err := v.entryLeaf(v.param("id"), &Form{Values: url.Values{}})
	if err != nil {
		return err
	}
	return entrySheet.show(v, 200, p)
}

func (v *visit) entryLeaf(id string, f *Form) (*entryLeaf, error) {
	x, err := v.b.Entry(v.ctx(), v.actor, id)
	if err != nil {
		return nil, err
	}
	p := &entryLeaf{page: page{Title: kindWords(x.Kind), Section: secBook}, Head: x.Summary, Say: entrySay(x), Here: *v.side(x), ID: x.ID, Canonical: x.Canonical, Form: f}
	if x.Old != nil {
		p.Old = v.side(*x.Old)
	}
	if x.New != nil {
		p.New = v.side(*x.New)
	}
	if x.SubjectRef != nil {
		p.SubjectURL = v.subjectURL(*x.SubjectRef)
	}
	p.Hidden = x.Hidden
	if x.Failed && v.acts(book.KeepRemedies) {
		p.RemedyURL = with(v.url("remedy"), "record", x.ID)
	}
	if x.Batch != "" && v.may(book.SeeBook) {
		p.BatchURL = v.url("book", x.Batch)
	}
	if x.MayCorrect {
		p.WithdrawURL = v.url("withdraw", x.ID)
		p.Reasons = reasonOptions(x.NeedReason)
		if correctable(x.Kind) {
			p.CorrectURL = v.url("correct", x.ID)
		}
	}
	if x.Kind == "batch" {
		err = v.importRows(p, x)
	}
	return p, err
}

const rowsShown = 25

// importRows adds what an import brought, and how it is taken back.
func (v *visit) importRows(p *entryLeaf, x book.EntryView) error {
	list, err := v.b.Entries(v.ctx(), v.actor, book.EntryQuery{Batch: x.ID, Limit: rowsShown + 1})
	if err != nil {
		return err
	}
	if len(list) > rowsShown {
		list = list[:rowsShown]
		p.RowsURL = with(v.url("book"), "batch", x.ID)
	}
	p.Rows = v.entryLines(list)
	if v.may(book.ImportTables) && !x.Withdrawn {
		p.UndoURL = v.url("undo", x.ID)
	}
	return nil
}

func entrySay(x book.EntryView) string {
	switch {
	case x.Kind == "batch" && x.Withdrawn:
		return "The whole import was taken back, and nothing of it counts."
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
