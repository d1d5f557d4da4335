package program

import (
	"time"

	"lodebook/models/civil"
)

// first is how long after the start an item is first asked: with within, its length.
func (r *reader) first(o object, c Cadence) civil.Duration {
	if d := o.duration("first", true); d != nil {
		return *d
	}
	if c.Rule == Within {
		return c.Within
	}
	return civil.Duration{}
}

// notice is 30 days or a quarter of the cadence, whichever is shorter, where the file gives none.
func (r *reader) notice(o object, c Cadence) Notice {
	if d := o.duration("notice", true); d != nil {
		return Notice{Given: d}
	}
	return Notice{Days: c.usualNotice()}
}

func (c Cadence) usualNotice() int {
	const most = 30
	switch c.Rule {
	case Every:
		return min(most, c.Every.NominalDays()/4)
	case Within:
		return min(most, c.Within.NominalDays()/4)
	case Each:
		return min(most, c.Each.NominalDays()/4)
	case Once:
		return most
	}
	return 0
}

// startDays are days that stand for every day of the Gregorian calendar when durations are added:
// the calendar repeats after 400 years, and within a month only the days that another month may
// lack (29 to 31) behave unlike the 28th.
func startDays(yield func(civil.Day) bool) {
	for month := range 400 * 12 {
		year, m := 2000+month/12, time.Month(month%12+1)
		for d := 28; d <= civil.DaysIn(year, m); d++ {
			if !yield(civil.Of(year, m, d)) {
				return
			}
		}
	}
}

// shorter tells whether from every day of the calendar a ends before b.
func shorter(a, b civil.Duration) bool {
	// A month has 28 to 31 days, and clamping moves an end by at most three; where these bounds
	// decide, nothing needs to be counted.
	if months(a) == months(b) {
		return days(a) < days(b)
	}
	if atMost(a) < atLeast(b) {
		return true
	}
	for d := range startDays {
		if d.Add(a) >= d.Add(b) {
			return false
		}
	}
	return true
}

func months(d civil.Duration) int  { return d.Years*12 + d.Months }
func days(d civil.Duration) int    { return d.Weeks*7 + d.Days }
func atMost(d civil.Duration) int  { return months(d)*31 + days(d) }
func atLeast(d civil.Duration) int { return months(d)*28 + days(d) - 3 }

// longest is the most days that the duration spans from any day.
func longest(d civil.Duration) int {
	if months(d) == 0 {
		return days(d)
	}
	n := 0
	for start := range startDays {
		n = max(n, int(start.Add(d)-start))
	}
	return n
}
