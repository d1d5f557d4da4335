package standing

import (
	"cmp"
	"maps"
	"slices"
	"sort"
	"strings"

	"lodebook/models/program"
)

// Engine holds what is on record and judges it. Its Put methods and Turn are for one writer at a time
// and not beside a reader; any number of readers may run together. Who wants to write while others
// read forks first: see Fork.
//
// A line that is put again (the same Seq for the same subject, and Code for a fact) replaces itself:
// that is how its Ended arrives later. Nothing else of a line may change between two puts.
//
// Everything inside belongs to the engine that made it and may be shared by its forks; a write copies
// what another engine may be reading. Lists only ever grow behind the end that a reader knows.
type Engine struct {
	own    *owner
	known  int64   // what is recorded up to it counts in the boards
	sites  []*site // by number
	number map[string]int32
	kinds  kinds           // of records
	limits limits          // of clearances
	names  names           // numbers of people
	people pages           // what happened to people, by number
	marks  marks           // identifiers of the entries of records, by sequence number
	views  map[int32]*view // the writer's, by site
	room   [2]*scratch     // that they write into
}

// owner marks what an engine may change in place.
type owner struct{ _ byte }

// site is what is on record at one site. A site is known once it has a version.
type site struct {
	own      *owner
	no       int32
	code     string
	editions []*edition // by Seq
	locals   []*local   // by number
	number   map[Subject]int32
	numbers  *owner // whose number is
	ofKind   map[program.Asks][]int32
	// appointed lists, for each post, everybody who was ever appointed to it at this site.
	appointed map[string][]int32
	*compiled
}

// local is what is on record about a subject at one site.
type local struct {
	own      *owner
	no       int32
	person   int32 // number of the person, -1 for all others
	subject  Subject
	past     *past       // of all others
	stints   []Stint     // by Seq
	rights   []Right     // of a person, by Seq
	facts    []facts     // in no order
	excusals []exception // in no order
}

// facts are the dated values of one code, by day and Seq.
type facts struct {
	code string
	list []Fact
}

// exception is all excusals of one item, by Seq.
type exception struct {
	item string
	list []Excusal
}

// past is what happened to a subject. A person's is shared by all sites.
type past struct {
	own    *owner
	code   string     // of a person
	homes  []home     // of a person: where they are known
	deeds  []deedsOf  // in no order
	events []happened // in no order
	pauses []Excusal  // by Seq
}

type home struct{ site, local int32 }

// deedsOf are the records of one kind and code, by compareRecords.
type deedsOf struct {
	kind int32
	list []record
}

// kinds numbers the kinds and codes of records. It is copied when one is added.
type kinds struct {
	number map[string]int32
	what   []string
	post   []string // of an appointment the post, of any other empty
}

// happened are the events of one code, by Seq.
type happened struct {
	code string
	list []Event
}

// New is an engine with nothing on record.
func New() *Engine { return &Engine{own: &owner{}, known: Always, number: map[string]int32{}} }

// Fork gives an engine with the same content. From then on e is only read, by any number of readers
// at once, while the fork may be written. A fork that is thrown away leaves no trace, but only one
// fork of an engine may ever be written on: the last.
func (e *Engine) Fork() *Engine {
	f := *e
	f.own = &owner{}
	f.views, f.room = nil, [2]*scratch{}
	f.sites = slices.Clone(e.sites)
	f.names = e.names.fork()
	f.people = e.people.fork()
	f.marks = e.marks.fork()
	return &f
}

// AsKnownAt gives an engine, for reading only, whose counts and histories are by what was recorded up to
// a sequence number: by entries that had not been superseded or withdrawn by then. What it takes them
// from is made when it is first asked for, and kept as long as the engine is.
func (e *Engine) AsKnownAt(k int64) *Engine {
	f := e.Fork()
	f.known = k
	for i, s := range f.sites {
		c := *s
		c.compiled = &compiled{}
		f.sites[i] = &c
	}
	return f
}

// PutVersion puts a recorded version of the site's program.
func (e *Engine) PutVersion(site string, v Version) {
	s := e.owned(site)
	ed := newEdition(site, v)
	s.editions = upsert(s.editions, ed, func(a, b **edition) int { return cmp.Compare((*a).Seq, (*b).Seq) })
	s.compiled = &compiled{}
	delete(e.views, s.no)
	for sub := range ed.declared {
		e.local(site, sub)
	}
	for _, item := range ed.items {
		for _, what := range item.Records {
			e.kind(what)
		}
	}
}

// PutStint puts a span of presence of a person or a fixture, which makes it known at the site.
func (e *Engine) PutStint(site string, s Stint) {
	l := e.local(site, s.Subject)
	l.stints = upsert(l.stints, s, func(a, b *Stint) int { return cmp.Compare(a.Seq, b.Seq) })
	e.changed(e.owned(site), l, change{stint: true})
}

