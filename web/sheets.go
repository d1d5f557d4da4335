package web

import (
	"errors"
	"html/template"
	"net/http"
	"slices"
	"strings"

	"lodebook/models/book"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// sheetLeaf is a sheet to fill in: first what it asks, then what it comes to, then it is kept.
type sheetLeaf struct {
	page
	Head, Say string
	Zone      string
	Kind      string // inspection or check
	Action    string
	Form      *Form
	Fields    []field
	Hidden    []hidden
	Cautions  []string
	NoDevice  bool
	PrintURL  string
	Judged    bool
	Disc      template.HTML
	Verdict   string
	Word      standing.Word
	Reasons   []string
	OnFail    string
	Out       string     // what keeping it takes out of service
	Seen      string     // the verdict as the form carries it
	Both      *bothSides // of a correction that came too late
}

var sheetSheet = leafOf[sheetLeaf]("sheet")

func sheetForm(v *visit, f *Form) (*sheetLeaf, error) {
	f.Default("on", v.today().String())
	id, err := v.formID(f)
	if err != nil {
		return nil, err
	}
	sh, ok := v.site.Program.SheetFor(f.Get("record"))
	if !ok {
		return nil, &book.NotFound{What: "sheet", Code: f.Get("record")}
	}
	head, err := v.b.SheetHead(v.ctx(), v.actor, v.site.Code, f.Get("fixture"), f.Get("record"))
	if err != nil {
		return nil, err
	}
	p := &sheetLeaf{page: page{Title: sh.Title, Section: secRounds}, Head: head.Name, Zone: head.Zone, Action: v.url("sheet"), Form: f, Cautions: sh.Cautions, NoDevice: !head.Devices}
	p.PrintURL = with(v.url("round-sheet"), "record", f.Get("record"), "fixture", f.Get("fixture"))
	p.Kind, _, _ = strings.Cut(f.Get("record"), "/")
	p.Say = sh.Title
	if head.Last != nil {
		p.Say += " · last looked at " + shortDay(*head.Last, v.today())
	} else {
		p.Say += " · never looked at"
	}
	p.Hidden = []hidden{id, {"record", f.Get("record")}, {"fixture", f.Get("fixture")}}
	text := false
	for _, x := range sh.Fields {
		p.Fields = append(p.Fields, sheetField(f, x))
		text = text || x.Type == program.FieldText
	}
	p.Fields = append(p.Fields, f.Date("on", "Looked at on").Need().UpTo(v.today().String()))
	if !text || f.Get("note") != "" { // one field for remarks is enough
		p.Fields = append(p.Fields, f.Text("note", "Note"))
	}
	if old := f.Get("supersedes"); old != "" {
		p.Hidden = append(p.Hidden, hidden{"supersedes", old})
		p.Fields = append(p.Fields, f.Choice("reason", "Why it is corrected", reasonOptions(false)), f.Text("reason_text", "More, in a sentence"))
	}
	return p, nil
}

// sheetField is one line of a sheet, large enough for a thumb.
func sheetField(f *Form, x program.Field) field {
	name := "v-" + x.Code
	x.Label = orCode(x.Label, upperFirst(spaced(x.Code)))
	var out field
	switch x.Type {
	case program.FieldYesNo:
		bad := ""
		if x.Must != nil {
			bad = map[bool]string{true: "no", false: "yes"}[*x.Must]
		}
		out = f.YesNo(name, x.Label, bad).Big()
	case program.FieldChoice:
		var options []option
		for _, c := range x.Choices {
			options = append(options, option{Value: c, Words: upperFirst(c), Bad: slices.Contains(x.FailOn, c)})
		}
		out = f.Picks(name, x.Label, options).Big()
	case program.FieldNumber:
		out = f.Number(name, x.Label, x.Unit).Big()
	case program.FieldDay:
		out = f.Date(name, x.Label)
	default:
		out = f.Text(name, x.Label)
	}
	if x.Required {
		out = out.Need()
	}
	return out.Help(limitWords(x))
}

func sheetPage(v *visit) error {
	p, err := sheetForm(v, v.asked())
	if err != nil {
		return err
	}
	return sheetSheet.show(v, 200, p)
}

// fillSheet judges first and shows what it comes to; with "keep" it writes.
func fillSheet(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	form := book.SheetForm{ID: f.Get("id"), Record: f.Get("record"), Fixture: f.Get("fixture"), On: f.Get("on"), Note: f.Get("note"), Values: map[string]string{}}
	sh, ok := v.site.Program.SheetFor(form.Record)
	if !ok {
		return &book.NotFound{What: "sheet", Code: form.Record}
	}
	for _, x := range sh.Fields {
		form.Values[x.Code] = f.Get("v-" + x.Code)
	}
	verdict, err := v.b.JudgeSheet(v.ctx(), v.actor, v.site.Code, form)
	if err == nil && f.Get("keep") != "" && f.Get("seen") == seenAs(verdict) {
		return v.keepSheet(f, form, sh)
	}
	return v.judged(f, sh, verdict, err)
}

// seenAs is the verdict as the form carries it: only what was shown is kept, so a value that was
// changed after it is judged again first.
func seenAs(v book.Verdict) string { return v.Result + "|" + strings.Join(v.Reasons, "|") }

// judged shows the form again with what it comes to, or with its faults.
func (v *visit) judged(f *Form, sh *program.Sheet, verdict book.Verdict, err error) error {
	status := http.StatusOK
	var both *bothSides
	var stale *book.Stale
	switch {
	case errors.As(err, &stale):
		status = http.StatusConflict
		var now book.EntryView
		if both, now, err = v.late(stale); err != nil {
			return err
		}
		f.Set("supersedes", now.ID)
	case f.Take(err):
		status = http.StatusUnprocessableEntity
		for _, x := range sh.Fields {
			f.Rename(x.Code, "v-"+x.Code)
		}
	case err != nil:
		return err
	}
	p, err := sheetForm(v, f)
	if err != nil {
		return err
	}
	p.Both = both
	if status == http.StatusOK {
		p.Judged, p.Seen = true, seenAs(verdict)
		p.Reasons, p.OnFail = verdict.Reasons, verdict.OnFail
		if verdict.Result == book.Fail && sh.OnFailOut {
			p.Out = outWords(sh, p.Zone)
		}
		p.Word, p.Verdict = standing.Met, "passes"
		switch {
		case verdict.Result == book.Fail:
			p.Word, p.Verdict = standing.Failed, "fails"
		case verdict.Remark:
			p.Verdict = "passes, with a remark"
		}
		p.Disc = disc(p.Word, 1)
	}
	return sheetSheet.show(v, status, p)
}

func (v *visit) keepSheet(f *Form, form book.SheetForm, sh *program.Sheet) error {
	r, verdict, err := v.b.FillSheet(v.ctx(), v.actor, v.site.Code, form, correctionOf(f, f.Get("supersedes")))
	if err != nil {
		return v.judged(f, sh, verdict, err)
	}
	text := "Kept: " + sh.Title + ", passed."
	if verdict.Result == book.Fail {
		text = "Kept: " + sh.Title + ", failed. " + verdict.OnFail
	}
	return v.kept(v.url("rounds"), strings.TrimSpace(text), r.ID())
}
