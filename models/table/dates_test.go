package table

import (
	"fmt"
	"slices"
	"strings"
	"testing"
	"time"
	_ "time/tzdata" // the zones of these tests are there on every machine

	"pgregory.net/rapid"

	"lodebook/models/civil"
)

// one gives the only row of a CSV file with one cell in the column joined.
func one(t *testing.T, cell, delim string, o Options) Row {
	t.Helper()
	r, faults, err := opened([]byte("code"+delim+"joined\nP1"+delim+cell+"\n"), o)
	if err != nil || len(faults) > 0 {
		t.Fatal(faults, err)
	}
	row, faults, err := r.Next()
	if err != nil || len(faults) > 0 {
		t.Fatal(faults, err)
	}
	return row
}

// TestSerialFacts holds the arithmetic against what is published of the two systems.
func TestSerialFacts(t *testing.T) {
	for _, c := range []struct {
		epoch  Epoch
		serial string
		day    string // "": refused
		source string
	}{
		{Epoch1900, "40729", "2011-07-05", "Microsoft Support, Date systems in Excel"},
		{Epoch1904, "39267", "2011-07-05", "Microsoft Support, Date systems in Excel"},
		{Epoch1900, "1", "1900-01-01", "Microsoft Support, Date systems in Excel"},
		{Epoch1904, "0", "1904-01-01", "Microsoft Support, Date systems in Excel"},
		{Epoch1900, "39448", "2008-01-01", "Microsoft Support, DATE function (from memory)"},
		{Epoch1900, "2958465", "9999-12-31", "ECMA-376 part 1, §18.17.4.1 (from memory)"},
		{Epoch1904, "2957003", "9999-12-31", "ECMA-376 part 1, §18.17.4.1 (from memory)"},
		{Epoch1900, "59", "1900-02-28", "ECMA-376 part 1, §18.17.4.1 (the leap year that was none; from memory)"},
		{Epoch1900, "60", "", "ECMA-376 part 1, §18.17.4.1 (the leap year that was none; from memory)"},
		{Epoch1900, "61", "1900-03-01", "ECMA-376 part 1, §18.17.4.1 (the leap year that was none; from memory)"},
		{Epoch1904, "60", "1904-03-01", "1904 was a leap year: January and February have 60 days"},
		{Epoch1900, "43831", "2020-01-01", "from memory"},
		{Epoch1904, "42369", "2020-01-01", "43831 less the 1,462 days between the systems"},
		{Epoch1900, "25569", "1970-01-01", "from memory: the serial of the Unix epoch"},
		{Epoch1900, "0", "", "formats page: serials from 1"},
		{Epoch1900, "2958466", "", "formats page: serials to 2958465"},
		{Epoch1904, "2957004", "", "no day after 9999-12-31"},
	} {
		row := one(t, c.serial, ",", Options{Serials: c.epoch})
		day, ok, f := row.Day("joined")
		if (c.day == "") != (f != nil) || ok && day.String() != c.day {
			t.Errorf("serial %s of system %d is %s (%v), want %q by %s", c.serial, c.epoch, day, f, c.day, c.source)
		}
		if got, want := row.reader.Serials(), len(c.day)/10; got != want {
			t.Errorf("serial %s: %d serials counted, want %d", c.serial, got, want)
		}
	}
}