// PutFact puts a dated value that is on record at the site.
func (e *Engine) PutFact(site string, f Fact) {
	l := e.local(site, f.Subject)
	f.ID = "" // nothing tells of a fact by its entry
	i := slices.IndexFunc(l.facts, func(of facts) bool { return of.code == f.Code })
	if i < 0 {
		i = len(l.facts)
		l.facts = append(l.facts, facts{code: f.Code})
	}
	l.facts[i].list = upsert(l.facts[i].list, f, func(a, b *Fact) int {
		return cmp.Or(cmp.Compare(a.From, b.From), cmp.Compare(a.Seq, b.Seq))
	})
	e.changed(e.owned(site), l, change{fact: f.Code})
}

// PutRecord puts something done. A person's record counts at every site, except for local items; a
// record of any other subject belongs to the site where it was recorded. Of two records of one
// moment the one of the later entry is the later.
func (e *Engine) PutRecord(r Record) {
	at := e.siteNumber(r.Site)
	p, l := e.past(r.Site, r.Subject)
	kind := e.kind(r.What)
	i := p.find(kind)
	if i < 0 {
		i = len(p.deeds)
		p.deeds = append(p.deeds, deedsOf{kind: kind})
	}
	kept := newRecord(&r, at)
	kept.limit = e.limits.put(r.Limit)
	e.marks.put(e.own, kept.seq, markOf(r.ID))
	fresh := len(p.deeds[i].list)
	p.deeds[i].list = upsert(p.deeds[i].list, kept, compareRecords)
	list := p.deeds[i].list
	c := change{done: true, kind: kind, record: kept, behind: len(list) > fresh && list[len(list)-1].seq == kept.seq}
	if r.Subject.Asks == program.AsksPerson {
		if c.post = e.kinds.post[kind]; c.post != "" {
			e.appoint(r.Site, c.post, e.local(r.Site, r.Subject).no)
		}
	}
	e.happenedTo(r.Site, p, l, c)
}

// appoint notes that a person was appointed to a post of the site.
func (e *Engine) appoint(site, post string, person int32) {
	s := e.owned(site)
	if list := s.appointed[post]; !slices.Contains(list, person) {
		s.appointed = maps.Clone(s.appointed)
		s.appointed[post] = append(list[:len(list):len(list)], person)
	}
}

// PutEvent puts something that happened. Events of persons count at every site whose items name the
// code, others at their site.
func (e *Engine) PutEvent(site string, ev Event) {
	p, l := e.past(site, ev.Subject)
	i := slices.IndexFunc(p.events, func(h happened) bool { return h.code == ev.Code })
	if i < 0 {
		i = len(p.events)
		p.events = append(p.events, happened{code: ev.Code})
	}
	p.events[i].list = upsert(p.events[i].list, ev, func(a, b *Event) int { return cmp.Compare(a.Seq, b.Seq) })
	e.happenedTo(site, p, l, change{event: ev.Code})
}

// PutExcusal puts an excusal, which counts at its site, or a pause (an empty Item); a person's
// pauses count at every site.
func (e *Engine) PutExcusal(site string, x Excusal) {
	bySeq := func(a, b *Excusal) int { return cmp.Compare(a.Seq, b.Seq) }
	if x.Item == "" {
		p, l := e.past(site, x.Subject)
		p.pauses = upsert(p.pauses, x, bySeq)
		e.happenedTo(site, p, l, change{pause: true})
		return
	}
	l := e.local(site, x.Subject)
	i := slices.IndexFunc(l.excusals, func(of exception) bool { return of.item == x.Item })
	if i < 0 {
		i = len(l.excusals)
		l.excusals = append(l.excusals, exception{item: x.Item})
	}
	l.excusals[i].list = upsert(l.excusals[i].list, x, bySeq)
	e.changed(e.owned(site), l, change{item: x.Item})
}

// site gives what is on record at a site, or nil.
func (e *Engine) site(code string) *site {
	if no, ok := e.number[code]; ok {
		return e.sites[no]
	}
	return nil
}

// siteNumber numbers a site, a new one with the next number.
func (e *Engine) siteNumber(code string) int32 {
	no, ok := e.number[code]
	if !ok {
		no = int32(len(e.sites))
		e.number = maps.Clone(e.number)
		e.number[code] = no
		e.sites = append(e.sites, &site{
			own: e.own, no: no, code: code, number: map[Subject]int32{}, numbers: e.own,
			ofKind: map[program.Asks][]int32{}, appointed: map[string][]int32{}, compiled: &compiled{},
		})
	}
	return no
}

// owned gives the site to write on.
func (e *Engine) owned(code string) *site { return e.ownedSite(e.siteNumber(code)) }

func (e *Engine) ownedSite(no int32) *site {
	s := e.sites[no]
	if s.own != e.own {
		c := *s
		c.own = e.own
		c.locals = slices.Clone(s.locals)
		c.compiled = s.compiled.fork()
		s = &c
		e.sites[no] = s
	}
	return s
}

