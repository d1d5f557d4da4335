package book

import (
	"context"
	"slices"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/reach"
	"lodebook/models/standing"
	"lodebook/models/store"
)

// Stock is taken of what no single entry says: when a site is short of people, and what its list of doors asks
// for. It is reckoned from all that is on record, and what differs from what was reckoned before goes on record
// itself, so that it is known what the book said at any moment.

// reckoning is when an item is short of people between two instants, of which the second is excluded.
type reckoning struct {
	from, to time.Time
	spans    []reach.Uncovered
}

// The horizon up to which stock is taken, in days from today: a roster that ends sooner leaves the rest of the
// nearer one uncovered; beyond the further one nothing is said. Both are carried on to a Monday, so that stock
// is not taken every day.
const (
	nearHorizon = 28
	farHorizon  = 56
)

func onMonday(d civil.Day) civil.Day {
	for d.Weekday() != time.Monday {
		d++
	}
	return d
}

// reckon reckons an item of a site anew; false where there is no roster yet.
func (m *model) reckon(r *reach.Reader, site, item string, now time.Time) (reckoning, bool) {
	duties := m.dutiesOf(site)
	was, known := m.reckoned(site, item, always64)
	if len(duties) == 0 && !known {
		return reckoning{}, false
	}
	zone := m.zone(site)
	today := civil.DayOf(now, zone)
	from, last := was.from, today
	roster := make([]reach.Duty, len(duties))
	for i, d := range duties {
		roster[i] = reach.Duty{Person: d.Person, From: d.From, To: d.To, Word: d.Duty}
		if from.IsZero() || d.From.Before(from) {
			from = d.From
		}
		last = max(last, civil.DayOf(d.To.Add(-1), zone)+1)
	}
	end := min(max(last, onMonday(today+nearHorizon)), onMonday(today+farHorizon))
	to := end.Midnight(zone).UTC()
	if !from.Before(to) { // the roster begins behind the horizon
		return reckoning{}, false
	}
	return reckoning{from, to, r.Uncovered(item, roster, from, to)}, true
}

// reckoned is what is on record of an item of a site, as known at k.
func (m *model) reckoned(site, item string, k int64) (reckoning, bool) {
	var out reckoning
	found := false
	for _, row := range m.stocks.get(siteCode{site, item}) {
		if !known(row.Line).KnownAt(k) {
			continue
		}
		if !found || row.From.Before(out.from) {
			out.from = row.From
		}
		found = true
		out.to = row.To
		out.spans = cutUncovered(out.spans, time.Time{}, row.From)
		for _, text := range row.Spans {
			if u, ok := spanOf(text); ok {
				out.spans = appendUncovered(out.spans, u)
			}
		}
	}
	return out, found
}

// appendUncovered adds a span behind the others; where it goes on with the last one, it makes that one longer.
func appendUncovered(list []reach.Uncovered, u reach.Uncovered) []reach.Uncovered {
	if n := len(list) - 1; n >= 0 && list[n].To.Equal(u.From) && list[n].There == u.There && list[n].Needed == u.Needed {
		list[n].To = u.To
		return list
	}
	return append(list, u)
}

// cutUncovered leaves of spans what lies between two instants; a zero one is none.
func cutUncovered(list []reach.Uncovered, from, to time.Time) []reach.Uncovered {
	var out []reach.Uncovered
	for _, u := range list {
		if !from.IsZero() && u.From.Before(from) {
			u.From = from
		}
		if !to.IsZero() && u.To.After(to) {
			u.To = to
		}
		if u.From.Before(u.To) {
			out = append(out, u)
		}
	}
	return out
}

// differs is the first instant from which on two reckonings say something else; false where they never do.
func (r reckoning) differs(o reckoning) (time.Time, bool) {
	var at time.Time
	earlier := func(times ...time.Time) {
		for _, t := range times {
			if at.IsZero() || t.Before(at) {
				at = t
			}
		}
	}
	if !r.from.Equal(o.from) {
		earlier(r.from, o.from)
	}
	if !r.to.Equal(o.to) {
		earlier(r.to, o.to)
	}
	for i := range max(len(r.spans), len(o.spans)) {
		switch {
		case i >= len(r.spans):
			earlier(o.spans[i].From)
		case i >= len(o.spans):
			earlier(r.spans[i].From)
		default:
			a, b := r.spans[i], o.spans[i]
			if a.From.Equal(b.From) && a.To.Equal(b.To) && a.There == b.There && a.Needed == b.Needed {
				continue
			}
			if a.From.Equal(b.From) && a.There == b.There && a.Needed == b.Needed {
				earlier(a.To, b.To)
			} else {
				earlier(a.From, b.From)
			}
		}
		break
	}
	return at, !at.IsZero()
}

