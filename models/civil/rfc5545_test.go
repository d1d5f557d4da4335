package civil_test

import (
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/teambition/rrule-go"
	"pgregory.net/rapid"

	"lodebook/models/civil"
)

// steps are n days: the anchor, and the anchor plus each multiple of the duration.
func steps(from civil.Day, by civil.Duration, n int) []civil.Day {
	var days []civil.Day
	for i := range n {
		days = append(days, from.Add(civil.Duration{Years: i * by.Years, Months: i * by.Months, Weeks: i * by.Weeks, Days: i * by.Days}))
	}
	return days
}

// pick are the first n days from the anchor on that the rule takes.
func pick(from civil.Day, n int, takes func(civil.Day) bool) []civil.Day {
	var days []civil.Day
	for d := from; len(days) < n; d++ {
		if takes(d) {
			days = append(days, d)
		}
	}
	return days
}

func monthsSince(from, d civil.Day) int {
	y1, m1, _ := from.Date()
	y2, m2, _ := d.Date()
	return (y2-y1)*12 + int(m2-m1)
}

func dayOfMonth(d civil.Day) int {
	_, _, dom := d.Date()
	return dom
}

func fromMonthEnd(d civil.Day) int { return int(d - d.MonthEnd() - 1) } // -1 is the last day

func dayOfYear(d civil.Day) int { return int(d-civil.PeriodOf(civil.ByYear, d).First) + 1 }

func weeksSince(from, d civil.Day) int {
	return int(civil.PeriodOf(civil.ByWeek, d).First-civil.PeriodOf(civil.ByWeek, from).First) / 7
}

