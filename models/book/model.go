package book

import (
	"cmp"
	"encoding/json"
	"fmt"
	"slices"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
	"lodebook/models/store"
)

// model is what the book keeps in memory: the evaluator and what pages look up. It is fed from the
// projected rows, at open and after every write of this or another process.
type model struct {
	head     int64 // number of entries taken in
	engine   *standing.Engine
	sites    map[string]*siteModel
	people   map[string][]store.PersonRow
	fixtures map[siteCode][]store.FixtureRow
	stints   map[store.SubjectKey][]store.StintRow
	facts    map[store.SubjectKey][]store.FactRow
	records  map[store.SubjectKey][]store.RecordRow
	events   map[store.SubjectKey][]store.EventRow
	excusals map[store.SubjectKey][]store.ExcusalRow
	plans    []store.PlanRow
	accounts map[string][]store.AccountRow
	batches  []store.BatchRow
	sessions map[string]map[int64]bool // records that stand, by session: whether a plan is done
}

type siteCode struct{ site, code string }

func newModel() *model {
	return &model{
		engine: standing.New(), sites: map[string]*siteModel{}, people: map[string][]store.PersonRow{},
		fixtures: map[siteCode][]store.FixtureRow{}, stints: map[store.SubjectKey][]store.StintRow{},
		facts: map[store.SubjectKey][]store.FactRow{}, records: map[store.SubjectKey][]store.RecordRow{},
		events: map[store.SubjectKey][]store.EventRow{}, excusals: map[store.SubjectKey][]store.ExcusalRow{},
		accounts: map[string][]store.AccountRow{}, sessions: map[string]map[int64]bool{},
	}
}

// upsert puts a row into a list kept in order of sequence number; a row of the same entry (and, by
// same, of the same part of it) is replaced.
func upsert[T any](list []T, row T, seq func(T) int64, same func(a, b T) bool) []T {
	i := len(list)
	for i > 0 && seq(list[i-1]) > seq(row) {
		i--
	}
	for j := i - 1; j >= 0 && seq(list[j]) == seq(row); j-- {
		if same(list[j], row) {
			list[j] = row
			return list
		}
	}
	return slices.Insert(list, i, row)
}

func always[T any](_, _ T) bool { return true }

// take brings the model up to date with the rows that changed.
func (m *model) take(d store.Delta) error {
	for _, v := range d.Versions {
		if err := m.takeVersion(v); err != nil {
			return err
		}
	}
	for _, r := range d.People {
		m.people[r.Code] = upsert(m.people[r.Code], r, func(r store.PersonRow) int64 { return r.Seq }, always)
	}
	for _, r := range d.Fixtures {
		k := siteCode{r.Site, r.Code}
		m.fixtures[k] = upsert(m.fixtures[k], r, func(r store.FixtureRow) int64 { return r.Seq }, always)
		if m.engine != nil {
			m.engine.PutFact(r.Site, standing.Fact{Line: known(r.Line), Subject: subjectOf(string(program.AsksFixture), r.Code), Code: factKind, From: civil.FirstDay, Value: r.Kind})
		}
	}
	for _, r := range d.Stints {
		k := store.SubjectKey{Site: r.Site, Kind: r.Kind, Code: r.Code}
		m.stints[k] = upsert(m.stints[k], r, func(r store.StintRow) int64 { return r.Seq }, always)
		if m.engine != nil {
			m.engine.PutStint(r.Site, standing.Stint{Line: known(r.Line), Subject: subjectOf(r.Kind, r.Code), First: r.First, Last: r.Last})
		}
	}
	for _, r := range d.Facts {
		if err := m.takeFact(r); err != nil {
			return err
		}
	}
	m.takeHappenings(d)
	for _, r := range d.Plans {
		m.plans = upsert(m.plans, r, func(r store.PlanRow) int64 { return r.Seq }, always)
	}
	for _, r := range d.Accounts {
		m.accounts[r.ID] = upsert(m.accounts[r.ID], r, func(r store.AccountRow) int64 { return r.Seq }, always)
	}
	for _, r := range d.Batches {
		m.batches = upsert(m.batches, r, func(r store.BatchRow) int64 { return r.Seq }, always)
	}
	return nil
}

