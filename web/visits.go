package web

import (
	"cmp"
	"html/template"
	"net/url"
	"strings"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/standing"
)

// visitLine is one visit as lists show it.
type visitLine struct {
	Disc                  template.HTML
	Who, URL, Note        string
	Where, When           string
	Word                  string // class of When
	Small                 []string
	Do                    []act
	Escort, Tools, Signed string // on paper
}

// knownLine is somebody who has been here before.
type knownLine struct {
	Who, Note, URL string
	Person         string // the form that makes a person of them; empty: they need none
}

type deskLeaf struct {
	page
	Say         string
	Here        []visitLine
	Awaited     []visitLine
	Known       []knownLine
	KnownMore   int
	AnnounceURL string
	ListURL     string
}

var deskSheet = leafOf[deskLeaf]("desk")

const knownShown = 12

// deskPage is for whoever stands at the door: who is here, who is expected, and who has been here before.
func deskPage(v *visit) error {
	list, err := v.b.Visits(v.ctx(), v.actor, book.VisitQuery{Site: v.site.Code, Open: true})
	if err != nil {
		return err
	}
	p := &deskLeaf{page: page{Title: "Desk", Section: secDesk}, AnnounceURL: v.url("announce"), ListURL: v.url("visits")}
	for _, x := range list {
		if x.Here() {
			p.Here = append(p.Here, v.visitLine(x))
		} else {
			p.Awaited = append(p.Awaited, v.visitLine(x))
		}
	}
	known, err := v.b.KnownVisitors(v.ctx(), v.actor, v.site.Code)
	if err != nil {
		return err
	}
	for i, k := range known {
		if i == knownShown {
			p.KnownMore = len(known) - i
			break
		}
		l := knownLine{Who: k.Visitor, Note: strings.TrimPrefix(k.Employer+", "+count(k.Times, "visit", "visits")+" in 90 days", ", "), URL: with(v.url("announce"), "again", k.Last.Entry)}
		if k.Often() && v.may(book.KeepPeople) {
			l.Person = with(v.url("visitor-person"), "visit", k.Last.Entry)
		}
		p.Known = append(p.Known, l)
	}
	p.Say = deskSay(list)
	return deskSheet.show(v, 200, p)
}

func deskSay(list []book.VisitView) string {
	here, late, awaited := 0, 0, 0
	for _, x := range list {
		switch {
		case x.Overdue:
			here, late = here+1, late+1
		case x.Here():
			here++
		default:
			awaited++
		}
	}
	s := "Nobody is visiting now"
	if here > 0 {
		s = upperFirst(count(here, "visitor is here", "visitors are here"))
	}
	if late > 0 {
		s += ", " + number(late) + " of them longer than announced"
	}
	if awaited > 0 {
		return s + "; " + number(awaited) + " more " + singular(awaited, "is", "are") + " announced for today."
	}
	return s + "."
}

func (v *visit) visitLine(x book.VisitView) visitLine {
	loc := v.site.Location
	at := func(t time.Time) string {
		if civil.DayOf(t, loc) == v.day() {
			return t.In(loc).Format("15:04")
		}
		return moment(t, loc, v.today())
	}
	l := visitLine{Disc: disc(standing.Awaited, 0), Who: x.Visitor, URL: v.url("visits", x.Entry), Note: strings.TrimPrefix(x.Employer+", "+x.KindWords, ", "), Where: "Zone " + strings.Join(x.Zones, ", "), Escort: x.EscortName, Tools: strings.Join(x.Tools, ", ")}
	l.When = at(x.From) + " to " + at(x.To)
	if x.EscortName != "" {
		l.Where += ", with " + x.EscortName
	}
	switch {
	case x.Overdue:
		l.Disc, l.Word, l.When = disc(standing.Lapsed, 0), string(standing.Lapsed), "should be gone since "+at(x.To)
		l.Small = append(l.Small, "here since "+at(*x.ArrivedAt))
	case x.Here():
		l.Disc, l.When = disc(standing.Met, 1), "here since "+at(*x.ArrivedAt)
		l.Small = append(l.Small, "until "+at(x.To))
	case x.Over != "":
		l.Disc, l.When = disc(standing.Excused, 0), overWords[x.Over]+" "+at(*x.OverAt)
	}
	if x.EscortLapses != nil {
		l.Small = append(l.Small, "the escort's level ends before "+shortDay(*x.EscortLapses, v.today()))
	}
	if x.Late {
		l.Small = append(l.Small, "announced after it began")
	}
	if !v.may(book.HandleVisits) {
		return l
	}
	step := func(s book.VisitStep) string { return with(v.url("visit-step"), "visit", x.Entry, "step", string(s)) }
	switch {
	case x.Here():
		l.Do = []act{{"Gone", step(book.Gone)}}
	case x.Awaited():
		l.Do = []act{{"Here now", step(book.Arrived)}}
	}
	return l
}

