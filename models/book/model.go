package book

import (
	"cmp"
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"maps"
	"runtime"
	"slices"
	"strings"
	"sync"
	"sync/atomic"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
	"lodebook/models/store"
)

// model is what the book keeps in memory: the evaluator and what pages look up. It is fed from the
// projected rows, at open and after every write of this or another process. Once it is published it is
// only read; what comes after goes into a fork.
type model struct {
	own        *owner
	st         *store.Store              // where the records are, of which it only keeps what standings need
	progress   func(rows, entries int64) // is told how far reading everything is; may be nil
	only       string                    // the site of which alone it is; empty: all
	head       int64                     // number of entries taken in
	engine     *standing.Engine
	sites      map[string]*siteModel
	people     shelf[string, []store.PersonRow]
	named      shelf[uint64, []string] // codes of people by the hash of each name that they bear or bore
	badges     shelf[string, []string] // codes of people by each badge that they bear or bore
	marks      shelf[markKey, []store.MarkRow]
	visits     shelf[string, []store.VisitRow]     // by site
	visitSteps shelf[string, []store.VisitStepRow] // by the entry of the visit
	fixtures   shelf[siteCode, []store.FixtureRow]
	stints     shelf[store.SubjectKey, []store.StintRow]
	facts      shelf[store.SubjectKey, []store.FactRow]
	events     shelf[store.SubjectKey, []store.EventRow]
	excusals   shelf[store.SubjectKey, []store.ExcusalRow]
	rights     shelf[store.SubjectKey, []store.RightRow] // by person, at each site
	remedyModel
	coverModel
	plans    []store.PlanRow
	done     shelf[string, []int64] // the records that stand of each planned session
	accounts shelf[string, []store.AccountRow]
	batches  []store.BatchRow
}

// markKey is where and when a passage was that is explained.
type markKey struct {
	site, door string
	micro      int64
}

func keyOfMark(r store.MarkRow) markKey { return markKey{r.Site, r.Door, r.At.UnixMicro()} }

type siteCode struct{ site, code string }

func newModel() *model {
	m := &model{own: &owner{}, engine: standing.New(), sites: map[string]*siteModel{}}
	m.named, m.badges = newShelf[uint64, []string](m.own), newShelf[string, []string](m.own)
	m.marks = newShelf[markKey, []store.MarkRow](m.own)
	m.visits, m.visitSteps = newShelf[string, []store.VisitRow](m.own), newShelf[string, []store.VisitStepRow](m.own)
	m.people, m.fixtures = newShelf[string, []store.PersonRow](m.own), newShelf[siteCode, []store.FixtureRow](m.own)
	m.stints, m.facts = newShelf[store.SubjectKey, []store.StintRow](m.own), newShelf[store.SubjectKey, []store.FactRow](m.own)
	m.events, m.excusals = newShelf[store.SubjectKey, []store.EventRow](m.own), newShelf[store.SubjectKey, []store.ExcusalRow](m.own)
	m.rights = newShelf[store.SubjectKey, []store.RightRow](m.own)
	m.remedyModel = newRemedyModel(m.own)
	m.coverModel = newCoverModel(m.own)
	m.done, m.accounts = newShelf[string, []int64](m.own), newShelf[string, []store.AccountRow](m.own)
	return m
}

// fork gives a model with the same content to take more in; m itself is only read from then on. A fork
// that is not published is thrown away; only one may be under way at a time.
func (m *model) fork() *model {
	f := *m
	f.own = &owner{}
	f.engine = m.engine.Fork()
	f.sites = maps.Clone(m.sites)
	f.named, f.badges, f.marks = m.named.fork(f.own), m.badges.fork(f.own), m.marks.fork(f.own)
	f.visits, f.visitSteps = m.visits.fork(f.own), m.visitSteps.fork(f.own)
	f.people, f.fixtures = m.people.fork(f.own), m.fixtures.fork(f.own)
	f.stints, f.facts = m.stints.fork(f.own), m.facts.fork(f.own)
	f.events, f.excusals = m.events.fork(f.own), m.excusals.fork(f.own)
	f.rights = m.rights.fork(f.own)
	f.remedyModel = m.remedyModel.fork(f.own)
	f.coverModel = m.coverModel.fork(f.own)
	f.done, f.accounts = m.done.fork(f.own), m.accounts.fork(f.own)
	return &f
}