// local gives the subject at the site to write on, a new one where it was not known.
func (e *Engine) local(code string, sub Subject) *local {
	s := e.owned(code)
	no, ok := s.number[sub]
	if !ok {
		return e.newLocal(s, sub)
	}
	return e.ownedLocal(s, no)
}

func (e *Engine) ownedLocal(s *site, no int32) *local {
	l := s.locals[no]
	if l.own != e.own {
		c := *l
		c.own = e.own
		c.facts, c.excusals = slices.Clone(l.facts), slices.Clone(l.excusals)
		l = &c
		s.locals[no] = l
	}
	return l
}

func (e *Engine) newLocal(s *site, sub Subject) *local {
	l := &local{own: e.own, no: int32(len(s.locals)), person: -1, subject: sub}
	if sub.Asks == program.AsksPerson {
		l.person = e.person(sub.Code)
		p := e.ownedPast(l.person)
		p.homes = append(p.homes, home{s.no, l.no})
	} else {
		l.past = &past{own: e.own}
	}
	if s.numbers != e.own {
		s.number, s.numbers = maps.Clone(s.number), e.own
	}
	s.number[sub] = l.no
	s.locals = append(s.locals, l)
	s.ofKind = maps.Clone(s.ofKind)
	list := s.ofKind[sub.Asks]
	s.ofKind[sub.Asks] = append(list, l.no)
	return l
}

// person numbers a person, a new one with the next number.
func (e *Engine) person(code string) int32 {
	no, ok := e.names.find(code)
	if !ok {
		no = e.people.add(e.own, &past{own: e.own, code: code})
		e.names.put(e.own, code, no)
	}
	return no
}

// past gives what happened to a subject, to write on, and (of all but persons) the subject at its site.
func (e *Engine) past(site string, sub Subject) (*past, *local) {
	if sub.Asks == program.AsksPerson {
		return e.ownedPast(e.person(sub.Code)), nil
	}
	l := e.local(site, sub)
	if l.past.own != e.own {
		l.past = l.past.copy(e.own)
	}
	return l.past, l
}

func (e *Engine) ownedPast(person int32) *past {
	p := e.people.at(person)
	if p.own != e.own {
		p = p.copy(e.own)
		e.people.set(e.own, person, p)
	}
	return p
}

// copy gives a past that may be changed without changing p. The lists inside are shared.
func (p *past) copy(own *owner) *past {
	c := *p
	c.own = own
	c.homes, c.deeds, c.events = slices.Clone(p.homes), slices.Clone(p.deeds), slices.Clone(p.events)
	return &c
}

// find gives the place of the records of a kind and code, -1 where there are none.
func (p *past) find(kind int32) int {
	for i := range p.deeds {
		if p.deeds[i].kind == kind {
			return i
		}
	}
	return -1
}

// records gives the records of a kind and code.
func (v *view) records(l *local, what string) []record {
	kind, ok := v.e.kinds.number[what]
	if !ok {
		return nil
	}
	p := v.past(l)
	if i := p.find(kind); i >= 0 {
		return p.deeds[i].list
	}
	return nil
}

// kind numbers a kind and code of records, a new one with the next number.
func (e *Engine) kind(what string) int32 {
	no, ok := e.kinds.number[what]
	if !ok {
		no = int32(len(e.kinds.what))
		if e.kinds.number = maps.Clone(e.kinds.number); e.kinds.number == nil {
			e.kinds.number = map[string]int32{}
		}
		e.kinds.number[what] = no
		e.kinds.what = append(e.kinds.what, what)
		post, _ := strings.CutPrefix(what, appointment)
		if post == what {
			post = ""
		}
		e.kinds.post = append(e.kinds.post, post)
	}
	return no
}

// eventsOf gives the events of a code.
func (p *past) eventsOf(code string) []Event {
	for i := range p.events {
		if p.events[i].code == code {
			return p.events[i].list
		}
	}
	return nil
}

// values gives the dated values of a fact.
func (l *local) values(code string) []Fact {
	for i := range l.facts {
		if l.facts[i].code == code {
			return l.facts[i].list
		}
	}
	return nil
}

// excused gives the excusals of an item.
func (l *local) excused(item string) []Excusal {
	for i := range l.excusals {
		if l.excusals[i].item == item {
			return l.excusals[i].list
		}
	}
	return nil
}

// upsert puts v in its place in the ordered list, over an equal one if there is one. What others may
// be reading stays as it is: but behind the end, the list is copied.
func upsert[T any](list []T, v T, compare func(a, b *T) int) []T {
	n := len(list)
	if n == 0 || compare(&list[n-1], &v) < 0 {
		return append(list, v) // lines mostly come in order
	}
	i, found := sort.Find(n, func(i int) int { return compare(&v, &list[i]) })
	if found {
		list = slices.Clone(list)
		list[i] = v
		return list
	}
	return slices.Insert(list[:n:n], i, v)
}