var overWords = map[book.VisitStep]string{book.Gone: "gone", book.TurnedAway: "turned away", book.CalledOff: "called off"}

// announceForm is the form of a visit.
func announceForm(v *visit, f *Form) (*formLeaf, error) {
	now := v.b.Now().In(v.site.Location)
	f.Default("from", now.Format("2006-01-02 15:04")).Default("to", now.Add(4*time.Hour).Format("2006-01-02 15:04")).Default("kind", "vendor")
	p := &formLeaf{page: page{Title: "Announce a visit", Section: secDesk}, Head: "Announce a visit", Action: v.url("announce"), Form: f, Button: "Announce"}
	p.Say = "Somebody who is no person of this book and has no right comes in, and is kept company."
	id, err := v.formID(f)
	p.Hidden = []hidden{id, {"person", f.Get("person")}}
	kinds := make([]option, len(book.VisitKinds))
	for i, k := range book.VisitKinds {
		kinds[i] = option{Value: k.Code, Words: k.Words}
	}
	var zones []tick
	for _, z := range v.site.Program.Zones {
		note := ""
		if z.Restricted {
			note = "whoever escorts holds " + v.levelName(z.Escort)
			if z.Escort == "" {
				note = "the program names nobody who may escort here"
			}
		}
		zones = append(zones, tick{Value: z.Code, Name: zoneName(z), Note: note, Ticked: f.Has("zones", z.Code)})
	}
	p.Fields = []field{
		f.Text("visitor", "Who").Need().Help("The visitor's own name; of a companion, never the patient's"),
		f.Text("employer", "From which firm or body"),
		f.Choice("kind", "What kind of visit", kinds).Need(),
		f.Ticks("zones", "Into which zones", zones),
		f.Text("escort", "Who goes with them").Help("The code of a person; needed for a restricted zone"),
		f.Text("from", "From").Need(), f.Text("to", "To").Need(),
		f.Text("purpose", "What for"),
		f.Long("tools", "Tools they bring").Help("One a line; each is checked in and out"),
		f.Text("badge", "Badge lent for the visit"),
	}
	p.Cautions = []string{"Everybody is screened before a restricted zone, each time. No tool of iron goes into Zone IV. Nothing medical belongs here, and no patient's name."}
	return p, err
}

// announcePage opens the form, filled in with the last visit of somebody who has been here before.
func announcePage(v *visit) error {
	f := v.asked()
	if again := f.Get("again"); again != "" {
		x, err := v.b.Visit(v.ctx(), v.actor, v.site.Code, again)
		if err != nil {
			return err
		}
		f.Values = url.Values{"zones": x.Zones}
		f.Set("visitor", x.Visitor).Set("employer", x.Employer).Set("kind", x.Kind).Set("escort", x.Escort).Set("purpose", x.Purpose).Set("tools", strings.Join(x.Tools, "\n")).Set("person", x.Person)
	}
	if f.Get("escort") == "" && v.actor.Person != "" {
		f.Set("escort", v.actor.Person)
	}
	return v.showAnnounce(f)
}

func (v *visit) showAnnounce(f *Form) error {
	p, err := announceForm(v, f)
	if err != nil {
		return err
	}
	return v.showForm(p)
}

