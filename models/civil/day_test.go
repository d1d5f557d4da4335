package civil_test

import (
	"encoding/json"
	"testing"
	"time"
	_ "time/tzdata"

	"pgregory.net/rapid"

	"lodebook/models/civil"
)

// failer is what the helpers need of *testing.T and *rapid.T.
type failer interface {
	Helper()
	Fatal(...any)
}

func day(t failer, s string) civil.Day {
	t.Helper()
	d, err := civil.ParseDay(s)
	if err != nil {
		t.Fatal(err)
	}
	return d
}

func zone(t failer, name string) *time.Location {
	t.Helper()
	loc, err := time.LoadLocation(name)
	if err != nil {
		t.Fatal(err)
	}
	return loc
}

func TestParseDayTakesOneFormOnly(t *testing.T) {
	for _, good := range []string{"0001-01-01", "1970-01-01", "2024-02-29", "2000-02-29", "9999-12-31"} {
		if got := day(t, good).String(); got != good {
			t.Errorf("ParseDay(%q).String() = %q", good, got)
		}
	}
	for _, bad := range []string{
		"", "2025-02-29", "1900-02-29", "2025-04-31", "2025-13-01", "2025-00-10", "2025-01-00", "0000-01-01",
		"2025-1-01", "25-01-01", "2025/01/01", "2025-01-01T00:00:00Z", " 2025-01-01", "2025-01-01 ",
		"+025-01-01", "2025-+1-01", "2025-01--1", "20250101", "２025-01-", "10000-01-01",
	} {
		if d, err := civil.ParseDay(bad); err == nil {
			t.Errorf("ParseDay(%q) = %v, want an error", bad, d)
		}
	}
}

func TestDayBounds(t *testing.T) {
	if civil.FirstDay != day(t, "0001-01-01") || civil.LastDay != day(t, "9999-12-31") {
		t.Errorf("bounds are %v and %v", civil.FirstDay, civil.LastDay)
	}
	if day(t, "1970-01-01") != 0 || day(t, "1969-12-31") != -1 {
		t.Error("days are not counted from 1970-01-01")
	}
}

// Every day of the calendar, against the standard library.
func TestDatesAgainstPackageTime(t *testing.T) {
	at := time.Date(1, time.January, 1, 0, 0, 0, 0, time.UTC)
	for d := civil.FirstDay; d <= civil.LastDay; d++ {
		y, m, dom := at.Date()
		gy, gm, gd := d.Date()
		if gy != y || gm != m || gd != dom || civil.Of(y, m, dom) != d || d.Weekday() != at.Weekday() || civil.DayOf(at, time.UTC) != d {
			t.Fatalf("day %d is %d-%d-%d, a %v; package time has %v", d, gy, gm, gd, d.Weekday(), at)
		}
		at = at.Add(24 * time.Hour)
	}
}

// Months and days outside their range carry over as in time.Date, which DaysIn and PeriodOf lean on.
func TestDatesCarryOver(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		y, m, dom := rapid.IntRange(-50, 10050).Draw(t, "y"), rapid.IntRange(-40, 40).Draw(t, "m"), rapid.IntRange(-900, 900).Draw(t, "d")
		want := time.Date(y, time.Month(m), dom, 0, 0, 0, 0, time.UTC).Unix() / 86400
		if got := civil.Of(y, time.Month(m), dom); int64(got) != want {
			t.Fatalf("%d-%d-%d is day %d, want %d", y, m, dom, got, want)
		}
	})
}

func TestDaysIn(t *testing.T) {
	for _, y := range []int{1900, 2000, 2023, 2024, 2100} {
		for m := time.January; m <= time.December; m++ {
			if got, want := civil.DaysIn(y, m), time.Date(y, m+1, 0, 0, 0, 0, 0, time.UTC).Day(); got != want {
				t.Errorf("%v %d has %d days, want %d", m, y, got, want)
			}
		}
	}
}

func TestDayRoundTrips(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d := civil.Day(rapid.Int32Range(int32(civil.FirstDay), int32(civil.LastDay)).Draw(t, "day"))
		if y, m, dd := d.Date(); civil.Of(y, m, dd) != d {
			t.Fatalf("%d does not come back from %d-%d-%d", d, y, m, dd)
		}
		text, err := json.Marshal(d)
		if err != nil {
			t.Fatal(err)
		}
		var back civil.Day
		if err := json.Unmarshal(text, &back); err != nil || back != d {
			t.Fatalf("%s comes back as %v, %v", text, back, err)
		}
		if end := d.MonthEnd(); end < d || end.Format("2006-01") != d.Format("2006-01") || (end+1).Format("02") != "01" {
			t.Fatalf("the month of %v does not end on %v", d, end)
		}
	})
}

