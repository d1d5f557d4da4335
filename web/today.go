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
	When     *asOf
	GapsURL  string
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
	st, err := v.b.Standings(v.ctx(), v.actor, book.StandingQuery{Site: v.site.Code, On: v.on})
	if err != nil {
		return v.todayWithoutPerson(err)
	}
	p := &todayLeaf{page: page{Title: "Today", Section: secToday, AsOf: v.asOf()}, Head: longDay(v.day(), v.today()), WeekURL: v.url("week"), GapsURL: v.url("gaps")}
	p.When = p.AsOf
	rows := v.forRole(st.Rows)
	bad, low, told := sorted(rows)
	p.Out, p.Low, p.Told = v.grouped(bad, false), v.grouped(low, true), v.grouped(told, true)
	if len(p.Low) > lowShown {
		p.LowMore = len(p.Low) - lowShown
		p.Low = p.Low[:lowShown]
	}
	p.Say = v.todaySay(bad, low, told)
	if p.Week, err = v.week(rows); err != nil {
		return err
	}
	if v.acts(book.RecordDone) {
		p.Do = []act{{"Record a session", v.url("session")}, {"Record a drill", v.url("drill")}}
	}
	if err := v.todayRest(p, st); err != nil {
		return err
	}
	return todaySheet.show(v, 200, p)
}

// todayRest adds the checks that a member may record, and the first steps of an empty site.
func (v *visit) todayRest(p *todayLeaf, st book.Standings) error {
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
	if err := v.todayRest(p, book.Standings{}); err != nil {
		return err
	}
	return todaySheet.show(v, 200, p)
}

// forRole leaves facilities what they answer for; everybody else sees all that they may.
func (v *visit) forRole(rows []book.Row) []book.Row {
	if v.actor.Role != book.Facilities {
		return rows
	}
	var out []book.Row
	for _, r := range rows {
		if r.Subject.Asks == program.AsksFixture || r.Owner == string(book.Facilities) || r.Subject.Code == v.actor.Person && r.Subject.Asks == program.AsksPerson {
			out = append(out, r)
		}
	}
	return out
}

// sorted parts rows into gaps (longest first), what is closing (soonest first) and data faults.
func sorted(rows []book.Row) (bad, low, told []book.Row) {
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
	day := func(d *civil.Day) civil.Day {
		if d == nil {
			return civil.LastDay
		}
		return *d
	}
	slices.SortStableFunc(bad, func(a, b book.Row) int { return cmp.Compare(day(a.Since), day(b.Since)) })
	slices.SortStableFunc(low, func(a, b book.Row) int { return cmp.Compare(day(a.Due), day(b.Due)) })
	return bad, low, told
}

// grouped gathers people in the same standing of one item into a line. Things stand alone, but for
// those of a kind that are due alike, where all is set.
func (v *visit) grouped(rows []book.Row, all bool) []todayLine {
	type key struct {
		item string
		word standing.Word
	}
	byItem := map[key][]book.Row{}
	var order []key
	for _, r := range rows {
		k := key{r.Item, r.Word}
		switch {
		case r.Subject.Asks == program.AsksPerson:
		case all && r.Due != nil:
			k.item += " " + r.Due.String()
		default:
			k.item += " " + r.Subject.Code
		}
		if byItem[k] == nil {
			order = append(order, k)
		}
		byItem[k] = append(byItem[k], r)
	}
	out := make([]todayLine, 0, len(order))
	for _, k := range order {
		out = append(out, v.todayLine(byItem[k]))
	}
	return out
}

const namesShown = 4

func (v *visit) todayLine(rows []book.Row) todayLine {
	one := v.rowLine(rows[0])
	l := todayLine{Disc: one.Disc, Word: one.Word, What: one.What, WhatURL: one.WhatURL, Cadence: one.Cadence, Who: one.Who, WhoURL: one.WhoURL, Note: one.Note, When: one.When, Do: one.Do}
	if len(rows) == 1 {
		return l
	}
	l.Who, l.WhoURL = askedOf(len(rows), rows[0].Subject.Asks), l.WhatURL
	var names []string
	for i, r := range rows {
		if i == namesShown {
			names = append(names, number(len(rows)-namesShown)+" more")
			break
		}
		names = append(names, r.SubjectName)
	}
	l.Note = and(names)
	l.Do = v.manyActs(rows)
	if rows[0].Word == standing.DataFault {
		l.When = ""
	}
	return l
}

