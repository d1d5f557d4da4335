package scenario

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"reflect"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// todays are forty days to stand on: month ends, a leap day, the turn of a year, every weekday, the
// site's own holidays, and the days of clock changes.
func todays() []civil.Day {
	days := []civil.Day{
		civil.Of(2028, 2, 29), civil.Of(2028, 3, 1), civil.Of(2029, 2, 28), civil.Of(2026, 12, 31), civil.Of(2027, 1, 1),
		civil.Of(2026, 12, 25), civil.Of(2026, 7, 10), civil.Of(2026, 7, 13), civil.Of(2026, 3, 29), civil.Of(2026, 10, 25),
		civil.Of(2026, 3, 31), civil.Of(2026, 4, 1), civil.Of(2027, 1, 31), civil.Of(2027, 5, 2),
	}
	for i := range civil.Day(26) {
		days = append(days, civil.Of(2026, 9, 1)+i*23)
	}
	return days
}

// table reads one of the site's tables: the cells of each row by column.
func (s Site) table(t *testing.T, name string) []map[string]string {
	t.Helper()
	i := slices.IndexFunc(s.Files, func(f File) bool { return f.Table == name })
	all, err := csv.NewReader(bytes.NewReader(s.Files[i].CSV)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var rows []map[string]string
	for _, cells := range all[1:] {
		r := map[string]string{}
		for j, c := range cells {
			r[all[0][j]] = c
		}
		rows = append(rows, r)
	}
	return rows
}

func parsed(t *testing.T, s Site) *program.Program {
	t.Helper()
	p, err := program.Parse(s.Program)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// dayOf reads a day or an instant of a table.
func dayOf(t *testing.T, p *program.Program, text string) civil.Day {
	t.Helper()
	if d, err := civil.ParseDay(text); err == nil {
		return d
	}
	at, err := time.Parse(time.RFC3339, text)
	if err != nil {
		t.Fatalf("%q is neither a day nor an instant", text)
	}
	return civil.DayOf(at, p.Site.Location)
}

// presence gives the spans of each person and fixture, as the tables have them.
func presence(t *testing.T, s Site) map[string][]civil.Period {
	t.Helper()
	out := map[string][]civil.Period{}
	for _, of := range []struct{ table, first, last string }{{"people", "joined", "left"}, {"fixtures", "since", "until"}} {
		for _, r := range s.table(t, of.table) {
			p := civil.Period{First: civil.FirstDay, Last: civil.LastDay}
			var err error
			if r[of.first] == "" {
				continue // a change of facts within a span
			}
			if p.First, err = civil.ParseDay(r[of.first]); err != nil {
				t.Fatal(err)
			}
			if r[of.last] != "" {
				if p.Last, err = civil.ParseDay(r[of.last]); err != nil {
					t.Fatal(err)
				}
			}
			out[r["code"]] = append(out[r["code"]], p)
		}
	}
	return out
}

func TestSameDaySameBytes(t *testing.T) {
	for _, day := range todays()[:3] {
		if a, b := Make(day), Make(day); !reflect.DeepEqual(a, b) {
			t.Errorf("%s: two sites of one day differ", day)
		}
	}
	if a, b := Make(todays()[0]), Make(todays()[1]); bytes.Equal(a.Files[2].CSV, b.Files[2].CSV) {
		t.Error("the history of two days is the same: it is not dated up to today")
	}
}

// TestEveryToday holds the tables against the program and the calendar, whatever day it is.
func TestEveryToday(t *testing.T) {
	for _, today := range todays() {
		s := Make(today)
		p := parsed(t, s)
		if w := p.Warnings(); len(w) > 0 {
			t.Errorf("%s: the program warns: %s", today, strings.Join(w, "; "))
		}
		site := checked{t, s, p, today, presence(t, s), map[string]bool{}}
		for _, it := range p.Items {
			for _, what := range it.Records {
				site.asked[what] = true
			}
		}
		site.records()
		site.otherTables()
		site.plansAndSheets()
	}
}

// checked is a site with what its tables are held against.
type checked struct {
	*testing.T
	Site
	p        *program.Program
	today    civil.Day
	presence map[string][]civil.Period
	asked    map[string]bool
}

func (c checked) fail(format string, args ...any) {
	c.Helper()
	c.Errorf("%s: %s", c.today, fmt.Sprintf(format, args...))
}

func (c checked) records() {
	rows := c.table(c.T, "records")
	if n := len(rows); n < 5000 || n > 9000 {
		c.fail("%d records", n)
	}
	seen := map[string]bool{}
	var last civil.Day
	for _, r := range rows {
		day := dayOf(c.T, c.p, r["on"])
		if !c.asked[r["record"]] && !strings.HasPrefix(r["record"], "appointment/") {
			c.fail("no item asks for %s", r["record"])
		}
		if !c.there(r["subject"], day) {
			c.fail("%s of %s on %s, when it was not there", r["record"], r["subject"], day)
		}
		if day >= c.today {
			c.fail("%s of %s lies on %s", r["record"], r["subject"], day)
		}
		if !c.p.Calendar.Operates(day) && day >= *c.p.InForceFrom {
			c.fail("%s of %s on %s, when the site is closed", r["record"], r["subject"], day)
		}
		if day < last {
			c.fail("%s of %s on %s stands behind %s", r["record"], r["subject"], day, last)
		}
		last = day
		key := r["record"] + " " + r["subject"] + " " + r["on"] + r["result"]
		if seen[key] {
			c.fail("%s twice", key)
		}
		seen[key] = true
		if r["until"] != "" && dayOf(c.T, c.p, r["until"]) < day {
			c.fail("%s of %s ends before it begins", r["record"], r["subject"])
		}
	}
}

// there tells whether a subject exists, and of people and fixtures, whether it was there.
func (c checked) there(ref string, day civil.Day) bool {
	kind, code, ok := strings.Cut(ref, ":")
	if !ok {
		return slices.ContainsFunc(c.presence[ref], func(p civil.Period) bool { return p.First <= day && day <= p.Last })
	}
	known := map[string]func(string) bool{
		"crew":     func(s string) bool { _, ok := c.p.Crew(s); return ok },
		"zone":     func(s string) bool { _, ok := c.p.Zone(s); return ok },
		"post":     func(s string) bool { _, ok := c.p.Post(s); return ok },
		"document": func(s string) bool { _, ok := c.p.Document(s); return ok },
		"site":     func(s string) bool { return s == c.Code },
	}
	return known[kind] != nil && known[kind](code)
}

func (c checked) otherTables() {
	for _, r := range c.table(c.T, "events") {
		day := dayOf(c.T, c.p, r["on"])
		if _, ok := c.p.Event(r["event"]); !ok || !c.there(r["subject"], day) || day >= c.today {
			c.fail("event %v", r)
		}
	}
	for _, r := range c.table(c.T, "excusals") {
		from, to := dayOf(c.T, c.p, r["from"]), dayOf(c.T, c.p, r["to"])
		if _, ok := c.p.Item(r["item"]); !ok || !c.there(r["subject"], from) || from > c.today || to <= c.today || r["reason"] == "" {
			c.fail("excusal %v", r)
		}
	}
	for _, r := range c.table(c.T, "pauses") {
		from, to := dayOf(c.T, c.p, r["from"]), dayOf(c.T, c.p, r["to"])
		if !c.there(r["subject"], from) || from >= c.today || to < from {
			c.fail("pause %v", r)
		}
	}
}

func (c checked) plansAndSheets() {
	week := civil.PeriodOf(civil.ByWeek, c.today)
	if len(c.Plans) < 3 {
		c.fail("%d plans", len(c.Plans))
	}
	for _, p := range c.Plans {
		if _, ok := c.p.Crew(p.Crew); !ok || !c.asked[p.Record] || p.Day < c.today || p.Day > week.Last+7 || !c.p.Calendar.Operates(p.Day) {
			c.fail("plan %v", p)
		}
	}
	for _, e := range c.Sheets {
		sheet, ok := c.p.SheetFor(e.Record)
		if !ok || !c.asked[e.Record] || !c.there(e.Fixture, e.On) || e.On >= c.today {
			c.fail("sheet %v", e)
			continue
		}
		if _, faults := sheet.Judge(e.Values); len(faults) > 0 {
			c.fail("%s of %s: %v", e.Record, e.Fixture, faults)
		}
		for _, who := range []string{"facilities", "safety-officer"} {
			if !slices.Contains(c.p.Recorders(sheet), who) {
				c.fail("%s may not record %s", who, e.Record)
			}
		}
	}
}

// A detector drifts: its distances, month by month, fall without failing.
func TestDrift(t *testing.T) {
	var cm []float64
	for _, e := range Make(civil.Of(2026, 12, 1)).Sheets {
		if e.Fixture != driftDetector {
			continue
		}
		v, err := strconv.ParseFloat(e.Values["distance_cm"], 64)
		if err != nil {
			t.Fatal(err)
		}
		cm = append(cm, v)
	}
	if n := len(cm); n < 8 || cm[n-1] > cm[0]-10 || slices.Max(cm[n-4:]) >= slices.Min(cm[:4]) {
		t.Errorf("no drift in %v", cm)
	}
}

// What the site is like, as the issue asks for it.
func TestSize(t *testing.T) {
	today := civil.Of(2026, 12, 1)
	s := Make(today)
	p := parsed(t, s)
	here := map[string]int{}
	for code, spans := range presence(t, s) {
		for _, sp := range spans {
			if sp.First <= today && today <= sp.Last {
				here[code[:1]]++
			}
		}
	}
	people := here["S"] + here["X"]
	fixtures := 0
	for k, n := range here {
		if k != "S" && k != "X" {
			fixtures += n
		}
	}
	if people < 58 || people > 64 || fixtures < 38 || fixtures > 44 {
		t.Errorf("%d people and %d fixtures", people, fixtures)
	}
	if first := *p.InForceFrom; first != civil.Of(2025, 6, 1) {
		t.Errorf("in force from %s: not eighteen months", first)
	}
	names := map[string]string{}
	for _, r := range s.table(t, "people") {
		if other, ok := names[r["name"]]; ok && r["name"] != "" && other != r["code"] {
			t.Errorf("%s and %s are both called %s", other, r["code"], r["name"])
		}
		names[r["name"]] = r["code"]
	}
	roles := map[string]bool{}
	for _, a := range s.Accounts {
		roles[a.Role] = true
		if a.Person != "" && len(presence(t, s)[a.Person]) == 0 {
			t.Errorf("account %s is nobody's", a.Name)
		}
	}
	for _, r := range []string{"administrator", "safety-officer", "facilities", "member", "reader"} {
		if !roles[r] {
			t.Errorf("no account for the role %s", r)
		}
	}
}
