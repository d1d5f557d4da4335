package scenario

import (
	"time"

	"lodebook/models/civil"
)

const siteCode = "AVERHAVN"

// months of history that the site has behind it.
const months = 18

// almanac knows the scenario's days: all are counted from today.
type almanac struct {
	today    civil.Day
	began    civil.Day // the program is in force from here on
	calendar civil.Calendar
	loc      *time.Location
}

func newAlmanac(today civil.Day, calendar civil.Calendar, loc *time.Location) almanac {
	return almanac{today, inForceFrom(today), calendar, loc}
}

// inForceFrom is the first day of the month eighteen months ago.
func inForceFrom(today civil.Day) civil.Day { return almanac{today: today}.month(months) }

// closedDays are the site's holidays from the program's first day to the end of next year: two at
// the turn of the year, one for the harbour's own feast.
func closedDays(today civil.Day) []civil.Day {
	first, _, _ := inForceFrom(today).Date()
	last, _, _ := today.Date()
	var days []civil.Day
	for y := first; y <= last+1; y++ {
		days = append(days, civil.Of(y, time.January, 1), harbourDay(y), civil.Of(y, time.December, 25))
	}
	return days
}

// harbourDay is the second Friday of July.
func harbourDay(year int) civil.Day {
	d := civil.Of(year, time.July, 8)
	for d.Weekday() != time.Friday {
		d++
	}
	return d
}

// ago is the last operating day that lies at least so many days back.
func (a almanac) ago(days int) civil.Day { return a.openBy(a.today - civil.Day(days)) }

// openBy is the last operating day up to a day.
func (a almanac) openBy(d civil.Day) civil.Day {
	for !a.calendar.Operates(d) {
		d--
	}
	return d
}

// openFrom is the first operating day from a day on.
func (a almanac) openFrom(d civil.Day) civil.Day {
	for !a.calendar.Operates(d) {
		d++
	}
	return d
}

// twoDays is the first of the last two operating days in a row that lie at least so far back.
func (a almanac) twoDays(days int) civil.Day {
	d := a.ago(days)
	for !a.calendar.Operates(d + 1) {
		d = a.openBy(d - 1)
	}
	return d
}

// month is the first day of the month so many months ago.
func (a almanac) month(ago int) civil.Day {
	y, m, _ := a.today.Date()
	return civil.Of(y, m-time.Month(ago), 1)
}

// inMonth is a day of the month so many months ago, or the first operating day after it.
func (a almanac) inMonth(ago, day int) civil.Day { return a.openFrom(a.month(ago) + civil.Day(day-1)) }

// session is the day up to d on which trainings and screenings are held: the Tuesday of every
// fourth week, or the operating day before it.
func (a almanac) session(d civil.Day) civil.Day {
	for {
		if _, week := d.ISOWeek(); d.Weekday() == time.Tuesday && week%4 == 0 {
			return a.openBy(d)
		}
		d--
	}
}

// at gives an instant of a day by the site's clocks, as a table of records holds it.
func (a almanac) at(d civil.Day, hour, minute int) string {
	y, m, day := d.Date()
	return time.Date(y, m, day, hour, minute, 0, 0, a.loc).Format(time.RFC3339)
}
