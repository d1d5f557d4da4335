package reach_test

import (
	"fmt"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/reach"
	"lodebook/models/standing"
)

// crew is a site with an item that needs people, and its roster.
type crew struct {
	*testing.T
	*standing.Engine
	p      *program.Program
	seq    int64
	duties []reach.Duty
}

func newCrew(t *testing.T, hours, cover string) *crew {
	t.Helper()
	src := `lodebook: 1
in_force_from: 2025-01-01
site: {code: S, time_zone: Europe/Lisbon}
calendar: {open: [mon, tue, wed, thu, fri], hours: ` + hours + `, closed: [2025-06-10]}
levels: [{code: L1}, {code: L2}, {code: L3}]
posts: [{code: MRSO}]
items:
  - {code: T1, title: T, asks: person, record: training/t1, every: P1Y, confers: L1}
  - {code: T2, title: T, asks: person, record: training/t2, every: P1Y, confers: L2, when: "subject.level != 'L1'"}
  - {code: T3, title: T, asks: person, record: training/t3, every: P1Y, confers: L3, when: "subject.level == 'L3'"}
  - {code: C, title: T, asks: site, cover: ` + cover + `}
`
	p, err := program.Parse([]byte(src))
	if err != nil {
		t.Fatal(err)
	}
	c := &crew{T: t, Engine: standing.New(), p: p}
	c.PutVersion("S", standing.Version{Line: c.line(), Number: 1, InForceFrom: *p.InForceFrom, Program: p})
	return c
}

func (c *crew) line() standing.Line {
	c.seq++
	return standing.Line{Seq: c.seq, ID: fmt.Sprint(c.seq)}
}

func (c *crew) day(s string) civil.Day {
	c.Helper()
	d, err := civil.ParseDay(s)
	if err != nil {
		c.Fatal(err)
	}
	return d
}

// staff puts a person on staff who has been assigned a level and trained for it on a day.
func (c *crew) staff(person, level, trained string) {
	c.Helper()
	s := standing.Subject{Asks: program.AsksPerson, Code: person}
	first := c.day("2025-01-01")
	c.PutStint("S", standing.Stint{Line: c.line(), Subject: s, First: &first})
	c.PutFact("S", standing.Fact{Line: c.line(), Subject: s, Code: "level", From: first, Value: level})
	if trained != "" {
		c.PutRecord(standing.Record{Line: c.line(), Site: "S", Subject: s, What: "training/t" + level[1:], Day: c.day(trained), Passed: true})
	}
}

func (c *crew) appoint(person, what, on string) {
	c.Helper()
	c.PutRecord(standing.Record{Line: c.line(), Site: "S", Subject: standing.Subject{Asks: program.AsksPerson, Code: person}, What: "appointment/" + what, Day: c.day(on), Passed: true})
}

func (c *crew) at(s string) time.Time {
	c.Helper()
	t, err := time.ParseInLocation("2006-01-02 15:04", s, c.p.Site.Location)
	if strings.Contains(s, "T") {
		t, err = time.Parse(time.RFC3339, s)
	}
	if err != nil {
		c.Fatal(err)
	}
	return t
}

func (c *crew) duty(person, from, to string, word ...string) {
	c.Helper()
	c.duties = append(c.duties, reach.Duty{Person: person, From: c.at(from), To: c.at(to), Word: strings.Join(append(word, "duty")[:1], "")})
}

// short wants what is uncovered from one day to another, in the site's local time: "from to there/needed".
func (c *crew) short(from, to string, want ...string) {
	c.Helper()
	r, err := reach.New(c.Engine, "S", standing.Always)
	if err != nil {
		c.Fatal(err)
	}
	loc := c.p.Site.Location
	got := []string{}
	for _, u := range r.Uncovered("C", c.duties, c.day(from).Midnight(loc), (c.day(to) + 1).Midnight(loc)) {
		got = append(got, fmt.Sprintf("%s %s %d/%d", u.From.In(loc).Format("01-02 15:04"), u.To.In(loc).Format("01-02 15:04"), u.There, u.Needed))
	}
	if !slices.Equal(got, want) {
		c.Errorf("uncovered %q, want %q", got, want)
	}
}

