package web

import (
	"strings"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// recordLine is one record of a history as a page shows it.
type recordLine struct {
	Day, What, More, Result, URL string
	Over                         bool
}

func (v *visit) recordLines(list []book.RecordLine) []recordLine {
	out := make([]recordLine, len(list))
	for i, r := range list {
		l := recordLine{Day: shortDay(r.Day, v.today()), What: r.Title, Result: "passed", URL: v.url("book", r.Entry), Over: r.Ended}
		if r.Time != nil {
			l.Day += ", " + r.Time.In(v.site.Location).Format("15:04")
		}
		switch {
		case !r.Passed:
			l.Result = "failed"
		case r.Remark:
			l.Result = "passed, with a remark"
		}
		var more []string
		if r.Until != nil {
			more = append(more, "good until "+shortDay(*r.Until, v.today()))
		}
		if r.Limit != "" {
			more = append(more, "only for "+strings.Join(strings.Fields(r.Limit), ", "))
		}
		if r.Site != v.site.Code {
			more = append(more, "at "+r.Site)
		}
		l.More = strings.Join(more, " · ")
		out[i] = l
	}
	return out
}

// factGroup is one fact over time: what holds on the day, and what held or will hold on others.
type factGroup struct {
	Label  string
	Now    factLine
	Others []factLine
}

type factLine struct{ Value, From, URL string }

type excusalLine struct {
	What, Span, Because, URL string
	Waiting, Over, Pause     bool
	Entry                    string
	Open                     bool
}

type personLeaf struct {
	page
	Name, Say      string
	Who            []faultLine // labelled values
	Bad, Told      []rowLine   // gaps; what cannot be told
	Low, Good      []rowLine   // closing or awaited; the rest
	HeldWhy        []string
	Facts          []factGroup
	Excusals       []excusalLine
	Events         []recordLine
	Records, Older []recordLine
	Zones          []zoneRibbon
	Window         string // what the ribbons show
	Do             []act
	MayEnd, Mine   bool
	ConfirmURL     string
	EndURL         string
	EraseURL       string
	When           *asOf
	Outages        []outageLine // of a fixture or zone
	Duties         []dutyLine   // of a person, in the next two weeks
	Holders        []postLine   // of a post
}

var personSheet = leafOf[personLeaf]("person")

// personPage shows one person. A member sees themselves.
func personPage(v *visit) error {
	x, err := v.b.Person(v.ctx(), v.actor, v.site.Code, v.param("code"), v.on)
	if err != nil {
		return err
	}
	section := secPeople
	if !v.may(book.SeeSite) {
		section = secMine
	}
	p := &personLeaf{page: page{Title: x.Name, Section: section, AsOf: v.asOf()}, Name: x.Name, HeldWhy: x.HeldWhy}
	p.When = p.AsOf
	p.Mine = x.Subject.Code == v.actor.Person
	v.part(p, x.Rows)
	p.Say = v.personSay(x, p)
	p.Who = v.whoWords(x)
	v.personPast(p, x)
	if !x.Erased {
		if p.Zones, p.Window, err = v.zoneRibbons(x.Subject.Code); err != nil {
			return err
		}
	}
	if !v.elsewhen() && !x.Erased {
		if p.Duties, err = v.dutiesOf(x.Subject.Code); err != nil {
			return err
		}
	}
	for i := range p.Good {
		p.Good[i].Do = nil // what is in order asks for nothing
	}
	if v.acts(book.RecordDone) {
		p.Do = v.personActs(x)
	}
	if p.Mine && v.acts(book.SelfReport) && v.asksSelf() {
		p.Do = append(p.Do, act{"Something about my screening has changed", v.url("self-report")})
	}
	p.MayEnd = v.acts(book.Excuse)
	p.EndURL, p.ConfirmURL = v.url("pause-end"), v.url("confirm")
	if v.acts(book.Erase) && !p.Mine && !x.Erased && !presentNow(x) {
		p.EraseURL = with(v.url("erase"), "person", x.Subject.Code)
	}
	return personSheet.show(v, 200, p)
}

func presentNow(x book.SubjectView) bool {
	for _, s := range x.Stints {
		if s.Last == nil || *s.Last >= x.Site.Today {
			return true
		}
	}
	return false
}

// part lists what has run out, what cannot be told, what is running low or awaited, and the rest.
func (v *visit) part(p *personLeaf, rows []book.Row) {
	for _, r := range rows {
		l := v.rowLine(r)
		switch {
		case r.Word.IsGap():
			p.Bad = append(p.Bad, l)
		case r.Word == standing.DataFault:
			p.Told = append(p.Told, l)
		case r.Word == standing.Closing || r.Word == standing.Awaited:
			p.Low = append(p.Low, l)
		default:
			p.Good = append(p.Good, l)
		}
	}
}

// personSay answers the question of the page: what they hold, until when, and what falls short.
func (v *visit) personSay(x book.SubjectView, p *personLeaf) string {
	if x.Erased {
		return "The name and the texts about this person were erased. What was done stays on record under the code."
	}
	if last, gone := v.gone(x); gone {
		return x.Name + " left on " + shortDay(last, v.today()) + "; nothing is asked any more."
	}
	if pause := v.pausedOn(x); pause != nil {
		return x.Name + " is paused from " + shortDay(pause.From, v.today()) + " to " + shortDayOr(pause.To, v.today(), "no end yet") + "; nothing is asked meanwhile, and no zone is open."
	}
	return x.Name + " " + v.levelWords(x) + "; " + v.oweWords(p) + "."
}

// gone tells that every stint was over on the day, and the last day of the latest.
func (v *visit) gone(x book.SubjectView) (last civil.Day, gone bool) {
	for _, s := range x.Stints {
		if s.Last == nil || *s.Last >= v.day() {
			return 0, false
		}
		last = max(last, *s.Last)
	}
	return last, len(x.Stints) > 0
}

func (v *visit) pausedOn(x book.SubjectView) *book.ExcusalLine {
	for i, e := range x.Excusals {
		if e.Item == "" && !e.Ended && e.From <= v.day() && (e.To == nil || *e.To >= v.day()) {
			return &x.Excusals[i]
		}
	}
	return nil
}

func (v *visit) levelWords(x book.SubjectView) string {
	assigned, held := v.levelName(x.Level), v.levelName(x.Held)
	until := ""
	if x.HeldUntil != nil {
		until = " until " + shortDay(*x.HeldUntil, v.today())
	}
	switch {
	case x.Level == "":
		return "has no level assigned"
	case x.Held == "":
		return "is assigned " + assigned + " and holds no level"
	case x.Held == x.Level:
		return "holds " + held + until
	default:
		return "is assigned " + assigned + " and holds " + held + until
	}
}

// oweWords counts what has run out and what is due soon.
func (v *visit) oweWords(p *personLeaf) string {
	low := 0
	for _, l := range p.Low {
		if l.Word == standing.Closing {
			low++
		}
	}
	var parts []string
	if n := len(p.Bad); n > 0 {
		parts = append(parts, count(n, "thing has run out or failed", "things have run out or failed"))
	}
	if n := len(p.Told); n > 0 {
		parts = append(parts, count(n, "thing cannot be told for want of a fact", "things cannot be told for want of a fact"))
	}
	if len(parts) == 0 {
		parts = append(parts, "nothing has run out")
	}
	if low > 0 {
		parts = append(parts, count(low, "is due soon", "are due soon"))
	}
	if len(p.Bad)+len(p.Told)+len(p.Low)+len(p.Good) == 0 {
		return "nothing is asked on this day"
	}
	return and(parts)
}

// whoWords are the labelled values that are no dated facts.
func (v *visit) whoWords(x book.SubjectView) []faultLine {
	var out []faultLine
	add := func(label, value string) {
		if value != "" {
			out = append(out, faultLine{label, value})
		}
	}
	add("Code", x.Subject.Code)
	if k, ok := v.site.Program.FixtureKind(x.Kind); ok {
		add("Kind", orCode(k.Name, x.Kind))
	}
	add("E-mail", x.Email)
	add("Badge", x.Badge)
	present := "In use"
	if x.Subject.Asks == program.AsksPerson {
		present = "On staff"
	}
	for _, s := range x.Stints {
		add(present, shortDayOr(s.First, v.today(), "always")+" to "+shortDayOr(s.Last, v.today(), "now"))
	}
	return out
}

// factGroups gathers the facts by what they say, the newest first.
func (v *visit) factGroups(asks program.Asks, facts []book.FactLine) []factGroup {
	var out []factGroup
	for _, f := range facts {
		if f.Ended {
			continue
		}
		line := factLine{v.factWords(f), fromWords(f, v), v.entryURL(string(asks), f.Entry, false)}
		if n := len(out); n == 0 || out[n-1].Label != f.Label {
			out = append(out, factGroup{Label: f.Label})
		}
		g := &out[len(out)-1]
		if g.Now.From == "" && f.From <= v.day() {
			g.Now = line
		} else {
			g.Others = append(g.Others, line)
		}
	}
	for i := range out {
		out[i].Label = upperFirst(spaced(out[i].Label))
		if out[i].Now.From == "" {
			out[i].Now.Value = "not yet"
		}
	}
	return out
}

// factWords names levels, crews and zones; other values stand as they are.
func (v *visit) factWords(f book.FactLine) string {
	switch f.Code {
	case "level":
		return v.levelName(f.Value)
	case "crew":
		return v.crewName(f.Value)
	default:
		return f.Value
	}
}

// personPast fills in what is behind the standings.
func (v *visit) personPast(p *personLeaf, x book.SubjectView) {
	p.Facts = v.factGroups(x.Subject.Asks, x.Facts)
	for _, e := range x.Excusals {
		p.Excusals = append(p.Excusals, v.excusalLine(e))
	}
	for _, e := range x.Events {
		p.Events = append(p.Events, recordLine{Day: shortDay(e.Day, v.today()), What: e.Name, URL: v.entryURL("event", e.Entry, false), Over: e.Ended})
	}
	p.Records = v.recordLines(x.Records)
	if len(p.Records) > historyShown+historyLeast {
		p.Records, p.Older = p.Records[:historyShown], p.Records[historyShown:]
	}
}

// historyShown is how many records a history shows where it folds; fewer than historyLeast more do
// not make it fold.
const (
	historyShown = 20
	historyLeast = 6
)

func fromWords(f book.FactLine, v *visit) string {
	if f.From.Format("2006") < "1000" {
		return "always"
	}
	return "from " + shortDay(f.From, v.today())
}

func (v *visit) excusalLine(e book.ExcusalLine) excusalLine {
	l := excusalLine{What: orCode(e.Title, e.Item), Because: e.Because, URL: v.entryURL("excusal", e.Entry, false), Waiting: e.Waiting, Over: e.Ended, Pause: e.Item == "", Entry: e.Entry}
	if l.Pause {
		l.What = "Everything paused"
	}
	l.Span = shortDay(e.From, v.today()) + " to " + shortDayOr(e.To, v.today(), "no end yet")
	l.Open = l.Pause && e.To == nil && !e.Ended
	if e.ApprovedBy != "" {
		l.Because += " (approved by " + e.ApprovedBy + ", as imported)"
	}
	return l
}

func (v *visit) personActs(x book.SubjectView) []act {
	key := subjectKey(x.Subject)
	return []act{
		{"Record something", with(v.url("record"), "subject", key)},
		{"Record a screening", with(v.url("screening"), "person", x.Subject.Code)},
		{"Change", with(v.url("keep-person"), "code", x.Subject.Code)},
		{"Excuse", with(v.url("excuse"), "subject", key)},
		{"Pause", with(v.url("pause"), "subject", key)},
		{"Report an event", with(v.url("event"), "subject", key)},
		{"Grant a right", with(v.url("grant"), "person", x.Subject.Code)},
	}
}
