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

// Instants reads a cell as an instant. A local time that comes twice, since clocks were put back over it, gives both,
// the earlier first: Moment refuses it and says what would do. A day alone is a fault.
func (r Row) Instants(col string, loc *time.Location) ([]time.Time, *Fault) {
	w, ok, f := r.when(col)
	switch {
	case f != nil:
		return nil, f
	case !ok:
		return nil, r.Fault(col, "is empty", "an instant as 2025-03-01T08:30:00Z")
	case !w.timed:
		return nil, r.Fault(col, "is a day and not an instant", "add a time, as in "+w.day.String()+" 08:30")
	}
	if !w.zoned {
		wall := time.Unix(int64(w.day)*86400, 0).UTC().Add(w.clock)
		if both := onTheClock(wall, loc); len(both) == 2 {
			return []time.Time{both[0].UTC(), both[1].UTC()}, nil
		}
	}
	t, problem, accepted := w.instant(loc)
	if problem != "" {
		return nil, r.Fault(col, problem, accepted)
	}
	r.counted(w)
	return []time.Time{t.UTC()}, nil
}