// TestDays reads what people write for days.
func TestDays(t *testing.T) {
	for _, c := range []struct {
		cell  string
		order DateOrder
		day   string
		says  string // of the fault
	}{
		{"2025-03-01", "", "2025-03-01", ""},
		{"2024-02-29", "", "2024-02-29", ""},
		{" 2025-03-01 ", "", "2025-03-01", ""},
		{"25/12/2025", "", "2025-12-25", ""},
		{"25.12.2025", "", "2025-12-25", ""},
		{"25-12-2025", "", "2025-12-25", ""},
		{"12/25/2025", "", "2025-12-25", ""},
		{"5/5/2025", "", "2025-05-05", ""},
		{"2025/12/25", "", "2025-12-25", ""},
		{"2025-3-1", "", "2025-03-01", ""},
		{"03/04/2025", "", "", "can be read as 3 April 2025 or as 4 March 2025; accepted: 2025-04-03 or 2025-03-04"},
		{"03.04.2025", "", "", "can be read as 3 April 2025 or as 4 March 2025"},
		{"03/04/2025", DMY, "2025-04-03", ""},
		{"03/04/2025", MDY, "2025-03-04", ""},
		{"3.4.2025", DMY, "2025-04-03", ""},
		{"12/25/2025", DMY, "", "is not a day if the day comes first"},
		{"25/12/2025", MDY, "", "is not a day if the month comes first"},
		{"25/12/2025", DMY, "2025-12-25", ""},
		{"2025-02-30", "", "", "is not a day of the calendar"},
		{"2025-13-01", "", "", "is not a day of the calendar"},
		{"2023-02-29", "", "", "is not a day of the calendar"},
		{"0000-01-01", "", "", "is not a day of the calendar"},
		{"31/02/2025", "", "", "is not a day of the calendar"},
		{"30/02/2025", DMY, "", "is not a day of the calendar"},
		{"25/12/25", "", "", "a year of two digits"},
		{"25.12.25", DMY, "", "a year of two digits"},
		{"20250301", "", "", "is no serial number of a day; accepted: 2025-03-01"},
		{"2025", "", "", "may be a year"},
		{"2025.03", "", "", "may be a year"},
		{"2101", "", "1905-10-01", ""}, // day 2101 of a count in which 1905-12-31 is 2192
		{"1899", "", "1905-03-13", ""},
		{"-5", "", "", "is not a day"},
		{"45,658", "", "", "is neither a day nor"},
		{"25/12-2025", "", "", "is not a day"},
		{"soon", "", "", "is not a day; accepted: a day as YYYY-MM-DD"},
		{"2025-03-01 00:00:00", "", "2025-03-01", ""},
		{"2025-03-01T08:30", "", "2025-03-01", ""},
		{"45717.5", "", "2025-03-01", ""},
		{"2025-03-01T08:30:00Z", "", "", "is an instant where a day is asked"},
		{"2025-03-01 25:30", "", "", `has "25:30" where a time of day is expected`},
	} {
		cell := c.cell
		if strings.Contains(cell, ",") {
			cell = `"` + cell + `"`
		}
		row := one(t, cell, ",", Options{Dates: c.order})
		day, ok, f := row.Day("joined")
		switch {
		case c.says == "" && (f != nil || !ok || day.String() != c.day):
			t.Errorf("%q %s is %s, %v; want %s", c.cell, c.order, day, f, c.day)
		case c.says != "" && (f == nil || ok):
			t.Errorf("%q %s is %s, want a fault that says %q", c.cell, c.order, day, c.says)
		case c.says != "":
			only(t, []Fault{*f}, 2, "joined", c.says)
		}
	}
	row := one(t, "", ",", Options{})
	if _, ok, f := row.Day("joined"); ok || f != nil {
		t.Error("a blank cell is no day and no fault")
	}
	if _, ok, f := row.Day("left"); ok || f != nil {
		t.Error("a column that is not there is no day and no fault")
	}
	if day, _, f := one(t, "45717,25", ";", Options{}).Day("joined"); f != nil || day.String() != "2025-03-01" {
		t.Errorf("a decimal comma in a file of semicolons: %s, %v", day, f)
	}
}

