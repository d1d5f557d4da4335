package civil_test

import (
	"testing"
	"time"

	"pgregory.net/rapid"

	"lodebook/models/civil"
)

func TestPeriodsByHand(t *testing.T) {
	for _, c := range []struct {
		unit             string
		day, first, last string
	}{
		{"day", "2024-02-29", "2024-02-29", "2024-02-29"},
		{"week", "2025-01-01", "2024-12-30", "2025-01-05"}, // a Wednesday; ISO 8601 weeks run Monday to Sunday
		{"week", "2025-01-05", "2024-12-30", "2025-01-05"},
		{"week", "2025-01-06", "2025-01-06", "2025-01-12"},
		{"week", "1969-12-31", "1969-12-29", "1970-01-04"},
		{"month", "2024-02-10", "2024-02-01", "2024-02-29"},
		{"month", "2023-12-31", "2023-12-01", "2023-12-31"},
		{"quarter", "2024-02-29", "2024-01-01", "2024-03-31"},
		{"quarter", "2024-06-30", "2024-04-01", "2024-06-30"},
		{"quarter", "2024-07-01", "2024-07-01", "2024-09-30"},
		{"quarter", "2024-12-31", "2024-10-01", "2024-12-31"},
		{"year", "2024-12-31", "2024-01-01", "2024-12-31"},
	} {
		u, err := civil.ParseUnit(c.unit)
		if err != nil {
			t.Fatal(err)
		}
		if got, want := civil.PeriodOf(u, day(t, c.day)), (civil.Period{First: day(t, c.first), Last: day(t, c.last)}); got != want {
			t.Errorf("the %s of %s is %v to %v, want %v to %v", c.unit, c.day, got.First, got.Last, want.First, want.Last)
		}
	}
	if u, err := civil.ParseUnit("fortnight"); err == nil {
		t.Errorf("a fortnight is read as %v, want an error", u)
	}
}

// Periods of one unit lie end to end and each holds the day that it was asked for.
func TestPeriodsTileTheCalendar(t *testing.T) {
	units := []civil.Unit{civil.ByDay, civil.ByWeek, civil.ByMonth, civil.ByQuarter, civil.ByYear}
	rapid.Check(t, func(t *rapid.T) {
		u := rapid.SampledFrom(units).Draw(t, "unit")
		d := civil.Day(rapid.Int32Range(-300000, 300000).Draw(t, "day"))
		p := civil.PeriodOf(u, d)
		if d < p.First || d > p.Last {
			t.Fatalf("%v is not in %v to %v", d, p.First, p.Last)
		}
		if civil.PeriodOf(u, p.First) != p || civil.PeriodOf(u, p.Last) != p {
			t.Fatalf("the ends of %v to %v are of other periods", p.First, p.Last)
		}
		if n := p.Next(u); n.First != p.Last+1 || n.Prev(u) != p {
			t.Fatalf("%v to %v is not followed by %v to %v", p.First, p.Last, n.First, n.Last)
		}
	})
}

func TestUnitNames(t *testing.T) {
	for _, name := range []string{"day", "week", "month", "quarter", "year"} {
		u, err := civil.ParseUnit(name)
		if err != nil || u.String() != name {
			t.Errorf("%s is read as %v, %v", name, u, err)
		}
	}
}

func TestCalendar(t *testing.T) {
	c := civil.Calendar{Closed: map[civil.Day]bool{day(t, "2025-12-25"): true}}
	c.Open[time.Thursday], c.Open[time.Friday] = true, true
	for d, want := range map[string]bool{
		"2025-12-18": true,  // a Thursday
		"2025-12-25": false, // a Thursday that is closed
		"2025-12-26": true,  // a Friday
		"2025-12-27": false, // a Saturday
	} {
		if c.Operates(day(t, d)) != want {
			t.Errorf("operates on %s: %v, want %v", d, !want, want)
		}
	}
	if !civil.EveryDay().Operates(day(t, "2025-12-25")) || (civil.Calendar{}).Operates(day(t, "2025-12-25")) {
		t.Error("EveryDay is closed, or the zero calendar is open")
	}
}
