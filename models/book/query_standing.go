package book

import (
	"cmp"
	"context"
	"slices"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// StandingQuery asks for standings. Nil On is today at the site; nil KnownAt is all that is
// recorded. Item and Subject (a code, or kind:code) narrow it.
type StandingQuery struct {
	Site    string
	On      *civil.Day
	KnownAt *time.Time
	Item    string
	Subject string
	Why     bool
}

// Standings gives the standings that the actor may see: a member only their own.
func (b *Book) Standings(ctx context.Context, actor Actor, q StandingQuery) (Standings, error) {
	out := Standings{KnownAt: q.KnownAt}
	own, err := b.mayRead(actor, q.Site)
	if err != nil {
		return out, err
	}
	k, err := b.knownAt(ctx, q.KnownAt)
	if err != nil {
		return out, err
	}
	err = b.read(ctx, func(m *model) error {
		site, err := m.view(q.Site, q.On, k, b.Now())
		if err != nil {
			return err
		}
		out.Site, out.On = site.SiteView, site.on
		sq := standing.Query{On: site.on, KnownAt: k, Item: q.Item, Why: q.Why}
		if sq.Subject, err = m.narrow(actor, own, q); err != nil {
			return err
		}
		if q.Item != "" && q.Item != string(AsksRemedy) && q.Item != string(AsksReport) && !m.site(q.Site).declares(func(p *program.Program) bool { _, ok := p.Item(q.Item); return ok }) {
			return &NotFound{"item", q.Item}
		}
		out.Rows, err = site.rows(sq)
		out.Rows = m.alsoOverdue(out.Rows, actor, own, q, site.on, k)
		return err
	})
	return out, err
}

// mayRead checks that the actor may see the site; own says that it is only what is their own.
func (b *Book) mayRead(actor Actor, site string) (own bool, err error) {
	if actor.may(SeeSite, site) == nil {
		return false, nil
	}
	return true, actor.may(SeeOwn, site)
}

// narrow resolves the query's subject; of an actor who sees only their own, it is always they.
func (m *model) narrow(actor Actor, own bool, q StandingQuery) (*standing.Subject, error) {
	if own {
		if actor.Person == "" {
			return nil, &Denied{Action: SeeOwn, Role: actor.Role, Why: "this account is linked to no person; ask an administrator to link it"}
		}
		return &standing.Subject{Asks: program.AsksPerson, Code: actor.Person}, nil
	}
	if q.Subject == "" {
		return nil, nil
	}
	s, faults := (&check{m: m, site: q.Site}).subject("subject", q.Subject)
	if len(faults) > 0 {
		return nil, &Invalid{faults}
	}
	return &standing.Subject{Asks: program.Asks(s.Kind), Code: s.Code}, nil
}

// siteOn is a site on one day as known at one moment, ready to answer.
type siteOn struct {
	SiteView
	m     *model
	on    civil.Day
	k     int64
	named map[standing.Subject][2]string // names and notes, each looked up once
	crews map[string]int                 // people in each crew; nil until asked
}

// view makes the site ready for a day (nil: today).
func (m *model) view(code string, on *civil.Day, k int64, now time.Time) (*siteOn, error) {
	s := m.site(code)
	if s == nil {
		return nil, &NotFound{"site", code}
	}
	zone := m.zone(code)
	v := &siteOn{m: m, k: k, on: civil.DayOf(now, zone), named: map[standing.Subject][2]string{}}
	v.Today = v.on
	if on != nil {
		v.on = *on
	}
	in := s.on(v.on)
	p := in.program
	v.SiteView = SiteView{Code: code, Name: p.Site.Name, TimeZone: p.Site.TimeZone, Location: zone, Today: v.Today, Program: p, Version: in.row.Number}
	v.People = m.engine.SubjectCount(code, program.AsksPerson, v.on, k)
	v.Fixtures = m.engine.SubjectCount(code, program.AsksFixture, v.on, k)
	return v, nil
}

// rows evaluates and dresses the standings.
func (v *siteOn) rows(q standing.Query) ([]Row, error) {
	list, err := v.m.engine.Evaluate(v.Code, q)
	if err != nil {
		return nil, err
	}
	program := v.Program
	if in, ok := v.m.engine.VersionOn(v.Code, v.on, v.k); ok {
		program = in.Program
	}
	rows := make([]Row, 0, len(list))
	for _, s := range list {
		r := Row{Standing: s, Site: v.Code, Asked: s.Word != standing.DataFault}
		r.SubjectName, r.SubjectNote = v.nameAndNote(s.Subject)
		if item, ok := program.Item(s.Item); ok {
			r.Title, r.Group, r.Basis, r.Records, r.Guards = item.Title, item.Group, item.Basis, item.Records, item.Guards
			r.Cadence, r.Owner = item.Cadence.Words(), ownerOf(item)
		}
		rows = append(rows, r)
	}
	return rows, nil
}

// ownerOf is who answers for an item's gaps: whom the program names, else facilities for things and
// zones and the safety officer for the rest.
func ownerOf(i *program.Item) string {
	if i.Owner != "" {
		return i.Owner
	}
	if i.Asks == program.AsksFixture || i.Asks == program.AsksZone {
		return string(Facilities)
	}
	return string(SafetyOfficer)
}

// nameAndNote looks a subject's name and note up once.
func (v *siteOn) nameAndNote(s standing.Subject) (name, note string) {
	both, ok := v.named[s]
	if !ok {
		both = [2]string{v.subjectName(s), v.subjectNote(s)}
		v.named[s] = both
	}
	return both[0], both[1]
}

// subjectName is the subject's name, or its code where it has none.
func (v *siteOn) subjectName(s standing.Subject) string {
	switch s.Asks {
	case program.AsksPerson:
		p, _ := v.m.person(s.Code)
		if p.Erased {
			return s.Code + " " + erasedText
		}
		return cmp.Or(p.Name, s.Code)
	case program.AsksFixture:
		f, _ := v.m.fixture(v.Code, s.Code)
		return cmp.Or(f.Name, s.Code)
	case program.AsksZone:
		return "Zone " + s.Code
	case program.AsksCrew:
		return cmp.Or(named(v.Program.Crew(s.Code)), s.Code)
	case program.AsksPost:
		return cmp.Or(named(v.Program.Post(s.Code)), s.Code)
	case program.AsksDocument:
		if d, ok := v.Program.Document(s.Code); ok {
			return cmp.Or(d.Title, s.Code)
		}
	case program.AsksSite:
		return v.Name
	case AsksRemedy, AsksReport:
		name, _ := v.overdueNames(s)
		return name
	}
	return s.Code
}

type crewOrPost interface{ program.Crew | program.Post }

func named[T crewOrPost](x *T, ok bool) string {
	if !ok {
		return ""
	}
	switch v := any(x).(type) {
	case *program.Crew:
		return v.Name
	case *program.Post:
		return v.Name
	}
	return ""
}

// subjectNote says a little more: crew and employer of a person, kind and zone of a fixture.
func (v *siteOn) subjectNote(s standing.Subject) string {
	var parts []string
	switch s.Asks {
	case program.AsksPerson:
		if e := v.texts("employer", s)[0]; e != "" {
			parts = append(parts, e)
		}
		if crew := v.texts(factCrew, s)[0]; crew != "" {
			parts = append(parts, cmp.Or(named(v.Program.Crew(crew)), crew))
		}
	case program.AsksFixture:
		f, _ := v.m.fixture(v.Code, s.Code)
		if f.Name != "" {
			parts = append(parts, s.Code)
		}
		parts = append(parts, v.kindName(f.Kind))
		if zone := v.texts(factZone, s)[0]; zone != "" {
			parts = append(parts, "Zone "+zone)
		}
	case AsksRemedy, AsksReport:
		_, note := v.overdueNames(s)
		return note
	case program.AsksCrew:
		parts = append(parts, plural(v.crewSize(s.Code), "person", "people"))
	}
	return strings.Join(parts, ", ")
}

// texts are the values of a fact of subjects of one kind, empty where there is none: a look at each, where
// all that selectors read of a subject is dear to derive.
func (v *siteOn) texts(fact string, of ...standing.Subject) []string {
	out := make([]string, len(of))
	for i, x := range v.m.engine.Facts(v.Code, fact, of, v.on, v.k) {
		out[i], _ = x.(string)
	}
	return out
}

// crewSize is the number of people on staff in a crew.
func (v *siteOn) crewSize(crew string) int {
	if v.crews == nil {
		v.crews = map[string]int{}
		for _, crew := range v.texts(factCrew, v.m.engine.Subjects(v.Code, program.AsksPerson, v.on, v.k)...) {
			v.crews[crew]++
		}
	}
	return v.crews[crew]
}

func (v *siteOn) kindName(kind string) string {
	if k, ok := v.Program.FixtureKind(kind); ok && k.Name != "" {
		return k.Name
	}
	return kind
}

func plural(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return smallNumber(n) + " " + many
}

// severity orders words from worst to best, for "worst first" lists and the worst of many.
var severity = []standing.Word{
	standing.Failed, standing.Missing, standing.Lapsed, standing.DataFault, standing.Closing,
	standing.Awaited, standing.Excused, standing.Met,
}

// Worse tells whether a is worse than b.
func Worse(a, b standing.Word) bool {
	return b == "" || slices.Index(severity, a) < slices.Index(severity, b)
}
