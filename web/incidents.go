package web

import (
	"bytes"
	"errors"
	"net/http"
	"net/url"
	"strconv"
	"strings"

	"lodebook/models/book"
	"lodebook/models/program"
	"lodebook/models/table"
)

// incidentCautions stand over every form of an incident.
var incidentCautions = []string{"Name no patient: no name, no date of birth, no number of a record, and nothing medical. What happened to the room, the things and the work is enough."}

// incidentFields are what an incident is made of.
func (v *visit) incidentFields(f *Form) []field {
	p := v.site.Program
	zones := []option{{Value: "", Words: "No zone, or not known"}}
	for _, z := range p.Zones {
		zones = append(zones, option{Value: z.Code, Words: zoneName(z)})
	}
	kinds := codesAsOptions("Choose", p.Incidents, func(k program.IncidentKind) string { return k.Code }, func(k program.IncidentKind) string { return k.Name })
	var grave []option
	for _, s := range p.Severities {
		grave = append(grave, option{Value: s.Code, Words: s.Name})
	}
	out := []field{
		f.Choice("incident", "What kind", kinds).Need(),
		f.Text("at", "When").Need().Help("By the clocks here, as near as you know it"),
		f.Choice("zone", "Where", zones),
		f.Long("what", "What happened").Need(),
		f.Picks("severity", "How bad it was, or could have been", grave).Need(),
		f.Long("action", "What was done at once"),
		f.Text("who", "Who was involved").Help("Staff and visitors, in a word; no patients"),
		f.Text("people", "Their codes, where they are on record").Help("With blanks between; erasing one of them erases these texts too"),
	}
	for _, name := range []string{"what", "who", "action"} {
		if strings.Contains(f.Fault(name), "date of birth") || f.Get("sure") != "" {
			return append(out, f.Ticks("sure", "The numbers in the text", []tick{{Value: "yes", Name: "I have looked: they tell of no patient"}}))
		}
	}
	return out
}

func incidentOf(f *Form) book.IncidentForm {
	return book.IncidentForm{
		ID: f.Get("id"), Kind: f.Get("incident"), Zone: f.Get("zone"), At: f.Get("at"), Severity: f.Get("severity"), What: f.Get("what"), Who: f.Get("who"),
		Action: f.Get("action"), By: f.Get("by"), People: strings.Fields(f.Get("people")), Anonymous: f.Get("name") == "no", Sure: f.Get("sure") == "yes",
	}
}

func (v *visit) showIncidentForm(f *Form) error {
	now, err := v.b.IncidentNow(v.ctx(), v.site.Code)
	if err != nil {
		return err
	}
	f.Default("at", now).Default("name", "yes")
	id, err := v.formID(f)
	if err != nil {
		return err
	}
	p := &formLeaf{page: page{Title: "Report an incident", Section: secIncidents}, Head: "Report an incident or a near miss", Action: v.url("incident"), Form: f, Button: "Report it", Cautions: incidentCautions, Hidden: []hidden{id}}
	p.Say = "The safety officers read it, and nobody else does. Nobody is blamed for telling."
	p.Fields = append(v.incidentFields(f), f.Picks("name", "In your name?", []option{{Value: "yes", Words: "In my name"}, {Value: "no", Words: "Without a name"}}).Need().
		Help("Without a name the book keeps what you write here and when it was written, and neither your account nor anything that leads to it. Sign-ins of the day are kept as for everybody, so it can be guessed where few were signed in. You cannot take it back or see it again."))
	p.After = "Write again if you learn more. In your name, you will see on this page that it was received."
	return v.showForm(p)
}

func reportIncidentPage(v *visit) error { return v.showIncidentForm(v.asked()) }