// upsert puts a row into a list kept in order of sequence number; a row of the same entry (and, by
// same, of the same part of it) is replaced. A list that others may read is not changed but behind
// its end.
func upsert[T any](list []T, row T, seq func(T) int64, same func(a, b T) bool) []T {
	i := len(list)
	for i > 0 && seq(list[i-1]) > seq(row) {
		i--
	}
	for j := i - 1; j >= 0 && seq(list[j]) == seq(row); j-- {
		if same(list[j], row) {
			list = slices.Clone(list)
			list[j] = row
			return list
		}
	}
	if i == len(list) {
		return append(list, row)
	}
	return slices.Insert(list[:len(list):len(list)], i, row)
}

func always[T any](_, _ T) bool { return true }

// put upserts a row into the list of a key on a shelf.
func put[K comparable, T any](s *shelf[K, []T], k K, row T, seq func(T) int64, same func(a, b T) bool) {
	s.set(k, upsert(s.get(k), row, seq, same))
}

// take brings the model up to date with the rows that changed.
func (m *model) take(d store.Delta) error {
	programs, err := parseAll(d.Versions)
	if err != nil {
		return err
	}
	for i, v := range d.Versions {
		m.putVersion(v, programs[i])
	}
	for _, r := range d.People {
		put(&m.people, r.Code, r, func(r store.PersonRow) int64 { return r.Seq }, always)
		m.putName(r)
		m.putBadge(r)
	}
	for _, r := range d.Fixtures {
		put(&m.fixtures, siteCode{r.Site, r.Code}, r, func(r store.FixtureRow) int64 { return r.Seq }, always)
		m.putFixture(r)
	}
	for _, r := range d.Stints {
		k := store.SubjectKey{Site: r.Site, Kind: r.Kind, Code: r.Code}
		put(&m.stints, k, r, func(r store.StintRow) int64 { return r.Seq }, always)
		m.putStint(r)
	}
	for _, r := range d.Facts {
		if err := m.takeFact(r); err != nil {
			return err
		}
	}
	for _, r := range d.Plans {
		m.plans = upsert(m.plans, r, func(r store.PlanRow) int64 { return r.Seq }, always)
		if _, known := m.planned(r.ID); !known {
			m.done.set(r.ID, []int64{})
		}
	}
	m.takeHappenings(d)
	m.takeRemedies(d)
	m.takeCover(d)
	for _, r := range d.Accounts {
		put(&m.accounts, r.ID, r, func(r store.AccountRow) int64 { return r.Seq }, always)
	}
	for _, r := range d.Batches {
		m.batches = upsert(m.batches, r, func(r store.BatchRow) int64 { return r.Seq }, always)
	}
	return nil
}

