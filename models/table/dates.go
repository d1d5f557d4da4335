package table

import (
	"fmt"
	"regexp"
	"strconv"
	"strings"
	"time"

	"lodebook/models/civil"
)

// when is a cell understood as a date, as precisely as it says.
type when struct {
	day    civil.Day
	clock  time.Duration // what a clock on the wall showed, since midnight; with timed
	offset time.Duration // east of UTC; with zoned
	timed  bool          // it has a time of day
	zoned  bool          // and an offset
	serial bool          // it stood in the file as a bare number
}

const isoDay = "a day as YYYY-MM-DD"

// dateRules are what a file's dates are read by.
type dateRules struct {
	order  DateOrder
	traits traits
}

// read understands a cell as a date, with or without a time of day. problem is "" if it could.
func (d dateRules) read(s string) (w when, problem, accepted string) {
	if serialForm.MatchString(s) {
		return d.readSerial(s)
	}
	date, clock, timed := cutClock(s)
	w.day, problem, accepted = d.readDate(date)
	if problem != "" || !timed {
		return w, problem, accepted
	}
	if !w.readClock(clock) {
		return w, fmt.Sprintf("has %q where a time of day is expected", clock), isoDay + ", or with a time as 2025-03-01 08:30 or 2025-03-01T08:30:00Z"
	}
	return w, "", ""
}

var clockStart = regexp.MustCompile(`[\sTt]+\d`)

// cutClock parts a date from the time of day that follows it after a T or blanks.
func cutClock(s string) (date, clock string, ok bool) {
	at := clockStart.FindStringIndex(s)
	if at == nil || !strings.Contains(s, ":") {
		return s, "", false
	}
	return s[:at[0]], s[at[1]-1:], true
}

var clockForm = regexp.MustCompile(`^(\d{1,2}):(\d{2})(?::(\d{2})(?:[.,](\d{1,9}))?)?(?:\s*([AaPp])\.?[Mm]\.?)?\s*([Zz]|[+-]\d{2}:?\d{2})?$`)

// readClock understands a time of day of 24 or 12 hours, with or without an offset from UTC.
func (w *when) readClock(s string) bool {
	m := clockForm.FindStringSubmatch(s)
	if m == nil {
		return false
	}
	hour, minute, second := number(m[1]), number(m[2]), number("0"+m[3])
	if half := strings.ToLower(m[5]); half != "" {
		if hour < 1 || hour > 12 {
			return false
		}
		hour = hour%12 + map[string]int{"a": 0, "p": 12}[half]
	}
	if hour > 23 || minute > 59 || second > 59 {
		return false
	}
	nanos := number((m[4] + "000000000")[:9])
	w.timed = true
	w.clock = time.Duration(hour)*time.Hour + time.Duration(minute)*time.Minute + time.Duration(second)*time.Second + time.Duration(nanos)
	return m[6] == "" || w.readOffset(m[6])
}

func (w *when) readOffset(s string) bool {
	w.zoned = true
	if s == "Z" || s == "z" {
		return true
	}
	digits := strings.ReplaceAll(s[1:], ":", "")
	hours, minutes := number(digits[:2]), number(digits[2:])
	w.offset = time.Duration(hours)*time.Hour + time.Duration(minutes)*time.Minute
	if s[0] == '-' {
		w.offset = -w.offset
	}
	return hours < 24 && minutes < 60
}

// number is for digits that a pattern has let through.
func number(s string) int {
	n, err := strconv.Atoi(s)
	if err != nil {
		return 0
	}
	return n
}