func reportIncident(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	_, err = v.b.ReportIncident(v.ctx(), v.actor, v.site.Code, incidentOf(f))
	if f.Take(err) {
		return v.showIncidentForm(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("incidents"), "Received. The safety officers will read it.", "")
}

// incidentLine is one incident in the officers' list.
type incidentLine struct {
	Name, URL, When, Kind, Zone, Grave, What, Reported string
	Waits                                              []string // reports that are due
	Remedies                                           string
}

type incidentsLeaf struct {
	page
	Say       string
	ReportURL string
	ExportURL string // empty: not for this visitor
	Lines     []incidentLine
	Own       []incidentLine
	Pager     pager
}

var incidentsSheet = leafOf[incidentsLeaf]("incidents")

// incidentsPage lists the incidents to a safety officer; everybody else sees that theirs were received.
func incidentsPage(v *visit) error {
	p := &incidentsLeaf{page: page{Title: "Incidents", Section: secIncidents}, ReportURL: v.url("incident")}
	own, err := v.b.OwnIncidents(v.ctx(), v.actor, v.site.Code)
	if err != nil {
		return err
	}
	if v.may(book.SeeIncidents) {
		return v.allIncidents(p)
	}
	for _, x := range own {
		p.Own = append(p.Own, incidentLine{Name: "Incident " + strconv.Itoa(x.Number), When: moment(x.At, v.site.Location, v.today())})
	}
	p.Say = "Anybody may report an incident or a near miss. Only the safety officers read what is reported."
	if len(own) > 0 {
		p.Say += " " + upperFirst(count(len(own), "report of yours was received.", "reports of yours were received."))
	}
	return incidentsSheet.show(v, 200, p)
}

func (v *visit) allIncidents(p *incidentsLeaf) error {
	list, err := v.b.Incidents(v.ctx(), v.actor, v.site.Code)
	if err != nil {
		return err
	}
	switch v.query("format") {
	case "csv":
		return v.incidentsCSV(list)
	case "json":
		out := make([]book.IncidentJSON, len(list))
		for i, x := range list {
			out[i] = x.JSON(v.site.Code)
		}
		v.c.JSON(200, out)
		return nil
	}
	due, open := 0, 0
	for _, x := range list {
		for _, r := range x.Reports {
			if r.Done == nil {
				due++
			}
		}
		for _, r := range x.Remedies {
			if r.State != book.RemedyClosed {
				open++
			}
		}
	}
	p.Say = "Nothing has been reported yet."
	if len(list) > 0 {
		p.Say = upperFirst(count(len(list), "incident is", "incidents are")) + " on record: " + count(due, "report to an outside body is", "reports to outside bodies are") + " still to be made, " + count(open, "remedy is", "remedies are") + " open. Only safety officers see this page."
	}
	p.ExportURL = with(v.url("incidents"), "format", "csv")
	list, p.Pager = paged(v, list)
	for _, x := range list {
		p.Lines = append(p.Lines, v.incidentLine(x))
	}
	return incidentsSheet.show(v, 200, p)
}

func (v *visit) incidentLine(x book.IncidentLine) incidentLine {
	l := incidentLine{
		Name: "Incident " + strconv.Itoa(x.Number), URL: v.url("incidents", strconv.Itoa(x.Number)), When: moment(x.At, v.site.Location, v.today()), Kind: x.KindName,
		Grave: x.Grave, What: shortened(x.What, 140), Reported: x.Reporter,
	}
	if x.Zone != "" {
		l.Zone = "Zone " + x.Zone
	}
	for _, r := range x.Reports {
		if r.Done == nil {
			l.Waits = append(l.Waits, r.To+": "+leftWords(r))
		}
	}
	open := 0
	for _, r := range x.Remedies {
		if r.State != book.RemedyClosed {
			open++
		}
	}
	switch {
	case open > 0:
		l.Remedies = count(open, "remedy open", "remedies open")
	case len(x.Remedies) > 0:
		l.Remedies = "remedies closed"
	default:
		l.Remedies = "no remedy"
	}
	return l
}

// leftWords counts down to a report's due day, in the days that the rule counts.
func leftWords(r book.ReportDue) string {
	kind := "day"
	if r.Working {
		kind = "working day"
	}
	switch {
	case r.Left < 0:
		return count(-r.Left, kind, kind+"s") + " overdue"
	case r.Left == 0:
		return "due today"
	default:
		return count(r.Left, kind, kind+"s") + " left"
	}
}

func (v *visit) incidentsCSV(list []book.IncidentLine) error {
	rows := func(yield func([]string) bool) {
		for _, x := range list {
			if !yield(x.Cells(v.site.Code)) {
				return
			}
		}
	}
	return v.csv("incidents", book.IncidentColumns, rows)
}

// csv sends a table for a spreadsheet, harmless to open.
func (v *visit) csv(name string, header []string, rows func(func([]string) bool)) error {
	var buf bytes.Buffer
	if err := table.Write(&buf, header, rows); err != nil {
		return err
	}
	v.c.Header("Content-Disposition", `attachment; filename="`+name+"-"+strings.Map(plainName, v.site.Code)+"-"+v.today().String()+`.csv"`)
	v.c.Data(200, "text/csv; charset=utf-8", buf.Bytes())
	return nil
}

// reportLine is one report to an outside body on the page of an incident.
type reportLine struct {
	Code, To, Due, Left, Done string
	Late                      bool
}

type incidentLeaf struct {
	page
	Head, Say   string
	What        string
	Facts       []faultLine
	Reports     []reportLine
	ReportURL   string
	Today       string
	Remedies    []remedyLine
	RemedyURL   string
	CorrectURL  string
	EntryURL    string
	WithdrawURL string
	Reasons     []option
	Form        *Form
}

var incidentSheet = leafOf[incidentLeaf]("incident")

func (v *visit) number() int {
	n, err := strconv.Atoi(v.param("number"))
	if err != nil {
		return 0
	}
	return n
}

func incidentPage(v *visit) error { return v.showIncident(&Form{Values: url.Values{}}) }

// showIncident shows one incident, with what was wrong with a form on it.
func (v *visit) showIncident(f *Form) error {
	x, err := v.b.Incident(v.ctx(), v.actor, v.site.Code, v.number())
	if err != nil {
		return err
	}
	at := strconv.Itoa(x.Number)
	p := &incidentLeaf{
		page: page{Title: "Incident " + at, Section: secIncidents}, Head: "Incident " + at + ": " + strings.ToLower(x.KindName), What: x.What, Form: f, Today: v.today().String(),
		ReportURL: v.url("incidents", at, "report"), RemedyURL: with(v.url("remedy"), "incident", at, "severity", x.Severity), CorrectURL: v.url("incidents", at, "correct"),
		WithdrawURL: v.url("withdraw", x.Entry), EntryURL: v.url("book", x.Entry), Reasons: reasonOptions(true),
	}
	add := func(label, value string) {
		if value != "" {
			p.Facts = append(p.Facts, faultLine{label, value})
		}
	}
	add("Happened", moment(x.At, v.site.Location, v.today()))
	if x.Zone != "" {
		add("Where", "Zone "+x.Zone)
	}
	add("Severity", x.Grave)
	add("Done at once", x.Action)
	add("Who was involved", x.Who)
	add("On record as involved", strings.Join(x.PeopleNames, ", "))
	add("Reported by", x.Reporter)
	waits := 0
	for _, r := range x.Reports {
		l := reportLine{Code: r.Code, To: r.To, Due: longDay(r.Due, v.today()), Left: leftWords(r), Late: r.Left < 0}
		if r.Done != nil {
			l.Done = shortDay(*r.Done, v.today())
		} else {
			waits++
		}
		p.Reports = append(p.Reports, l)
	}
	open := 0
	for _, r := range x.Remedies {
		if r.State != book.RemedyClosed {
			open++
		}
		p.Remedies = append(p.Remedies, v.remedyLine(r))
	}
	p.Say = upperFirst(count(waits, "report to an outside body is", "reports to outside bodies are")) + " still to be made, and " + count(open, "remedy is", "remedies are") + " open."
	return incidentSheet.show(v, p.Form.status(), p)
}

// status is how a page with this form is answered.
func (f *Form) status() int {
	if len(f.Faults) > 0 {
		return 422
	}
	return 200
}

func markReported(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.MarkReported(v.ctx(), v.actor, v.site.Code, v.number(), book.IncidentReportForm{ID: f.Get("id"), Report: f.Get("report"), Day: f.Get("day"), Reference: f.Get("reference")})
	if f.Take(err) {
		return v.showIncident(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("incidents", v.param("number")), "Kept: the report was made.", r.ID())
}

func (v *visit) correctIncidentForm(f *Form) *formLeaf {
	at := v.param("number")
	p := &formLeaf{page: page{Title: "Correct an incident", Section: secIncidents}, Head: "Correct incident " + at, Action: v.url("incidents", at, "correct"), Form: f, Button: "Keep the correction", Cautions: incidentCautions}
	p.Say = "What you write takes the place of what stands there; both stay readable to safety officers."
	p.Hidden = []hidden{{"supersedes", f.Get("supersedes")}}
	p.Fields = append(v.incidentFields(f), f.Choice("reason", "Why it is corrected", reasonOptions(true)).Need(), f.Text("reason_text", "More, in a sentence"))
	return p
}

func correctIncidentPage(v *visit) error {
	x, err := v.b.Incident(v.ctx(), v.actor, v.site.Code, v.number())
	if err != nil {
		return err
	}
	f := &Form{Values: url.Values{}}
	f.Set("incident", x.Kind).Set("zone", x.Zone).Set("at", book.ClockWords(x.At, v.site.Location)).Set("severity", x.Severity).Set("what", x.What).Set("who", x.Who)
	f.Set("action", x.Action).Set("people", strings.Join(x.People, " ")).Set("supersedes", x.Entry)
	return v.showForm(v.correctIncidentForm(f))
}

func correctIncident(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	fix := book.Correction{Supersedes: f.Get("supersedes"), Reason: f.Get("reason"), ReasonText: f.Get("reason_text")}
	r, err := v.b.CorrectIncident(v.ctx(), v.actor, v.site.Code, v.number(), incidentOf(f), fix)
	var stale *book.Stale
	switch {
	case errors.As(err, &stale):
		return v.tooLate(stale, f, v.correctIncidentForm(f))
	case f.Take(err):
		return v.showForm(v.correctIncidentForm(f))
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("incidents", v.param("number")), "Kept: the correction.", r.ID())
}

// reportURL leads from the code of an overdue report to its incident, for a safety officer.
func (v *visit) reportURL(code string) string {
	if !v.may(book.SeeIncidents) {
		return ""
	}
	number, _, _ := strings.Cut(code, ".")
	return v.url("incidents", number)
}

// tooLate shows a form again whose entry somebody else has changed meanwhile: what was typed, what was opened and
// what stands now. Sent again it is about what stands now.
func (v *visit) tooLate(stale *book.Stale, f *Form, p *formLeaf) error {
	both, now, err := v.late(stale)
	if err != nil {
		return err
	}
	f.Set("supersedes", now.ID)
	for i, h := range p.Hidden {
		if h.Name == "supersedes" {
			p.Hidden[i].Value = now.ID
		}
	}
	p.Both = both
	return formSheet.show(v, http.StatusConflict, p)
}