func (m *model) takeHappenings(d store.Delta) {
	for _, r := range d.Records {
		m.engine.PutRecord(standing.Record{
			Line: known(r.Line), Site: r.Site, Subject: subjectOf(r.Subject.Kind, r.Subject.Code), What: r.What,
			Day: r.Day, Time: r.Time, Passed: r.Passed, Until: r.Until, Limit: strings.Fields(r.Limit),
		})
		m.takeSession(r)
	}
	for _, r := range d.Events {
		put(&m.events, r.Subject, r, func(r store.EventRow) int64 { return r.Seq }, always)
		m.putEvent(r)
	}
	for _, r := range d.Excusals {
		put(&m.excusals, r.Subject, r, func(r store.ExcusalRow) int64 { return r.Seq }, always)
		m.putExcusal(r)
	}
	for _, r := range d.Rights {
		put(&m.rights, personAt(r.Site, r.Person), r, func(r store.RightRow) int64 { return r.Seq }, always)
		m.putRight(r)
	}
	for _, r := range d.Visits {
		put(&m.visits, r.Site, r, func(r store.VisitRow) int64 { return r.Seq }, always)
	}
	for _, r := range d.VisitSteps {
		put(&m.visitSteps, r.Visit, r, func(r store.VisitStepRow) int64 { return r.Seq }, always)
	}
	for _, r := range d.Marks {
		put(&m.marks, keyOfMark(r), r, func(r store.MarkRow) int64 { return r.Seq }, always)
	}
}

// What the evaluator is told of each row.

func (m *model) putFixture(r store.FixtureRow) {
	m.engine.PutFact(r.Site, standing.Fact{Line: known(r.Line), Subject: subjectOf(string(program.AsksFixture), r.Code), Code: factKind, From: civil.FirstDay, Value: r.Kind})
}

func (m *model) putStint(r store.StintRow) {
	m.engine.PutStint(r.Site, standing.Stint{Line: known(r.Line), Subject: subjectOf(r.Kind, r.Code), First: r.First, Last: r.Last})
}

func (m *model) putFact(r store.FactRow) error {
	value, err := factValueOf(r.Value)
	if err != nil {
		return fmt.Errorf("the fact %s of %s %s is not readable: %w", r.Fact, r.Kind, r.Code, err)
	}
	m.engine.PutFact(r.Site, standing.Fact{Line: known(r.Line), Subject: subjectOf(r.Kind, r.Code), Code: r.Fact, From: r.From, Value: value})
	return nil
}

func (m *model) putEvent(r store.EventRow) {
	m.engine.PutEvent(r.Site, standing.Event{Line: known(r.Line), Subject: subjectOf(r.Subject.Kind, r.Subject.Code), Code: r.Event, Day: r.Day, Time: r.Time})
}

func (m *model) putExcusal(r store.ExcusalRow) {
	m.engine.PutExcusal(r.Site, standing.Excusal{Line: known(r.Line), Subject: subjectOf(r.Subject.Kind, r.Subject.Code), Item: r.Item, From: r.From, To: r.To, Opens: r.Opens})
}

func (m *model) putRight(r store.RightRow) {
	m.engine.PutRight(r.Site, standing.Right{Line: known(r.Line), Person: r.Person, Zone: r.Zone, From: r.From, To: r.To})
}

// takeSession counts the record to its session while it stands, if the session was planned.
func (m *model) takeSession(r store.RecordRow) {
	list, planned := m.planned(r.Session)
	if !planned {
		return
	}
	list = slices.DeleteFunc(slices.Clone(list), func(seq int64) bool { return seq == r.Seq })
	if r.Ended == 0 {
		list = append(list, r.Seq)
	}
	m.done.set(r.Session, list)
}

// planned gives the records that stand of a session, and whether it is one that was planned.
func (m *model) planned(session string) ([]int64, bool) {
	if session == "" || m.done.parts == nil {
		return nil, false
	}
	list := m.done.get(session)
	return list, list != nil
}

func (m *model) takeFact(r store.FactRow) error {
	k := store.SubjectKey{Site: r.Site, Kind: r.Kind, Code: r.Code}
	put(&m.facts, k, r, func(r store.FactRow) int64 { return r.Seq }, func(a, b store.FactRow) bool { return a.Fact == b.Fact && a.From == b.From })
	return m.putFact(r)
}

// factValueOf reads the value of a fact, which is JSON. Most are plain texts, which need no looking into.
func factValueOf(text string) (any, error) {
	if n := len(text) - 1; n > 0 && text[0] == '"' && strings.IndexFunc(text[1:n], notPlain) < 0 && text[n] == '"' {
		return text[1:n], nil
	}
	var value any
	err := json.Unmarshal([]byte(text), &value)
	return value, err
}