// instant puts a point in time on the one time line: by its own offset, else by the clocks of loc.
func (w when) instant(loc *time.Location) (t time.Time, problem, accepted string) {
	wall := time.Unix(int64(w.day)*86400, 0).UTC().Add(w.clock)
	if w.zoned {
		return wall.Add(-w.offset), "", ""
	}
	found := onTheClock(wall, loc)
	switch len(found) {
	case 1:
		return found[0], "", ""
	case 0:
		_, before := wall.Add(-24 * time.Hour).In(loc).Zone()
		meant := wall.Add(-time.Duration(before) * time.Second).In(loc)
		return t, fmt.Sprintf("is a time of day that %s does not have: clocks were put forward over it", loc),
			"a time that clocks showed, or one with its offset, as " + meant.Format(time.RFC3339)
	}
	return t, fmt.Sprintf("comes twice in %s: clocks were put back over it", loc),
		found[0].Format(time.RFC3339) + " or " + found[1].Format(time.RFC3339)
}

// onTheClock lists the instants, earliest first, at which the clocks of loc show the wall time.
// The offsets in force a day before and a day after bracket any change between them.
func onTheClock(wall time.Time, loc *time.Location) []time.Time {
	var found []time.Time
	for _, around := range []time.Duration{-24 * time.Hour, 24 * time.Hour} {
		_, offset := wall.Add(around).In(loc).Zone()
		t := wall.Add(-time.Duration(offset) * time.Second).In(loc)
		if _, now := t.Zone(); now != offset || len(found) > 0 && found[0].Equal(t) {
			continue
		}
		found = append(found, t)
	}
	if len(found) == 2 && found[1].Before(found[0]) {
		found[0], found[1] = found[1], found[0]
	}
	return found
}

var (
	yearFirst = regexp.MustCompile(`^(\d{4})([-/.])(\d{1,2})([-/.])(\d{1,2})$`)
	yearLast  = regexp.MustCompile(`^(\d{1,2})([-/.])(\d{1,2})([-/.])(\d{4})$`)
	yearShort = regexp.MustCompile(`^\d{1,2}[-/.]\d{1,2}[-/.]\d{2}$`)
)

// readDate understands a date written in digits.
func (d dateRules) readDate(s string) (day civil.Day, problem, accepted string) {
	if m := yearFirst.FindStringSubmatch(s); m != nil && m[2] == m[4] {
		return calendarDay(number(m[1]), number(m[3]), number(m[5]))
	}
	if m := yearLast.FindStringSubmatch(s); m != nil && m[2] == m[4] {
		return d.readYearLast(number(m[1]), number(m[3]), number(m[5]))
	}
	if yearShort.MatchString(s) {
		return 0, "has a year of two digits", isoDay
	}
	return 0, "is not a day", isoDay
}

// readYearLast tells day from month where the file or the calendar leaves no doubt.
func (d dateRules) readYearLast(a, b, year int) (day civil.Day, problem, accepted string) {
	dmy, noDMY, _ := calendarDay(year, b, a)
	mdy, noMDY, _ := calendarDay(year, a, b)
	switch {
	case noDMY != "" && noMDY != "":
		return 0, "is not a day of the calendar, whichever of the two comes first", isoDay
	case d.order == DMY && noDMY != "":
		return 0, "is not a day if the day comes first, as it was said of this file", isoDay
	case d.order == MDY && noMDY != "":
		return 0, "is not a day if the month comes first, as it was said of this file", isoDay
	case d.order == DMY, noMDY != "":
		return dmy, "", ""
	case d.order == MDY, noDMY != "", dmy == mdy:
		return mdy, "", ""
	}
	const long = "2 January 2006"
	return 0, fmt.Sprintf("can be read as %s or as %s", dmy.Format(long), mdy.Format(long)),
		fmt.Sprintf("%s or %s; or say for the whole file which comes first (--dates dmy or --dates mdy)", dmy, mdy)
}

func calendarDay(year, month, day int) (d civil.Day, problem, accepted string) {
	if year < 1 || month < 1 || month > 12 || day < 1 || day > civil.DaysIn(year, time.Month(month)) {
		return 0, "is not a day of the calendar", isoDay
	}
	return civil.Of(year, time.Month(month), day), "", ""
}
