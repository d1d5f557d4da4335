package civil_test

import (
	"testing"
	"time"

	"pgregory.net/rapid"

	"lodebook/models/civil"
)

func duration(t failer, s string) civil.Duration {
	t.Helper()
	p, err := civil.ParseDuration(s)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func TestParseDuration(t *testing.T) {
	for _, c := range []struct {
		text string
		want civil.Duration
	}{
		{"P1Y", civil.Duration{Years: 1}},
		{"P6M", civil.Duration{Months: 6}},
		{"P2W", civil.Duration{Weeks: 2}},
		{"P30D", civil.Duration{Days: 30}},
		{"P1Y2M3W4D", civil.Duration{Years: 1, Months: 2, Weeks: 3, Days: 4}},
		{"P0D", civil.Duration{}},
		{"P0Y", civil.Duration{}},
	} {
		if got := duration(t, c.text); got != c.want {
			t.Errorf("%s is %+v, want %+v", c.text, got, c.want)
		}
	}
	for _, bad := range []string{
		"", "P", "1Y", "P1", "PY", "P1D1Y", "P1M1M", "P-1D", "-P1D", "P1.5Y", "PT5M", "P1YT", "P1DT1H", "p1y", "P1y",
		" P1D", "P1D ", "P1X", "P1001Y", "P99999D", "P99999999999999999999D", "P+1D",
	} {
		if p, err := civil.ParseDuration(bad); err == nil {
			t.Errorf("ParseDuration(%q) = %v, want an error", bad, p)
		}
	}
}

func TestDurationRoundTrips(t *testing.T) {
	part := rapid.IntRange(0, 1000)
	rapid.Check(t, func(t *rapid.T) {
		p := civil.Duration{Years: part.Draw(t, "y"), Months: part.Draw(t, "m"), Weeks: part.Draw(t, "w"), Days: part.Draw(t, "d")}
		text, err := p.MarshalText()
		if err != nil {
			t.Fatal(err)
		}
		var back civil.Duration
		if err := back.UnmarshalText(text); err != nil || back != p {
			t.Fatalf("%s comes back as %+v, %v", text, back, err)
		}
	})
}

// Published sums of a day and a duration, by systems that clamp to the month's last day as we do.
func TestAddAgainstPublishedSums(t *testing.T) {
	for _, c := range []struct{ day, plus, minus, want, source string }{
		{"2000-01-12", "P1Y3M5D", "", "2001-04-17", "XML Schema part 2, appendix E (its time part left out; no day is carried)"},
		{"2000-01-01", "", "P3M", "1999-10-01", "XML Schema part 2, appendix E, 2000-01 minus P3M"},
		{"2000-03-31", "P1M", "", "2000-04-30", "XML Schema part 2, appendix E, (2000-03-30 + P1D) + P1M"},
		{"2000-03-30", "P1M1D", "", "2000-05-01", "XML Schema part 2, appendix E, (2000-03-30 + P1M) + P1D: months, then days"},
		{"2000-01-31", "P1M", "", "2000-02-29", "XML Schema part 2, appendix E, the day is pinned"},
		{"2007-03-31", "P1M", "", "2007-04-30", "java.time, LocalDate.plusMonths"},
		{"2011-01-31", "P1M", "", "2011-02-28", "java.time"},
		{"2012-01-31", "P1M", "", "2012-02-29", "java.time"},
		{"2013-03-31", "P1M", "", "2013-04-30", "java.time"},
		{"2013-10-31", "P4M", "", "2014-02-28", "java.time"},
		{"2013-10-31", "", "P4M", "2013-06-30", "java.time"},
		{"2012-02-29", "P1Y", "", "2013-02-28", "java.time"},
		{"2020-02-29", "", "P1M", "2020-01-29", "java.time, 2020-01-31 + 1 month - 1 month"},
		{"2011-01-30", "P1M", "", "2011-02-28", "published examples of a calendar library that clamps"},
		{"2011-03-30", "", "P1M", "2011-02-28", "published examples of a calendar library that clamps"},
		{"2016-08-31", "P1M", "", "2016-09-30", "Databricks, add_months"},
		{"2016-08-31", "", "P6M", "2016-02-29", "Databricks, add_months"},
		{"2012-01-31", "P2M", "", "2012-03-31", "MariaDB, ADD_MONTHS"},
		{"2012-01-31", "", "P5M", "2011-08-31", "MariaDB, ADD_MONTHS"},
		{"2015-01-31", "P1M", "", "2015-02-28", "PostgreSQL, as reported"},
		{"2015-04-30", "P1M", "", "2015-05-30", "PostgreSQL family, as reported: a month's end is not kept"},
		{"2001-09-28", "P7D", "", "2001-10-05", "PostgreSQL documentation, date + integer"},
		{"2016-01-31", "P1M", "", "2016-02-29", "Vertica, ADD_MONTHS"},
		{"2024-01-31", "P1M", "", "2024-02-29", "not 2024-03-02, which is SQLite's overflow"},
		{"2024-02-29", "P1Y", "", "2025-02-28", "not 1 March, which is SQLite's overflow"},
		{"2015-09-30", "", "P1M", "2015-08-30", "not 2015-08-31, which is Vertica's and Db2's kept month end"},
	} {
		got := day(t, c.day)
		if c.plus != "" {
			got = got.Add(duration(t, c.plus))
		}
		if c.minus != "" {
			got = got.Sub(duration(t, c.minus))
		}
		if got.String() != c.want {
			t.Errorf("%s + %s - %s = %v, want %s (%s)", c.day, c.plus, c.minus, got, c.want, c.source)
		}
	}
}

// A step at a time drifts, from the anchor it does not (PostgreSQL and DuckDB, as reported).
func TestStepsDriftAndAnchorsDoNot(t *testing.T) {
	month := civil.Duration{Months: 1}
	step := day(t, "2022-01-31")
	for i, want := range []string{"2022-02-28", "2022-03-28", "2022-04-28"} {
		step = step.Add(month)
		if step.String() != want {
			t.Errorf("step %d is %v, want %s", i+1, step, want)
		}
	}
	for i, want := range []string{"2022-01-31", "2022-02-28", "2022-03-31", "2022-04-30"} {
		if got := day(t, "2022-01-31").Add(civil.Duration{Months: i}); got.String() != want {
			t.Errorf("anchor + %d months is %v, want %s", i, got, want)
		}
	}
}

// Years and months are one step: 2024-02-29 + P1Y1M is 2025-03-29, not 2025-02-28 and a month.
func TestYearsAndMonthsAreOneStep(t *testing.T) {
	if got := day(t, "2024-02-29").Add(duration(t, "P1Y1M")).String(); got != "2025-03-29" {
		t.Errorf("2024-02-29 + P1Y1M = %s, want 2025-03-29", got)
	}
	if got := day(t, "2024-02-29").Sub(duration(t, "P1Y11M")).String(); got != "2022-03-29" {
		t.Errorf("2024-02-29 - P1Y11M = %s, want 2022-03-29", got)
	}
}

func TestSumsStayInsideTheCalendar(t *testing.T) {
	far := civil.Duration{Years: 1000, Months: 10000, Weeks: 10000, Days: 10000}
	if civil.LastDay.Add(far) != civil.LastDay || civil.FirstDay.Sub(far) != civil.FirstDay {
		t.Error("a sum left the calendar")
	}
}

// Month arithmetic against a statement of its own: count months from year 0, keep the day of the
// month or take the last that exists, then count days.
func TestAddAgainstPlainCounting(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d := civil.Day(rapid.Int32Range(-200000, 200000).Draw(t, "day"))
		p := civil.Duration{
			Years: rapid.IntRange(0, 20).Draw(t, "y"), Months: rapid.IntRange(0, 40).Draw(t, "m"),
			Weeks: rapid.IntRange(0, 9).Draw(t, "w"), Days: rapid.IntRange(0, 99).Draw(t, "d"),
		}
		if got, want := d.Add(p), counted(d, p, 1); got != want {
			t.Fatalf("%v + %v = %v, want %v", d, p, got, want)
		}
		if got, want := d.Sub(p), counted(d, p, -1); got != want {
			t.Fatalf("%v - %v = %v, want %v", d, p, got, want)
		}
	})
}

