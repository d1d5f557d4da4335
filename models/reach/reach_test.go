package reach_test

import (
	"fmt"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/reach"
	"lodebook/models/standing"
)

// site is a site for cases worked by hand: the person ann is on staff since 2024-01-01 and has a right in zone IV from
// then on.
type site struct {
	*testing.T
	l   lines
	seq int64
}

func newSite(t *testing.T, zone string, items ...program.Item) *site {
	t.Helper()
	loc, err := time.LoadLocation(zone)
	if err != nil {
		t.Fatal(err)
	}
	s := &site{T: t}
	p := &program.Program{Site: program.Site{Code: "S", Location: loc}, Calendar: civil.EveryDay(), Zones: []program.Zone{{Code: "III", Restricted: true}, {Code: "IV", Restricted: true}}, Items: items}
	s.l.versions = append(s.l.versions, standing.Version{Line: s.line(), Number: 1, InForceFrom: civil.Of(2020, 1, 1), Program: p})
	s.l.stints = append(s.l.stints, standing.Stint{Line: s.line(), Subject: ann, First: ptr(civil.Of(2024, 1, 1))})
	s.right("IV", civil.Of(2024, 1, 1).Midnight(loc), nil)
	return s
}

func (s *site) line() standing.Line {
	s.seq++
	return standing.Line{Seq: s.seq, ID: fmt.Sprintf("e%d", s.seq)}
}

func (s *site) right(zone string, from time.Time, to *time.Time) {
	s.l.rights = append(s.l.rights, standing.Right{Line: s.line(), Person: "ann", Zone: zone, From: from, To: to})
}

func (s *site) instant(text string) time.Time {
	s.Helper()
	t, err := time.Parse(time.RFC3339, text)
	if err != nil {
		s.Fatal(err)
	}
	return t.UTC()
}

// record is of training/a: on a day, or at an instant.
func (s *site) record(on string, passed bool, limit ...string) {
	s.Helper()
	r := standing.Record{Line: s.line(), Site: "S", Subject: ann, What: "training/a", Passed: passed, Limit: limit}
	if day, err := civil.ParseDay(on); err == nil {
		r.Day = day
	} else {
		r.Time = ptr(s.instant(on))
		r.Day = civil.DayOf(*r.Time, time.UTC)
	}
	s.l.records = append(s.l.records, r)
}

func (s *site) event(on string) {
	s.Helper()
	e := standing.Event{Line: s.line(), Subject: ann, Code: "change"}
	if day, err := civil.ParseDay(on); err == nil {
		e.Day = day
	} else {
		e.Time = ptr(s.instant(on))
		e.Day = civil.DayOf(*e.Time, time.UTC)
	}
	s.l.events = append(s.l.events, e)
}

func (s *site) excusal(item, from, to string, opens bool) {
	s.Helper()
	a, err := civil.ParseDay(from)
	if err != nil {
		s.Fatal(err)
	}
	b, err := civil.ParseDay(to)
	if err != nil {
		s.Fatal(err)
	}
	s.l.excusals = append(s.l.excusals, standing.Excusal{Line: s.line(), Subject: ann, Item: item, From: a, To: &b, Opens: opens})
}

// in are the times in which ann is entitled to the zone, in UTC.
func (s *site) in(zone string) string {
	s.Helper()
	r, err := reach.New(s.l.engine(), "S", standing.Always)
	if err != nil {
		s.Fatal(err)
	}
	var out []string
	for _, x := range r.Ribbon("ann", zone) {
		if x.Entitled {
			to := "for good"
			if !x.To.IsZero() {
				to = x.To.Format(time.RFC3339)
			}
			out = append(out, x.From.Format(time.RFC3339)+" to "+to)
		}
	}
	return strings.Join(out, ", ")
}

func (s *site) want(zone, want string) {
	s.Helper()
	if got := s.in(zone); got != want {
		s.Errorf("entitled to %s: %q, want %q", zone, got, want)
	}
}

func training(c program.Cadence, guards ...string) program.Item {
	return program.Item{Code: "T", Asks: program.AsksPerson, Records: []string{"training/a"}, Cadence: c, Guards: guards, Notice: program.Notice{Days: 3}}
}

var yearly = program.Cadence{Rule: program.Every, Every: civil.Duration{Years: 1}}