// The offsets below are those of the IANA time zone database.
func TestMidnightAtClockChanges(t *testing.T) {
	for _, c := range []struct{ zone, day, want, what string }{
		{"Etc/UTC", "2025-06-01", "2025-06-01T00:00:00Z", "no clock change"},
		{"America/New_York", "2025-03-09", "2025-03-09T00:00:00-05:00", "a change later in the day"},
		{"America/Sao_Paulo", "2018-11-04", "2018-11-04T01:00:00-02:00", "midnight skipped"},
		{"America/Sao_Paulo", "2018-02-18", "2018-02-18T00:00:00-03:00", "23:00 to 24:00 of the day before came twice"},
		{"Asia/Beirut", "2022-03-27", "2022-03-27T01:00:00+03:00", "midnight skipped"},
		{"Asia/Beirut", "2022-10-30", "2022-10-30T00:00:00+02:00", "back at midnight"},
		{"Africa/Cairo", "2023-04-28", "2023-04-28T01:00:00+03:00", "midnight skipped"},
		{"Africa/Cairo", "2023-10-27", "2023-10-27T00:00:00+02:00", "back at midnight"},
		{"Atlantic/Azores", "2025-03-30", "2025-03-30T01:00:00Z", "midnight skipped"},
		{"Atlantic/Azores", "2025-10-26", "2025-10-26T00:00:00Z", "back from 01:00: midnight comes twice, the first counts"},
		{"America/Havana", "2024-03-10", "2024-03-10T01:00:00-04:00", "midnight skipped"},
		{"America/Havana", "2024-11-03", "2024-11-03T00:00:00-04:00", "back from 01:00: midnight comes twice"},
		{"America/St_Johns", "2006-10-29", "2006-10-29T00:00:00-02:30", "back from 00:01: the day begins, is left and begins again"},
		{"America/St_Johns", "2006-04-02", "2006-04-02T00:00:00-03:30", "forward at 00:01"},
		{"Pacific/Apia", "2011-12-29", "2011-12-29T00:00:00-10:00", "the last day before the date line"},
		{"Pacific/Apia", "2011-12-30", "2011-12-31T00:00:00+14:00", "a day that never was"},
		{"Pacific/Apia", "2011-12-31", "2011-12-31T00:00:00+14:00", "the day after it"},
		{"Antarctica/Troll", "2025-03-30", "2025-03-30T00:00:00Z", "two hours forward at 01:00"},
		{"Antarctica/Troll", "2025-10-26", "2025-10-26T00:00:00+02:00", "two hours back at 03:00"},
		{"Australia/Lord_Howe", "2025-04-06", "2025-04-06T00:00:00+11:00", "half an hour back at 02:00"},
		{"America/New_York", "2025-01-01", "2025-01-01T00:00:00-05:00", "after a leap year's last day"},
		{"Australia/Sydney", "2041-01-01", "2041-01-01T00:00:00+11:00", "after a leap year's last day, by rule"},
		{"Pacific/Kiritimati", "2025-01-01", "2025-01-01T00:00:00+14:00", "the farthest zone east"},
		{"Etc/GMT+12", "2025-01-01", "2025-01-01T00:00:00-12:00", "the farthest zone west"},
	} {
		got := day(t, c.day).Midnight(zone(t, c.zone)).Format(time.RFC3339)
		if got != c.want {
			t.Errorf("%s %s: midnight is %s, want %s (%s)", c.zone, c.day, got, c.want, c.what)
		}
	}
}

// awkwardZones change their clocks at or near midnight, by other amounts than an hour, or crossed
// the date line.
var awkwardZones = []string{
	"America/Sao_Paulo", "Asia/Beirut", "Africa/Cairo", "Atlantic/Azores", "Pacific/Apia", "Antarctica/Troll",
	"America/Havana", "America/St_Johns", "Australia/Lord_Howe", "America/Asuncion", "Asia/Gaza", "Asia/Tehran",
	"Pacific/Kwajalein", "Pacific/Fakaofo", "Asia/Manila", "America/Scoresbysund", "Europe/Dublin", "Africa/Casablanca",
	"Asia/Pyongyang", "Africa/Monrovia", "America/Metlakatla", "Asia/Amman", "America/Godthab", "Etc/UTC",
}