func (m *model) takeHappenings(d store.Delta) {
	for _, r := range d.Records {
		m.records[r.Subject] = upsert(m.records[r.Subject], r, func(r store.RecordRow) int64 { return r.Seq }, always)
		m.engine.PutRecord(standing.Record{
			Line: known(r.Line), Order: r.Order, Site: r.Site, Subject: subjectOf(r.Subject.Kind, r.Subject.Code), What: r.What,
			Day: r.Day, Time: r.Time, Passed: r.Passed, Until: r.Until, Limit: strings.Fields(r.Limit),
		})
		m.takeSession(r)
	}
	for _, r := range d.Events {
		m.events[r.Subject] = upsert(m.events[r.Subject], r, func(r store.EventRow) int64 { return r.Seq }, always)
		m.engine.PutEvent(r.Site, standing.Event{Line: known(r.Line), Subject: subjectOf(r.Subject.Kind, r.Subject.Code), Code: r.Event, Day: r.Day, Time: r.Time})
	}
	for _, r := range d.Excusals {
		m.excusals[r.Subject] = upsert(m.excusals[r.Subject], r, func(r store.ExcusalRow) int64 { return r.Seq }, always)
		m.engine.PutExcusal(r.Site, standing.Excusal{Line: known(r.Line), Subject: subjectOf(r.Subject.Kind, r.Subject.Code), Item: r.Item, From: r.From, To: r.To, Opens: r.Opens})
	}
}

// takeSession counts the record to its session while it stands.
func (m *model) takeSession(r store.RecordRow) {
	if r.Session == "" {
		return
	}
	if m.sessions[r.Session] == nil {
		m.sessions[r.Session] = map[int64]bool{}
	}
	if r.Ended == 0 {
		m.sessions[r.Session][r.Seq] = true
	} else {
		delete(m.sessions[r.Session], r.Seq)
	}
}

func (m *model) takeFact(r store.FactRow) error {
	var value any
	if err := json.Unmarshal([]byte(r.Value), &value); err != nil {
		return fmt.Errorf("the fact %s of %s %s is not readable: %w", r.Fact, r.Kind, r.Code, err)
	}
	k := store.SubjectKey{Site: r.Site, Kind: r.Kind, Code: r.Code}
	m.facts[k] = upsert(m.facts[k], r, func(r store.FactRow) int64 { return r.Seq }, func(a, b store.FactRow) bool { return a.Fact == b.Fact })
	if m.engine != nil {
		m.engine.PutFact(r.Site, standing.Fact{Line: known(r.Line), Subject: subjectOf(r.Kind, r.Code), Code: r.Fact, From: r.From, Value: value})
	}
	return nil
}

func (m *model) takeVersion(v store.VersionRow) error {
	s := m.sites[v.Site]
	if s == nil {
		s = &siteModel{code: v.Site}
		m.sites[v.Site] = s
	}
	p, err := program.Parse(v.Source)
	if err != nil {
		return fmt.Errorf("version %d of the program of site %s is not readable by this program: %w", v.Number, v.Site, err)
	}
	s.versions = upsert(s.versions, versionModel{v, p}, func(v versionModel) int64 { return v.row.Seq }, always)
	m.engine.PutVersion(v.Site, standing.Version{Line: known(v.Line), Number: v.Number, InForceFrom: v.InForceFrom, Program: p})
	return nil
}

func known(l store.Line) standing.Line { return standing.Line{Seq: l.Seq, Ended: l.Ended, ID: l.ID} }

func subjectOf(kind, code string) standing.Subject {
	return standing.Subject{Asks: program.Asks(kind), Code: code}
}

// site gives a site, or nil.
func (m *model) site(code string) *siteModel { return m.sites[code] }

func (m *model) siteCodes() []string { return sortedKeys(m.sites) }