// manyActs records many people in one form.
func (v *visit) manyActs(rows []book.Row) []act {
	if v.elsewhen() || !rows[0].Asked || len(rows[0].Records) == 0 {
		return nil
	}
	what := rows[0].Records[0]
	kind, _, _ := strings.Cut(what, "/")
	if rows[0].Subject.Asks == program.AsksFixture && v.may(book.FillSheet) {
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

func (v *visit) todaySay(bad, low, told []book.Row) []string {
	whose := ""
	if !v.may(book.SeeSite) {
		whose = " of yours"
	}
	var out []string
	switch {
	case len(bad) == 0 && len(low) == 0 && len(told) == 0:
		return []string{"Nothing" + whose + " has run out and nothing is running low."}
	case len(bad) == 0:
		out = append(out, "Nothing"+whose+" has run out.")
	default:
		out = append(out, upperFirst(count(len(bad), "thing"+whose+" has run out or failed.", "things"+whose+" have run out or failed.")))
	}
	if len(low) > 0 {
		out = append(out, upperFirst(count(len(low), "is running low.", "are running low.")))
	}
	if len(told) > 0 {
		out = append(out, upperFirst(count(len(told), "cannot be told for want of a fact.", "cannot be told for want of a fact.")))
	}
	return out
}

// week is the strip of the seven days from Monday.
func (v *visit) week(rows []book.Row) ([]weekDay, error) {
	first := civil.PeriodOf(civil.ByWeek, v.day()).First
	out := make([]weekDay, 7)
	for i := range out {
		d := first + civil.Day(i)
		out[i] = weekDay{Number: d.Format("2"), Name: d.Format("Mon"), Now: d == v.day()}
		if v.site.Program != nil && !v.site.Program.Calendar.Operates(d) {
			out[i].Lines = append(out[i].Lines, "closed")
		}
	}
	if v.may(book.SeeSite) {
		x, err := v.b.Drills(v.ctx(), v.actor, v.site.Code, v.on)
		if err != nil {
			return nil, err
		}
		for _, p := range x.Plans {
			if i := int(p.Day - first); i >= 0 && i < 7 {
				line := strings.TrimSpace(p.Title + ", " + strings.ToLower(orCode(p.CrewName, "everybody")) + " " + p.At)
				if p.Done {
					line = "✓ " + line
				}
				out[i].Lines = append(out[i].Lines, line)
			}
		}
	}
	dueInWeek(out, first, rows)
	return out, nil
}

const weekLines = 4

// dueInWeek adds what falls due on each day, the same item once with its number.
func dueInWeek(out []weekDay, first civil.Day, rows []book.Row) {
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
func (v *visit) firstSteps(st book.Standings) []stepLine {
	steps := []stepLine{
		{len(st.Site.Program.Items) > 0, "Choose the checklist", "Adopt a group of the starter at a time, then put your own numbers in.", v.url("groups")},
		{st.Site.People > 0, "Bring in the people", "A table of people with their levels, crews and the day they joined.", with(v.url("import"), "table", "people")},
		{st.Site.Fixtures > 0, "Bring in the fixtures", "Doors, vents, monitors, detectors, magnets: what gets inspected.", with(v.url("import"), "table", "fixtures")},
		{anyProved(st), "Bring in the history", "Trainings, screenings and inspections of the last years, as CSV or XLSX.", with(v.url("import"), "table", "records")},
	}
	for _, s := range steps {
		if !s.Done {
			return steps
		}
	}
	return nil
}

func anyProved(st book.Standings) bool {
	return slices.ContainsFunc(st.Rows, func(r book.Row) bool { return r.Record != "" })
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
	Lines []weekLine
}

type weekLine struct{ What, Who, Where, Word string }

var weekSheet = leafOf[weekLeaf]("week")

func weekPage(v *visit) error {
	st, err := v.b.Standings(v.ctx(), v.actor, book.StandingQuery{Site: v.site.Code, On: v.on})
	if err != nil {
		return err
	}
	week := civil.PeriodOf(civil.ByWeek, v.day())
	p := &weekLeaf{page: page{Title: "The week", Section: secToday}, Head: "Week of " + shortDay(week.First, v.today())}
	byDay := map[civil.Day][]weekLine{}
	var over []weekLine
	for _, r := range v.forRole(st.Rows) {
		l := weekLine{What: r.Title, Who: r.SubjectName, Where: r.SubjectNote, Word: word(r.Word)}
		switch {
		case r.Word.IsGap():
			over = append(over, l)
		case r.Due != nil && *r.Due >= week.First && *r.Due <= week.Last && r.Word != standing.Met:
			byDay[*r.Due] = append(byDay[*r.Due], l)
		}
	}
	for d := week.First; d <= week.Last; d++ {
		if len(byDay[d]) > 0 {
			p.Days = append(p.Days, weekPart{longDay(d, v.today()), byDay[d]})
		}
	}
	if len(over) > 0 {
		p.Days = append(p.Days, weekPart{"Run out before", over})
	}
	if v.may(book.SeeSite) {
		x, err := v.b.Drills(v.ctx(), v.actor, v.site.Code, v.on)
		if err != nil {
			return err
		}
		for _, pl := range x.Plans {
			if pl.Day >= week.First && pl.Day <= week.Last && !pl.Done {
				p.Plans = append(p.Plans, v.planLine(pl))
			}
		}
	}
	return weekSheet.show(v, 200, p)
}
