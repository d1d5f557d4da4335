package web

import (
	"errors"
	"html/template"
	"net/url"
	"strconv"
	"strings"

	"lodebook/models/book"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// remedyLine is one remedy as a list shows it.
type remedyLine struct {
	Disc                        template.HTML
	Name, URL, About, What      string
	Owner, Grave                string
	State, When                 string
	Over, Mine, Closed, Waiting bool
}

// remedyDisc is the well of ink of a remedy: empty when it is overdue, full when it is closed.
func remedyDisc(x book.RemedyLine) template.HTML {
	switch {
	case x.State == book.RemedyClosed:
		return disc(standing.Met, 1)
	case x.Overdue:
		return disc(standing.Lapsed, 0)
	default:
		return disc(standing.Closing, 0.5)
	}
}

func (v *visit) remedyLine(x book.RemedyLine) remedyLine {
	l := remedyLine{
		Disc: remedyDisc(x), Name: "Remedy " + strconv.Itoa(x.Number), URL: v.url("remedies", strconv.Itoa(x.Number)), About: x.About, What: shortened(x.What, 140), Owner: x.OwnerName,
		Grave: strings.ToLower(x.Grave), Over: x.Overdue, Mine: x.Mine, Closed: x.State == book.RemedyClosed, Waiting: x.State == book.RemedyDone,
	}
	due := shortDay(x.Due, v.today())
	switch {
	case l.Closed:
		l.State, l.When = "closed", "done "+shortDayOr(x.DoneOn, v.today(), "")
	case l.Waiting:
		l.State, l.When = "done, not confirmed", "due "+due
	case x.Overdue:
		l.State, l.When = "overdue", "since "+due
	default:
		l.State, l.When = "open", due+", "+until(x.Due, v.today())
	}
	return l
}

type remediesLeaf struct {
	page
	Say       string
	Tabs      []spineLink
	Groups    []remedyGroup
	ExportURL string
	MakeURL   string
	Pager     pager
}

type remedyGroup struct {
	Name  string
	Lines []remedyLine
}

var remediesSheet = leafOf[remediesLeaf]("remedies")

// remediesPage lists remedies: overdue ones first, then those of the visitor, the others, and the closed ones.
func remediesPage(v *visit) error {
	all := v.query("all") != ""
	list, err := v.b.Remedies(v.ctx(), v.actor, v.site.Code, !all)
	if err != nil {
		return err
	}
	switch v.query("format") {
	case "csv":
		return v.csv("remedies", book.RemedyColumns, func(yield func([]string) bool) {
			for _, x := range list {
				if !yield(x.Cells(v.site.Code)) {
					return
				}
			}
		})
	case "json":
		out := make([]book.RemedyJSON, len(list))
		for i, x := range list {
			out[i] = x.JSON(v.site.Code)
		}
		v.c.JSON(200, out)
		return nil
	}
	here := v.url("remedies")
	p := &remediesLeaf{page: page{Title: "Remedies", Section: secRemedies}, ExportURL: with(here, "format", "csv", "all", v.query("all"))}
	p.Tabs = []spineLink{{Name: "Open", URL: here, Current: !all}, {Name: "All", URL: with(here, "all", "yes"), Current: all}}
	p.Say = remediesSay(list)
	list, p.Pager = paged(v, list)
	for _, x := range list {
		name := "Open"
		switch {
		case x.State == book.RemedyClosed:
			name = "Closed"
		case x.Overdue:
			name = "Overdue"
		case x.Mine:
			name = "Yours"
		}
		if n := len(p.Groups); n == 0 || p.Groups[n-1].Name != name {
			p.Groups = append(p.Groups, remedyGroup{Name: name})
		}
		g := &p.Groups[len(p.Groups)-1]
		g.Lines = append(g.Lines, v.remedyLine(x))
	}
	return remediesSheet.show(v, 200, p)
}

func remediesSay(list []book.RemedyLine) string {
	open, over, mine, waits := 0, 0, 0, 0
	for _, x := range list {
		if x.State == book.RemedyClosed {
			continue
		}
		open++
		if x.Overdue {
			over++
		}
		if x.Mine {
			mine++
		}
		if x.State == book.RemedyDone {
			waits++
		}
	}
	if open == 0 {
		return "No remedy is open. From a gap, a failed record or an incident one is made with a click."
	}
	s := upperFirst(count(open, "remedy is open", "remedies are open")) + ", none of them overdue."
	if over > 0 {
		s = upperFirst(count(open, "remedy is open", "remedies are open")) + ", " + number(over) + " of them overdue."
	}
	if waits > 0 {
		s += " " + upperFirst(count(waits, "is done and waits for a second person.", "are done and wait for a second person."))
	}
	if mine > 0 {
		s += " " + upperFirst(count(mine, "is yours.", "are yours."))
	}
	return s
}

// remedyStep is one entry in the history of a remedy.
type remedyStep struct {
	Words, URL, When, Who, By, Note string
	Over                            bool
}

type remedyLeaf struct {
	page
	Head, Say string
	What      string
	Facts     []faultLine
	AboutURL  string
	Hidden    bool
	History   []remedyStep
	Form      *Form
	DoneURL   string // the form of what is done; empty: not for this visitor
	DoneID    string
	Today     string
	CheckURL  string // the form of the second person
	DoneEntry string
	MayNot    string
	ChangeURL string
}

var remedySheet = leafOf[remedyLeaf]("remedy")

func remedyPage(v *visit) error { return v.showRemedy(&Form{Values: url.Values{}}) }

// showRemedy shows one remedy with its history, and what was wrong with a form on it.
func (v *visit) showRemedy(f *Form) error {
	x, err := v.b.Remedy(v.ctx(), v.actor, v.site.Code, v.number())
	if err != nil {
		return err
	}
	at := strconv.Itoa(x.Number)
	p := &remedyLeaf{page: page{Title: "Remedy " + at, Section: secRemedies}, Head: "Remedy " + at + ": " + x.About, What: x.What, Hidden: x.Hidden, Form: f, Today: v.today().String(), DoneEntry: x.DoneEntry}
	p.Say = v.remedySay(x)
	add := func(label, value string) {
		if value != "" {
			p.Facts = append(p.Facts, faultLine{label, value})
		}
	}
	add("Owner", x.OwnerName)
	add("Severity", x.Grave)
	add("Asked for", shortDay(x.Made, v.today()))
	add("Due", shortDay(x.Due, v.today()))
	add("Why that day", x.Because)
	if x.Confirm {
		add("Confirmed", "by a second person, who neither owns it nor did it")
	}
	p.AboutURL = v.remedyTarget(x.RemedyLine)
	if x.MayDo {
		id, err := v.formID(f)
		if err != nil {
			return err
		}
		p.DoneURL, p.DoneID = v.url("remedies", at, "done"), id.Value
		f.Default("day", v.today().String())
	}
	if x.MayConfirm {
		p.CheckURL = v.url("remedies", at, "check")
	}
	if x.DoneEntry != "" && v.may(book.ConfirmRemedies) {
		p.MayNot = x.MayNot
	}
	if x.MayChange {
		p.ChangeURL = v.url("remedies", at, "change")
	}
	for _, s := range x.History {
		l := remedyStep{Words: s.Words, URL: v.entryURL(s.Kind, s.Entry, false), When: moment(s.At, v.site.Location, v.today()), Who: s.Who, By: s.By, Note: s.Note, Over: s.Over}
		p.History = append(p.History, l)
	}
	return remedySheet.show(v, f.status(), p)
}

func (v *visit) remedySay(x book.RemedyView) string {
	who := x.OwnerName
	if x.Mine {
		who = "You"
	}
	switch {
	case x.State == book.RemedyClosed && x.Confirm:
		return "It is done and confirmed."
	case x.State == book.RemedyClosed:
		return "It is done."
	case x.State == book.RemedyDone:
		return "It is done, and waits for a second person to confirm it; due " + shortDay(x.Due, v.today()) + ", " + until(x.Due, v.today()) + "."
	case x.Overdue:
		return who + " owed it by " + shortDay(x.Due, v.today()) + ", " + until(x.Due, v.today()) + ". It is a gap until it is closed."
	default:
		return who + map[bool]string{true: " owe", false: " owes"}[x.Mine] + " it by " + shortDay(x.Due, v.today()) + ", " + until(x.Due, v.today()) + "."
	}
}

// remedyTarget leads to what a remedy is for, for who may open it.
func (v *visit) remedyTarget(x book.RemedyLine) string {
	switch {
	case x.Incident != 0 && v.may(book.SeeIncidents):
		return v.url("incidents", strconv.Itoa(x.Incident))
	case x.Record != "":
		return v.entryURL("record", x.Record, false)
	case x.Subject != nil && v.may(book.SeeSite):
		return v.subjectURL(*x.Subject)
	}
	return ""
}

// severities are the program's, each with the time that it leaves.
func (v *visit) severities() []option {
	var out []option
	for _, s := range v.site.Program.Severities {
		words := s.Name + ", within " + durationWords(s)
		if s.Confirm {
			words += ", confirmed"
		}
		out = append(out, option{Value: s.Code, Words: words})
	}
	return out
}

func durationWords(s program.Severity) string {
	if d := s.Due; d.Years+d.Months+d.Weeks == 0 {
		return count(d.Days, "day", "days")
	}
	return s.Due.String()
}

func (v *visit) remedyFields(f *Form) []field {
	return []field{
		f.Long("what", "What is to be done").Need(),
		f.Picks("severity", "Severity", v.severities()).Need(),
		f.Text("owner", "Who owns it").Need().Help("The code or the name of a person, or the name of an account"),
		f.Date("due", "Due").Help("Empty: as the severity says"),
		f.Text("because", "Why another day").Help("Only where you set one"),
	}
}

func remedyOf(f *Form) book.RemedyForm {
	return book.RemedyForm{
		ID: f.Get("id"), Incident: f.Get("incident"), Record: f.Get("record"), Item: f.Get("item"), Subject: f.Get("subject"), Severity: f.Get("severity"), Owner: f.Get("owner"),
		Due: f.Get("due"), Because: f.Get("because"), What: f.Get("what"),
	}
}

func (v *visit) showMakeRemedy(f *Form) error {
	id, err := v.formID(f)
	if err != nil {
		return err
	}
	p := &formLeaf{page: page{Title: "Make a remedy", Section: secRemedies}, Head: "Make a remedy", Action: v.url("remedy"), Form: f, Button: "Make it", Hidden: []hidden{id}}
	p.Say = "What is to be done, by whom and by when. It is a gap from the day after it was due until it is closed."
	for _, name := range []string{"incident", "record", "item", "subject"} {
		if f.Get(name) != "" {
			p.Hidden = append(p.Hidden, hidden{name, f.Get(name)})
		}
	}
	switch {
	case f.Get("incident") != "":
		p.Head += " for incident " + f.Get("incident")
		p.Cautions = []string{"Only safety officers and the owner read what you write. Name no patient, and nothing medical."}
	case f.Get("record") != "":
		p.Head += " for a failed record"
	case f.Get("item") != "":
		p.Head += ": " + v.itemTitle(f.Get("item")) + ", " + v.subjectName(f.Get("subject"))
	default:
		p.Fields = []field{
			f.Choice("item", "What falls short", v.itemsFor("")).Need(),
			f.Text("subject", "Of whom or what").Need().Help("A code, or kind:code, as in fixture:V1"),
		}
	}
	for _, name := range []string{"for", "incident", "record"} {
		if words := f.Fault(name); words != "" {
			p.Cautions = append(p.Cautions, words)
		}
	}
	p.Fields = append(p.Fields, v.remedyFields(f)...)
	return v.showForm(p)
}

func (v *visit) itemTitle(code string) string {
	if i, ok := v.site.Program.Item(code); ok {
		return orCode(i.Title, code)
	}
	return code
}

func makeRemedyPage(v *visit) error { return v.showMakeRemedy(v.asked()) }

func makeRemedy(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.KeepRemedy(v.ctx(), v.actor, v.site.Code, remedyOf(f))
	if f.Take(err) {
		return v.showMakeRemedy(f)
	}
	if err != nil {
		return err
	}
	to := v.url("remedies")
	if n := f.Get("incident"); n != "" {
		to = v.url("incidents", n)
	}
	return v.kept(to, "Kept: the remedy.", r.ID())
}

func (v *visit) changeRemedyForm(f *Form) *formLeaf {
	at := v.param("number")
	p := &formLeaf{page: page{Title: "Change a remedy", Section: secRemedies}, Head: "Change remedy " + at, Action: v.url("remedies", at, "change"), Form: f, Button: "Keep the change"}
	p.Say = "Its number, what it is for and what became of it stay. Another due day than the severity's needs a reason, and nobody gives themselves more time."
	p.Hidden = []hidden{{"supersedes", f.Get("supersedes")}}
	p.Fields = append(v.remedyFields(f), f.Choice("reason", "Why it is changed", reasonOptions(true)).Need(), f.Text("reason_text", "More, in a sentence"))
	return p
}

func changeRemedyPage(v *visit) error {
	x, err := v.b.Remedy(v.ctx(), v.actor, v.site.Code, v.number())
	if err != nil {
		return err
	}
	if !x.MayChange {
		return &book.Denied{Action: book.KeepRemedies, Role: v.actor.Role, Why: "this remedy is not changed from here: it is closed, or it is your own"}
	}
	f := &Form{Values: url.Values{}}
	f.Set("what", x.What).Set("severity", x.Severity).Set("owner", x.Owner).Set("because", x.Because).Set("supersedes", x.Entry).Set("reason", "other")
	if x.Because != "" {
		f.Set("due", x.Due.String())
	}
	return v.showForm(v.changeRemedyForm(f))
}

func changeRemedy(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	fix := book.Correction{Supersedes: f.Get("supersedes"), Reason: f.Get("reason"), ReasonText: f.Get("reason_text")}
	r, err := v.b.ChangeRemedy(v.ctx(), v.actor, v.site.Code, v.number(), remedyOf(f), fix)
	var stale *book.Stale
	switch {
	case errors.As(err, &stale):
		return v.tooLate(stale, f, v.changeRemedyForm(f))
	case f.Take(err):
		return v.showForm(v.changeRemedyForm(f))
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("remedies", v.param("number")), "Kept: the change.", r.ID())
}

func remedyDone(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.RemedyDone(v.ctx(), v.actor, v.site.Code, v.number(), book.RemedyDoneForm{ID: f.Get("id"), Day: f.Get("day"), By: f.Get("by"), Note: f.Get("note")})
	if f.Take(err) {
		return v.showRemedy(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("remedies", v.param("number")), "Kept: it is done.", r.ID())
}

func checkRemedy(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	refused := f.Get("word") == "refused"
	r, err := v.b.CheckRemedy(v.ctx(), v.actor, v.site.Code, v.number(), book.RemedyCheckForm{Done: f.Get("done"), Refused: refused, Note: f.Get("note")})
	if f.Take(err) {
		return v.showRemedy(f)
	}
	if err != nil {
		return err
	}
	words := "You confirmed it."
	if refused {
		words = "Sent back. It is open again."
	}
	return v.kept(v.url("remedies", v.param("number")), words, r.ID())
}

// overdueRow tells whether a row is of something overdue that no item asks for.
func overdueRow(r book.Row) bool {
	return r.Subject.Asks == book.AsksRemedy || r.Subject.Asks == book.AsksReport
}

// gapRemedy leads from a gap to its open remedy, or to the form of a new one.
func (v *visit) gapRemedy(r book.Row, open map[string]int) act {
	if overdueRow(r) {
		return act{}
	}
	if n, ok := open[r.Item+" "+subjectKey(r.Subject)]; ok {
		return act{"Remedy " + strconv.Itoa(n), v.url("remedies", strconv.Itoa(n))}
	}
	if !v.acts(book.KeepRemedies) {
		return act{}
	}
	return act{"Remedy", with(v.url("remedy"), "item", r.Item, "subject", subjectKey(r.Subject))}
}