// 2 June 2025 is a Monday; 10 June is closed.
func TestUncoveredInOperatingHoursOnly(t *testing.T) {
	c := newCrew(t, `{mon-fri: "08:00-18:00"}`, "{level: L2}")
	c.staff("ann", "L2", "2025-01-10")
	c.duty("ann", "2025-06-05 06:00", "2025-06-05 12:00")
	c.duty("ann", "2025-06-06 08:00", "2025-06-06 18:00")
	c.short("2025-06-05", "2025-06-11", "06-05 12:00 06-05 18:00 0/1", "06-09 08:00 06-09 18:00 0/1", "06-11 08:00 06-11 18:00 0/1")
}

func TestUncoveredThroughMidnight(t *testing.T) {
	c := newCrew(t, `{mon-fri: "22:00-06:00"}`, "{level: L2, at_least: 2}")
	c.staff("ann", "L2", "2025-01-10")
	c.staff("bob", "L2", "2025-01-10")
	c.duty("ann", "2025-06-02 21:00", "2025-06-03 07:00")
	c.duty("bob", "2025-06-02 22:00", "2025-06-03 02:30")
	// Monday's hours reach into Tuesday, Friday's into Saturday.
	c.short("2025-06-03", "2025-06-03", "06-03 02:30 06-03 06:00 1/2", "06-03 22:00 06-04 00:00 0/2")
	c.short("2025-06-07", "2025-06-08", "06-07 00:00 06-07 06:00 0/2")
}

// By the IANA database Lisbon goes forward on 30 March 2025 at 01:00 UTC, and back on 26 October at 01:00 UTC: these days
// have 23 and 25 hours.
func TestUncoveredAtClockChanges(t *testing.T) {
	c := newCrew(t, "", "{level: L2, hours: all}")
	c.staff("ann", "L2", "2025-01-10")
	for _, s := range []struct{ from, to, day string }{
		{"2025-03-30T00:00:00Z", "2025-03-30T23:00:00Z", "2025-03-30"},
		{"2025-10-25T23:00:00Z", "2025-10-27T00:00:00Z", "2025-10-26"},
	} {
		c.duty("ann", s.from, s.to)
		c.short(s.day, s.day)
	}
	c.duties = nil
	for _, s := range []struct {
		day, from, to string
		hours         int
	}{{"2025-03-30", "2025-03-30T00:00:00Z", "2025-03-30T23:00:00Z", 23}, {"2025-10-26", "2025-10-25T23:00:00Z", "2025-10-27T00:00:00Z", 25}} {
		r, err := reach.New(c.Engine, "S", standing.Always)
		if err != nil {
			t.Fatal(err)
		}
		d, loc := c.day(s.day), c.p.Site.Location
		got := r.Uncovered("C", nil, d.Midnight(loc), (d + 1).Midnight(loc))
		if len(got) != 1 || !got[0].From.Equal(c.at(s.from)) || !got[0].To.Equal(c.at(s.to)) || got[0].To.Sub(got[0].From) != time.Duration(s.hours)*time.Hour {
			t.Errorf("uncovered on %s: %v, want %s to %s", s.day, got, s.from, s.to)
		}
	}
}

func TestUncoveredCountsAPersonOnce(t *testing.T) {
	c := newCrew(t, `{mon-fri: "08:00-18:00"}`, "{level: L2, at_least: 2}")
	c.staff("ann", "L2", "2025-01-10")
	c.staff("bob", "L3", "")
	c.duty("ann", "2025-06-02 08:00", "2025-06-02 14:00")
	c.duty("ann", "2025-06-02 10:00", "2025-06-02 18:00", "late")
	c.short("2025-06-02", "2025-06-02", "06-02 08:00 06-02 18:00 1/2")
	// A higher level counts; on-call does not.
	c.PutRecord(standing.Record{Line: c.line(), Site: "S", Subject: standing.Subject{Asks: program.AsksPerson, Code: "bob"}, What: "training/t3", Day: c.day("2025-03-01"), Passed: true})
	c.PutRecord(standing.Record{Line: c.line(), Site: "S", Subject: standing.Subject{Asks: program.AsksPerson, Code: "bob"}, What: "training/t2", Day: c.day("2025-03-01"), Passed: true})
	c.duty("bob", "2025-06-02 08:00", "2025-06-02 12:00")
	c.duty("bob", "2025-06-02 12:00", "2025-06-02 18:00", "on-call")
	c.short("2025-06-02", "2025-06-02", "06-02 12:00 06-02 18:00 1/2")
}

