package standing

import (
	"slices"
	"strings"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// The facts that fill fields of their own; all others are declared ones.
const (
	factName  = "name"
	factLevel = "level"
	factCrew  = "crew"
	factKind  = "kind"
	factZone  = "zone"
)

// appointment is the kind of the records that fill a post; the code behind it is the post's.
const appointment = "appointment/"

// deputy follows the code of a post whose deputy somebody is appointed: inside, that is a post of its own, which
// no code can name.
const deputy = "/deputy"

// builtIn tells whether a fact of such a subject is a field of its own.
func builtIn(asks program.Asks, code string) bool {
	switch asks {
	case program.AsksPerson:
		return code == factName || code == factLevel || code == factCrew
	case program.AsksFixture:
		return code == factKind || code == factZone
	}
	return false
}

// Profile is the subject as a selector reads it on the day, as known at k: its facts, and what
// follows from the records (held level, posts, holders), or from rights.
func (e *Engine) Profile(site string, s Subject, on civil.Day, k int64) program.Subject {
	v, err := e.view(site, k)
	if err != nil {
		return program.Subject{Asks: s.Asks, Code: s.Code, Facts: map[string]any{}}
	}
	return v.profile(v.local(s), on, nil)
}

// profile fills in the fields that are asked for; what costs no more than a look is always there.
// A nil list asks for everything.
func (v *view) profile(l *local, on civil.Day, reads []string) program.Subject {
	wants := func(field string) bool { return reads == nil || slices.Contains(reads, field) }
	p := program.Subject{Asks: l.subject.Asks, Code: l.subject.Code, Facts: v.facts(l, on)}
	switch p.Asks {
	case program.AsksPerson:
		p.Name, p.Level, p.Crew = v.text(l, factName, on), v.text(l, factLevel, on), v.text(l, factCrew, on)
		if wants("held") {
			p.Held = v.heldLevel(l, on)
		}
		if wants("posts") {
			p.Posts = v.posts(l, on)
		}
		if wants("zones") {
			p.Zones = v.zones(l, on)
		}
	case program.AsksFixture:
		p.Kind, p.Zone = v.text(l, factKind, on), v.text(l, factZone, on)
	case program.AsksPost:
		if wants("holders") {
			p.Holders = v.holders(p.Code, on)
		}
		if wants("deputies") {
			p.Deputies = v.holders(p.Code+deputy, on)
		}
	}
	return p
}

func (v *view) facts(l *local, on civil.Day) map[string]any {
	all := make(map[string]any, len(l.facts))
	for i := range l.facts {
		code := l.facts[i].code
		if value := v.fact(l, code, on); value != nil && !builtIn(l.subject.Asks, code) {
			all[code] = value
		}
	}
	if age := v.doorListAge(l, on); age != nil {
		all[program.FactDoorListAge] = age
	}
	return all
}

// fact is the value that holds on the day, nil where there is none: of the latest day, the last
// recorded.
func (v *view) fact(l *local, code string, on civil.Day) any {
	list := l.values(code)
	for i := len(list) - 1; i >= 0; i-- {
		if f := &list[i]; f.From <= on && f.KnownAt(v.k) {
			return f.Value
		}
	}
	return nil
}

// doorListAge is how many days old the site's list of who can open which door is on the day, -1 where there is none;
// nil where that is not known.
func (v *view) doorListAge(l *local, on civil.Day) any {
	if l.subject.Asks != program.AsksSite {
		return nil
	}
	switch of := v.fact(l, program.FactDoorListOf, on).(type) {
	case string:
		if day, err := civil.ParseDay(of); err == nil {
			return float64(min(on-day, program.OldestDoorList))
		}
	case bool:
		return float64(-1)
	}
	return nil
}

// ageTurns adds the days on which the age of the list of doors is another one.
func (v *view) ageTurns(t *turns, l *local) {
	list := l.values(program.FactDoorListOf)
	for i := range list {
		f := &list[i]
		if !f.KnownAt(v.k) {
			continue
		}
		t.add(f.From)
		of, ok := f.Value.(string)
		day, err := civil.ParseDay(of)
		if !ok || err != nil {
			continue
		}
		last := day + program.OldestDoorList
		for j := i + 1; j < len(list); j++ {
			if list[j].KnownAt(v.k) {
				last = min(last, list[j].From)
				break
			}
		}
		for d := f.From + 1; d <= last; d++ {
			t.add(d)
		}
	}
}

func (v *view) text(l *local, code string, on civil.Day) string {
	s, _ := v.fact(l, code, on).(string)
	return s
}

// posts are those that the person holds on the day, sorted; whose deputy they are is not among them.
func (v *view) posts(person *local, on civil.Day) []string {
	var out []string
	deeds := v.past(person).deeds
	for i := range deeds {
		if post := v.e.kinds.post[deeds[i].kind]; post != "" && !strings.HasSuffix(post, deputy) && v.holdsPost(person, post, on) {
			out = append(out, post)
		}
	}
	slices.Sort(out)
	return out
}

// holders are the people who hold the post on the day, sorted.
func (v *view) holders(post string, on civil.Day) []string {
	var out []string
	for _, no := range v.site.appointed[post] {
		person := v.site.locals[no]
		if v.holdsPost(person, post, on) {
			out = append(out, person.subject.Code)
		}
	}
	slices.Sort(out)
	return out
}

// holdsPost tells whether the last appointment of the person to the post, up to the day, passed and
// has not run out. Only the site's own appointments count, and only while the person is there: a
// post whose holder has left stands empty.
func (v *view) holdsPost(person *local, post string, on civil.Day) bool {
	if _, here := v.presence(person, on); !here {
		return false
	}
	last := v.appointment(person, post, on)
	return last != nil && last.passed && (last.until == noDay || on <= last.until)
}

func (v *view) appointment(person *local, post string, on civil.Day) *record {
	ed := v.edition(on)
	if ed == nil {
		return nil
	}
	var last deed
	list := v.records(person, appointment+post)
	for i := range list {
		r := &list[i]
		if int32(r.site) != v.site.no || !r.knownAt(v.k) {
			continue
		}
		d := deed{r.in(ed.loc), r}
		if d.on <= on && (last.record == nil || compareDeeds(last, d) < 0) {
			last = d
		}
	}
	return last.record
}