// The examples of RFC 5545 §3.8.5.3, each by the calendar functions of this package.
func TestRFC5545Examples(t *testing.T) {
	is := func(days ...time.Weekday) func(civil.Day) bool {
		return func(d civil.Day) bool { return slices.Contains(days, d.Weekday()) }
	}
	workday := is(time.Monday, time.Tuesday, time.Wednesday, time.Thursday, time.Friday)
	nth := func(d civil.Day, n int, of func(civil.Day) bool) bool { // the n-th such day of its month
		m := civil.PeriodOf(civil.ByMonth, d)
		var all []civil.Day
		for e := m.First; e <= m.Last; e++ {
			if of(e) {
				all = append(all, e)
			}
		}
		if n < 0 {
			n += len(all) + 1
		}
		return n >= 1 && n <= len(all) && all[n-1] == d
	}
	every := func(start, by string, n int) []civil.Day { return steps(day(t, start), duration(t, by), n) }
	these := func(start string, n int, takes func(from, d civil.Day) bool) []civil.Day {
		from := day(t, start)
		return pick(from, n, func(d civil.Day) bool { return takes(from, d) })
	}
	for _, c := range []struct {
		rule string
		got  []civil.Day
		want string
	}{
		{"DAILY;INTERVAL=10;COUNT=5", every("1997-09-02", "P10D", 5),
			"1997-09-02 1997-09-12 1997-09-22 1997-10-02 1997-10-12"},
		{"WEEKLY;COUNT=10", every("1997-09-02", "P1W", 10),
			"1997-09-02 1997-09-09 1997-09-16 1997-09-23 1997-09-30 1997-10-07 1997-10-14 1997-10-21 1997-10-28 1997-11-04"},
		{"WEEKLY;INTERVAL=2;WKST=SU", every("1997-09-02", "P2W", 12),
			"1997-09-02 1997-09-16 1997-09-30 1997-10-14 1997-10-28 1997-11-11 1997-11-25 1997-12-09 1997-12-23 1998-01-06 1998-01-20 1998-02-03"},
		{"WEEKLY;INTERVAL=2;BYDAY=MO,WE,FR", these("1997-09-01", 25, func(from, d civil.Day) bool {
			return weeksSince(from, d)%2 == 0 && is(time.Monday, time.Wednesday, time.Friday)(d)
		}), "1997-09-01 1997-09-03 1997-09-05 1997-09-15 1997-09-17 1997-09-19 1997-09-29 1997-10-01 1997-10-03 1997-10-13 " +
			"1997-10-15 1997-10-17 1997-10-27 1997-10-29 1997-10-31 1997-11-10 1997-11-12 1997-11-14 1997-11-24 1997-11-26 " +
			"1997-11-28 1997-12-08 1997-12-10 1997-12-12 1997-12-22"},
		{"MONTHLY;COUNT=10;BYDAY=1FR", these("1997-09-05", 10, func(_, d civil.Day) bool { return nth(d, 1, is(time.Friday)) }),
			"1997-09-05 1997-10-03 1997-11-07 1997-12-05 1998-01-02 1998-02-06 1998-03-06 1998-04-03 1998-05-01 1998-06-05"},
		{"MONTHLY;INTERVAL=2;COUNT=10;BYDAY=1SU,-1SU", these("1997-09-07", 10, func(from, d civil.Day) bool {
			return monthsSince(from, d)%2 == 0 && (nth(d, 1, is(time.Sunday)) || nth(d, -1, is(time.Sunday)))
		}), "1997-09-07 1997-09-28 1997-11-02 1997-11-30 1998-01-04 1998-01-25 1998-03-01 1998-03-29 1998-05-03 1998-05-31"},
		{"MONTHLY;COUNT=6;BYDAY=-2MO", these("1997-09-22", 6, func(_, d civil.Day) bool { return nth(d, -2, is(time.Monday)) }),
			"1997-09-22 1997-10-20 1997-11-17 1997-12-22 1998-01-19 1998-02-16"},
		{"MONTHLY;BYMONTHDAY=-3", these("1997-09-28", 6, func(_, d civil.Day) bool { return fromMonthEnd(d) == -3 }),
			"1997-09-28 1997-10-29 1997-11-28 1997-12-29 1998-01-29 1998-02-26"},
		{"MONTHLY;COUNT=10;BYMONTHDAY=2,15", these("1997-09-02", 10, func(_, d civil.Day) bool { return dayOfMonth(d) == 2 || dayOfMonth(d) == 15 }),
			"1997-09-02 1997-09-15 1997-10-02 1997-10-15 1997-11-02 1997-11-15 1997-12-02 1997-12-15 1998-01-02 1998-01-15"},
		{"MONTHLY;COUNT=10;BYMONTHDAY=1,-1", these("1997-09-30", 10, func(_, d civil.Day) bool { return dayOfMonth(d) == 1 || d == d.MonthEnd() }),
			"1997-09-30 1997-10-01 1997-10-31 1997-11-01 1997-11-30 1997-12-01 1997-12-31 1998-01-01 1998-01-31 1998-02-01"},
		{"MONTHLY;INTERVAL=18;COUNT=10;BYMONTHDAY=10..15", these("1997-09-10", 10, func(from, d civil.Day) bool {
			return monthsSince(from, d)%18 == 0 && dayOfMonth(d) >= 10 && dayOfMonth(d) <= 15
		}), "1997-09-10 1997-09-11 1997-09-12 1997-09-13 1997-09-14 1997-09-15 1999-03-10 1999-03-11 1999-03-12 1999-03-13"},
		{"MONTHLY;INTERVAL=2;BYDAY=TU", these("1997-09-02", 18, func(from, d civil.Day) bool {
			return monthsSince(from, d)%2 == 0 && d.Weekday() == time.Tuesday
		}), "1997-09-02 1997-09-09 1997-09-16 1997-09-23 1997-09-30 1997-11-04 1997-11-11 1997-11-18 1997-11-25 " +
			"1998-01-06 1998-01-13 1998-01-20 1998-01-27 1998-03-03 1998-03-10 1998-03-17 1998-03-24 1998-03-31"},
		{"YEARLY;COUNT=10;BYMONTH=6,7", these("1997-06-10", 10, func(_, d civil.Day) bool {
			_, m, dom := d.Date()
			return (m == 6 || m == 7) && dom == 10
		}), "1997-06-10 1997-07-10 1998-06-10 1998-07-10 1999-06-10 1999-07-10 2000-06-10 2000-07-10 2001-06-10 2001-07-10"},
		{"YEARLY;INTERVAL=3;COUNT=10;BYYEARDAY=1,100,200", these("1997-01-01", 10, func(from, d civil.Day) bool {
			return monthsSince(from, d)/12%3 == 0 && slices.Contains([]int{1, 100, 200}, dayOfYear(d))
		}), "1997-01-01 1997-04-10 1997-07-19 2000-01-01 2000-04-09 2000-07-18 2003-01-01 2003-04-10 2003-07-19 2006-01-01"},
		{"YEARLY;BYWEEKNO=20;BYDAY=MO", these("1997-05-12", 3, func(_, d civil.Day) bool {
			_, w := d.ISOWeek()
			return w == 20 && d == civil.PeriodOf(civil.ByWeek, d).First
		}), "1997-05-12 1998-05-11 1999-05-17"},
		{"YEARLY;BYMONTH=3;BYDAY=TH", these("1997-03-13", 11, func(_, d civil.Day) bool {
			_, m, _ := d.Date()
			return m == 3 && d.Weekday() == time.Thursday
		}), "1997-03-13 1997-03-20 1997-03-27 1998-03-05 1998-03-12 1998-03-19 1998-03-26 1999-03-04 1999-03-11 1999-03-18 1999-03-25"},
		{"MONTHLY;BYDAY=FR;BYMONTHDAY=13", these("1997-09-03", 5, func(_, d civil.Day) bool { return dayOfMonth(d) == 13 && d.Weekday() == time.Friday }),
			"1998-02-13 1998-03-13 1998-11-13 1999-08-13 2000-10-13"},
		{"MONTHLY;BYDAY=SA;BYMONTHDAY=7..13", these("1997-09-13", 10, func(_, d civil.Day) bool {
			return d.Weekday() == time.Saturday && dayOfMonth(d) >= 7 && dayOfMonth(d) <= 13
		}), "1997-09-13 1997-10-11 1997-11-08 1997-12-13 1998-01-10 1998-02-07 1998-03-07 1998-04-11 1998-05-09 1998-06-13"},
		{"YEARLY;INTERVAL=4;BYMONTH=11;BYDAY=TU;BYMONTHDAY=2..8", these("1996-11-05", 3, func(from, d civil.Day) bool {
			_, m, dom := d.Date()
			return monthsSince(from, d)%48 == 0 && m == 11 && d.Weekday() == time.Tuesday && dom >= 2 && dom <= 8
		}), "1996-11-05 2000-11-07 2004-11-02"},
		{"MONTHLY;COUNT=3;BYDAY=TU,WE,TH;BYSETPOS=3", these("1997-09-04", 3, func(_, d civil.Day) bool {
			return nth(d, 3, is(time.Tuesday, time.Wednesday, time.Thursday))
		}), "1997-09-04 1997-10-07 1997-11-06"},
		{"MONTHLY;BYDAY=MO..FR;BYSETPOS=-2", these("1997-09-29", 7, func(_, d civil.Day) bool { return nth(d, -2, workday) }),
			"1997-09-29 1997-10-30 1997-11-27 1997-12-30 1998-01-29 1998-02-26 1998-03-30"},
		{"WEEKLY;INTERVAL=2;COUNT=4;BYDAY=TU,SU;WKST=MO", these("1997-08-05", 4, func(from, d civil.Day) bool {
			return weeksSince(from, d)%2 == 0 && is(time.Tuesday, time.Sunday)(d)
		}), "1997-08-05 1997-08-10 1997-08-19 1997-08-24"},
	} {
		if got := written(c.got); got != c.want {
			t.Errorf("%s:\n got %s\nwant %s", c.rule, got, c.want)
		}
	}
}