func TestUncoveredWhereTrainingLapsesInMidWeek(t *testing.T) {
	c := newCrew(t, `{mon-fri: "00:00-24:00"}`, "{level: L2}")
	c.staff("ann", "L2", "2024-06-04") // good through 4 June 2025, a Wednesday
	c.duty("ann", "2025-06-03 12:00", "2025-06-05 12:00")
	c.short("2025-06-04", "2025-06-05", "06-05 00:00 06-06 00:00 0/1")
	c.PutRecord(standing.Record{Line: c.line(), Site: "S", Subject: standing.Subject{Asks: program.AsksPerson, Code: "ann"}, What: "training/t2", Day: c.day("2025-06-05"), Passed: true})
	c.short("2025-06-04", "2025-06-05", "06-05 12:00 06-06 00:00 0/1")
}

func TestUncoveredWhereSomebodyIsAwayOrHasLeft(t *testing.T) {
	c := newCrew(t, `{mon-fri: "08:00-18:00"}`, "{level: L1}")
	c.staff("ann", "L1", "2025-01-10")
	ann := standing.Subject{Asks: program.AsksPerson, Code: "ann"}
	for day := 2; day <= 6; day++ {
		c.duty("ann", fmt.Sprintf("2025-06-%02d 08:00", day), fmt.Sprintf("2025-06-%02d 18:00", day))
	}
	c.short("2025-06-02", "2025-06-06")
	to := c.day("2025-06-04")
	c.PutExcusal("S", standing.Excusal{Line: c.line(), Subject: ann, From: c.day("2025-06-03"), To: &to})
	c.short("2025-06-02", "2025-06-06", "06-03 08:00 06-03 18:00 0/1", "06-04 08:00 06-04 18:00 0/1")
	first, last := c.day("2025-01-01"), c.day("2025-06-05")
	c.PutStint("S", standing.Stint{Line: c.line(), Subject: ann, First: &first, Last: &last})
	c.short("2025-06-05", "2025-06-06", "06-06 08:00 06-06 18:00 0/1")
}

func TestUncoveredPost(t *testing.T) {
	c := newCrew(t, `{mon-fri: "08:00-18:00"}`, "{post: MRSO}")
	c.staff("ann", "L1", "")
	c.staff("bob", "L1", "")
	c.staff("cyd", "L1", "")
	c.appoint("ann", "MRSO", "2025-02-01")
	c.appoint("bob", "MRSO/deputy", "2025-06-03")
	for _, person := range []string{"ann", "cyd"} {
		c.duty(person, "2025-06-02 08:00", "2025-06-02 12:00")
	}
	c.duty("bob", "2025-06-02 12:00", "2025-06-02 18:00", "on-call")
	c.duty("bob", "2025-06-03 08:00", "2025-06-03 18:00", "on-call")
	c.short("2025-06-02", "2025-06-03", "06-02 12:00 06-02 18:00 0/1")
	c.duty("cyd", "2025-06-04 08:00", "2025-06-04 18:00")
	c.short("2025-06-04", "2025-06-04", "06-04 08:00 06-04 18:00 0/1")
	post := c.Profile("S", standing.Subject{Asks: program.AsksPost, Code: "MRSO"}, c.day("2025-06-04"), standing.Always)
	if !slices.Equal(post.Holders, []string{"ann"}) || !slices.Equal(post.Deputies, []string{"bob"}) {
		t.Errorf("the post has holders %v and deputies %v", post.Holders, post.Deputies)
	}
	if posts := c.Profile("S", standing.Subject{Asks: program.AsksPerson, Code: "bob"}, c.day("2025-06-04"), standing.Always).Posts; len(posts) > 0 {
		t.Errorf("a deputy is said to hold %v", posts)
	}
}

