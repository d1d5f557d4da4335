// Package civil is the arithmetic of calendar days: days without a clock, ISO 8601
// durations of years, months, weeks and days, the periods of a cadence, and a site's
// operating calendar. It is pure: no clock, no input or output.
package civil

import (
	"fmt"
	"strconv"
	"time"
)

// Day is a civil day of the proleptic Gregorian calendar, counted from 1970-01-01 (day 0).
// It has no time zone; the zone of a site decides which day an instant lies in.
type Day int32

// FirstDay and LastDay bound what a book can hold: 0001-01-01 to 9999-12-31.
const (
	FirstDay Day = -719162
	LastDay  Day = 2932896
)

// Of gives the day of a proleptic Gregorian date. Months and days outside their usual range
// carry over, as in time.Date.
func Of(year int, month time.Month, day int) Day {
	const secondsPerDay = 86400
	s := time.Date(year, month, day, 0, 0, 0, 0, time.UTC).Unix()
	if s < 0 {
		s -= secondsPerDay - 1
	}
	return Day(s / secondsPerDay)
}

// DayOf gives the civil day on which the instant t falls in the zone loc.
func DayOf(t time.Time, loc *time.Location) Day {
	y, m, d := t.In(loc).Date()
	return Of(y, m, d)
}

// ParseDay reads a day written as YYYY-MM-DD and nothing else.
func ParseDay(s string) (Day, error) {
	if len(s) != 10 || s[4] != '-' || s[7] != '-' {
		return 0, fmt.Errorf("%q is not a day; a day is written YYYY-MM-DD", s)
	}
	y, m, d, ok := digits(s[0:4]), digits(s[5:7]), digits(s[8:10]), true
	if y < 1 || m < 1 || m > 12 || d < 1 {
		ok = false
	}
	if !ok || d > DaysIn(y, time.Month(m)) {
		return 0, fmt.Errorf("%q is not a day of the calendar; a day is written YYYY-MM-DD", s)
	}
	return Of(y, time.Month(m), d), nil
}

func digits(s string) int {
	for _, c := range s {
		if c < '0' || c > '9' {
			return -1
		}
	}
	n, err := strconv.Atoi(s)
	if err != nil {
		return -1
	}
	return n
}

// DaysIn is the number of days of a month.
func DaysIn(year int, month time.Month) int {
	return time.Date(year, month+1, 0, 0, 0, 0, 0, time.UTC).Day()
}

// Date splits the day into year, month and day of the month.
func (d Day) Date() (year int, month time.Month, day int) {
	return d.utc().Date()
}

func (d Day) utc() time.Time { return time.Unix(int64(d)*86400, 0).UTC() }

// String writes the day as YYYY-MM-DD.
func (d Day) String() string { return d.utc().Format("2006-01-02") }

// Format writes the day by a layout of package time.
func (d Day) Format(layout string) string { return d.utc().Format(layout) }

// Weekday is the day's weekday.
func (d Day) Weekday() time.Weekday { return d.utc().Weekday() }

// ISOWeek gives the ISO 8601 week-numbering year and week.
func (d Day) ISOWeek() (year, week int) { return d.utc().ISOWeek() }

// Midnight is the first instant of the day in the zone loc. Where clocks skip midnight, it is
// the first instant that the day has.
func (d Day) Midnight(loc *time.Location) time.Time {
	y, m, dd := d.Date()
	t := time.Date(y, m, dd, 0, 0, 0, 0, loc)
	if DayOf(t, loc) == d {
		// Where midnight comes twice, or the zone's rule gave the later one, the first counts.
		for _, back := range []time.Duration{3 * time.Hour, 2 * time.Hour, time.Hour, 30 * time.Minute} {
			if e := t.Add(-back); DayOf(e, loc) == d {
				return e
			}
		}
		return t
	}
	// Midnight was skipped and time.Date fell into the day before: walk to the change.
	lo, hi := t, t.Add(4*time.Hour)
	for hi.Sub(lo) > time.Second {
		mid := lo.Add(hi.Sub(lo) / 2)
		if DayOf(mid, loc) < d {
			lo = mid
		} else {
			hi = mid
		}
	}
	return hi.Truncate(time.Second)
}

// MarshalText writes the day for JSON and YAML.
func (d Day) MarshalText() ([]byte, error) { return []byte(d.String()), nil }

// UnmarshalText reads what MarshalText wrote.
func (d *Day) UnmarshalText(b []byte) error {
	v, err := ParseDay(string(b))
	if err != nil {
		return err
	}
	*d = v
	return nil
}

// MonthEnd is the last day of the day's month.
func (d Day) MonthEnd() Day {
	y, m, _ := d.Date()
	return Of(y, m, DaysIn(y, m))
}