// By hand: a pass with only a day counts from the next midnight; the year that follows 29 February 2024 ends with
// 28 February 2025, and the entitlement with the midnight after it.
func TestADayAndALeapYear(t *testing.T) {
	s := newSite(t, "UTC", training(yearly, "IV"))
	s.want("IV", "")
	s.record("2024-02-29", true)
	s.want("IV", "2024-03-01T00:00:00Z to 2025-03-01T00:00:00Z")
	s.want("III", "") // no right, and nothing guards it
}

// By hand: a pass at half past nine counts from then; a failure with only a day closes that day from its first instant,
// also before the pass of that day; a failure with a time from that time.
func TestTimesOfADay(t *testing.T) {
	s := newSite(t, "UTC", training(yearly, "IV"))
	s.record("2024-05-06T09:30:00Z", true)
	s.want("IV", "2024-05-06T09:30:00Z to 2025-05-07T00:00:00Z")
	s.record("2024-06-01T17:00:00Z", false)
	s.want("IV", "2024-05-06T09:30:00Z to 2024-06-01T17:00:00Z")
	s.record("2024-06-01T18:00:00Z", true)
	s.want("IV", "2024-05-06T09:30:00Z to 2024-06-01T17:00:00Z, 2024-06-01T18:00:00Z to 2025-06-02T00:00:00Z")
	s.record("2024-07-01", false)
	s.record("2024-07-01", true)
	s.want("IV", "2024-05-06T09:30:00Z to 2024-06-01T17:00:00Z, 2024-06-01T18:00:00Z to 2024-07-01T00:00:00Z, 2024-07-02T00:00:00Z to 2025-07-02T00:00:00Z")
}

// The clocks of the Azores went forward on 31 March 2024, from 00:00 (UTC-1) to 01:00 (UTC+0), and back on 27 October
// 2024, from 01:00 to 00:00, both at 01:00 UTC: the rule EU of the IANA time zone database, held by the test itself
// against Go's copy. The day of the change has no midnight and begins at 01:00 local; in autumn it has two, and begins at
// the earlier.
func TestDaysOfTwentyThreeAndTwentyFiveHours(t *testing.T) {
	azores, err := time.LoadLocation("Atlantic/Azores")
	if err != nil {
		t.Fatal(err)
	}
	forward, back := time.Date(2024, 3, 31, 1, 0, 0, 0, time.UTC), time.Date(2024, 10, 27, 1, 0, 0, 0, time.UTC)
	if begin, end := forward.In(azores).ZoneBounds(); !begin.Equal(forward) || !end.Equal(back) {
		t.Fatalf("the database has %v and %v", begin, end)
	}
	for _, c := range []struct {
		day   string
		hours time.Duration
	}{{"2024-03-31", 23}, {"2024-10-27", 25}} {
		d, err := civil.ParseDay(c.day)
		if err != nil {
			t.Fatal(err)
		}
		s := newSite(t, "Atlantic/Azores", training(program.Cadence{Rule: program.Every, Every: civil.Duration{Days: 1}}, "IV"))
		s.record((d - 1).String(), true) // counts from the first instant of the day, and through it: good to the day itself
		from, to := d.Midnight(azores).UTC(), (d + 1).Midnight(azores).UTC()
		if to.Sub(from) != c.hours*time.Hour {
			t.Errorf("%s has %v", c.day, to.Sub(from))
		}
		s.want("IV", from.Format(time.RFC3339)+" to "+to.Format(time.RFC3339))
	}
}

// By hand: a change that somebody reports at noon closes their zones from noon on; a screening on the same day with only
// a day does not answer it, since it may have come before; one with a later time does, from that time.
func TestAReportedChangeClosesAtOnce(t *testing.T) {
	after := training(program.Cadence{Rule: program.After, After: []string{"change"}, Within: civil.Duration{Days: 2}}, "IV")
	after.Code = "AFTER"
	s := newSite(t, "UTC", training(program.Cadence{Rule: program.Once}, "IV"), after)
	s.record("2024-02-01", true)
	s.want("IV", "2024-02-02T00:00:00Z to for good")
	s.event("2024-03-05T12:00:00Z")
	s.want("IV", "2024-02-02T00:00:00Z to 2024-03-05T12:00:00Z")
	s.record("2024-03-05", true)
	s.want("IV", "2024-02-02T00:00:00Z to 2024-03-05T12:00:00Z")
	s.record("2024-03-05T15:00:00Z", true)
	s.want("IV", "2024-02-02T00:00:00Z to 2024-03-05T12:00:00Z, 2024-03-05T15:00:00Z to for good")
}