// clock is the oracle: it asks, minute by minute, who is there.
type clock struct {
	*crew
	item   *program.Item
	able   map[string]bool // by person and day
	pauses []standing.Excusal
}

// opens tells, by looking at every minute, when the hours that begin on a day do so and when they end.
func (m *clock) opens(on civil.Day) [][2]time.Time {
	if m.item.Cadence.Cover.AllDay || len(m.p.Hours) == 0 {
		return [][2]time.Time{{on.Midnight(m.p.Site.Location), (on + 1).Midnight(m.p.Site.Location)}}
	}
	if !m.p.Calendar.Operates(on) {
		return nil
	}
	loc := m.p.Site.Location
	shown := func(t time.Time) int {
		return int(civil.DayOf(t, loc)-on)*1440 + t.In(loc).Hour()*60 + t.In(loc).Minute()
	}
	var out [][2]time.Time
	for _, h := range m.p.Hours {
		if h.Weekday != on.Weekday() {
			continue
		}
		var from, to time.Time
		for t := on.Midnight(loc); t.Before((on + 3).Midnight(loc)); t = t.Add(time.Minute) {
			if from.IsZero() && shown(t) >= h.From {
				from = t
			}
			if shown(t) <= h.To && (shown(t) == h.To || shown(t.Add(time.Minute)) > h.To) {
				to = t
				if shown(t) != h.To {
					to = t.Add(time.Minute) // the time is skipped
				}
			}
			if h.To%1440 == 0 && shown(t) == h.To {
				break // a day begins once
			}
		}
		if from.Before(to) {
			out = append(out, [2]time.Time{from, to})
		}
	}
	return out
}

func (m *clock) there(t time.Time) int {
	on := civil.DayOf(t, m.p.Site.Location)
	seen := map[string]bool{}
	for _, d := range m.duties {
		if !t.Before(d.From) && t.Before(d.To) && m.item.Cadence.Cover.Counts(d.Word) && m.counts(d.Person, on) {
			seen[d.Person] = true
		}
	}
	return len(seen)
}

// counts tells whether the person counts on the day, by what the evaluator says of the day.
func (m *clock) counts(person string, on civil.Day) bool {
	key := person + on.String()
	able, known := m.able[key]
	if known {
		return able
	}
	if level := m.item.Cadence.Cover.Level; level != "" {
		held, _ := m.Held("S", person, on, standing.Always)
		able = held >= level // L1, L2, L3
	} else {
		post := m.Profile("S", standing.Subject{Asks: program.AsksPost, Code: "MRSO"}, on, standing.Always)
		able = slices.Contains(post.Holders, person) || slices.Contains(post.Deputies, person)
	}
	m.able[key] = able && !m.away(person, on)
	return m.able[key]
}

// away tells whether the person is not on staff, where nothing is asked of them, or a pause covers the day. The word of an
// obligation does not tell: one that failed in the pause is failed.
func (m *clock) away(person string, on civil.Day) bool {
	s := standing.Subject{Asks: program.AsksPerson, Code: person}
	list, err := m.Evaluate("S", standing.Query{On: on, Subject: &s, Item: "T1", KnownAt: standing.Always})
	if err != nil {
		m.Fatal(err)
	}
	return len(list) == 0 || slices.ContainsFunc(m.pauses, func(x standing.Excusal) bool {
		return x.Subject == s && x.From <= on && on <= *x.To
	})
}

