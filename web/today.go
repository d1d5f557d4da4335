package web

import (
	"cmp"
	"fmt"
	"html/template"
	"slices"
	"strings"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// todayLine is one line of Today: an item, and the one or the many who are in it.
type todayLine struct {
	Disc          template.HTML
	Word          standing.Word
	What, WhatURL string
	Cadence       string
	Who, WhoURL   string
	Note          string
	When          string
	Do            []act
}

// weekDay is one day of the strip.
type weekDay struct {
	Number, Name string
	Now          bool
	Lines        []string
}

type todayLeaf struct {
	page
	Head     string
	Say      []string
	Out, Low []todayLine
	Told     []todayLine // cannot be told
	LowMore  int
	Waiting  []rowLine
	Week     []weekDay
	WeekURL  string
	Do       []act
	Steps    []stepLine
	Excusals []waitingLine
	Visits   []visitLine
	Alarms   []alarmLine
	When     *asOf
	GapsURL  string
	Outages  []outageLine
	ToTell   []reportLine // reports to outside bodies, for a safety officer
}

// waitingLine is an excusal that waits for a safety officer.
type waitingLine struct{ Who, What, Until, URL string }

// stepLine is one of the first steps of an empty site.
type stepLine struct {
	Done        bool
	Text, Words string
	URL         string
}

var todaySheet = leafOf[todayLeaf]("today")

const lowShown = 14

func todayPage(v *visit) error {
	st, err := v.short()
	if err != nil {
		return v.todayWithoutPerson(err)
	}
	p := &todayLeaf{page: page{Title: "Today", Section: secToday, AsOf: v.asOf()}, Head: longDay(v.day(), v.today()), WeekURL: v.url("week"), GapsURL: v.url("gaps")}
	p.When = p.AsOf
	rows := v.forRole(st.Rows)
	bad, low, told := sorted(rows)
	p.Say = v.todaySay(len(bad), len(low), len(told))
	if said := v.selfSay(rows); said != "" && v.may(book.SeeSite) {
		p.Say = append(p.Say, said)
	}
	p.Week = v.week(st.Plans, rows)
	out, running, untold := bunches(bad, false), bunches(low, true), bunches(told, true)
	if len(running) > lowShown {
		p.LowMore = len(running) - lowShown
		running = running[:lowShown]
	}
	if err := v.nameFirst(slices.Concat(out, running, untold), namesShown); err != nil {
		return err
	}
	p.Out, p.Low, p.Told = v.todayLines(out), v.todayLines(running), v.todayLines(untold)
	if v.acts(book.RecordDone) {
		p.Do = []act{{"Record a session", v.url("session")}, {"Record a drill", v.url("drill")}}
	}
	if v.acts(book.ReportIncident) {
		p.Do = append(p.Do, act{"Report an incident", v.url("incident")})
	}
	if err := v.todayRest(p, st); err != nil {
		return err
	}
	return todaySheet.show(v, 200, p)
}

// todayRest adds the checks that a member may record, and the first steps of an empty site.
func (v *visit) todayRest(p *todayLeaf, st short) error {
	if !v.may(book.SeeSite) && v.may(book.FillSheet) {
		round, err := v.b.Rounds(v.ctx(), v.actor, v.site.Code, v.on)
		if err != nil {
			return err
		}
		for _, s := range round.Due {
			p.Waiting = append(p.Waiting, v.rowLines(s.Rows)...)
		}
	}
	if v.acts(book.Excuse) {
		waiting, err := v.b.WaitingExcusals(v.ctx(), v.actor, v.site.Code)
		if err != nil {
			return err
		}
		for _, x := range waiting {
			p.Excusals = append(p.Excusals, waitingLine{Who: x.SubjectName, What: x.Title, Until: shortDayOr(x.To, v.today(), ""), URL: v.url("people", x.SubjectCode)})
		}
	}
	if err := v.todayRemedies(p); err != nil {
		return err
	}
	if v.may(book.SeeVisits) && !v.elsewhen() {
		open, err := v.b.Visits(v.ctx(), v.actor, book.VisitQuery{Site: v.site.Code, Open: true})
		if err != nil {
			return err
		}
		for _, x := range open {
			if x.Here() || v.may(book.HandleVisits) {
				p.Visits = append(p.Visits, v.visitLine(x))
			}
		}
	}
	if v.may(book.SeePassages) && !v.elsewhen() {
		if err := v.todayAlarms(p); err != nil {
			return err
		}
	}
	if v.may(book.SetProgram) {
		p.Steps = v.firstSteps(st)
	}
	return nil
}

// todayWithoutPerson is what a member sees whose account is linked to nobody.
func (v *visit) todayWithoutPerson(err error) error {
	if v.may(book.SeeSite) || v.actor.Person != "" {
		return err
	}
	p := &todayLeaf{page: page{Title: "Today", Section: secToday, AsOf: v.asOf()}, Head: longDay(v.day(), v.today()), WeekURL: v.url("week")}
	p.When = p.AsOf
	p.Say = []string{"This account is linked to no person yet, so nothing of yours can be shown. An administrator can link it."}
	if v.acts(book.ReportIncident) {
		p.Do = []act{{"Report an incident", v.url("incident")}}
	}
	if err := v.todayRest(p, short{}); err != nil {
		return err
	}
	return todaySheet.show(v, 200, p)
}

// forRole leaves facilities what they answer for; everybody else sees all that they may.
func (v *visit) forRole(rows []book.Row) []*book.Row {
	all := pointers(rows)
	if v.actor.Role != book.Facilities {
		return all
	}
	return slices.DeleteFunc(all, func(r *book.Row) bool {
		mine := r.Subject.Asks == program.AsksPerson && r.Subject.Code == v.actor.Person
		return r.Subject.Asks != program.AsksFixture && r.Owner != string(book.Facilities) && !mine
	})
}

// sorted parts rows into gaps (longest first), what is closing (soonest first) and data faults.
func sorted(rows []*book.Row) (bad, low, told []*book.Row) {
	for _, r := range rows {
		switch {
		case r.Word.IsGap():
			bad = append(bad, r)
		case r.Word == standing.Closing:
			low = append(low, r)
		case r.Word == standing.DataFault:
			told = append(told, r)
		}
	}
	longestFirst(bad)
	slices.SortStableFunc(low, func(a, b *book.Row) int { return cmp.Compare(dayOrLast(a.Due), dayOrLast(b.Due)) })
	return bad, low, told
}

// longestFirst puts gaps in the order in which they began.
func longestFirst(gaps []*book.Row) {
	slices.SortStableFunc(gaps, func(a, b *book.Row) int { return cmp.Compare(dayOrLast(a.Since), dayOrLast(b.Since)) })
}

func dayOrLast(d *civil.Day) civil.Day {
	if d == nil {
		return civil.LastDay
	}
	return *d
}

// bunch is rows that one line shows.
type bunch []*book.Row

// thingsAlone is how many things in the same standing of one item stand each on a line of its own.
const thingsAlone = 6

// bunches gathers people in the same standing of one item. A few things stand alone; many are gathered
// too. With due, things are gathered that are due alike, be they few or many.
func bunches(rows []*book.Row, due bool) []bunch {
	type key struct {
		item, subject string
		word          standing.Word
		due           civil.Day
	}
	alike := map[key]int{}
	for _, r := range rows {
		alike[key{item: r.Item, word: r.Word}]++
	}
	at := map[key]int{}
	var out []bunch
	for _, r := range rows {
		k := key{item: r.Item, word: r.Word}
		switch {
		case r.Subject.Asks == program.AsksPerson:
		case due && r.Due != nil:
			k.due = *r.Due
		case alike[k] <= thingsAlone:
			k.subject = r.Subject.Code
		}
		i, ok := at[k]
		if !ok {
			i = len(out)
			at[k], out = i, append(out, nil)
		}
		out[i] = append(out[i], r)
	}
	return out
}

// nameFirst puts rows with names in the place of the first few of each bunch.
func (v *visit) nameFirst(all []bunch, few int) error {
	var rows []book.Row
	for _, b := range all {
		for _, r := range b[:min(few, len(b))] {
			rows = append(rows, *r)
		}
	}
	if err := v.b.Named(v.ctx(), v.actor, v.site.Code, v.on, rows); err != nil {
		return err
	}
	n := 0
	for _, b := range all {
		for i := range b[:min(few, len(b))] {
			b[i] = &rows[n]
			n++
		}
	}
	return nil
}

func (v *visit) todayLines(all []bunch) []todayLine {
	out := make([]todayLine, len(all))
	for i, b := range all {
		out[i] = v.todayLine(b)
	}
	return out
}

const namesShown = 4

func (v *visit) todayLine(rows bunch) todayLine {
	first := *rows[0]
	one := v.rowLine(first)
	l := todayLine{Disc: one.Disc, Word: one.Word, What: one.What, WhatURL: one.WhatURL, Cadence: one.Cadence, Who: one.Who, WhoURL: one.WhoURL, Note: one.Note, When: one.When, Do: one.Do}
	if len(rows) == 1 {
		return l
	}
	l.Who, l.WhoURL = askedOf(len(rows), first.Subject.Asks), l.WhatURL
	var names []string
	for i, r := range rows {
		if i == namesShown {
			names = append(names, number(len(rows)-namesShown)+" more")
			break
		}
		names = append(names, r.SubjectName)
	}
	l.Note = and(names)
	l.Do = v.manyActs(first)
	if first.Word == standing.DataFault {
		l.When = ""
	}
	return l
}

// manyActs records many people in one form.
func (v *visit) manyActs(r book.Row) []act {
	if v.elsewhen() || !r.Asked || len(r.Records) == 0 {
		return nil
	}
	what := r.Records[0]
	kind, _, _ := strings.Cut(what, "/")
	if r.Subject.Asks == program.AsksFixture && v.may(book.FillSheet) {
		return []act{{"To the round", v.url("rounds")}}
	}
	if !v.may(book.RecordDone) {
		return nil
	}
	switch kind {
	case "training", "review", "acknowledgement":
		return []act{{"Record", with(v.url("session"), "record", what)}}
	case "screening":
		return []act{{"Record", with(v.url("screening"), "record", what)}}
	case "drill":
		return []act{{"Plan", with(v.url("plan"), "record", what)}}
	}
	return nil
}

func (v *visit) todaySay(bad, low, told int) []string {
	whose := ""
	if !v.may(book.SeeSite) {
		whose = " of yours"
	}
	var out []string
	switch {
	case bad == 0 && low == 0 && told == 0:
		return []string{"Nothing" + whose + " has run out and nothing is running low."}
	case bad == 0:
		out = append(out, "Nothing"+whose+" has run out.")
	default:
		out = append(out, upperFirst(count(bad, "thing"+whose+" has run out or failed.", "things"+whose+" have run out or failed.")))
	}
	if low > 0 {
		out = append(out, upperFirst(count(low, "is running low.", "are running low.")))
	}
	if told > 0 {
		out = append(out, upperFirst(count(told, "cannot be told for want of a fact.", "cannot be told for want of a fact.")))
	}
	return out
}

// week is the strip of the seven days from Monday.
func (v *visit) week(plans []book.PlanLine, rows []*book.Row) []weekDay {
	first := civil.PeriodOf(civil.ByWeek, v.day()).First
	out := make([]weekDay, 7)
	for i := range out {
		d := first + civil.Day(i)
		out[i] = weekDay{Number: d.Format("2"), Name: d.Format("Mon"), Now: d == v.day()}
		if v.site.Program != nil && !v.site.Program.Calendar.Operates(d) {
			out[i].Lines = append(out[i].Lines, "closed")
		}
	}
	for _, p := range plans {
		if i := int(p.Day - first); i >= 0 && i < 7 {
			line := strings.TrimSpace(p.Title + ", " + strings.ToLower(orCode(p.CrewName, "everybody")) + " " + p.At)
			if p.Done {
				line = "✓ " + line
			}
			out[i].Lines = append(out[i].Lines, line)
		}
	}
	dueInWeek(out, first, rows)
	return out
}

const weekLines = 4

// dueInWeek adds what falls due on each day, the same item once with its number.
func dueInWeek(out []weekDay, first civil.Day, rows []*book.Row) {
	type spot struct {
		day  int
		item string
	}
	n := map[spot]int{}
	title := map[spot]string{}
	var order []spot
	for _, r := range rows {
		if r.Due == nil || r.Word == standing.Met && r.Rule == program.Each {
			continue
		}
		i := int(*r.Due - first)
		if i < 0 || i >= 7 {
			continue
		}
		s := spot{i, r.Item}
		if n[s] == 0 {
			order = append(order, s)
			title[s] = r.Title
		}
		n[s]++
	}
	more := map[int]int{}
	for _, s := range order {
		if len(out[s.day].Lines) >= weekLines {
			more[s.day]++
			continue
		}
		line := shortened(title[s], weekChars)
		if n[s] > 1 {
			line = fmt.Sprintf("%s (%d)", line, n[s])
		}
		out[s.day].Lines = append(out[s.day].Lines, line)
	}
	for i, k := range more {
		out[i].Lines = append(out[i].Lines, "and "+number(k)+" more")
	}
}

const weekChars = 32

// shortened cuts a text at a blank before it grows too long for a narrow column.
func shortened(s string, most int) string {
	if len(s) <= most {
		return s
	}
	if at := strings.LastIndexByte(s[:most], ' '); at > 0 {
		return s[:at] + " …"
	}
	return s
}

// firstSteps leads an empty site to its first morning.
func (v *visit) firstSteps(st short) []stepLine {
	steps := []stepLine{
		{len(st.Site.Program.Items) > 0, "Choose the checklist", "Adopt a group of the starter at a time, then put your own numbers in.", v.url("groups")},
		{st.Site.People > 0, "Bring in the people", "A table of people with their levels, crews and the day they joined.", with(v.url("import"), "table", "people")},
		{st.Site.Fixtures > 0, "Bring in the fixtures", "Doors, vents, monitors, detectors, magnets: what gets inspected.", with(v.url("import"), "table", "fixtures")},
		{st.Proved, "Bring in the history", "Trainings, screenings and inspections of the last years, as CSV or XLSX.", with(v.url("import"), "table", "records")},
	}
	for _, s := range steps {
		if !s.Done {
			return steps
		}
	}
	return nil
}

// weekLeaf is the week on one printable page: due, who, where.
type weekLeaf struct {
	page
	Head  string
	Days  []weekPart
	Plans []planLine
}

type weekPart struct {
	Day   string
	Count int
	Lines []weekLine
}

type weekLine struct{ What, Who, Where, Word string }

var weekSheet = leafOf[weekLeaf]("week")

// weekFew is how many lines of one item in one standing a part of the week has before it counts the rest.
const weekFew = 12

func weekPage(v *visit) error {
	st, err := v.short()
	if err != nil {
		return err
	}
	week := civil.PeriodOf(civil.ByWeek, v.day())
	p := &weekLeaf{page: page{Title: "The week", Section: secToday}, Head: "Week of " + shortDay(week.First, v.today())}
	byDay := map[civil.Day][]*book.Row{}
	var over []*book.Row
	for _, r := range v.forRole(st.Rows) {
		switch {
		case r.Word.IsGap():
			over = append(over, r)
		case r.Due != nil && *r.Due >= week.First && *r.Due <= week.Last && r.Word != standing.Met:
			byDay[*r.Due] = append(byDay[*r.Due], r)
		}
	}
	for d := week.First; d <= week.Last; d++ {
		if err := p.add(v, longDay(d, v.today()), byDay[d]); err != nil {
			return err
		}
	}
	if err := p.add(v, "Run out before", over); err != nil {
		return err
	}
	for _, pl := range st.Plans {
		if pl.Day >= week.First && pl.Day <= week.Last && !pl.Done {
			p.Plans = append(p.Plans, v.planLine(pl))
		}
	}
	return weekSheet.show(v, 200, p)
}

// add puts a part with its rows on the page, if there are any.
func (p *weekLeaf) add(v *visit, head string, rows []*book.Row) error {
	if len(rows) == 0 {
		return nil
	}
	all := bunches(rows, false)
	if err := v.nameFirst(all, weekFew); err != nil {
		return err
	}
	part := weekPart{Day: head, Count: len(rows)}
	for _, b := range all {
		for _, r := range b[:min(weekFew, len(b))] {
			part.Lines = append(part.Lines, weekLine{What: r.Title, Who: r.SubjectName, Where: r.SubjectNote, Word: word(r.Word)})
		}
		if more := len(b) - weekFew; more > 0 {
			part.Lines = append(part.Lines, weekLine{What: b[0].Title, Who: "and " + number(more) + " more", Word: word(b[0].Word)})
		}
	}
	p.Days = append(p.Days, part)
	return nil
}