// zone is the time zone of a site, UTC where there is none.
func (m *model) zone(site string) *time.Location {
	if s := m.sites[site]; s != nil {
		return s.newest().program.Site.Location
	}
	return time.UTC
}

func (m *model) newestVersion(site string) (store.VersionRow, bool) {
	s := m.sites[site]
	if s == nil {
		return store.VersionRow{}, false
	}
	best := s.versions[0].row
	for _, v := range s.versions {
		if v.row.InForceFrom > best.InForceFrom {
			best = v.row
		}
	}
	return best, true
}

// person merges what the standing lines say of a person; of each field the last that says it.
func (m *model) person(code string) (store.PersonRow, bool) {
	var out store.PersonRow
	found := false
	for _, r := range m.people[code] {
		if r.Ended != 0 {
			continue
		}
		found = true
		out.Line, out.Code, out.Erased = r.Line, r.Code, out.Erased || r.Erased
		out.Name = cmp.Or(r.Name, out.Name)
		out.Email = cmp.Or(r.Email, out.Email)
		out.Badge = cmp.Or(r.Badge, out.Badge)
	}
	return out, found
}

// fixture merges what the standing lines say of a fixture.
func (m *model) fixture(site, code string) (store.FixtureRow, bool) {
	var out store.FixtureRow
	found := false
	for _, r := range m.fixtures[siteCode{site, code}] {
		if r.Ended != 0 {
			continue
		}
		found = true
		name := cmp.Or(r.Name, out.Name)
		out = r
		out.Name = name
	}
	return out, found
}

// stintsAt gives the spans of a subject at a site that count: of those that begin on one day the
// last recorded.
func (m *model) stintsAt(site, kind, code string) []store.StintRow {
	var out []store.StintRow
	for _, r := range m.stints[store.SubjectKey{Site: site, Kind: kind, Code: code}] {
		if r.Ended != 0 {
			continue
		}
		out = slices.DeleteFunc(out, func(o store.StintRow) bool { return sameDay(o.First, r.First) })
		out = append(out, r)
	}
	slices.SortFunc(out, func(a, b store.StintRow) int { return compareDays(a.First, b.First, civil.FirstDay) })
	return out
}

func compareDays(a, b *civil.Day, absent civil.Day) int {
	day := func(d *civil.Day) civil.Day {
		if d == nil {
			return absent
		}
		return *d
	}
	return cmp.Compare(day(a), day(b))
}

// presentAt tells whether a person is on staff anywhere at the moment, and where.
func (m *model) presentAt(person string, now time.Time) (string, bool) {
	for _, site := range m.siteCodes() {
		today := civil.DayOf(now, m.zone(site))
		for _, s := range m.stintsAt(site, string(program.AsksPerson), person) {
			if covers(s.First, s.Last, today) {
				return site, true
			}
		}
	}
	return "", false
}

func covers(first, last *civil.Day, d civil.Day) bool {
	return (first == nil || *first <= d) && (last == nil || d <= *last)
}

// account gives the account as its last standing line says.
func (m *model) account(id string) (store.AccountRow, bool) {
	rows := m.accounts[id]
	for i := len(rows) - 1; i >= 0; i-- {
		if rows[i].Ended == 0 {
			return rows[i], true
		}
	}
	return store.AccountRow{}, false
}

// accountNamed finds the account that bears a name now.
func (m *model) accountNamed(name string) (store.AccountRow, bool) {
	for _, id := range sortedKeys(m.accounts) {
		if a, ok := m.account(id); ok && strings.EqualFold(a.Name, name) && name != "" {
			return a, true
		}
	}
	return store.AccountRow{}, false
}

// hasSubject tells whether the subject is on record at the site (a person: in the book).
func (m *model) hasSubject(site string, s subjectBody) bool {
	switch program.Asks(s.Kind) {
	case program.AsksPerson:
		_, ok := m.person(s.Code)
		return ok
	case program.AsksFixture:
		_, ok := m.fixture(site, s.Code)
		return ok
	default:
		sm := m.site(site)
		return sm != nil && slices.Contains(sm.subjectCodes(program.Asks(s.Kind)), s.Code)
	}
}