// TestMoments reads days, instants and local times. The clock changes are those of the European
// Union (Directive 2000/84/EC: at 01:00 UTC on the last Sundays of March and October) and of New
// York (15 U.S.C. §260a: at 02:00 local time, second Sunday of March, first of November).
func TestMoments(t *testing.T) {
	for _, c := range []struct{ cell, zone, want, says string }{
		{"2025-03-01", "Europe/Lisbon", "2025-03-01", ""},
		{"45717", "Europe/Lisbon", "2025-03-01", ""},
		{"2025-07-01T08:30:00Z", "Asia/Tokyo", "2025-07-01 2025-07-01T08:30:00Z", ""},
		{"2025-07-01T22:30:00Z", "Asia/Tokyo", "2025-07-02 2025-07-01T22:30:00Z", ""},
		{"2025-07-01 08:30:00.25+02:00", "UTC", "2025-07-01 2025-07-01T06:30:00.25Z", ""},
		{"2025-07-01t08:30:00z", "UTC", "2025-07-01 2025-07-01T08:30:00Z", ""},      // RFC 3339 §5.6: t and z too
		{"1996-12-19T16:39:57-08:00", "UTC", "1996-12-20 1996-12-20T00:39:57Z", ""}, // RFC 3339 §5.8
		{"2025-07-01 08:30", "Europe/Lisbon", "2025-07-01 2025-07-01T07:30:00Z", ""},
		{"2025-01-01 8:30", "Europe/Lisbon", "2025-01-01 2025-01-01T08:30:00Z", ""},
		{"7/31/2025 8:30 PM", "America/New_York", "2025-07-31 2025-08-01T00:30:00Z", ""},
		{"31/7/2025 12:05:09 am", "UTC", "2025-07-31 2025-07-31T00:05:09Z", ""},
		{"2025-07-01 00:00", "Europe/Lisbon", "2025-07-01 2025-06-30T23:00:00Z", ""},
		{"45839.354166666664", "Europe/Lisbon", "2025-07-01 2025-07-01T07:30:00Z", ""},
		{"45839.999999999", "UTC", "2025-07-02", ""}, // less than a millisecond before midnight

		{"2025-10-26 01:30", "Europe/Lisbon", "", "comes twice in Europe/Lisbon: clocks were put back over it; accepted: 2025-10-26T01:30:00+01:00 or 2025-10-26T01:30:00Z"},
		{"2025-03-30 01:30", "Europe/Lisbon", "", "does not have: clocks were put forward over it; accepted: a time that clocks showed, or one with its offset, as 2025-03-30T02:30:00+01:00"},
		{"2025-03-30 00:00", "Atlantic/Azores", "", "clocks were put forward"},
		{"2025-11-02 01:59:59", "America/New_York", "", "2025-11-02T01:59:59-04:00 or 2025-11-02T01:59:59-05:00"},
		{"2025-03-09 02:00", "America/New_York", "", "clocks were put forward"},
		{"45956.0625", "Europe/Lisbon", "", "comes twice"}, // 2025-10-26 01:30
		{"2025-10-26 00:59", "Europe/Lisbon", "2025-10-26 2025-10-25T23:59:00Z", ""},
		{"2025-10-26 02:00", "Europe/Lisbon", "2025-10-26 2025-10-26T02:00:00Z", ""},
		{"2025-03-30 00:59", "Europe/Lisbon", "2025-03-30 2025-03-30T00:59:00Z", ""},
		{"2025-03-30 02:00", "Europe/Lisbon", "2025-03-30 2025-03-30T01:00:00Z", ""},
		{"2025-10-26T01:30:00+01:00", "Europe/Lisbon", "2025-10-26 2025-10-26T00:30:00Z", ""},

		{"03/04/2025 08:30", "UTC", "", "can be read as"},
		{"2025-03-01 08:60", "UTC", "", "where a time of day is expected"},
		{"2025-03-01 24:00", "UTC", "", "where a time of day is expected"},
		{"2025-03-01 13:00 pm", "UTC", "", "where a time of day is expected"},
		{"2025-03-01 08:30 WET", "UTC", "", "where a time of day is expected"},
		{"2025-03-01 08:30+25:00", "UTC", "", "where a time of day is expected"},
		{"08:30", "UTC", "", "is not a day"},
	} {
		zone, err := time.LoadLocation(c.zone)
		if err != nil {
			t.Fatal(err)
		}
		m, ok, f := one(t, c.cell, ",", Options{}).Moment("joined", zone)
		if c.says != "" {
			if f == nil || ok {
				t.Errorf("%q in %s is %+v, want a fault that says %q", c.cell, c.zone, m, c.says)
				continue
			}
			only(t, []Fault{*f}, 2, "joined", c.says)
			continue
		}
		got := m.Day.String()
		if m.Time != nil {
			got += " " + m.Time.Format(time.RFC3339Nano)
		}
		if f != nil || !ok || got != c.want {
			t.Errorf("%q in %s is %q, %v; want %q", c.cell, c.zone, got, f, c.want)
		}
	}
}

