package standing

import (
	"cmp"
	"slices"
	"sort"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// Engine holds what is on record and judges it. Its Put methods are for one writer at a time and
// not beside a reader; any number of readers may run together. The caller guards this with a lock.
//
// A line that is put again (the same Seq for the same subject, and Code for a fact) replaces itself:
// that is how its Ended arrives later. Nothing else of a line may change between two puts.
type Engine struct {
	sites  map[string]*site
	people map[string]*past
}

// site is what is on record at one site. A site is known once it has a version.
type site struct {
	code     string
	editions []*edition // by Seq
	subjects map[Subject]*local
	ofKind   map[program.Asks][]*local
	// appointed lists, for each post, everybody who was ever appointed to it at this site.
	appointed map[string][]*local
}

// local is what is on record about a subject at one site.
type local struct {
	subject  Subject
	past     *past
	stints   []Stint              // by Seq
	facts    map[string][]Fact    // by code; then by day and Seq
	excusals map[string][]Excusal // by item; then by Seq
}

// past is what happened to a subject. A person's is shared by all sites.
type past struct {
	records map[string][]record // by kind/code; then by compareRecords
	events  map[string][]Event  // by code; then by Seq
	pauses  []Excusal           // by Seq
}

// record is a Record as it is kept: what the rules read and no more, since there are many.
type record struct {
	Line
	order  int64
	site   *site
	time   *time.Time
	until  *civil.Day
	day    civil.Day
	passed bool
}

// New is an engine with nothing on record.
func New() *Engine {
	return &Engine{sites: map[string]*site{}, people: map[string]*past{}}
}

// PutVersion puts a recorded version of the site's program.
func (e *Engine) PutVersion(site string, v Version) {
	s := e.site(site)
	s.editions = upsert(s.editions, newEdition(site, v), func(a, b **edition) int { return cmp.Compare((*a).Seq, (*b).Seq) })
}

// PutStint puts a span of presence of a person or a fixture, which makes it known at the site.
func (e *Engine) PutStint(site string, s Stint) {
	l := e.local(site, s.Subject)
	l.stints = upsert(l.stints, s, func(a, b *Stint) int { return cmp.Compare(a.Seq, b.Seq) })
}

// PutFact puts a dated value that is on record at the site.
func (e *Engine) PutFact(site string, f Fact) {
	l := e.local(site, f.Subject)
	l.facts[f.Code] = upsert(l.facts[f.Code], f, func(a, b *Fact) int {
		return cmp.Or(cmp.Compare(a.From, b.From), cmp.Compare(a.Seq, b.Seq))
	})
}

// PutRecord puts something done. A person's record counts at every site, except for local items; a
// record of any other subject belongs to the site where it was recorded.
func (e *Engine) PutRecord(r Record) {
	s, p := e.site(r.Site), e.past(r.Site, r.Subject)
	kept := record{r.Line, r.Order, s, r.Time, r.Until, r.Day, r.Passed}
	p.records[r.What] = upsert(p.records[r.What], kept, compareRecords)
	if post, ok := strings.CutPrefix(r.What, appointment); ok && r.Subject.Asks == program.AsksPerson {
		l := e.local(r.Site, r.Subject)
		if !slices.Contains(s.appointed[post], l) {
			s.appointed[post] = append(s.appointed[post], l)
		}
	}
}

// PutEvent puts something that happened. Events of persons count at every site whose items name the
// code, others at their site.
func (e *Engine) PutEvent(site string, ev Event) {
	p := e.past(site, ev.Subject)
	p.events[ev.Code] = upsert(p.events[ev.Code], ev, func(a, b *Event) int { return cmp.Compare(a.Seq, b.Seq) })
}

// PutExcusal puts an excusal, which counts at its site, or a pause (an empty Item); a person's
// pauses count at every site.
func (e *Engine) PutExcusal(site string, x Excusal) {
	bySeq := func(a, b *Excusal) int { return cmp.Compare(a.Seq, b.Seq) }
	if x.Item == "" {
		p := e.past(site, x.Subject)
		p.pauses = upsert(p.pauses, x, bySeq)
		return
	}
	l := e.local(site, x.Subject)
	l.excusals[x.Item] = upsert(l.excusals[x.Item], x, bySeq)
}

func (e *Engine) site(code string) *site {
	s := e.sites[code]
	if s == nil {
		s = &site{code: code, subjects: map[Subject]*local{}, ofKind: map[program.Asks][]*local{}, appointed: map[string][]*local{}}
		e.sites[code] = s
	}
	return s
}

func (e *Engine) local(site string, sub Subject) *local {
	s := e.site(site)
	l := s.subjects[sub]
	if l == nil {
		l = &local{subject: sub, past: newPast(), facts: map[string][]Fact{}, excusals: map[string][]Excusal{}}
		if sub.Asks == program.AsksPerson {
			l.past = e.person(sub.Code)
		}
		s.subjects[sub] = l
		s.ofKind[sub.Asks] = append(s.ofKind[sub.Asks], l)
	}
	return l
}

func (e *Engine) past(site string, sub Subject) *past {
	if sub.Asks == program.AsksPerson {
		return e.person(sub.Code)
	}
	return e.local(site, sub).past
}

func (e *Engine) person(code string) *past {
	p := e.people[code]
	if p == nil {
		p = newPast()
		e.people[code] = p
	}
	return p
}

func newPast() *past {
	return &past{records: map[string][]record{}, events: map[string][]Event{}}
}

// upsert puts v in its place in the ordered list, over an equal one if there is one.
func upsert[T any](list []T, v T, compare func(a, b *T) int) []T {
	n := len(list)
	if n == 0 || compare(&list[n-1], &v) < 0 {
		return append(list, v) // lines mostly come in order
	}
	i, found := sort.Find(n, func(i int) int { return compare(&v, &list[i]) })
	if found {
		list[i] = v
		return list
	}
	return slices.Insert(list, i, v)
}

// compareRecords orders records as the design does, with the days of those that have a time
// counted in UTC: a site's own zone moves them by a day at most.
func compareRecords(a, b *record) int {
	return compareDeeds(deed{dayIn(a.day, a.time, time.UTC), a}, deed{dayIn(b.day, b.time, time.UTC), b})
}

// dayIn is the day in the zone of something that has a day and perhaps a time.
func dayIn(day civil.Day, at *time.Time, loc *time.Location) civil.Day {
	if at == nil {
		return day
	}
	return civil.DayOf(*at, loc)
}
