package standing

import (
	"cmp"
	"slices"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// Right is a person's standing permission to enter a zone of a site: from an instant, which is included, up to
// one that is not; nil: until it is withdrawn. It ends with the stint in which it was granted, which is the one
// that holds the day of From; granted outside any stint it is never in force. Of those of one person and zone that
// begin at the same instant and are known, the last recorded counts.
type Right struct {
	Line
	Person, Zone string
	From         time.Time
	To           *time.Time
}

// PutRight puts a right of a person at the site.
func (e *Engine) PutRight(site string, r Right) {
	l := e.local(site, Subject{program.AsksPerson, r.Person})
	r.ID, r.Person = "", "" // nothing tells of a right by its entry
	l.rights = upsert(l.rights, r, func(a, b *Right) int { return cmp.Compare(a.Seq, b.Seq) })
	e.changed(e.owned(site), l, change{right: true})
}

// Grant is a time in which a right is in force: From is included, To is not; a zero To is never.
type Grant struct {
	Zone     string
	From, To time.Time
}

// grants are the times in which rights of the person are in force, in order of recording.
func (v *view) grants(l *local) []Grant {
	var out []Grant
	for i := range l.rights {
		r := &l.rights[i]
		if !r.KnownAt(v.k) || v.replaced(l, i) {
			continue
		}
		g := Grant{Zone: r.Zone, From: r.From}
		if r.To != nil {
			g.To = *r.To
		}
		last, within := v.stintOf(l, v.dayAt(r.From))
		if !within {
			continue
		}
		if last != civil.LastDay {
			if end := v.dawn(last + 1); g.To.IsZero() || end.Before(g.To) {
				g.To = end
			}
		}
		if g.To.IsZero() || g.From.Before(g.To) {
			out = append(out, g)
		}
	}
	return out
}

// replaced tells whether a later known right of the same zone begins at the same instant.
func (v *view) replaced(l *local, i int) bool {
	r := &l.rights[i]
	return slices.ContainsFunc(l.rights[i+1:], func(o Right) bool {
		return o.KnownAt(v.k) && o.Zone == r.Zone && o.From.Equal(r.From)
	})
}

// stintOf is the last day of the stint that holds the day, civil.LastDay where it is open.
func (v *view) stintOf(l *local, on civil.Day) (last civil.Day, found bool) {
	since := civil.FirstDay
	for i := range l.stints {
		s := &l.stints[i]
		if !v.stands(l, i) || s.First != nil && *s.First > on || s.Last != nil && *s.Last < on {
			continue
		}
		first := civil.FirstDay
		if s.First != nil {
			first = *s.First
		}
		if !found || first > since {
			since, last = first, civil.LastDay
			if s.Last != nil {
				last = *s.Last
			}
		}
		found = true
	}
	return last, found
}

// zones are those in which a right of the person is in force at any instant of the day, sorted.
func (v *view) zones(l *local, on civil.Day) []string {
	if len(l.rights) == 0 {
		return nil
	}
	begin, end := v.dawn(on), v.dawn(on+1)
	var out []string
	for _, g := range v.grants(l) {
		if g.From.Before(end) && (g.To.IsZero() || g.To.After(begin)) {
			out = append(out, g.Zone)
		}
	}
	slices.Sort(out)
	return slices.Compact(out)
}

// rightTurns adds the days on which the zones of the person may change.
func (v *view) rightTurns(t *turns, l *local) {
	if len(l.rights) == 0 {
		return
	}
	for i := range l.rights {
		r := &l.rights[i]
		if !r.KnownAt(v.k) {
			continue
		}
		t.add(v.dayAt(r.From))
		if r.To != nil {
			t.add(v.dayAt(r.To.Add(-1)) + 1)
		}
	}
	v.stintTurns(t, l)
	v.reignTurns(t) // a version may bring another time zone
}

// zone is the time zone of the day: that of its version, before the first that of the first.
func (v *view) zone(on civil.Day) *time.Location {
	if len(v.reigns) == 0 {
		return time.UTC
	}
	return v.reigns[max(0, v.reign(on))].loc
}

// dawn is the first instant of the day at the site. It is remembered: what people hang on falls on the same days.
func (v *view) dawn(on civil.Day) time.Time {
	t, ok := v.dawns[on]
	if !ok {
		t = on.Midnight(v.zone(on)).UTC()
		if v.dawns == nil {
			v.dawns = map[civil.Day]time.Time{}
		}
		v.dawns[on] = t
	}
	return t
}

// dayAt is the day of the instant at the site. Where versions differ in their time zones it is the one between
// whose dawn and the next one's the instant lies.
func (v *view) dayAt(t time.Time) civil.Day {
	d := civil.DayOf(t, time.UTC)
	for v.dawn(d).After(t) {
		d--
	}
	for !v.dawn(d + 1).After(t) {
		d++
	}
	return d
}
