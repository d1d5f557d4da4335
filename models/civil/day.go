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

// Midnight is the first instant that falls on the day in the zone loc: local midnight, the moment
// of the change where clocks skip midnight, and the earlier of two midnights where it comes twice.
// A day that the zone never had (a move across the date line) begins when the next one does, so
// that the span from its Midnight to the next day's is empty.
func (d Day) Midnight(loc *time.Location) time.Time {
	const farthest = 24 * time.Hour // no zone was ever this far from UTC
	utc := d.utc()
	for t := utc.Add(-farthest).In(loc); ; {
		_, offset := t.Zone()
		change := zoneEnd(t)
		first := utc.Add(-time.Duration(offset) * time.Second).In(loc)
		if first.Before(t) {
			first = t
		}
		if change.IsZero() || first.Before(change) {
			return first
		}
		t = change
	}
}

// zoneEnd is an instant after t up to which t's offset holds; zero means for ever. ZoneBounds alone
// will not do: where a zone changes by rule it counts every year as 365 days, so that on the last UTC
// day of a leap year it gives an end which is not after t. No rule changes clocks on that day.
func zoneEnd(t time.Time) time.Time {
	_, end := t.ZoneBounds()
	if end.IsZero() || end.After(t) {
		return end
	}
	const day = 24 * time.Hour
	return t.Truncate(day).Add(day).In(t.Location())
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