// Midnight is held against its definition: the first of all instants, minute by minute around it,
// that fall on the day.
func TestMidnightIsTheFirstInstantOfItsDay(t *testing.T) {
	first, last := day(t, "1890-01-01"), day(t, "2045-01-01")
	rapid.Check(t, func(t *rapid.T) {
		loc := zone(t, rapid.SampledFrom(awkwardZones).Draw(t, "zone"))
		d := civil.Day(rapid.Int32Range(int32(first), int32(last)).Draw(t, "day"))
		if rapid.Bool().Draw(t, "at the next change") {
			d = nextClockChange(d, loc) + civil.Day(rapid.IntRange(-1, 2).Draw(t, "off"))
		}
		m := d.Midnight(loc)
		if civil.DayOf(m, loc) < d || civil.DayOf(m.Add(-time.Nanosecond), loc) >= d {
			t.Fatalf("%v in %v: %v is not where the day begins", d, loc, m)
		}
		for before := m.Add(-time.Second); before.After(m.Add(-30 * time.Hour)); before = before.Add(-time.Minute) {
			if civil.DayOf(before, loc) == d {
				t.Fatalf("%v in %v: midnight %v, but %v is of that day", d, loc, m, before)
			}
		}
	})
}

func nextClockChange(d civil.Day, loc *time.Location) civil.Day {
	_, change := d.Midnight(loc).ZoneBounds()
	if change.IsZero() {
		return d
	}
	return civil.DayOf(change, loc)
}

// ISO 8601 week dates.
func TestISOWeeks(t *testing.T) {
	for _, c := range []struct {
		day                 string
		year, week, weekday int
		source              string
	}{
		{"1985-04-12", 1985, 15, 5, "ISO 8601:2000 §5.2.3.1"},
		{"2006-12-31", 2006, 52, 7, "published week calendars"},
		{"1996-12-30", 1997, 1, 1, "M. Kuhn's summary of ISO 8601"},
		{"1997-01-05", 1997, 1, 7, "M. Kuhn's summary of ISO 8601"},
		{"2012-12-31", 2013, 1, 1, "published week calendars"},
		{"2013-12-30", 2014, 1, 1, "published week calendars"},
		{"2014-12-29", 2015, 1, 1, "published week calendars"},
		{"2005-01-01", 2004, 53, 6, "from memory, recomputed"},
		{"2005-01-02", 2004, 53, 7, "from memory, recomputed"},
		{"2005-12-31", 2005, 52, 6, "from memory, recomputed"},
		{"2007-01-01", 2007, 1, 1, "from memory, recomputed"},
		{"2008-12-29", 2009, 1, 1, "from memory, recomputed"},
		{"2009-12-31", 2009, 53, 4, "from memory, recomputed"},
		{"2010-01-03", 2009, 53, 7, "from memory, recomputed"},
		{"2020-12-31", 2020, 53, 4, "from memory, recomputed"},
		{"2021-01-03", 2020, 53, 7, "from memory, recomputed"},
		{"2024-12-30", 2025, 1, 1, "from memory, recomputed"},
		{"2026-12-31", 2026, 53, 4, "from memory, recomputed"},
		{"2022-12-31", 2022, 52, 6, "computed; a page in circulation says 2023-W01-6, which is wrong"},
	} {
		d := day(t, c.day)
		y, w := d.ISOWeek()
		if wd := (int(d.Weekday())+6)%7 + 1; y != c.year || w != c.week || wd != c.weekday {
			t.Errorf("%s is %d-W%02d-%d, want %d-W%02d-%d (%s)", c.day, y, w, wd, c.year, c.week, c.weekday, c.source)
		}
	}
}

// 71 of any 400 years have 53 weeks (published with the standard's summaries; recomputed).
func TestLongISOYears(t *testing.T) {
	long := 0
	for y := 1801; y <= 2200; y++ {
		if _, w := civil.Of(y, time.December, 28).ISOWeek(); w == 53 {
			long++
		}
	}
	if long != 71 {
		t.Errorf("%d long years in 400, want 71", long)
	}
	if _, w := civil.Of(2015, time.December, 28).ISOWeek(); w != 53 {
		t.Errorf("2015 has %d weeks, want 53", w)
	}
}
