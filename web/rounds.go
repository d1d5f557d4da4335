package web

import (
	"html/template"
	"slices"
	"strings"

	"lodebook/models/book"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// stop is one fixture of a round.
type stop struct {
	Name, Code, Kind, URL string
	Rows                  []rowLine
}

type roundZone struct {
	Zone    string
	Devices bool
	Stops   []stop
}

type roundsLeaf struct {
	page
	Say      string
	Zones    []roundZone
	Later    []rowLine
	Print    string
	Fixtures string
	SeeAll   bool
	When     *asOf
}

var roundsSheet = leafOf[roundsLeaf]("rounds")

// roundsPage lists what there is to look at, zone by zone.
func roundsPage(v *visit) error {
	p, err := v.round()
	if err != nil {
		return err
	}
	return roundsSheet.show(v, 200, p)
}

const laterShown = 12

func (v *visit) round() (*roundsLeaf, error) {
	x, err := v.b.Rounds(v.ctx(), v.actor, v.site.Code, v.on)
	if err != nil {
		return nil, err
	}
	p := &roundsLeaf{page: page{Title: "Rounds", Section: secRounds, AsOf: v.asOf()}, Print: v.url("round-sheet"), Fixtures: v.url("fixtures"), SeeAll: v.may(book.SeeSite)}
	p.When = p.AsOf
	for _, s := range x.Due {
		st := stop{Name: s.Fixture.Name, Code: s.Fixture.Code, Kind: s.Fixture.KindName, URL: v.url("fixtures", s.Fixture.Code), Rows: v.rowLines(s.Rows)}
		if !p.SeeAll {
			st.URL = ""
		}
		if n := len(p.Zones); n == 0 || p.Zones[n-1].Zone != s.Fixture.Zone {
			p.Zones = append(p.Zones, roundZone{Zone: s.Fixture.Zone, Devices: s.Devices})
		}
		z := &p.Zones[len(p.Zones)-1]
		z.Stops = append(z.Stops, st)
	}
	for _, r := range x.Later {
		if r.Due != nil && len(p.Later) < laterShown {
			p.Later = append(p.Later, v.rowLine(r))
		}
	}
	p.Say = roundSay(x)
	return p, nil
}

func roundSay(x book.Round) string {
	gaps, low := 0, 0
	for _, s := range x.Due {
		for _, r := range s.Rows {
			if r.Word.IsGap() {
				gaps++
			} else {
				low++
			}
		}
	}
	if len(x.Due) == 0 {
		return "Nothing is due on any fixture. The next ones are below."
	}
	s := upperFirst(count(len(x.Due), "fixture wants", "fixtures want")) + " looking at: "
	return s + count(gaps, "thing has", "things have") + " run out or failed, " + count(low, "is", "are") + " due soon."
}

// roundSheetLeaf is the round on paper, with boxes.
type roundSheetLeaf struct {
	page
	Day   string
	Zones []paperZone
	Back  string
}

type paperZone struct {
	Zone    string
	Devices bool
	Stops   []paperStop
}

type paperStop struct {
	Name, Code string
	Sheets     []paperSheet
}

type paperSheet struct {
	Title    string
	Cautions []string
	Fields   []paperField
}

type paperField struct{ Label, Limits, Box string }

var roundSheetSheet = leafOf[roundSheetLeaf]("round-sheet")

// roundSheetPage is for zones into which no device goes.
func roundSheetPage(v *visit) error {
	x, err := v.b.Rounds(v.ctx(), v.actor, v.site.Code, v.on)
	if err != nil {
		return err
	}
	p := &roundSheetLeaf{page: page{Title: "Round on paper", Section: secRounds}, Day: longDay(v.day(), v.today()), Back: v.url("rounds")}
	for _, s := range x.Due {
		ps := paperStop{Name: s.Fixture.Name, Code: s.Fixture.Code}
		for _, r := range s.Rows {
			sheet := v.paperSheet(r)
			if !slices.ContainsFunc(ps.Sheets, func(o paperSheet) bool { return o.Title == sheet.Title }) {
				ps.Sheets = append(ps.Sheets, sheet)
			}
		}
		if n := len(p.Zones); n == 0 || p.Zones[n-1].Zone != s.Fixture.Zone {
			p.Zones = append(p.Zones, paperZone{Zone: s.Fixture.Zone, Devices: s.Devices})
		}
		z := &p.Zones[len(p.Zones)-1]
		z.Stops = append(z.Stops, ps)
	}
	return roundSheetSheet.show(v, 200, p)
}

func (v *visit) paperSheet(r book.Row) paperSheet {
	out := paperSheet{Title: r.Title}
	for _, what := range r.Records {
		sh, ok := v.site.Program.SheetFor(what)
		if !ok {
			continue
		}
		out.Title, out.Cautions = sh.Title, sh.Cautions
		for _, f := range sh.Fields {
			box := strings.Repeat("_", 12)
			switch f.Type {
			case program.FieldYesNo:
				box = "☐ yes  ☐ no"
			case program.FieldChoice:
				box = "☐ " + strings.Join(f.Choices, "  ☐ ")
			case program.FieldText:
				box = strings.Repeat("_", 30)
			}
			if f.Unit != "" {
				box += " " + f.Unit
			}
			out.Fields = append(out.Fields, paperField{f.Label, limitWords(f), box})
		}
		return out
	}
	return out
}

// limitWords says what a field asks, as it stands under it.
func limitWords(f program.Field) string {
	var parts []string
	unit := strings.TrimSuffix(" "+f.Unit, " ")
	add := func(words string, n *float64) {
		if n != nil {
			parts = append(parts, words+" "+trimNumber(*n)+unit)
		}
	}
	add("at least", f.Min)
	add("at most", f.Max)
	add("a remark below", f.WarnBelow)
	add("a remark above", f.WarnAbove)
	if f.Help != "" {
		parts = append(parts, f.Help)
	}
	return strings.Join(parts, "; ")
}

type sheetLeaf struct {
	page
	Head, Say string
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
	Script    string
}

var sheetSheet = leafOf[sheetLeaf]("sheet")

func sheetForm(v *visit, f *Form) (*sheetLeaf, error) {
	f.Default("on", v.today().String())
	if f.Get("id") == "" {
		id, err := v.b.FreshID()
		if err != nil {
			return nil, err
		}
		f.Set("id", id)
	}
	sh, ok := v.site.Program.SheetFor(f.Get("record"))
	if !ok {
		return nil, &book.NotFound{What: "sheet", Code: f.Get("record")}
	}
	head, err := v.b.SheetHead(v.ctx(), v.actor, v.site.Code, f.Get("fixture"), f.Get("record"))
	if err != nil {
		return nil, err
	}
	p := &sheetLeaf{page: page{Title: sh.Title, Section: secRounds}, Head: head.Name, Action: v.url("sheet"), Form: f, Cautions: sh.Cautions, NoDevice: !head.Devices, PrintURL: v.url("round-sheet")}
	p.Say = sh.Title
	if head.Last != nil {
		p.Say += " · last looked at " + shortDay(*head.Last, v.today())
	} else {
		p.Say += " · never looked at"
	}
	p.Hidden = []hidden{{"id", f.Get("id")}, {"record", f.Get("record")}, {"fixture", f.Get("fixture")}}
	for _, x := range sh.Fields {
		p.Fields = append(p.Fields, sheetField(f, x))
	}
	p.Fields = append(p.Fields, f.Date("on", "Looked at on").Need().UpTo(v.today().String()), f.Text("note", "Note"))
	if old := f.Get("supersedes"); old != "" {
		p.Hidden = append(p.Hidden, hidden{"supersedes", old})
		p.Fields = append(p.Fields, f.Choice("reason", "Why it is corrected", reasonOptions(false)), f.Text("reason_text", "More, in a sentence"))
	}
	return p, nil
}

// sheetField is one line of a sheet, large enough for a thumb.
func sheetField(f *Form, x program.Field) field {
	name := "v-" + x.Code
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
	status := 200
	if f.Take(err) {
		status = 422
		for _, x := range sh.Fields {
			f.Rename(x.Code, "v-"+x.Code)
		}
	} else if err != nil {
		return err
	}
	p, err := sheetForm(v, f)
	if err != nil {
		return err
	}
	if status == 200 {
		p.Judged = true
		p.Reasons, p.OnFail = verdict.Reasons, verdict.OnFail
		p.Word, p.Verdict = standing.Met, "passes"
		switch {
		case verdict.Result == book.Fail:
			p.Word, p.Verdict = standing.Failed, "fails"
		case verdict.Remark:
			p.Verdict = "passes, with a remark"
		}
		p.Disc = disc(p.Word, 1)
		p.Hidden = append(p.Hidden, hidden{"seen", seenAs(verdict)})
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