// stockOf is the entry that puts right what is on record of an item; nil where that is right.
func (m *model) stockOf(r *reach.Reader, site, item string, now time.Time) *stockBody {
	is, ok := m.reckon(r, site, item, now)
	if !ok {
		return nil
	}
	was, known := m.reckoned(site, item, always64)
	at, differs := is.differs(was)
	if !known {
		at, differs = is.from, true
	}
	if !differs {
		return nil
	}
	b := &stockBody{Item: item, From: at.Format(time.RFC3339), To: is.to.Format(time.RFC3339)}
	for _, u := range cutUncovered(is.spans, at, time.Time{}) {
		b.Spans = append(b.Spans, stockSpan{u.From.Format(time.RFC3339), u.To.Format(time.RFC3339), u.There, u.Needed})
	}
	b.Days = m.stockDays(site, item, is, civil.DayOf(at, m.zone(site)))
	return b
}

// stockDays says from a day on which days are short. Days of which something is on record already are named too,
// since of one day the last that is recorded counts.
func (m *model) stockDays(site, item string, is reckoning, first civil.Day) []stockDay {
	zone := m.zone(site)
	named := map[civil.Day]bool{first: true}
	last := civil.DayOf(is.to, zone)
	for _, f := range m.facts.get(factKey(site, program.AsksSite, site)) {
		if f.Fact == program.UncoveredFact(item) && f.Ended == 0 && f.From >= first {
			named[f.From] = true
			last = max(last, f.From)
		}
	}
	named[civil.DayOf(is.to, zone)] = true
	var out []stockDay
	was, spans := false, is.spans
	for d := first; d <= last; d++ {
		from, to := d.Midnight(zone), (d + 1).Midnight(zone)
		if !from.Before(is.to) {
			if named[d] {
				out = append(out, stockDay{On: d})
			}
			continue
		}
		for len(spans) > 0 && !spans[0].To.After(from) {
			spans = spans[1:]
		}
		short := len(spans) > 0 && spans[0].From.Before(to)
		if named[d] || short != was {
			out = append(out, stockDay{d, &short})
		}
		was = short
	}
	return out
}

// doorState is what is known of a site's list of who can open which door: the day on which it was last imported, and
// how many changes it asks for. There is no list where none was ever imported.
type doorState struct {
	imported civil.Day
	open     int
	ok       bool
}

// doorListOf tells the state of a site's list of doors. Tests put another one in its place.
var doorListOf = func(ctx context.Context, b *Book, site string, now time.Time) (s doorState, err error) {
	s.imported, s.open, s.ok, err = b.doorList(ctx, site, now)
	return s, err
}

// asksDoors tells whether some item of the site asks for the state of its list of doors.
func (m *model) asksDoors(site string) bool {
	return m.site(site).declares(func(p *program.Program) bool {
		return slices.ContainsFunc(p.Items, func(i program.Item) bool { return readsDoors(&i) })
	})
}

// stockOfDoors is the entry that puts right what is on record of the list of doors; nil where that is right, or
// where no item asks.
func (m *model) stockOfDoors(site string, s doorState, now time.Time) *stockBody {
	if !m.asksDoors(site) {
		return nil
	}
	today := civil.DayOf(now, m.zone(site))
	d := &stockDoors{On: today, Open: s.open, Anew: true}
	if s.ok {
		d.Imported = &s.imported
	}
	subject := standing.Subject{Asks: program.AsksSite, Code: site}
	of := m.engine.Facts(site, program.FactDoorListOf, []standing.Subject{subject}, today, always64)[0]
	asks := m.engine.Facts(site, program.FactDoorListOpen, []standing.Subject{subject}, today, always64)[0]
	if of == d.of() {
		if asks == float64(s.open) {
			return nil
		}
		d.Anew = false
	}
	if of == nil && !s.ok { // never was one: on no day so far
		d.On = m.firstDay(site)
	}
	return &stockBody{Doors: d}
}

// of is the day of the list as the evaluator keeps it.
func (d *stockDoors) of() any {
	if d.Imported == nil {
		return false
	}
	return d.Imported.String()
}

