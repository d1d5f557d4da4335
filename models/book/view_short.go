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

// Short is what asks for attention at a site on a day.
type Short struct {
	Site SiteView
	On   civil.Day
	// Rows are the gaps, what is closing, what cannot be told, and whatever else falls due in the week of
	// the day; in order of item, then subject. Their subjects have no names yet: see Named.
	Rows    []Row
	Proved  bool // some obligation has a record
	Plans   []PlanLine
	Entries int64
}

// Gaps are the rows that are gaps.
func (s Short) Gaps() []Row { return Standings{Rows: s.Rows}.Gaps() }

// Faults are the rows that cannot be told for want of a fact.
func (s Short) Faults() []Row { return Standings{Rows: s.Rows}.Faults() }

// Due is the number of fixtures with a gap or something closing.
func (s Short) Due() int {
	due := map[string]bool{}
	for _, r := range s.Rows {
		if r.Subject.Asks == program.AsksFixture && (r.Word.IsGap() || r.Word == standing.Closing) {
			due[r.Subject.Code] = true
		}
	}
	return len(due)
}

// Short gives what asks for attention: to an actor who does not see the site only what is their own, and
// no plans. To all who see the site the answer is the same.
func (b *Book) Short(ctx context.Context, actor Actor, site string, on *civil.Day) (Short, error) {
	var out Short
	own, err := b.mayRead(actor, site)
	if err != nil {
		return out, err
	}
	err = b.read(ctx, func(m *model) error {
		v, err := m.view(site, on, always64, b.Now())
		if err != nil {
			return err
		}
		q := standing.Query{On: v.on, KnownAt: v.k}
		if q.Subject, err = m.narrow(actor, own, StandingQuery{Site: site}); err != nil {
			return err
		}
		out = Short{Site: v.SiteView, On: v.on, Entries: m.head}
		if !own {
			out.Plans = v.plans()
		}
		if err := v.short(&out, q); err != nil {
			return err
		}
		out.Rows = m.alsoOverdue(out.Rows, actor, own, StandingQuery{Site: site}, v.on, v.k)
		return nil
	})
	return out, err
}

// pressing are the words that ask for attention, or will when they fall due.
var pressing = []standing.Word{standing.Closing, standing.Lapsed, standing.Missing, standing.Failed, standing.DataFault, standing.Awaited}

// short evaluates, and dresses what is to be seen but for the names of its subjects.
func (v *siteOn) short(out *Short, q standing.Query) error {
	asked := v.Program
	if in, ok := v.m.engine.VersionOn(v.Code, v.on, v.k); ok {
		asked = in.Program
	}
	week := civil.PeriodOf(civil.ByWeek, v.on)
	list, err := v.pressing(asked, q, week.Last)
	if err != nil {
		return err
	}
	var one Row // the last item's, without a standing
	for i := range list {
		s := &list[i]
		out.Proved = out.Proved || s.Record != ""
		if !s.Word.IsGap() && s.Word != standing.Closing && s.Word != standing.DataFault && (s.Due == nil || *s.Due < week.First || *s.Due > week.Last) {
			continue
		}
		if one.Item != s.Item {
			one = v.rowOf(asked, s.Item)
		}
		r := one
		r.Standing, r.Asked = *s, s.Word != standing.DataFault
		out.Rows = append(out.Rows, r)
	}
	out.Rows = slices.Clip(out.Rows)
	if !out.Proved {
		q.Words = []standing.Word{standing.Met, standing.Excused}
		list, err = v.m.engine.Evaluate(v.Code, q)
		out.Proved = slices.ContainsFunc(list, func(s standing.Standing) bool { return s.Record != "" })
	}
	return err
}

// pressing evaluates what is not met, and what is met and yet falls due up to a day, since its notice is
// shorter; in order of item, then subject.
func (v *siteOn) pressing(p *program.Program, q standing.Query, last civil.Day) ([]standing.Standing, error) {
	q.Words = pressing
	list, err := v.m.engine.Evaluate(v.Code, q)
	if err != nil {
		return nil, err
	}
	q.Words = []standing.Word{standing.Met}
	for i := range p.Items {
		item := &p.Items[i]
		if item.Cadence.Holds != nil || item.Cadence.Rule == program.After || item.Notice.Before(last) <= v.on {
			continue
		}
		q.Item = item.Code
		met, err := v.m.engine.Evaluate(v.Code, q)
		if err != nil {
			return nil, err
		}
		list = append(list, met...)
	}
	slices.SortStableFunc(list, func(a, b standing.Standing) int {
		return cmp.Or(strings.Compare(a.Item, b.Item), strings.Compare(a.Subject.Code, b.Subject.Code))
	})
	return list, nil
}

// rowOf is what every row of an item says.
func (v *siteOn) rowOf(p *program.Program, code string) Row {
	r := Row{Site: v.Code}
	r.Item = code
	if item, ok := p.Item(code); ok {
		r.Title, r.Group, r.Basis, r.Records, r.Guards = item.Title, item.Group, item.Basis, item.Records, item.Guards
		r.Cadence, r.Owner = item.Cadence.Words(), ownerOf(item)
	}
	return r
}

// Named fills in the names and notes of the subjects of rows that Short gave to the actor.
func (b *Book) Named(ctx context.Context, actor Actor, site string, on *civil.Day, rows []Row) error {
	own, err := b.mayRead(actor, site)
	if err != nil {
		return err
	}
	return b.read(ctx, func(m *model) error {
		v, err := m.names(site, on, b.Now())
		if err != nil {
			return err
		}
		for i := range rows {
			s := rows[i].Subject
			if own && !m.ownsRemedy(actor, site, s) && s != (standing.Subject{Asks: program.AsksPerson, Code: actor.Person}) {
				return &Denied{Action: SeeSite, Role: actor.Role}
			}
			rows[i].SubjectName, rows[i].SubjectNote = v.nameAndNote(s)
		}
		return nil
	})
}

// names is the site ready to name subjects, without its numbers of people and fixtures.
func (m *model) names(code string, on *civil.Day, now time.Time) (*siteOn, error) {
	s := m.site(code)
	if s == nil {
		return nil, &NotFound{"site", code}
	}
	v := &siteOn{m: m, k: always64, on: civil.DayOf(now, m.zone(code)), named: map[standing.Subject][2]string{}}
	if on != nil {
		v.on = *on
	}
	p := s.on(v.on).program
	v.SiteView = SiteView{Code: code, Name: p.Site.Name, Program: p}
	return v, nil
}
