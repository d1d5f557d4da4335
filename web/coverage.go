package web

import (
	"cmp"
	"slices"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// coverLine is a time in which somebody is missing.
type coverLine struct {
	When, Long string
	Title, URL string
	Who, There string
	Past       bool
}

// dutyLine is one turn of the roster.
type dutyLine struct {
	Name, URL  string
	When, Duty string
	EntryURL   string
}

// dutyDay is the roster of a day.
type dutyDay struct {
	Day   string
	Lines []dutyLine
}

type coverageLeaf struct {
	page
	Say             string
	Now, Past       []coverLine
	PastMore        int
	Items           []faultLine
	Week            string
	Before, After   string
	Days            []dutyDay
	ExportURL       string
	DutyURL, Import string
}

var coverageSheet = leafOf[coverageLeaf]("coverage")

// The page shows what is uncovered in the four weeks from today, and of the four before it the newest.
const (
	coverDays = 28
	coverPast = 12
)

// coveragePage tells when in the next four weeks nobody is there who must be, and who is on duty in a week.
func coveragePage(v *visit) error {
	loc, today := v.site.Location, v.today()
	now := v.b.Now()
	q := book.CoverQuery{Site: v.site.Code, From: (today - coverDays).Midnight(loc), To: (today + coverDays).Midnight(loc)}
	x, err := v.b.Coverage(v.ctx(), v.actor, q)
	if err != nil {
		return err
	}
	switch v.query("format") {
	case "csv":
		return v.csv("coverage", book.CoverColumns, func(yield func([]string) bool) {
			for _, u := range x.Rows {
				if !yield(u.Cells()) {
					return
				}
			}
		})
	case "json":
		out := make([]book.UncoveredJSON, len(x.Rows))
		for i, u := range x.Rows {
			out[i] = u.JSON()
		}
		v.c.JSON(200, out)
		return nil
	}
	p := &coverageLeaf{page: page{Title: "Coverage", Section: secCoverage}, ExportURL: with(v.url("coverage"), "format", "csv")}
	coming := slices.DeleteFunc(slices.Clone(x.Rows), func(u book.Uncovered) bool { return !u.To.After(now) })
	p.Say = coverSay(x, coming, now)
	for _, u := range x.Rows {
		if l := v.coverLine(u, now); l.Past {
			p.Past = append(p.Past, l)
		} else {
			p.Now = append(p.Now, l)
		}
	}
	slices.Reverse(p.Past)
	p.PastMore = max(0, len(p.Past)-coverPast)
	p.Past = p.Past[:min(len(p.Past), coverPast)]
	for _, i := range x.Items {
		words := upperFirst(i.Words) + ", " + i.When + ". No roster is on record."
		if !i.To.IsZero() {
			words = upperFirst(i.Words) + ", " + i.When + ". Reckoned to " + moment(i.To, loc, today) + "."
		}
		p.Items = append(p.Items, faultLine{i.Title, words})
	}
	if v.may(book.KeepRoster) {
		p.DutyURL = v.url("duty")
	}
	if v.may(book.ImportTables) {
		p.Import = v.url("import")
	}
	return v.showWeek(p)
}

// showWeek adds the roster of the week that the address names, or of this one.
func (v *visit) showWeek(p *coverageLeaf) error {
	first := v.today()
	if d, err := civil.ParseDay(v.query("week")); err == nil && d > civil.FirstDay+7 && d < civil.LastDay-14 {
		first = d
	}
	for first.Weekday() != time.Monday {
		first--
	}
	p.Week = longDay(first, v.today()) + " to " + longDay(first+6, v.today())
	p.Before, p.After = with(v.url("coverage"), "week", (first-7).String()), with(v.url("coverage"), "week", (first+7).String())
	loc := v.site.Location
	list, err := v.b.Roster(v.ctx(), v.actor, book.DutyQuery{Site: v.site.Code, From: first.Midnight(loc), To: (first + 7).Midnight(loc)})
	if err != nil {
		return err
	}
	for d := first; d < first+7; d++ {
		day := dutyDay{Day: longDay(d, v.today())}
		for _, x := range list {
			if on := max(civil.DayOf(x.From, loc), first); on == d {
				day.Lines = append(day.Lines, v.dutyLine(x, d))
			}
		}
		p.Days = append(p.Days, day)
	}
	return coverageSheet.show(v, 200, p)
}

func (v *visit) dutyLine(x book.DutyLine, on civil.Day) dutyLine {
	l := dutyLine{Name: x.Name, When: v.span(x.From, x.To, on), Duty: x.Duty, EntryURL: v.entryURL("duty", x.Entry, false)}
	l.URL = v.subjectURL(standing.Subject{Asks: program.AsksPerson, Code: x.Person})
	return l
}

// span writes a time of a day: the clock alone where it begins or ends on the day.
func (v *visit) span(from, to time.Time, on civil.Day) string {
	loc := v.site.Location
	at := func(t time.Time) string {
		clock := t.In(loc).Format("15:04")
		if d := civil.DayOf(t, loc); d != on {
			return shortDay(d, v.today()) + ", " + clock
		}
		return clock
	}
	return at(from) + " to " + at(to)
}

func (v *visit) coverLine(u book.Uncovered, now time.Time) coverLine {
	on := civil.DayOf(u.From, v.site.Location)
	l := coverLine{When: longDay(on, v.today()), Long: v.span(u.From, u.To, on), Title: orCode(u.Title, u.Item), URL: v.url("checklist", u.Item), Who: u.Words, Past: !u.To.After(now)}
	l.There = "nobody of " + number(u.Needed) + " there"
	if u.There > 0 {
		l.There = number(u.There) + " of " + number(u.Needed) + " there"
	} else if u.Needed == 1 {
		l.There = "nobody there"
	}
	return l
}

func coverSay(x book.Coverage, coming []book.Uncovered, now time.Time) string {
	if len(x.Items) == 0 {
		return "No item of the checklist asks for people on duty."
	}
	if !slices.ContainsFunc(x.Items, func(i book.CoverItem) bool { return !i.To.IsZero() }) {
		return "No roster is on record, so it cannot be told who is there."
	}
	if len(coming) == 0 {
		return "In the next four weeks everybody is there who must be."
	}
	var long time.Duration
	for _, u := range coming {
		from := u.From
		if from.Before(now) {
			from = now
		}
		long += u.To.Sub(from)
	}
	s := upperFirst(count(len(coming), "time", "times")) + " in the next four weeks, " + hours(long) + " in all, somebody is missing who must be there."
	if first := slices.MinFunc(coming, func(a, b book.Uncovered) int { return cmp.Or(a.From.Compare(b.From), cmp.Compare(a.Item, b.Item)) }); !first.From.After(now) {
		return s + " One of them is now."
	}
	return s
}

// hours writes a length of time.
func hours(d time.Duration) string {
	h, m := int(d.Hours()), int(d.Minutes())%60
	switch {
	case h == 0:
		return count(m, "minute", "minutes")
	case m == 0 || h >= 10:
		return count(h, "hour", "hours")
	}
	return count(h, "hour", "hours") + " " + count(m, "minute", "minutes")
}

// coverOf are the times in which an item is uncovered on a day, for the page of gaps.
func (v *visit) coverOf(day civil.Day) (map[string][]string, error) {
	out := map[string][]string{}
	if !v.may(book.SeeSite) {
		return out, nil
	}
	loc := v.site.Location
	x, err := v.b.Coverage(v.ctx(), v.actor, book.CoverQuery{Site: v.site.Code, From: day.Midnight(loc), To: (day + 1).Midnight(loc)})
	for _, u := range x.Rows {
		out[u.Item] = append(out[u.Item], v.span(u.From, u.To, day)+", "+v.coverLine(u, u.From).There)
	}
	return out, err
}

// dutiesOf are the turns of a person in the two weeks from today.
func (v *visit) dutiesOf(person string) ([]dutyLine, error) {
	loc, today := v.site.Location, v.today()
	list, err := v.b.Roster(v.ctx(), v.actor, book.DutyQuery{Site: v.site.Code, Person: person, From: today.Midnight(loc), To: (today + 14).Midnight(loc)})
	var out []dutyLine
	for _, x := range list {
		on := civil.DayOf(x.From, loc)
		out = append(out, dutyLine{Name: longDay(on, today), When: v.span(x.From, x.To, on), Duty: x.Duty, EntryURL: v.entryURL("duty", x.Entry, false)})
	}
	return out, err
}
