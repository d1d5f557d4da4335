package reach_test

import (
	"strings"
	"testing"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/reach"
	"lodebook/models/standing"
)

// why are the reasons at an instant, with their due days; as One and the ribbon both say them.
func (s *site) why(zone, at string) string {
	s.Helper()
	r, err := reach.New(s.l.engine(), "S", standing.Always)
	if err != nil {
		s.Fatal(err)
	}
	t := s.instant(at)
	one, ribbon := full(r.One("ann", zone, t).Reasons), full(spanAt(r.Ribbon("ann", zone), t).Reasons)
	if one != ribbon {
		s.Errorf("at %s One says %q and the ribbon %q", at, one, ribbon)
	}
	return one
}

func (s *site) wantWhy(zone, at, want string) {
	s.Helper()
	if got := s.why(zone, at); got != want {
		s.Errorf("at %s: %q, want %q", at, got, want)
	}
}

// By hand: within one stint another begins, and with it the time that a newcomer has. The item is awaited before and
// after, but is due on another day.
func TestADueDayMovesWithTheStart(t *testing.T) {
	it := training(yearly, "IV")
	it.First = civil.Duration{Days: 60}
	s := newSite(t, "UTC", it)
	s.l.stints = append(s.l.stints, standing.Stint{Line: s.line(), Subject: ann, First: ptr(civil.Of(2024, 1, 11))})
	s.wantWhy("IV", "2024-01-10T23:59:59Z", "T awaited due 2024-03-01")
	s.wantWhy("IV", "2024-01-11T00:00:00Z", "T awaited due 2024-03-11")
}

// Reasons stand in the order of the program of the day, also where a later version has another.
func TestReasonsGoByTheProgramOfTheDay(t *testing.T) {
	a, b := training(yearly, "IV"), training(yearly, "IV")
	a.Code, b.Code = "A", "B"
	s := newSite(t, "UTC", b, a)
	later := *s.l.versions[0].Program
	later.Items = []program.Item{a, b}
	s.l.versions = append(s.l.versions, standing.Version{Line: s.line(), Number: 2, InForceFrom: civil.Of(2024, 3, 1), Program: &later})
	s.wantWhy("IV", "2024-02-29T12:00:00Z", "B missing due 2024-01-01, A missing due 2024-01-01")
	s.wantWhy("IV", "2024-03-01T00:00:00Z", "A missing due 2024-01-01, B missing due 2024-01-01")
}

// Samoa went from 29 to 31 December 2011 (IANA time zone database, Pacific/Apia): a pause on the day between takes
// nothing away, and neither does an entitlement end there.
func TestAPauseOnADayThatNeverWas(t *testing.T) {
	s := newSite(t, "Pacific/Apia", training(program.Cadence{Rule: program.Once}, "IV"))
	s.l.versions[0].InForceFrom = civil.Of(2011, 1, 1)
	s.l.stints[0].First = ptr(civil.Of(2011, 1, 1))
	s.l.rights[0].From = s.instant("2011-02-01T00:00:00Z")
	s.record("2011-12-01", true)
	s.want("IV", "2011-12-02T10:00:00Z to for good")
	s.excusal("", "2011-12-30", "2011-12-30", false)
	s.want("IV", "2011-12-02T10:00:00Z to for good")
	r, err := reach.New(s.l.engine(), "S", standing.Always)
	if err != nil {
		t.Fatal(err)
	}
	if a := r.One("ann", "IV", s.instant("2011-12-20T12:00:00Z")); !a.Entitled || a.Until != nil {
		t.Errorf("entitled %v until %v", a.Entitled, a.Until)
	}
}

// A limit keeps a zone shut after the pause too, so it is said in the pause.
func TestALimitIsSaidInAPause(t *testing.T) {
	s := newSite(t, "UTC", training(yearly, "III", "IV"))
	s.record("2024-02-01", true, "III")
	s.excusal("", "2024-03-01", "2024-03-10", false)
	s.excusal("T", "2024-03-05", "2024-03-20", true)
	s.wantWhy("IV", "2024-03-04T12:00:00Z", "paused")
	s.wantWhy("IV", "2024-03-06T12:00:00Z", "paused, T limited")
	s.wantWhy("IV", "2024-03-15T12:00:00Z", "T limited")
}

// At lists whoever is on staff on the day or has a right that nobody has ended, and nobody else, by code.
func TestWhoIsListed(t *testing.T) {
	s := newSite(t, "UTC", training(program.Cadence{Rule: program.Once}, "IV"))
	e := s.l.engine()
	put := func(person, left string, right bool, to string) {
		sub := standing.Subject{Asks: program.AsksPerson, Code: person}
		stint := standing.Stint{Line: s.line(), Subject: sub, First: ptr(civil.Of(2024, 1, 1))}
		if left != "" {
			day, err := civil.ParseDay(left)
			if err != nil {
				t.Fatal(err)
			}
			stint.Last = &day
		}
		e.PutStint("S", stint)
		if right {
			r := standing.Right{Line: s.line(), Person: person, Zone: "IV", From: s.instant("2024-01-02T00:00:00Z")}
			if to != "" {
				r.To = ptr(s.instant(to))
			}
			e.PutRight("S", r)
		}
	}
	put("zoe", "", false, "")
	put("bob", "2024-03-31", true, "")                     // left, and the right was never withdrawn
	put("cyd", "2024-03-31", true, "2024-03-31T12:00:00Z") // left, and it was
	put("dan", "2024-03-31", false, "")                    // left without one
	put("eve", "2024-04-01", true, "2024-03-31T12:00:00Z") // the last day
	r, err := reach.New(e, "S", standing.Always)
	if err != nil {
		t.Fatal(err)
	}
	list := func(at string) string {
		var out []string
		for _, a := range r.At("IV", s.instant(at)) {
			out = append(out, a.Person+": "+full(a.Reasons))
		}
		return strings.Join(out, "; ")
	}
	missing := "T missing due 2024-01-01"
	for at, want := range map[string]string{
		"2024-04-01T23:59:59Z": "ann: " + missing + "; bob: not-on-staff, right-ended; eve: right-ended, " + missing + "; zoe: no-right, " + missing,
		"2024-04-02T00:00:00Z": "ann: " + missing + "; bob: not-on-staff, right-ended; zoe: no-right, " + missing,
	} {
		if got := list(at); got != want {
			t.Errorf("at %s: %q, want %q", at, got, want)
		}
	}
	if _, err := reach.New(e, "T", standing.Always); err == nil {
		t.Error("a site that is not in the book is answered about")
	}
}