func TestUncoveredIsWhatTheMinutesSay(t *testing.T) {
	found := 0
	rapid.Check(t, func(rt *rapid.T) {
		d := &draws{T: rt, Rand: rand.New(rand.NewPCG(rapid.Uint64().Draw(rt, "seed"), 2))}
		hours := []string{`{mon-sun: "07:15-19:45"}`, `{mon-sun: "22:30-01:30"}`, `{sat-sun: ["00:00-01:00", "02:00-24:00"], mon: "01:15-23:00"}`, ""}[d.n(4)]
		cover := []string{"{level: L2}", "{level: L1, at_least: 2}", "{post: MRSO}", "{level: L1, hours: all}", "{post: MRSO, hours: all, duties: [duty]}", "{level: L2, duties: [duty, on-call]}"}[d.n(6)]
		c := newCrew(t, hours, cover)
		c.p.Calendar.Open = civil.EveryDay().Open
		first := c.day([]string{"2025-03-28", "2025-10-24", "2025-06-02"}[d.n(3)])
		when := func() time.Time {
			return first.Midnight(c.p.Site.Location).Add(time.Duration(d.n(4*96)) * 15 * time.Minute)
		}
		var pauses []standing.Excusal
		for _, person := range []string{"ann", "bob", "cyd"} {
			s := standing.Subject{Asks: program.AsksPerson, Code: person}
			c.staff(person, []string{"L1", "L2"}[d.n(2)], "")
			for range 1 + d.n(4) {
				on := first + civil.Day(d.n(5)) - []civil.Day{0, 365}[d.n(2)]
				c.PutRecord(standing.Record{Line: c.line(), Site: "S", Subject: s, What: []string{"training/t1", "training/t2"}[d.n(2)], Day: on, Passed: d.chance(85)})
			}
			for range d.n(3) {
				r := standing.Record{Line: c.line(), Site: "S", Subject: s, What: []string{"appointment/MRSO", "appointment/MRSO/deputy"}[d.n(2)], Day: first + civil.Day(d.n(4)), Passed: d.chance(80)}
				if d.chance(40) {
					r.Until = ptr(r.Day + civil.Day(d.n(3)))
				}
				c.PutRecord(r)
			}
			if d.chance(30) {
				pauses = append(pauses, standing.Excusal{Line: c.line(), Subject: s, From: first + civil.Day(d.n(3)), To: ptr(first + 3)})
				c.PutExcusal("S", pauses[len(pauses)-1])
			}
			for range d.n(6) {
				from := when()
				c.duties = append(c.duties, reach.Duty{Person: person, From: from, To: from.Add(time.Duration(1+d.n(4*48)) * 15 * time.Minute), Word: []string{"duty", "duty", "on-call"}[d.n(3)]})
			}
		}
		item, _ := c.p.Item("C")
		m := &clock{c, item, map[string]bool{}, pauses}
		from, to := first.Midnight(c.p.Site.Location), (first + 4).Midnight(c.p.Site.Location)
		asked := map[int64]bool{}
		for on := first - 2; on <= first+4; on++ {
			for _, h := range m.opens(on) {
				for t := h[0]; t.Before(h[1]); t = t.Add(time.Minute) {
					asked[t.Unix()] = true
				}
			}
		}
		r, err := reach.New(c.Engine, "S", standing.Always)
		if err != nil {
			rt.Fatal(err)
		}
		spans := r.Uncovered("C", c.duties, from, to)
		found += len(spans)
		for i := 1; i < len(spans); i++ {
			if a, b := spans[i-1], spans[i]; b.From.Before(a.To) || a.To.Equal(b.From) && a.There == b.There {
				rt.Fatalf("%v and %v overlap or are one", a, b)
			}
		}
		for t := from; t.Before(to); t = t.Add(5 * time.Minute) {
			want, got := -1, -1
			if n := m.there(t); asked[t.Unix()] && n < item.Cadence.Cover.AtLeast {
				want = n
			}
			for _, u := range spans {
				if !t.Before(u.From) && t.Before(u.To) {
					got = u.There
				}
			}
			if got != want {
				rt.Fatalf("%s, %s, at %v: %d there by the spans %v, %d by the minutes", hours, cover, t.In(c.p.Site.Location), got, spans, want)
			}
		}
	})
	if found == 0 {
		t.Error("nothing was ever uncovered")
	}
}
