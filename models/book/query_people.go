package book

import (
	"cmp"
	"context"
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

// at runs a query of a site on a day that the actor may see whole.
func (b *Book) at(ctx context.Context, actor Actor, site string, on *civil.Day, fn func(v *siteOn) error) error {
	if err := actor.may(SeeSite, site); err != nil {
		return err
	}
	return b.read(ctx, func(m *model) error {
		v, err := m.view(site, on, always64, b.Now())
		if err != nil {
			return err
		}
		return fn(v)
	})
}

// tally gathers the standings of one subject.
type tally struct {
	gaps, closing int
	worst         standing.Word
	next          *civil.Day
}

func (t *tally) add(r Row) {
	if r.Word.IsGap() {
		t.gaps++
	}
	if r.Word == standing.Closing {
		t.closing++
	}
	if Worse(r.Word, t.worst) {
		t.worst = r.Word
	}
	if r.Due != nil && (t.next == nil || *r.Due < *t.next) && !r.Word.IsGap() {
		t.next = r.Due
	}
}

func tallies(rows []Row) map[standing.Subject]*tally {
	out := map[standing.Subject]*tally{}
	for _, r := range rows {
		if out[r.Subject] == nil {
			out[r.Subject] = &tally{}
		}
		out[r.Subject].add(r)
	}
	return out
}

// People lists everybody who ever was on staff at the site, those of the day first.
func (b *Book) People(ctx context.Context, actor Actor, site string, on *civil.Day) (SiteView, []PersonSummary, error) {
	var out []PersonSummary
	var sv SiteView
	err := b.at(ctx, actor, site, on, func(v *siteOn) error {
		sv = v.SiteView
		rows, err := v.rows(standing.Query{On: v.on, KnownAt: v.k})
		if err != nil {
			return err
		}
		sums := tallies(rows)
		for _, code := range v.peopleOfSite() {
			out = append(out, v.personSummary(code, sums))
		}
		return nil
	})
	slices.SortFunc(out, func(a, b PersonSummary) int {
		return cmp.Or(boolOrder(b.Here, a.Here), strings.Compare(strings.ToLower(a.Name), strings.ToLower(b.Name)), strings.Compare(a.Code, b.Code))
	})
	return sv, out, err
}

func boolOrder(a, b bool) int {
	switch {
	case a == b:
		return 0
	case a:
		return 1
	default:
		return -1
	}
}

// peopleOfSite are the codes of everybody with a stint at the site.
func (v *siteOn) peopleOfSite() []string {
	var out []string
	for _, known := range v.m.engine.Known(v.Code, program.AsksPerson) {
		code := known.Code
		if len(v.m.stintsAt(v.Code, string(program.AsksPerson), code)) > 0 {
			out = append(out, code)
		}
	}
	slices.Sort(out)
	return out
}

func (v *siteOn) personSummary(code string, sums map[standing.Subject]*tally) PersonSummary {
	s := standing.Subject{Asks: program.AsksPerson, Code: code}
	p, _ := v.m.person(code)
	profile := v.m.engine.Profile(v.Code, s, v.on, v.k)
	out := PersonSummary{Code: code, Name: v.subjectName(s), Crew: profile.Crew, Level: profile.Level, Held: profile.Held, Erased: p.Erased}
	out.Employer, _ = profile.Facts["employer"].(string)
	for _, st := range v.m.stintsAt(v.Code, string(program.AsksPerson), code) {
		out.Joined, out.Left = st.First, st.Last
		if covers(st.First, st.Last, v.on) {
			out.Here = true
			break
		}
	}
	if t := sums[s]; t != nil {
		out.Gaps, out.Closing, out.Worst, out.NextDue = t.gaps, t.closing, t.worst, t.next
	}
	return out
}

// Person gives one person with all that stands on record about them at the site. A member may see
// themselves.
func (b *Book) Person(ctx context.Context, actor Actor, site, code string, on *civil.Day) (SubjectView, error) {
	if own, err := b.mayRead(actor, site); err != nil {
		return SubjectView{}, err
	} else if own && actor.Person != code {
		return SubjectView{}, &Denied{Action: SeeSite, Role: actor.Role}
	}
	return b.subject(ctx, site, standing.Subject{Asks: program.AsksPerson, Code: code}, on)
}

// Subject gives any other subject of the site with all that stands on record about it.
func (b *Book) Subject(ctx context.Context, actor Actor, site string, s standing.Subject, on *civil.Day) (SubjectView, error) {
	if s.Asks == program.AsksPerson {
		return b.Person(ctx, actor, site, s.Code, on)
	}
	if err := actor.may(SeeSite, site); err != nil {
		return SubjectView{}, err
	}
	return b.subject(ctx, site, s, on)
}

func (b *Book) subject(ctx context.Context, site string, s standing.Subject, on *civil.Day) (SubjectView, error) {
	var out SubjectView
	var loose []looseText
	err := b.read(ctx, func(m *model) error {
		v, err := m.view(site, on, always64, b.Now())
		if err != nil {
			return err
		}
		if !m.hasSubject(site, subjectBody{string(s.Asks), s.Code}) {
			return &NotFound{string(s.Asks), s.Code}
		}
		out, loose, err = v.subjectView(s)
		return err
	})
	if err != nil {
		return out, err
	}
	return out, b.fillExcusals(ctx, &out, loose)
}

// looseText is a veiled text that a history shows and that is read from its entry.
type looseText struct {
	seq int64
	at  int
}

func (v *siteOn) subjectView(s standing.Subject) (SubjectView, []looseText, error) {
	out := SubjectView{Site: v.SiteView, On: v.on, Subject: s, Name: v.subjectName(s)}
	rows, err := v.rows(standing.Query{On: v.on, KnownAt: v.k, Subject: &s, Why: true})
	if err != nil {
		return out, nil, err
	}
	out.Rows = rows
	profile := v.m.engine.Profile(v.Code, s, v.on, v.k)
	out.Level, out.Held, out.Crew, out.Zone, out.Kind = profile.Level, profile.Held, profile.Crew, profile.Zone, profile.Kind
	if s.Asks == program.AsksPerson {
		p, _ := v.m.person(s.Code)
		out.Email, out.Badge, out.Erased = p.Email, p.Badge, p.Erased
		_, out.HeldWhy = v.m.engine.Held(v.Code, s.Code, v.on, v.k)
		out.HeldUntil = v.heldUntil(s, out.Held, rows)
	}
	for _, st := range v.m.stintsAt(v.Code, string(s.Asks), s.Code) {
		out.Stints = append(out.Stints, StintLine{st.First, st.Last, st.ID})
	}
	out.Facts = v.factLines(s)
	key := subjectBody{string(s.Asks), s.Code}.key(v.Code)
	records, err := v.m.recordsOf(v.Code, s)
	if err != nil {
		return out, nil, err
	}
	out.Records = v.recordLines(records)
	for _, e := range v.m.events.get(key) {
		out.Events = append(out.Events, v.eventLine(e))
	}
	slices.Reverse(out.Events)
	var loose []looseText
	for _, x := range v.m.excusals.get(key) {
		if x.Item != "" && x.Site != v.Code {
			continue
		}
		loose = append(loose, looseText{x.Seq, len(out.Excusals)})
		out.Excusals = append(out.Excusals, v.excusalLine(x))
	}
	return out, loose, nil
}

func (v *siteOn) factLines(s standing.Subject) []FactLine {
	labels := map[string]string{factLevel: "Assigned level", factCrew: "Crew", factZone: "Zone"}
	c := &check{m: v.m, site: v.Code}
	declared := c.personFacts()
	if s.Asks == program.AsksFixture {
		f, _ := v.m.fixture(v.Code, s.Code)
		declared = c.fixtureFacts(f.Kind)
	}
	var out []FactLine
	for _, r := range v.m.facts.get(factKey(v.Code, s.Asks, s.Code)) {
		label := cmp.Or(labels[r.Fact], declared[r.Fact].Label, r.Fact)
		out = append(out, FactLine{r.Fact, label, factShown(r.Value, declared[r.Fact].Unit), r.From, r.ID, r.Batch != "", r.Ended != 0})
	}
	slices.SortStableFunc(out, func(a, b FactLine) int { return cmp.Or(strings.Compare(a.Label, b.Label), cmp.Compare(b.From, a.From)) })
	return out
}

// factShown writes a fact's JSON value as a person reads it.
func factShown(value, unit string) string {
	var v any
	if err := json.Unmarshal([]byte(value), &v); err != nil {
		return value
	}
	switch x := v.(type) {
	case nil:
		return "not on record"
	case bool:
		if x {
			return "yes"
		}
		return "no"
	case float64:
		return strings.TrimSpace(fmt.Sprintf("%v %s", x, unit))
	default:
		return fmt.Sprint(x)
	}
}

func (v *siteOn) recordLines(rows []store.RecordRow) []RecordLine {
	out := make([]RecordLine, 0, len(rows))
	for _, r := range rows {
		out = append(out, v.recordLine(r))
	}
	slices.SortStableFunc(out, func(a, b RecordLine) int { return cmp.Compare(b.Day, a.Day) })
	return out
}

func (v *siteOn) recordLine(r store.RecordRow) RecordLine {
	s := subjectOf(r.Subject.Kind, r.Subject.Code)
	day := r.Day
	if r.Time != nil {
		day = civil.DayOf(*r.Time, v.Location)
	}
	return RecordLine{
		Entry: r.ID, What: r.What, Title: v.whatTitle(r.What), SubjectKind: r.Subject.Kind, Subject: r.Subject.Code, SubjectName: v.subjectName(s),
		Site: r.Site, Day: day, Time: r.Time, Passed: r.Passed, Remark: r.Remark, Until: r.Until, Limit: r.Limit,
		Ended: r.Ended != 0, Imported: r.Batch != "", Session: r.Session,
	}
}

func (v *siteOn) whatTitle(what string) string { return WhatTitle(v.Program, what) }

// WhatTitle names the kind/code of a record: by its sheet, document or post, else in words.
func WhatTitle(p *program.Program, what string) string {
	if sh, ok := p.SheetFor(what); ok && sh.Title != "" {
		return sh.Title
	}
	kind, code, _ := strings.Cut(what, "/")
	words := strings.ReplaceAll(code, "-", " ")
	switch kind {
	case "check", "inspection":
		return upperFirst(words)
	case "acknowledgement":
		if d, ok := p.Document(code); ok {
			return "Read: " + cmp.Or(d.Title, code)
		}
	case "appointment":
		return "Appointed: " + cmp.Or(named(p.Post(code)), code)
	}
	return upperFirst(words) + " " + kind
}

func upperFirst(s string) string {
	if s == "" {
		return s
	}
	return strings.ToUpper(s[:1]) + s[1:]
}

func (v *siteOn) eventLine(e store.EventRow) EventLine {
	name := e.Event
	if ev, ok := v.m.site(v.Code).event(e.Event); ok && ev.Name != "" {
		name = ev.Name
	}
	return EventLine{e.ID, e.Event, name, e.Day, e.Time, e.Ended != 0}
}

func (v *siteOn) excusalLine(x store.ExcusalRow) ExcusalLine {
	s := subjectOf(x.Subject.Kind, x.Subject.Code)
	out := ExcusalLine{
		Entry: x.ID, Item: x.Item, From: x.From, To: x.To, Opens: x.Opens, Waiting: x.Waiting, Ended: x.Ended != 0,
		SubjectKind: x.Subject.Kind, SubjectCode: x.Subject.Code, SubjectName: v.subjectName(s),
	}
	if i, ok := v.Program.Item(x.Item); ok {
		out.Title = i.Title
	}
	return out
}

// fillExcusals reads the reasons of excusals from their entries.
func (b *Book) fillExcusals(ctx context.Context, out *SubjectView, loose []looseText) error {
	if len(loose) == 0 {
		return nil
	}
	return b.st.Read(ctx, func(tx *store.Tx) error {
		for _, l := range loose {
			e, err := tx.EntryAt(l.seq)
			if err != nil {
				return err
			}
			veils, err := tx.Veils(l.seq)
			if err != nil {
				return err
			}
			bd, err := decode(e, veils[l.seq])
			if err != nil {
				return err
			}
			switch x := bd.(type) {
			case *excusalBody:
				out.Excusals[l.at].Because, out.Excusals[l.at].ApprovedBy = x.Because.String(), x.ApprovedBy.String()
			case *pauseBody:
				out.Excusals[l.at].Because = x.Because.String()
			}
		}
		return nil
	})
}

// SiteHead gives a site as pages head with it, to anybody who belongs to it.
func (b *Book) SiteHead(ctx context.Context, actor Actor, site string, on *civil.Day) (SiteView, error) {
	var out SiteView
	if !actor.SeesSite(site) {
		return out, &Denied{Action: SeeOwn, Role: actor.Role, Why: "this account does not belong to site " + site}
	}
	err := b.read(ctx, func(m *model) error {
		v, err := m.view(site, on, always64, b.Now())
		if err == nil {
			out = v.SiteView
		}
		return err
	})
	return out, err
}

// Sites lists the codes and names of the sites that the actor belongs to.
func (b *Book) Sites(ctx context.Context, actor Actor) ([]SiteView, error) {
	var out []SiteView
	err := b.read(ctx, func(m *model) error {
		for _, code := range m.siteCodes() {
			if !actor.SeesSite(code) {
				continue
			}
			p := m.site(code).newest()
			out = append(out, SiteView{Code: code, Name: p.program.Site.Name, TimeZone: p.program.Site.TimeZone, Location: m.zone(code), Today: civil.DayOf(b.Now(), m.zone(code)), Program: p.program, Version: p.row.Number})
		}
		return nil
	})
	return out, err
}

// Zone gives the time zone of a site.
func (b *Book) Zone(ctx context.Context, site string) (*time.Location, error) {
	var loc *time.Location
	err := b.read(ctx, func(m *model) error {
		if m.site(site) == nil {
			return &NotFound{"site", site}
		}
		loc = m.zone(site)
		return nil
	})
	return loc, err
}