func announce(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.Announce(v.ctx(), v.actor, v.site.Code, book.VisitForm{
		ID: f.Get("id"), Visitor: f.Get("visitor"), Employer: f.Get("employer"), Badge: f.Get("badge"), Kind: f.Get("kind"), Purpose: f.Get("purpose"),
		From: f.Get("from"), To: f.Get("to"), Escort: f.Get("escort"), Tool: f.Values.Get("tools"), Zones: f.All("zones"), Person: f.Get("person"),
	})
	if f.Take(err) {
		return v.showAnnounce(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("desk"), "Announced: "+f.Get("visitor")+".", r.ID())
}

// stepForm asks what belongs to a step of a visit.
func stepForm(v *visit, f *Form, x book.VisitView) (*formLeaf, error) {
	p := &formLeaf{page: page{Title: "Visit", Section: secDesk}, Action: v.url("visit-step"), Form: f}
	id, err := v.formID(f)
	p.Hidden = []hidden{id, {"visit", x.Entry}, {"step", f.Get("step")}}
	tools := make([]tick, len(x.Tools))
	for i, t := range x.Tools {
		tools[i] = tick{Value: t, Name: t, Ticked: f.Has("tools", t)}
	}
	switch book.VisitStep(f.Get("step")) {
	case book.Arrived:
		p.Head, p.Button = x.Visitor+" is here", "Here now"
		p.Say = "Into zone " + strings.Join(x.Zones, ", ") + withEscort(x) + "."
		f.Default("screener", v.actor.Person)
		p.Fields = []field{
			f.Picks("outcome", "What the screening found", []option{{Value: string(book.Cleared), Words: "Cleared"}, {Value: string(book.ClearedInPart), Words: "With a restriction"}, {Value: string(book.NotCleared), Words: "Not cleared", Bad: true}}).Help("The outcome alone, never a reason"),
			f.Text("screener", "Who screened them").Help("The code of a person"),
		}
		if len(tools) > 0 {
			p.Fields = append(p.Fields, f.Ticks("tools", "Tools checked in", tools))
		}
		p.Cautions = []string{"A record of a screening clears nobody: whoever screens at the door decides, each time."}
	case book.Gone:
		p.Head, p.Button = x.Visitor+" is gone", "Gone"
		if len(tools) > 0 {
			p.Fields = append(p.Fields, f.Ticks("tools", "Tools taken along", tools))
		}
		p.Fields = append(p.Fields, f.Text("note", "If a tool stays: where is it"))
	case book.TurnedAway:
		p.Head, p.Button, p.Risk = x.Visitor+" is turned away", "Turned away", true
	default:
		p.Head, p.Button, p.Risk = "The visit of "+x.Visitor+" is called off", "Call it off", true
	}
	p.Fields = append(p.Fields, f.Text("at", "When").Help("Empty: now"))
	return p, err
}

func withEscort(x book.VisitView) string {
	if x.EscortName == "" {
		return ""
	}
	return ", with " + x.EscortName
}

func stepPage(v *visit) error {
	x, err := v.b.Visit(v.ctx(), v.actor, v.site.Code, v.query("visit"))
	if err != nil {
		return err
	}
	f := v.asked()
	for _, t := range x.Tools {
		f.Values.Add("tools", t)
	}
	return v.showStep(f, x)
}

func (v *visit) showStep(f *Form, x book.VisitView) error {
	p, err := stepForm(v, f, x)
	if err != nil {
		return err
	}
	return v.showForm(p)
}

func stepVisit(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	x, err := v.b.Visit(v.ctx(), v.actor, v.site.Code, f.Get("visit"))
	if err != nil {
		return err
	}
	r, err := v.b.StepVisit(v.ctx(), v.actor, book.StepForm{
		ID: f.Get("id"), Visit: x.Entry, Step: book.VisitStep(f.Get("step")), At: f.Get("at"), Screener: f.Get("screener"), Note: f.Get("note"),
		Outcome: book.Outcome(f.Get("outcome")), Tools: f.All("tools"),
	})
	if f.Take(err) {
		return v.showStep(f, x)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("desk"), "Kept: "+x.Visitor+".", r.ID())
}

type visitsLeaf struct {
	page
	Head, Say string
	Lines     []visitLine
	When      *asOf
	Back      string
}

var visitsSheet = leafOf[visitsLeaf]("visits")

// visitsPage is the list of a day, to print.
func visitsPage(v *visit) error {
	list, err := v.b.Visits(v.ctx(), v.actor, book.VisitQuery{Site: v.site.Code, On: v.on})
	if err != nil {
		return err
	}
	p := &visitsLeaf{page: page{Title: "Visits", Section: secDesk, AsOf: v.asOf()}, Head: "Visits, " + longDay(v.day(), v.today())}
	p.When = p.AsOf
	if v.may(book.HandleVisits) {
		p.Back = v.url("desk")
	}
	p.Say = upperFirst(count(len(list), "visit is on record of this day.", "visits are on record of this day."))
	for _, x := range list {
		l := v.visitLine(x)
		l.Do = nil
		p.Lines = append(p.Lines, l)
	}
	return visitsSheet.show(v, 200, p)
}

type visitLeaf struct {
	page
	Head, Say string
	Facts     []faultLine
	Do        []act
	EraseURL  string
	ID        string
}

var visitSheet = leafOf[visitLeaf]("visit")

// visitPage shows one visit.
func visitPage(v *visit) error {
	x, err := v.b.Visit(v.ctx(), v.actor, v.site.Code, v.param("id"))
	if err != nil {
		return err
	}
	l := v.visitLine(x)
	p := &visitLeaf{page: page{Title: "Visit", Section: secDesk}, Head: x.Visitor, ID: x.Entry, Do: l.Do}
	p.Say = upperFirst(l.When) + ". " + strings.Join(l.Small, "; ")
	loc := v.site.Location
	add := func(label, value string) {
		if value != "" {
			p.Facts = append(p.Facts, faultLine{label, value})
		}
	}
	add("From", x.Employer)
	add("Kind", x.KindWords)
	add("What for", x.Purpose)
	add("Where", l.Where)
	add("Announced for", moment(x.From, loc, v.today())+" to "+moment(x.To, loc, v.today()))
	if x.ArrivedAt != nil {
		add("Came", moment(*x.ArrivedAt, loc, v.today()))
		add("Screened by", cmp.Or(x.ScreenerName, x.Screener))
		add("Outcome", spaced(string(x.Outcome)))
	}
	if x.OverAt != nil {
		add(upperFirst(overWords[x.Over]), moment(*x.OverAt, loc, v.today()))
	}
	add("Tools", strings.Join(x.Tools, ", "))
	add("Badge lent", x.Badge)
	if v.may(book.HandleVisits) && x.Awaited() {
		for _, s := range []struct {
			words string
			step  book.VisitStep
		}{{"Turn away", book.TurnedAway}, {"Call off", book.CalledOff}} {
			p.Do = append(p.Do, act{s.words, with(v.url("visit-step"), "visit", x.Entry, "step", string(s.step))})
		}
	}
	if v.may(book.HandleVisits) && !x.Erased {
		p.Do = append(p.Do, act{"Announce again", with(v.url("announce"), "again", x.Entry)})
	}
	if v.may(book.KeepPeople) && x.Person == "" && !x.Erased {
		p.Do = append(p.Do, act{"Make a person of them", with(v.url("visitor-person"), "visit", x.Entry)})
	}
	if v.may(book.Erase) && !x.Erased && !x.Here() {
		p.EraseURL = v.url("erase-visit")
	}
	return visitSheet.show(v, 200, p)
}

func eraseVisit(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	if _, err := v.b.EraseVisit(v.ctx(), v.actor, f.Get("visit")); err != nil {
		return err
	}
	return v.kept(v.url("visits", f.Get("visit")), "Who came is erased.", "")
}

// visitorPerson opens the form of a person with what is known of a visitor.
func visitorPerson(v *visit) error {
	x, err := v.b.Visit(v.ctx(), v.actor, v.site.Code, v.query("visit"))
	if err != nil {
		return err
	}
	f := &Form{Values: url.Values{}}
	f.Set("name", x.Visitor).Set("joined", v.today().String())
	for _, d := range v.site.Program.PersonFacts {
		if d.Code == "employer" {
			f.Set("fact-employer", x.Employer)
		}
	}
	return v.showForm(keepPersonForm(v, f))
}

// selfForm says what will happen before somebody reports a change about themselves.
func selfForm(v *visit, f *Form) *formLeaf {
	p := &formLeaf{page: page{Title: "A change about me", Section: secMine}, Head: "Something about my screening has changed", Action: v.url("self-report"), Form: f, Button: "It has changed", Risk: true}
	p.Say = "You do not say what. From the moment that you press it, the zones that a new screening guards are shut to you, until you have been screened again."
	p.After = "The safety officer sees that you ask to be screened again, and nothing more."
	p.Cautions = []string{"Tell nobody here why: no reason, nothing medical. Until you are screened again, stay out of the restricted zones, whatever a door does."}
	return p
}

func selfPage(v *visit) error { return v.showForm(selfForm(v, v.asked())) }

func selfReport(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	_, err = v.b.ReportSelf(v.ctx(), v.actor, v.site.Code)
	if f.Take(err) {
		return v.showForm(selfForm(v, f))
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("today"), "Kept: you ask to be screened again. Stay out of the restricted zones until then.", "")
}

// asksSelf tells whether the site's program has an event that people report of themselves.
func (v *visit) asksSelf() bool {
	for _, e := range v.site.Program.Events {
		if e.SelfReport {
			return true
		}
	}
	return false
}

// selfSay counts who asks to be screened again: those of whom an item that follows the report is not met.
func (v *visit) selfSay(rows []*book.Row) string {
	waiting := map[string]bool{}
	for _, r := range rows {
		item, ok := v.site.Program.Item(r.Item)
		if !ok || r.Word == standing.Met {
			continue
		}
		for _, code := range item.Cadence.After {
			if e, ok := v.site.Program.Event(code); ok && e.SelfReport {
				waiting[r.Subject.Code] = true
			}
		}
	}
	if len(waiting) == 0 {
		return ""
	}
	return upperFirst(count(len(waiting), "person asks", "people ask")) + " to be screened again."
}
