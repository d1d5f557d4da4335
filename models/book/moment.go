package book

import (
	"context"
	"time"

	"lodebook/models/civil"
	"lodebook/models/table"
)

// moment is when something happened: a day, or an instant and the day that the site's zone gives it.
type moment struct {
	day  civil.Day
	time *time.Time
}

// parseMoment reads what an entry holds: YYYY-MM-DD or RFC 3339. Entries were validated before
// they were written, so an unreadable one gives the zero moment.
func parseMoment(on string, loc *time.Location) moment {
	if d, err := civil.ParseDay(on); err == nil {
		return moment{day: d}
	}
	t, err := time.Parse(time.RFC3339, on)
	if err != nil {
		return moment{}
	}
	t = t.UTC()
	return moment{day: civil.DayOf(t, loc), time: &t}
}

// readMoment reads what was typed: a day, an instant, or a date and a time of day by the site's
// clocks. It gives the form that an entry holds.
func (c *check) readMoment(field, text string) (string, []Fault) {
	m, f := table.ReadMoment(text, c.zone())
	if f != nil {
		return "", []Fault{{field, f.Value, f.Problem, f.Accepted}}
	}
	return moment{day: m.Day, time: m.Time}.String(), nil
}

// String is the moment as an entry holds it.
func (m moment) String() string {
	if m.time != nil {
		return m.time.UTC().Format(time.RFC3339)
	}
	return m.day.String()
}

// moment checks that something that is said to have happened has: a day or an instant, not in the
// future.
func (c *check) moment(field, on string) (moment, []Fault) {
	m := parseMoment(on, c.zone())
	if m == (moment{}) && on != "1970-01-01" {
		return m, []Fault{{field, on, "is neither a day nor an instant", "write YYYY-MM-DD, or an instant such as 2026-03-01T08:30:00Z"}}
	}
	if m.day > c.today() || m.time != nil && m.time.After(c.now.Add(5*time.Minute)) {
		return m, []Fault{{field, on, "lies in the future", "a day up to today, " + c.today().String()}}
	}
	return m, nil
}

// Moment reads an instant at a site as a person writes it: RFC 3339, or a date and a time of day by the site's
// clocks. A local time that a change of the clocks makes ambiguous is refused, and so is a day alone.
func (b *Book) Moment(ctx context.Context, site, field, text string) (time.Time, error) {
	loc, err := b.Zone(ctx, site)
	if err != nil {
		return time.Time{}, err
	}
	m, f := table.ReadMoment(text, loc)
	if f != nil {
		return time.Time{}, invalid(field, text, f.Problem, f.Accepted)
	}
	if m.Time == nil {
		return time.Time{}, invalid(field, text, "is a day and not a moment", "add a time, as in "+m.Day.String()+" 12:00")
	}
	return *m.Time, nil
}
