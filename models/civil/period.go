package civil

import (
	"fmt"
	"time"
)

// Unit is the length of a calendar period.
type Unit uint8

// The periods that a cadence may count in; weeks are those of ISO 8601, Monday to Sunday.
const (
	ByDay Unit = iota + 1
	ByWeek
	ByMonth
	ByQuarter
	ByYear
)

var unitNames = map[Unit]string{ByDay: "day", ByWeek: "week", ByMonth: "month", ByQuarter: "quarter", ByYear: "year"}

// ParseUnit reads day, week, month, quarter or year.
func ParseUnit(s string) (Unit, error) {
	for u, n := range unitNames {
		if n == s {
			return u, nil
		}
	}
	return 0, fmt.Errorf("%q is not a period; it is day, week, month, quarter or year", s)
}

// String is the unit's name in the program file.
func (u Unit) String() string { return unitNames[u] }

// NominalDays is the unit's length by the count that the default notice uses.
func (u Unit) NominalDays() int {
	return map[Unit]int{ByDay: 1, ByWeek: 7, ByMonth: 30, ByQuarter: 90, ByYear: 365}[u]
}

// Period is a span of whole days, both included.
type Period struct{ First, Last Day }

// PeriodOf is the calendar period of the unit that holds the day.
func PeriodOf(u Unit, d Day) Period {
	y, m, _ := d.Date()
	switch u {
	case ByWeek:
		back := (int(d.Weekday()) + 6) % 7
		first := d - Day(back)
		return Period{first, first + 6}
	case ByMonth:
		return Period{Of(y, m, 1), Of(y, m, DaysIn(y, m))}
	case ByQuarter:
		q := (m-1)/3*3 + 1
		return Period{Of(y, q, 1), Of(y, q+2, DaysIn(y, q+2))}
	case ByYear:
		return Period{Of(y, time.January, 1), Of(y, time.December, 31)}
	default:
		return Period{d, d}
	}
}

// Next is the period of the same unit that follows p.
func (p Period) Next(u Unit) Period { return PeriodOf(u, p.Last+1) }

// Prev is the period of the same unit before p.
func (p Period) Prev(u Unit) Period { return PeriodOf(u, p.First-1) }

// Calendar says which days a site operates. The zero value is open on no weekday; EveryDay is
// the usual default.
type Calendar struct {
	Open   [7]bool // by time.Weekday
	Closed map[Day]bool
}

// EveryDay is the calendar of a site that never closes.
func EveryDay() Calendar {
	return Calendar{Open: [7]bool{true, true, true, true, true, true, true}}
}

// Operates tells whether the site is open on the day.
func (c Calendar) Operates(d Day) bool { return c.Open[d.Weekday()] && !c.Closed[d] }