// TestReadMoment checks that text outside a table is read by the same rules, serials apart.
func TestReadMoment(t *testing.T) {
	zone, err := time.LoadLocation("Europe/Lisbon")
	if err != nil {
		t.Fatal(err)
	}
	for text, want := range map[string]string{
		" 2025-03-01 ":         "2025-03-01",
		"2025-07-01 08:30":     "2025-07-01 2025-07-01T07:30:00Z",
		"2025-07-01T23:30:00Z": "2025-07-02 2025-07-01T23:30:00Z",
		"2025-10-26 01:30":     "comes twice",
		"03/04/2025":           "can be read as",
		"45717":                "neither a day nor an instant",
		"":                     "neither a day nor an instant",
	} {
		m, f := ReadMoment(text, zone)
		if f != nil {
			if !strings.Contains(f.Problem, want) || f.Accepted == "" || f.Line != 0 || f.Value != strings.TrimSpace(text) {
				t.Errorf("%q: %+v, want %q", text, f, want)
			}
			continue
		}
		got := m.Day.String()
		if m.Time != nil {
			got += " " + m.Time.Format(time.RFC3339)
		}
		if got != want {
			t.Errorf("%q is %q, want %q", text, got, want)
		}
	}
}

// TestLocalTimes holds local times against package time over every quarter of an hour of a year in
// zones whose clocks change: a time is read if and only if one instant of that year shows it.
func TestLocalTimes(t *testing.T) {
	for _, name := range []string{"Europe/Lisbon", "America/New_York", "Australia/Lord_Howe", "Atlantic/Azores", "Asia/Kolkata"} {
		zone, err := time.LoadLocation(name)
		if err != nil {
			t.Fatal(err)
		}
		shown := map[string][]time.Time{}
		const layout = "2006-01-02 15:04"
		for at := time.Date(2024, 12, 31, 0, 0, 0, 0, time.UTC); at.Year() < 2026 || at.YearDay() < 3; at = at.Add(15 * time.Minute) {
			s := at.In(zone).Format(layout)
			shown[s] = append(shown[s], at)
		}
		for wall := time.Date(2025, 1, 1, 0, 0, 0, 0, time.UTC); wall.Year() == 2025; wall = wall.Add(15 * time.Minute) {
			want := shown[wall.Format(layout)]
			got := onTheClock(wall, zone)
			if !slices.EqualFunc(got, want, func(a, b time.Time) bool { return a.Equal(b) }) {
				t.Fatalf("%s in %s: %v, want %v", wall.Format(layout), name, got, want)
			}
		}
	}
}

// TestDayRoundTrip writes any day in each form that leaves no doubt and reads it back.
func TestDayRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		day := civil.Day(rapid.IntRange(int(civil.FirstDay), int(civil.LastDay)).Draw(t, "day"))
		y, m, d := day.Date()
		for rules, s := range map[dateRules]string{
			{}:           day.String(),
			{order: DMY}: fmt.Sprintf("%d.%d.%04d", d, m, y),
			{order: MDY}: fmt.Sprintf("%02d/%02d/%04d", m, d, y),
		} {
			if w, problem, _ := rules.read(s); problem != "" || w.day != day {
				t.Fatalf("%q is %s, want %s: %s", s, w.day, day, problem)
			}
		}
		// Without an order a date is read exactly if its two readings are one.
		w, problem, _ := dateRules{}.read(fmt.Sprintf("%d/%d/%04d", d, m, y))
		if sure := d > 12 || d == int(m); sure != (problem == "") || sure && w.day != day {
			t.Fatalf("%d/%d/%d: %s, %q", d, m, y, w.day, problem)
		}
		epoch := Epoch(rapid.IntRange(0, 1).Draw(t, "epoch"))
		n := rapid.IntRange(1, lastSerial-1462).Draw(t, "serial")
		w, ok := fromSerial(float64(n), epoch)
		next, nextOK := fromSerial(float64(n+1), epoch)
		if ok && nextOK && next.day != w.day+1 {
			t.Fatalf("serials %d and %d of system %d are %s and %s", n, n+1, epoch, w.day, next.day)
		}
	})
}
