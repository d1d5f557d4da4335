package standing_test

import (
	"testing"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// The cases of this file and of those beside it are worked by hand from design section 3. The
// arithmetic stands beside each.

func TestEveryWithoutARecord(t *testing.T) {
	b := newBook(t, itemT(yearly(t)))
	b.want("2024-12-31", "none") // not on staff yet
	// due = start + P0D = 2025-01-01; due - 30 days has gone by: closing to the due day
	b.want("2025-01-01", "closing due 2025-01-01")
	b.want("2025-01-02", "missing due 2025-01-01 since 2025-01-02")

	b = newBook(t, itemT(yearly(t), first(t, "P1M"), notice(t, "P10D"), grace(t, "P5D")))
	// due = 2025-01-01 + P1M = 2025-02-01; the notice begins 10 days before, 2025-01-22
	b.want("2025-01-21", "awaited due 2025-02-01")
	b.want("2025-01-22", "closing due 2025-02-01")
	b.want("2025-02-01", "closing due 2025-02-01")
	b.want("2025-02-02", "closing due 2025-02-01 in grace") // to 2025-02-01 + P5D = 2025-02-06
	b.want("2025-02-06", "closing due 2025-02-01 in grace")
	b.want("2025-02-07", "missing due 2025-02-01 since 2025-02-07")
}

func TestEveryWithOneRecord(t *testing.T) {
	b := newBook(t, itemT(yearly(t), grace(t, "P14D")))
	r := b.record("2025-03-10")
	// due = 2025-03-10 + P1Y = 2026-03-10; minus 30 days = 2026-02-08; plus P14D = 2026-03-24
	b.want("2025-03-09", "missing due 2025-01-01 since 2025-01-16") // the record is not there yet; 2025-01-01 + P14D
	b.want("2025-03-10", "met due 2026-03-10")
	b.want("2026-02-07", "met due 2026-03-10")
	b.want("2026-02-08", "closing due 2026-03-10")
	b.want("2026-03-10", "closing due 2026-03-10")
	b.want("2026-03-11", "closing due 2026-03-10 in grace")
	b.want("2026-03-24", "closing due 2026-03-10 in grace")
	b.want("2026-03-25", "lapsed due 2026-03-10 since 2026-03-25")
	b.wantRecord("2026-03-25", r.ID)
}

func TestEveryCountsRecordsFromBeforeTheStart(t *testing.T) {
	b := newBook(t, itemT(yearly(t)))
	b.record("2024-06-01")
	b.want("2025-01-01", "met due 2025-06-01")
	b.wantStart("2025-01-01", "2025-01-01")
	// Due before the start: the gap is as old as the obligation, not as the due day.
	b = newBook(t, itemT(yearly(t)))
	b.record("2023-06-01")
	b.want("2025-01-10", "lapsed due 2024-06-01 since 2025-01-01")
}

func TestEveryToMonthEnd(t *testing.T) {
	c := yearly(t)
	c.MonthEnd = true
	for _, x := range []struct{ record, due string }{
		{"2025-11-12", "2026-11-30"}, // 2026-11-12, its month's end
		{"2025-01-31", "2026-01-31"}, // is the end already
		{"2024-02-29", "2025-02-28"}, // 29 February and a year is 2025-02-28
		{"2023-02-28", "2024-02-29"}, // 2024-02-28, its month's end in a leap year
	} {
		b := newBook(t, itemT(c))
		b.record(x.record)
		b.wantDue("2025-12-01", x.due)
	}
}

func TestEveryOn29February(t *testing.T) {
	b := newBook(t, itemT(yearly(t)))
	b.record("2024-02-29")
	b.want("2025-02-28", "closing due 2025-02-28") // 2025 has no 29 February: the month's last day
	b.want("2025-03-01", "lapsed due 2025-02-28 since 2025-03-01")
	b.record("2025-02-28")
	b.want("2026-02-28", "closing due 2026-02-28") // the 29th does not come back
	four := newBook(t, itemT(program.Cadence{Rule: program.Every, Every: dur(t, "P4Y")}))
	four.record("2024-02-29")
	four.want("2026-01-01", "met due 2028-02-29")
}

func TestEveryDurationsAddMonthsThenDays(t *testing.T) {
	b := newBook(t, itemT(program.Cadence{Rule: program.Every, Every: dur(t, "P1M1D")}))
	b.record("2025-01-31")
	// 2025-01-31 + P1M = 2025-02-28, then a day: 2025-03-01 (not 2025-02-01 + P1M)
	b.want("2025-02-28", "closing due 2025-03-01")
}

func TestEveryEarly(t *testing.T) {
	c := yearly(t)
	c.Early = ptr(dur(t, "P60D"))
	// After 2025-03-10 due is 2026-03-10; minus P60D is 2026-01-09.
	for _, x := range []struct{ second, due string }{
		{"2026-01-08", "2027-01-08"}, // a day too early: from the day itself
		{"2026-01-09", "2027-03-10"}, // the first day of the window: the anniversary is kept
		{"2026-02-01", "2027-03-10"},
		{"2026-03-10", "2027-03-10"}, // the due day itself
		{"2026-03-11", "2027-03-11"}, // too late for the anniversary
	} {
		b := newBook(t, itemT(c))
		b.record("2025-03-10")
		b.record(x.second)
		b.want("2026-04-01", "met due "+x.due)
	}
}

func TestEveryEarlyToMonthEnd(t *testing.T) {
	c := yearly(t)
	c.Early, c.MonthEnd = ptr(dur(t, "P60D")), true
	b := newBook(t, itemT(c))
	b.record("2026-02-03") // 2027-02-03, month's end 2027-02-28
	b.record("2027-01-20") // early: 2027-02-28 + P1Y = 2028-02-28, moved to the month's end all the same
	b.want("2027-06-01", "met due 2028-02-29")
}

func TestEveryKeepsTheLaterDueDay(t *testing.T) {
	c := yearly(t)
	c.Early = ptr(dur(t, "P60D"))
	b := newBook(t, itemT(c))
	b.record("2025-03-10")
	second := b.record("2026-02-01") // early: due 2027-03-10
	b.record("2026-03-01")           // not early for 2027-03-10; 2027-03-01 is before it, so it stays
	b.want("2026-06-01", "met due 2027-03-10")
	b.wantRecord("2026-06-01", second.ID)
}

func TestEveryUntil(t *testing.T) {
	c := yearly(t)
	c.Early = ptr(dur(t, "P60D"))
	b := newBook(t, itemT(c))
	b.record("2025-03-10", "until 2027-01-01") // computed 2026-03-10 is the earlier
	b.want("2025-04-01", "met due 2026-03-10")
	b.record("2025-06-01", "until 2025-12-31") // earlier than 2026-06-01, and moves the due day back
	b.want("2025-07-01", "met due 2025-12-31")
	b.record("2025-12-20") // early for 2025-12-31: the anniversary of that
	b.want("2026-01-15", "met due 2026-12-31")
	b.record("2026-02-01", "until 2026-02-01") // good for one day
	b.want("2026-02-01", "closing due 2026-02-01")
	b.want("2026-02-02", "lapsed due 2026-02-01 since 2026-02-02")
}

func TestEveryUntilIsNotMovedToMonthEnd(t *testing.T) {
	c := yearly(t)
	c.MonthEnd = true
	b := newBook(t, itemT(c))
	b.record("2025-03-10", "until 2026-03-12") // computed 2026-03-31; until is the earlier and stays as written
	b.want("2025-04-01", "met due 2026-03-12")
}

func TestEveryFailed(t *testing.T) {
	c := yearly(t)
	c.Early = ptr(dur(t, "P60D"))
	b := newBook(t, itemT(c))
	b.record("2025-03-10")                     // due 2026-03-10
	failure := b.record("2026-02-01", "fail")  // the old due day is forgotten
	b.want("2026-01-31", "met due 2026-03-10") // the notice begins on 2026-02-08
	b.want("2026-02-01", "failed since 2026-02-01")
	b.want("2030-01-01", "failed since 2026-02-01") // until a later one passes
	b.wantRecord("2026-02-05", failure.ID)
	b.record("2026-02-10") // would have been early for 2026-03-10: no anniversary is left to keep
	b.want("2026-03-01", "met due 2027-02-10")
}

func TestEveryOrderWithinADay(t *testing.T) {
	for name, c := range map[string]struct {
		records [][]string
		want    string
	}{
		"in order of recording":      {[][]string{{"2025-03-10", "fail"}, {"2025-03-10"}}, "met due 2026-03-10"},
		"and the other way":          {[][]string{{"2025-03-10"}, {"2025-03-10", "fail"}}, "failed since 2025-03-10"},
		"by time, not recording":     {[][]string{{"2025-03-10T09:00Z"}, {"2025-03-10T08:00Z", "fail"}}, "met due 2026-03-10"},
		"without a time comes first": {[][]string{{"2025-03-10T08:00Z", "fail"}, {"2025-03-10"}}, "failed since 2025-03-10"},
		"equal times by recording":   {[][]string{{"2025-03-10T08:00Z", "fail"}, {"2025-03-10T08:00Z"}}, "met due 2026-03-10"},
		"recorded late":              {[][]string{{"2025-03-10"}, {"2025-03-09", "fail"}}, "met due 2026-03-10"},
	} {
		t.Run(name, func(t *testing.T) {
			b := newBook(t, itemT(yearly(t)))
			for _, r := range c.records {
				b.record(r[0], r[1:]...)
			}
			b.want("2025-03-10", c.want)
		})
	}
}

func TestWithin(t *testing.T) {
	c := program.Cadence{Rule: program.Within, Within: dur(t, "P1Y"), Count: 2}
	b := newBook(t, itemT(c, first(t, "P1Y"))) // the program's default for first is the window
	// Not enough: due = 2025-01-01 + P1Y = 2026-01-01, minus 30 days = 2025-12-02
	b.want("2025-12-01", "awaited due 2026-01-01")
	b.want("2025-12-02", "closing due 2026-01-01")
	b.want("2026-01-02", "missing due 2026-01-01 since 2026-01-02")
	one := b.record("2025-05-01")
	b.record("2025-05-01")                                         // the same day counts once
	b.want("2025-06-01", "awaited due 2026-01-01")                 // still one day
	b.want("2026-01-02", "lapsed due 2026-01-01 since 2026-01-02") // but there is an accepted record
	b.wantRecord("2025-06-01", "")
	b.record("2025-09-01")
	// Two days: the second latest is 2025-05-01; plus P1Y is 2026-05-01, minus 30 days is 2026-04-01
	b.want("2025-09-01", "met due 2026-05-01")
	b.want("2026-03-31", "met due 2026-05-01")
	b.want("2026-04-01", "closing due 2026-05-01")
	b.want("2026-05-02", "lapsed due 2026-05-01 since 2026-05-02")
	if got := b.get("2025-10-01", standing.Always).Record; got == one.ID || got == "" {
		t.Errorf("the deciding record is %q, want the last of the day 2025-05-01", got)
	}
}

func TestWithinFailedTakesNothing(t *testing.T) {
	c := program.Cadence{Rule: program.Within, Within: dur(t, "P1Y"), Count: 2}
	b := newBook(t, itemT(c, first(t, "P1Y")))
	b.record("2025-05-01")
	b.record("2025-09-01")
	b.record("2025-10-01", "fail")
	b.want("2025-10-01", "failed since 2025-10-01")
	b.record("2025-10-02")
	b.want("2025-10-02", "met due 2026-09-01") // days 10-02, 09-01, 05-01: the second latest + P1Y
}

func TestOnce(t *testing.T) {
	b := newBook(t, itemT(program.Cadence{Rule: program.Once}, first(t, "P2M"), grace(t, "P1W")))
	// due = 2025-01-01 + P2M = 2025-03-01, minus 30 days = 2025-01-30, plus P1W = 2025-03-08
	b.want("2025-01-29", "awaited due 2025-03-01")
	b.want("2025-01-30", "closing due 2025-03-01")
	b.want("2025-03-08", "closing due 2025-03-01 in grace")
	b.want("2025-03-09", "missing due 2025-03-01 since 2025-03-09")
	b.record("2025-03-10")
	b.want("2099-01-01", "met") // for good, no due day
	b.record("2025-04-01", "until 2025-12-31")
	// The latest decides: due 2025-12-31, minus 30 days = 2025-12-01, plus P1W = 2026-01-07
	b.want("2025-11-30", "met due 2025-12-31")
	b.want("2025-12-01", "closing due 2025-12-31")
	b.want("2026-01-07", "closing due 2025-12-31 in grace")
	b.want("2026-01-08", "lapsed due 2025-12-31 since 2026-01-08")
	b.record("2026-02-01", "fail")
	b.want("2026-02-01", "failed since 2026-02-01")
	last := b.record("2026-02-02")
	b.want("2026-02-02", "met")
	b.wantRecord("2026-02-02", last.ID)
}

// The notices that a program leaves out, by the design's rule, and what they make of a due day.
func TestUsualNotices(t *testing.T) {
	for _, c := range []struct {
		item   string
		notice int // computed by hand
	}{
		{"every: P1Y", 30},                         // 365 / 4 = 91, at most 30
		{"every: P3M", 22},                         // 3 x 30 / 4 = 22.5, rounded down
		{"every: P2W", 3},                          // 14 / 4 = 3.5
		{"every: P3D", 0},                          // 3 / 4
		{"within: P1M", 7},                         // 30 / 4 = 7.5
		{"once: true", 30},                         // once: 30 days
		{"each: year", 30},                         // 365 / 4, at most 30
		{"each: quarter", 22},                      // 90 / 4 = 22.5
		{"each: month", 7},                         // 30 / 4 = 7.5
		{"each: week", 1},                          // 7 / 4 = 1.75
		{"each: day", 0},                           // 1 / 4
		{"after: [health-change], within: P2M", 0}, // after: P0D
	} {
		src := "lodebook: 1\nin_force_from: 2020-01-01\nsite: {code: S, name: Tern Quay, time_zone: Etc/UTC}\n" +
			"events: [{code: health-change, of: person}]\nitems:\n  - {code: T, title: An item, asks: person, record: training/a, basis: Site rule, " + c.item + "}\n"
		p, err := program.Parse([]byte(src))
		if err != nil {
			t.Errorf("%s: %v", c.item, err)
			continue
		}
		due := civil.Of(2025, 12, 31)
		if got := p.Items[0].Notice.Before(due); got != due-civil.Day(c.notice) {
			t.Errorf("%s: the notice begins %d days before, want %d", c.item, due-got, c.notice)
		}
	}
}

func TestLeft(t *testing.T) {
	b := newBook(t, itemT(program.Cadence{Rule: program.Every, Every: civil.Duration{Days: 100}}))
	b.record("2025-03-01") // due 2025-06-09, 100 days later
	for day, want := range map[string]float64{
		"2025-03-01": 1, "2025-03-26": 0.75, "2025-05-30": 0.1, "2025-06-09": 0, "2025-06-10": 0, "2025-01-01": 0,
	} {
		if got := b.get(day, standing.Always).Left; got != want {
			t.Errorf("on %s %v of the span is left, want %v", day, got, want)
		}
	}
	once := newBook(t, itemT(program.Cadence{Rule: program.Once}))
	once.record("2025-03-01")
	if got := once.get("2030-01-01", standing.Always).Left; got != 1 {
		t.Errorf("%v is left of what is met for good, want 1", got)
	}
}
