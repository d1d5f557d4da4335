package standing_test

import (
	"slices"
	"testing"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

var inIV = has("'IV' in subject.zones", []string{"zones"}, func(s program.Subject) bool { return slices.Contains(s.Zones, "IV") })

// right draws a right of a person.
func (w *world) right() {
	r := standing.Right{Line: w.line(), Person: oneOf(w, testPeople...), Zone: oneOf(w, "III", "IV", "IV"), From: w.hour()}
	if w.chance(50) {
		r.To = ptr(r.From.Add(time.Duration(1+w.pick(24*w.spread)) * time.Hour))
	}
	w.n.rights = append(w.n.rights, at[standing.Right]{w.site(), r})
	if w.chance(20) { // the same right, recorded anew
		again := r
		again.Line, again.To = w.line(), ptr(r.From.Add(time.Duration(w.pick(48))*time.Hour))
		w.n.rights = append(w.n.rights, at[standing.Right]{"S", again})
	}
}

func (w *world) hour() time.Time {
	return (w.day() - civil.Day(w.pick(w.spread))).Midnight(time.UTC).Add(time.Duration(w.pick(24)) * time.Hour)
}

// zones are those in which a right is in force at some instant of the day: tried hour by hour, since everything that
// is drawn lies on one, and the clocks of the zones that are drawn change by one.
func (n *naive) zones(person string, d civil.Day) []string {
	var out []string
	for _, zone := range []string{"III", "IV"} {
		for t := n.dawn(d); t.Before(n.dawn(d + 1)); t = t.Add(time.Hour) {
			if n.inForce(person, zone, t) {
				out = append(out, zone)
				break
			}
		}
	}
	return out
}

func (n *naive) inForce(person, zone string, t time.Time) bool {
	for _, r := range n.rights {
		if r.site != n.site || r.line.Person != person || r.line.Zone != zone || !n.knows(r.line.Line) || r.line.From.After(t) || r.line.To != nil && !r.line.To.After(t) {
			continue
		}
		if slices.ContainsFunc(n.rights, func(o at[standing.Right]) bool {
			return o.site == n.site && o.line.Person == person && o.line.Zone == zone && n.knows(o.line.Line) && o.line.From.Equal(r.line.From) && o.line.Seq > r.line.Seq
		}) {
			continue
		}
		if n.sameStint(person, n.dayAt(r.line.From), n.dayAt(t)) {
			return true
		}
	}
	return false
}

// sameStint tells whether the stint that holds the one day, of several the one that began last, holds the other too.
func (n *naive) sameStint(person string, one, other civil.Day) bool {
	sub := standing.Subject{Asks: program.AsksPerson, Code: person}
	joined, ok := n.exists(sub, one)
	if !ok {
		return false
	}
	for _, s := range n.stints {
		if s.site != n.site || s.line.Subject != sub || !n.knows(s.line.Line) {
			continue
		}
		first, last := n.first, n.last
		if s.line.First != nil {
			first = *s.line.First
		}
		if s.line.Last != nil {
			last = *s.line.Last
		}
		later := slices.ContainsFunc(n.stints, func(o at[standing.Stint]) bool {
			return o.site == n.site && o.line.Subject == sub && n.knows(o.line.Line) && o.line.Seq > s.line.Seq &&
				(o.line.First == nil) == (s.line.First == nil) && (o.line.First == nil || *o.line.First == first)
		})
		if !later && first == joined && first <= one && one <= last {
			return other <= last
		}
	}
	return false
}

func (n *naive) dawn(d civil.Day) time.Time {
	v := n.version(d)
	for e := d; v == nil && e < n.last; e++ {
		v = n.version(e)
	}
	if v == nil {
		return d.Midnight(time.UTC)
	}
	return d.Midnight(v.Program.Site.Location)
}

func (n *naive) dayAt(t time.Time) civil.Day {
	d := civil.DayOf(t, time.UTC) + 2
	for n.dawn(d).After(t) {
		d--
	}
	return d
}

// A right is asked by the selector on each day that it touches, and ends with the stint.
func TestZonesOfASelector(t *testing.T) {
	it := itemT(yearly(t))
	it.When = inIV
	b := newBook(t, it)
	right := standing.Right{Line: b.line(), Person: "ann", Zone: "IV", From: time.Date(2025, 3, 10, 14, 0, 0, 0, time.UTC)}
	b.PutRight("S", right)
	b.want("2025-03-09", "none")
	b.want("2025-03-10", "closing due 2025-03-10")
	right.To = ptr(time.Date(2025, 3, 12, 0, 0, 0, 0, time.UTC))
	right.Line = b.line()
	b.PutRight("S", right) // of those that begin at one instant the last recorded counts
	b.want("2025-03-11", "missing due 2025-03-10 since 2025-03-11")
	b.want("2025-03-12", "none") // its first instant is no longer of the right
	b.PutRight("S", standing.Right{Line: b.line(), Person: "ann", Zone: "IV", From: time.Date(2024, 12, 1, 0, 0, 0, 0, time.UTC)})
	b.want("2025-01-01", "none") // granted before they were on staff
}