// notPlain tells whether a character may stand for another in JSON, or may not stand in it.
func notPlain(r rune) bool { return r < ' ' || r >= 0x7f || r == '"' || r == '\\' }

// parseAll reads the programs of versions, over all cores: there may be one or more of each of many sites.
func parseAll(versions []store.VersionRow) ([]*program.Program, error) {
	out, errs := make([]*program.Program, len(versions)), make([]error, len(versions))
	var next atomic.Int64
	var all sync.WaitGroup
	for range min(runtime.GOMAXPROCS(0), len(versions)) {
		all.Go(func() {
			for i := next.Add(1) - 1; int(i) < len(versions); i = next.Add(1) - 1 {
				out[i], errs[i] = programOf(versions[i])
			}
		})
	}
	all.Wait()
	return out, errors.Join(errs...)
}

func programOf(v store.VersionRow) (*program.Program, error) {
	p, err := program.Parse(v.Source)
	if err != nil {
		return nil, fmt.Errorf("version %d of the program of site %s is not readable by this program: %w", v.Number, v.Site, err)
	}
	return p, nil
}

func (m *model) putVersion(v store.VersionRow, p *program.Program) {
	s := &siteModel{code: v.Site}
	if old := m.sites[v.Site]; old != nil {
		s.versions = old.versions
	}
	m.sites[v.Site] = s
	s.versions = upsert(s.versions, versionModel{v, p}, func(v versionModel) int64 { return v.row.Seq }, always)
	m.coverModel.note(v.Site, p)
	m.engine.PutVersion(v.Site, standing.Version{Line: known(v.Line), Number: v.Number, InForceFrom: v.InForceFrom, Program: p})
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

// recordsOf reads the records of a subject, as far as they are known, in order of recording.
func (m *model) recordsOf(site string, s standing.Subject) ([]store.RecordRow, error) {
	var rows []store.RecordRow
	err := m.st.Read(context.Background(), func(tx *store.Tx) error {
		var err error
		rows, err = tx.RecordsAt(m.engine.Lines(site, s))
		return err
	})
	key := subjectBody{string(s.Asks), s.Code}.key(site)
	rows = slices.DeleteFunc(rows, func(r store.RecordRow) bool { return r.Subject != key })
	for i := range rows {
		if rows[i].Ended >= m.head {
			rows[i].Ended = 0 // by what is not known yet
		}
	}
	return rows, err
}

// person merges what the standing lines say of a person; of each field the last that says it.
func (m *model) person(code string) (store.PersonRow, bool) {
	var out store.PersonRow
	found := false
	for _, r := range m.people.get(code) {
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
	for _, r := range m.fixtures.get(siteCode{site, code}) {
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
	for _, r := range m.stints.get(store.SubjectKey{Site: site, Kind: kind, Code: code}) {
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

// accountIDs lists the accounts in order of their identifier.
func (m *model) accountIDs() []string {
	var ids []string
	for id := range m.accounts.all() {
		ids = append(ids, id)
	}
	slices.Sort(ids)
	return ids
}

// account gives the account as its last standing line says.
func (m *model) account(id string) (store.AccountRow, bool) {
	rows := m.accounts.get(id)
	for i := len(rows) - 1; i >= 0; i-- {
		if rows[i].Ended == 0 {
			return rows[i], true
		}
	}
	return store.AccountRow{}, false
}

// accountNamed finds the account that bears a name now.
func (m *model) accountNamed(name string) (store.AccountRow, bool) {
	var found store.AccountRow
	for id := range m.accounts.all() {
		if a, ok := m.account(id); ok && strings.EqualFold(a.Name, name) && name != "" && (found.ID == "" || id < found.ID) {
			found = a
		}
	}
	return found, found.ID != ""
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