// firstDay is the day from which the site's first version is in force.
func (m *model) firstDay(site string) civil.Day {
	first := civil.LastDay
	for _, v := range m.site(site).versions {
		first = min(first, v.row.InForceFrom)
	}
	return first
}

// stock are the entries that put right what is on record of a site.
func (m *model) stock(site string, doors doorState, now time.Time) ([]*stockBody, error) {
	r, err := reach.New(m.engine, site, always64)
	if err != nil {
		return nil, err
	}
	var out []*stockBody
	for _, item := range r.CoverItems() {
		if b := m.stockOf(r, site, item, now); b != nil {
			out = append(out, b)
		}
	}
	if b := m.stockOfDoors(site, doors, now); b != nil {
		out = append(out, b)
	}
	return out, nil
}

// stockTaken is as of when stock was taken last.
type stockTaken struct {
	head int64
	hour time.Time
}

// TakeStock puts on record what is reckoned and differs from what was: when sites are short of people, and what their
// lists of doors ask for. Where nothing has changed nothing is written. It costs next to nothing where no item asks.
func (b *Book) TakeStock(ctx context.Context) error {
	m, err := b.current(ctx)
	if err != nil || len(m.stocked) == 0 || b.site != "" {
		return err
	}
	as := stockTaken{m.head, b.Now().Truncate(time.Hour)}
	if last := b.stock.Load(); last != nil && *last == as {
		return nil
	}
	if err := b.takeStock(ctx, m.stocked); err != nil {
		return err
	}
	as.head = b.m.Load().head
	b.stock.Store(&as)
	return nil
}

// takeStock takes stock of some sites.
func (b *Book) takeStock(ctx context.Context, sites map[string]bool) error {
	m, err := b.current(ctx)
	if err != nil {
		return err
	}
	var odd []string
	doors := map[string]doorState{}
	for _, site := range sortedKeys(sites) {
		if m.asksDoors(site) {
			if doors[site], err = doorListOf(ctx, b, site, b.Now()); err != nil {
				return err
			}
		}
		list, err := m.stock(site, doors[site], b.Now())
		if err != nil {
			return err
		}
		if len(list) > 0 {
			odd = append(odd, site)
		}
	}
	if len(odd) == 0 {
		return nil
	}
	_, err = b.submit(&request{ctx: ctx, actor: JobActor(), fn: func(s *session) error {
		for _, site := range odd {
			list, err := s.m.stock(site, doors[site], s.now)
			if err != nil {
				return err
			}
			for _, body := range list {
				if err := s.add(draft{site: site, body: body}); err != nil {
					return err
				}
			}
		}
		return nil
	}})
	return err
}

// restock takes stock of the sites that a write bears on. What fails is made up for by the next Turn, and is no
// failure of the write.
func (b *Book) restock(ctx context.Context, r *request) {
	if len(r.bears) > 0 {
		_ = b.takeStock(context.WithoutCancel(ctx), r.bears)
	}
}

// bearsOn notes the sites whose stock may be another one after an entry.
func (s *session) bearsOn(d draft, rows []any) {
	if len(s.m.stocked) == 0 {
		return
	}
	switch d.body.kind() {
	case kindStock:
		return
	case kindWithdrawal, kindErasure:
		s.bear(sortedKeys(s.m.stocked)...)
	}
	for _, row := range rows {
		switch r := row.(type) {
		case store.DutyRow:
			s.bear(r.Site)
		case store.StintRow:
			if r.Kind == string(program.AsksPerson) {
				s.bear(r.Site)
			}
		case store.FactRow:
			if r.Kind == string(program.AsksPerson) {
				s.bear(r.Site)
			}
		case store.VersionRow:
			s.bear(r.Site)
		case store.BatchRow:
			s.bear(r.Site)
		case store.RecordRow:
			s.bearPerson(r.Subject)
		case store.ExcusalRow:
			s.bearPerson(r.Subject)
		case store.EventRow:
			s.bearPerson(r.Subject)
		}
	}
}

func (s *session) bearPerson(k store.SubjectKey) {
	if k.Kind != string(program.AsksPerson) {
		return
	}
	for site := range s.m.stocked {
		if len(s.m.stints.get(personAt(site, k.Code))) > 0 {
			s.bear(site)
		}
	}
}

func (s *session) bear(sites ...string) {
	for _, site := range sites {
		if s.bears == nil {
			s.bears = map[string]bool{}
		}
		s.bears[site] = true
	}
}