// An item that has only after lets nobody in before there was an event: it asks nothing of them.
func TestAnAfterItemAloneLetsNobodyIn(t *testing.T) {
	after := training(program.Cadence{Rule: program.After, After: []string{"change"}, Within: civil.Duration{Days: 2}}, "IV")
	s := newSite(t, "UTC", after)
	s.record("2024-02-01", true)
	s.want("IV", "")
}

func TestALimitOpensOnlyItsZones(t *testing.T) {
	s := newSite(t, "UTC", training(yearly, "III", "IV"))
	s.right("III", s.instant("2024-01-01T00:00:00Z"), nil)
	s.record("2024-02-01", true, "III")
	s.want("III", "2024-02-02T00:00:00Z to 2025-02-02T00:00:00Z")
	s.want("IV", "")
	s.record("2024-02-10T10:00:00Z", true)
	s.want("IV", "2024-02-10T10:00:00Z to 2025-02-11T00:00:00Z")
}

// A notice, an awaited first time and a pause open nothing; an excusal does where it says so, and not after a failure.
func TestWhatOpensNothing(t *testing.T) {
	it := training(yearly, "IV")
	it.First = civil.Duration{Days: 60}
	s := newSite(t, "UTC", it)
	s.want("IV", "")
	s.excusal("T", "2024-01-10", "2024-01-12", false)
	s.want("IV", "")
	s.excusal("T", "2024-01-20", "2024-01-21", true)
	s.want("IV", "2024-01-20T00:00:00Z to 2024-01-22T00:00:00Z")
	s.record("2024-01-20T12:00:00Z", false)
	s.want("IV", "2024-01-20T00:00:00Z to 2024-01-20T12:00:00Z")
	s.record("2024-02-01", true)
	s.excusal("", "2024-03-01", "2024-03-10", false)
	s.want("IV", "2024-01-20T00:00:00Z to 2024-01-20T12:00:00Z, 2024-02-02T00:00:00Z to 2024-03-01T00:00:00Z, 2024-03-11T00:00:00Z to 2025-02-02T00:00:00Z")
}

// A right ends with the stint in which it was granted, and does not come back with the next one.
func TestARightEndsWithItsStint(t *testing.T) {
	s := newSite(t, "UTC", training(program.Cadence{Rule: program.Once}, "IV"))
	s.record("2024-02-01", true)
	s.l.stints[0].Last = ptr(civil.Of(2024, 6, 30))
	s.l.stints = append(s.l.stints, standing.Stint{Line: s.line(), Subject: ann, First: ptr(civil.Of(2024, 9, 1))})
	s.want("IV", "2024-02-02T00:00:00Z to 2024-07-01T00:00:00Z")
	s.right("IV", s.instant("2024-10-01T08:00:00Z"), ptr(s.instant("2024-10-02T08:00:00Z")))
	s.want("IV", "2024-02-02T00:00:00Z to 2024-07-01T00:00:00Z, 2024-10-01T08:00:00Z to 2024-10-02T08:00:00Z")
}

// TestNobodyWithoutAnAnswer is the promise of the whole: whoever is entitled has, at that instant, an item that guards the
// zone, that is asked of them, and that a record which had passed by then answers, or an excusal that opens it.
func TestNobodyWithoutAnAnswer(t *testing.T) {
	entitled := 0
	rapid.Check(t, func(t *rapid.T) {
		d := newDraws(t)
		l := d.book().known(standing.Always)
		r, err := reach.New(l.engine(), "S", standing.Always)
		if err != nil {
			t.Fatal(err)
		}
		for _, s := range r.Ribbon("ann", "IV") {
			if !s.Entitled {
				continue
			}
			entitled++
			if s.From.IsZero() {
				t.Fatalf("entitled from the beginning of time\n%s", l)
			}
			v := l.version(l.day(s.From))
			answered := false
			for _, it := range v.Program.Items {
				for _, rec := range l.answering(it, v.Program.Site.Location) {
					had := rec.Time != nil && !rec.Time.After(s.From) || rec.Time == nil && rec.Day < l.day(s.From)
					answered = answered || rec.Passed && had
				}
				for _, x := range l.excusals {
					answered = answered || x.Opens && x.Item == it.Code && x.From <= l.day(s.From) && l.day(s.From) <= *x.To
				}
			}
			if !answered {
				t.Fatalf("entitled from %v on, by nothing\n%s", s.From, l)
			}
		}
	})
	if entitled < 5 {
		t.Errorf("only %d times anybody was entitled", entitled)
	}
}