func counted(d civil.Day, p civil.Duration, sign int) civil.Day {
	u := time.Unix(int64(d)*86400, 0).UTC()
	first := time.Date(u.Year(), u.Month()+time.Month(sign*(p.Years*12+p.Months)), 1, 0, 0, 0, 0, time.UTC)
	for dom := u.Day(); ; dom-- {
		if at := first.AddDate(0, 0, dom-1); at.Month() == first.Month() {
			return civil.Day(at.AddDate(0, 0, sign*(7*p.Weeks+p.Days)).Unix() / 86400)
		}
	}
}

func TestNominalDays(t *testing.T) {
	// Design section 3: a year counts 365 days, a quarter 90, a month 30, a week 7.
	for text, want := range map[string]int{"P1Y": 365, "P6M": 180, "P2W": 14, "P10D": 10, "P1Y1M1W1D": 403} {
		if got := duration(t, text).NominalDays(); got != want {
			t.Errorf("%s counts %d days, want %d", text, got, want)
		}
	}
	for unit, want := range map[civil.Unit]int{civil.ByDay: 1, civil.ByWeek: 7, civil.ByMonth: 30, civil.ByQuarter: 90, civil.ByYear: 365} {
		if got := unit.NominalDays(); got != want {
			t.Errorf("a %v counts %d days, want %d", unit, got, want)
		}
	}
}
