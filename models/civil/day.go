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

const secondsPerDay = 86400

// monthStarts are the days of a common year before each month.
var monthStarts = [13]int{0, 31, 59, 90, 120, 151, 181, 212, 243, 273, 304, 334, 365}

func isLeap(year int) bool { return year%4 == 0 && (year%100 != 0 || year%400 == 0) }

// yearStart is the number of days from 0001-01-01 to the year's first day.
func yearStart(year int) int {
	y := year - 1
	if y < 0 {
		return y*365 + floorDiv(y, 4) - floorDiv(y, 100) + floorDiv(y, 400)
	}
	of := uint32(y)
	return int(of*365 + of/4 - of/100 + of/400)
}

// monthStart is the number of days of the year before the month, counted from 0; 12 is the year's end.
func monthStart(year, month int) int {
	if month > 1 && isLeap(year) {
		return monthStarts[month] + 1
	}
	return monthStarts[month]
}

// Of gives the day of a proleptic Gregorian date. Months and days outside their usual range
// carry over, as in time.Date.
func Of(year int, month time.Month, day int) Day {
	months := year*12 + int(month) - 1
	year = floorDiv(months, 12)
	return FirstDay + Day(yearStart(year)+monthStart(year, months-year*12)+day-1)
}

// DayOf gives the civil day on which the instant t falls in the zone loc.
func DayOf(t time.Time, loc *time.Location) Day {
	_, offset := t.In(loc).Zone()
	return Day(floorDiv(int(t.Unix())+offset, secondsPerDay))
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
	return monthStart(year, int(month)) - monthStart(year, int(month)-1)
}

// Date splits the day into year, month and day of the month, by counting years from March, so that the
// leap day comes last (E. G. Richards, Calendars, in the Explanatory Supplement to the Astronomical
// Almanac, 3rd edition, 2013, section 15.11; from memory).
func (d Day) Date() (year int, month time.Month, day int) {
	const (
		fromMarch      = 306 // days from 0000-03-01 to 0001-01-01
		daysIn400Years = 146097
		daysIn100Years = 36524
		daysIn4Years   = 1461
	)
	n := int(d-FirstDay) + fromMarch
	centuries := floorDiv(n, daysIn400Years)
	n -= centuries * daysIn400Years
	of := uint32(n)
	years := (of - of/(daysIn4Years-1) + of/daysIn100Years - of/(daysIn400Years-1)) / 365
	of -= 365*years + years/4 - years/100
	m := (5*of + 2) / 153 // from March: 153 days in every five months
	day = int(of-(153*m+2)/5) + 1
	year, month = centuries*400+int(years), time.Month(m+3)
	if month > time.December {
		year, month = year+1, month-12
	}
	return year, month, day
}

func (d Day) utc() time.Time { return time.Unix(int64(d)*secondsPerDay, 0).UTC() }

// String writes the day as YYYY-MM-DD.
func (d Day) String() string { return d.utc().Format("2006-01-02") }

// Format writes the day by a layout of package time.
func (d Day) Format(layout string) string { return d.utc().Format(layout) }

// Weekday is the day's weekday; day 0 was a Thursday.
func (d Day) Weekday() time.Weekday {
	n := int(d) + int(time.Thursday)
	return time.Weekday(n - floorDiv(n, 7)*7)
}

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