func written(days []civil.Day) string {
	var all []string
	for _, d := range days {
		all = append(all, d.String())
	}
	return strings.Join(all, " ")
}

// A month that has no 30th: a recurrence rule skips it (RFC 5545 §3.8.5.3, MONTHLY;BYMONTHDAY=15,30
// from 2007-01-15 has no February 30), a duration stops at the month's last day.
func TestRulesSkipWhatDurationsClamp(t *testing.T) {
	rule, err := rrule.NewRRule(rrule.ROption{Freq: rrule.MONTHLY, Count: 3, Dtstart: time.Date(2007, 1, 30, 0, 0, 0, 0, time.UTC)})
	if err != nil {
		t.Fatal(err)
	}
	var theirs []civil.Day
	for _, at := range rule.All() {
		theirs = append(theirs, civil.DayOf(at, time.UTC))
	}
	if got := written(theirs); got != "2007-01-30 2007-03-30 2007-04-30" {
		t.Errorf("the rule gives %s", got)
	}
	if got := written(steps(day(t, "2007-01-30"), duration(t, "P1M"), 4)); got != "2007-01-30 2007-02-28 2007-03-30 2007-04-30" {
		t.Errorf("the durations give %s", got)
	}
}

// Where no day is clamped, steps of a duration are the recurrences of github.com/teambition/rrule-go.
func TestStepsAgainstRecurrenceRules(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n := rapid.IntRange(1, 18).Draw(t, "interval")
		kind := rapid.SampledFrom([]struct {
			freq rrule.Frequency
			by   civil.Duration
		}{
			{rrule.DAILY, civil.Duration{Days: n}}, {rrule.WEEKLY, civil.Duration{Weeks: n}},
			{rrule.MONTHLY, civil.Duration{Months: n}}, {rrule.YEARLY, civil.Duration{Years: n}},
		}).Draw(t, "kind")
		from := civil.Of(rapid.IntRange(1950, 2100).Draw(t, "year"), time.Month(rapid.IntRange(1, 12).Draw(t, "month")), rapid.IntRange(1, 28).Draw(t, "day"))
		y, m, dom := from.Date()
		rule, err := rrule.NewRRule(rrule.ROption{Freq: kind.freq, Interval: n, Count: 8, Dtstart: time.Date(y, m, dom, 0, 0, 0, 0, time.UTC)})
		if err != nil {
			t.Fatal(err)
		}
		var theirs []civil.Day
		for _, at := range rule.All() {
			theirs = append(theirs, civil.DayOf(at, time.UTC))
		}
		if ours := steps(from, kind.by, 8); written(ours) != written(theirs) {
			t.Fatalf("%v by %v:\n ours %s\ntheirs %s", from, kind.by, written(ours), written(theirs))
		}
	})
}

// ISO week periods agree with weekly recurrences that start on a Monday.
func TestWeeksAgainstRecurrenceRules(t *testing.T) {
	monday := day(t, "1996-12-30")
	rule, err := rrule.NewRRule(rrule.ROption{Freq: rrule.WEEKLY, Count: 1500, Dtstart: monday.Midnight(time.UTC)})
	if err != nil {
		t.Fatal(err)
	}
	p := civil.PeriodOf(civil.ByWeek, monday)
	for _, at := range rule.All() {
		if d := civil.DayOf(at, time.UTC); d != p.First {
			t.Fatalf("a week begins on %v, want %v", p.First, d)
		}
		p = p.Next(civil.ByWeek)
	}
}
