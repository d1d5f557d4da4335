package table

import (
	"strings"
	"time"

	"lodebook/models/civil"
)

// Moment is a day, or an instant together with the day on which it falls.
type Moment struct {
	Day  civil.Day
	Time *time.Time // nil: the day only. Else in UTC
}

// ReadMoment understands text outside a table by the rules of Row.Moment: a day as YYYY-MM-DD, an
// RFC 3339 instant, or a date and a time of day by the clocks of loc. A blank or a bare number is
// no moment. The fault has neither line nor column.
func ReadMoment(s string, loc *time.Location) (Moment, *Fault) {
	s = strings.TrimSpace(s)
	if s == "" || serialForm.MatchString(s) {
		return Moment{}, &Fault{Value: s, Problem: "is neither a day nor an instant", Accepted: isoDay + ", or an instant as 2025-03-01T08:30:00Z"}
	}
	w, problem, accepted := dateRules{}.read(s)
	if problem != "" {
		return Moment{}, &Fault{Value: s, Problem: problem, Accepted: accepted}
	}
	m, problem, accepted := w.moment(loc)
	if problem != "" {
		return Moment{}, &Fault{Value: s, Problem: problem, Accepted: accepted}
	}
	return m, nil
}

// moment puts a date with a time of day on the one time line, and leaves one without as a day.
func (w when) moment(loc *time.Location) (m Moment, problem, accepted string) {
	if !w.timed {
		return Moment{Day: w.day}, "", ""
	}
	t, problem, accepted := w.instant(loc)
	if problem != "" {
		return Moment{}, problem, accepted
	}
	t = t.UTC()
	return Moment{Day: civil.DayOf(t, loc), Time: &t}, "", ""
}
