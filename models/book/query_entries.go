package book

import (
	"cmp"
	"context"
	"fmt"
	"slices"
	"strings"
	"time"

	"lodebook/models/program"
	"lodebook/models/store"
)

// EntryQuery chooses entries of the book; a zero field asks for nothing.
type EntryQuery struct {
	Site, Kind, Batch, Actor string
	Before                   int64
	From, To                 time.Time
	Limit                    int
}

// Kinds are the kinds of entry with their words, for a filter.
var Kinds = []struct{ Kind, Words string }{
	{kindRecord, "Record"}, {kindPerson, "Person"}, {kindFixture, "Fixture"}, {kindEvent, "Event"}, {kindExcusal, "Excusal"},
	{kindRight, "Right"}, {kindDuty, "Duty"}, {kindStock, "Stock"}, {kindMark, "Explained passage"}, {kindVisit, "Visit"}, {kindVisitStep, "Step of a visit"}, {kindPause, "Pause"}, {kindPlan, "Plan"}, {kindWithdrawal, "Withdrawal"}, {kindProgram, "Program"}, {kindBatch, "Import"},
	{kindAccount, "Account"}, {kindErasure, "Erasure"},
	{kindIncident, "Incident"}, {kindIncidentReport, "Report of an incident"}, {kindRemedy, "Remedy"}, {kindRemedyDone, "Remedy done"},
	{kindRemedyCheck, "Remedy confirmed or sent back"}, {kindOutage, "Out of service"}, {kindReturn, "Back in service"},
}

// Entries gives entries of the sites that the actor belongs to, newest first.
func (b *Book) Entries(ctx context.Context, actor Actor, q EntryQuery) ([]EntryLine, error) {
	if err := actor.may(SeeBook, q.Site); err != nil {
		return nil, err
	}
	f := store.EntryFilter{Site: q.Site, Batch: q.Batch, Actor: q.Actor, Before: q.Before, From: q.From, To: q.To, Limit: max(1, min(q.Limit, 500))}
	if q.Kind != "" {
		f.Kinds = []string{q.Kind}
	}
	var out []EntryLine
	err := b.withEntries(ctx, func(tx *store.Tx, m *model) error {
		list, err := tx.Entries(f)
		if err != nil {
			return err
		}
		for _, e := range list {
			line, bd, err := m.entryLine(tx, e)
			if err != nil {
				return err
			}
			hidden, err := m.hides(tx, actor, e, bd)
			if err != nil {
				return err
			}
			if hidden {
				line.veil(actor)
			}
			// Who reported an incident is not found out by asking for what they wrote.
			if actor.seesEntry(e) && (!hidden || q.Actor == "" || line.ActorID != "") {
				out = append(out, line)
			}
		}
		return nil
	})
	return out, err
}

// seesEntry tells whether the entry is of a site that the actor belongs to. Those of the whole book
// (accounts, erasures) are for who belongs to all of it, and for their own writer.
func (a Actor) seesEntry(e store.Entry) bool {
	if e.Site == "" {
		return len(a.Sites) == 0 || a.Account != "" && e.Actor == a.Account
	}
	return a.SeesSite(e.Site)
}

// withEntries runs a query of what only the store keeps: fn is given a transaction and the model of the very
// entries that it sees.
func (b *Book) withEntries(ctx context.Context, fn func(tx *store.Tx, m *model) error) error {
	for {
		m, err := b.current(ctx)
		if err != nil {
			return err
		}
		behind := false
		err = b.st.Read(ctx, func(tx *store.Tx) error {
			size, err := tx.Size()
			behind = err == nil && size != m.head
			if err != nil || behind {
				return err
			}
			return fn(tx, m)
		})
		if !behind {
			return err
		}
		// Something was written after the model was looked at.
	}
}

// Entry gives one entry with its fields, what it superseded and what superseded it.
func (b *Book) Entry(ctx context.Context, actor Actor, id string) (EntryView, error) {
	var out EntryView
	err := b.withEntries(ctx, func(tx *store.Tx, m *model) error {
		e, ok, err := tx.EntryByID(id)
		if err != nil {
			return err
		}
		if !ok {
			return &NotFound{"entry", id}
		}
		if err := m.maySeeEntry(tx, actor, e); err != nil {
			return err
		}
		out, err = m.entryView(tx, actor, e)
		if err != nil {
			return err
		}
		out.MayCorrect, out.NeedReason = m.mayCorrectEntry(actor, e, b.Now(), out)
		return m.neighbours(tx, actor, &out)
	})
	return out, err
}

// maySeeEntry lets everybody see what they wrote themselves, and what is about them.
func (m *model) maySeeEntry(tx *store.Tx, actor Actor, e store.Entry) error {
	denied := actor.may(SeeBook, e.Site)
	if denied == nil && !actor.seesEntry(e) {
		denied = &Denied{Action: SeeBook, Role: actor.Role, Why: "this entry is about the whole book"}
	}
	if denied == nil || actor.Account != "" && e.Actor == actor.Account && actor.may(SeeOwn, e.Site) == nil {
		return nil
	}
	if actor.may(SeeSite, e.Site) == nil && slices.Contains([]string{kindRecord, kindEvent, kindFixture}, e.Kind) {
		return nil
	}
	veils, err := tx.Veils(e.Seq)
	if err != nil {
		return err
	}
	bd, err := decode(e, veils[e.Seq])
	if err != nil {
		return err
	}
	if r, ok := bd.(*recordBody); ok && actor.Person != "" && r.Subject.person() == actor.Person {
		return nil
	}
	return denied
}

func (m *model) mayCorrectEntry(actor Actor, e store.Entry, now time.Time, v EntryView) (may, reason bool) {
	if v.SupersededBy != "" || !slices.Contains([]string{kindRecord, kindPerson, kindFixture, kindEvent, kindExcusal, kindPause, kindRight, kindDuty, kindMark, kindVisit, kindVisitStep, kindPlan, kindIncident, kindIncidentReport, kindRemedy, kindRemedyDone, kindRemedyCheck, kindReturn}, e.Kind) {
		return false, false
	}
	if v.Hidden || Secret(e.Kind) && actor.may(SeeIncidents, e.Site) != nil {
		return false, false
	}
	own := actor.Account != "" && e.Actor == actor.Account
	if own {
		return actor.may(CorrectOwn, e.Site) == nil, now.Sub(e.RecordedAt) > slipTime
	}
	return actor.may(Correct, e.Site) == nil, true
}

func (m *model) neighbours(tx *store.Tx, actor Actor, v *EntryView) error {
	for _, n := range []struct {
		id string
		to **EntryView
	}{{v.Supersedes, &v.Old}, {v.SupersededBy, &v.New}} {
		if n.id == "" {
			continue
		}
		e, ok, err := tx.EntryByID(n.id)
		if err != nil {
			return err
		}
		if !ok {
			continue
		}
		view, err := m.entryView(tx, actor, e)
		if err != nil {
			return err
		}
		*n.to = &view
	}
	return nil
}

func (m *model) entryLine(tx *store.Tx, e store.Entry) (EntryLine, body, error) {
	veils, err := tx.Veils(e.Seq)
	if err != nil {
		return EntryLine{}, nil, err
	}
	bd, err := decode(e, veils[e.Seq])
	if err != nil {
		return EntryLine{}, nil, err
	}
	line := EntryLine{
		Seq: e.Seq, ID: e.ID, Kind: e.Kind, Site: e.Site, At: e.RecordedAt, ActorID: e.Actor, Actor: m.actorName(e.Actor, bd),
		Summary: m.summary(e, bd), Batch: e.Batch, Supersedes: e.Supersedes,
	}
	by, ok, err := tx.SupersededBy(e.ID)
	if err != nil {
		return line, bd, err
	}
	if ok {
		line.SupersededBy, line.Withdrawn = by.ID, by.Kind == kindWithdrawal
	}
	for _, r := range m.batches {
		if r.ID == e.Batch && r.Ended != 0 || r.ID == e.ID && r.Ended != 0 {
			line.Withdrawn = true
		}
	}
	return line, bd, nil
}

func (m *model) actorName(id string, bd body) string {
	switch id {
	case "operator":
		return "operator " + bd.shared().Operator.String()
	case "job":
		return "a scheduled job"
	case string(Anonymous):
		return "nobody named"
	}
	if a, ok := m.account(id); ok && a.Name != "" {
		return a.Name
	}
	return "account " + id
}

// inWords is the site by its newest program, for naming what an entry is about.
func (m *model) inWords(site string) *siteOn {
	v := &siteOn{SiteView: SiteView{Code: site, Program: &program.Program{}}, m: m}
	if sm := m.site(site); sm != nil {
		v.Program, v.Name = sm.newest().program, sm.newest().program.Site.Name
	}
	return v
}

func (m *model) subjectWords(site string, s subjectBody) string {
	return m.inWords(site).subjectName(subjectOf(s.Kind, s.Code))
}

// whatWords names the kind/code of a record.
func (m *model) whatWords(site, what string) string { return m.inWords(site).whatTitle(what) }

func (m *model) eventWords(site, code string) string {
	ev, _ := m.site(site).event(code)
	return cmp.Or(ev.Name, upperFirst(strings.ReplaceAll(code, "-", " ")))
}

// onWords is the day of what happened, and the time by the site's clocks where one is known.
func (m *model) onWords(site, on string) string {
	if at := parseMoment(on, m.zone(site)).time; at != nil {
		return at.In(m.zone(site)).Format("2006-01-02, 15:04")
	}
	return on
}

// summary says in one line what the entry says.
func (m *model) summary(e store.Entry, bd body) string {
	switch b := bd.(type) {
	case *recordBody:
		result := "passed"
		if b.Result == Fail {
			result = "failed"
		}
		return fmt.Sprintf("%s, %s, %s, %s", m.whatWords(e.Site, b.Record), result, m.subjectWords(e.Site, b.Subject), m.onWords(e.Site, b.On))
	case *personBody:
		return "Person " + m.subjectWords(e.Site, subjectBody{"person", b.Code}) + saidOf(b.Stint, b.Facts)
	case *fixtureBody:
		return "Fixture " + m.subjectWords(e.Site, subjectBody{"fixture", b.Code}) + saidOf(b.Stint, b.Facts)
	case *eventBody:
		return fmt.Sprintf("%s, %s, %s", m.eventWords(e.Site, b.Event), m.subjectWords(e.Site, b.Subject), m.onWords(e.Site, b.On))
	case *excusalBody:
		return fmt.Sprintf("%s excused for %s, %s to %s", b.Item, m.subjectWords(e.Site, b.Subject), b.From, b.To)
	case *pauseBody:
		return fmt.Sprintf("Pause of %s, %s to %s", m.subjectWords(e.Site, b.Subject), b.From, dayOr(b.To, "no end yet"))
	case *visitBody:
		return "Visit announced: " + b.Visitor.String() + ", zones " + strings.Join(b.Zones, ", ")
	case *visitStepBody:
		return "Visit, " + strings.ReplaceAll(string(b.Step), "-", " ") + ", " + m.onWords(e.Site, b.At)
	case *markBody:
		return b.words()
	case *rightBody:
		return fmt.Sprintf("Right of %s to enter zone %s, %s to %s", m.subjectWords(e.Site, subjectBody{"person", b.Person}), b.Zone, m.onWords(e.Site, b.From), cmp.Or(m.onWords(e.Site, b.To), "no end yet"))
	case *dutyBody:
		return fmt.Sprintf("Duty of %s, %s to %s, %s", m.subjectWords(e.Site, subjectBody{"person", b.Person}), m.onWords(e.Site, b.From), m.onWords(e.Site, b.To), b.Duty)
	case *stockBody:
		return b.summary()
	case *incidentBody, *incidentReportBody, *remedyBody, *remedyDoneBody, *remedyCheckBody, *outageBody, *returnBody:
		return m.remedySummary(e.Site, b)
	case *planBody:
		return fmt.Sprintf("Planned: %s for %s", m.whatWords(e.Site, b.Record), b.Day)
	case *programBody:
		return fmt.Sprintf("Program, version %d, in force from %s", b.Number, b.InForceFrom)
	case *batchBody:
		return fmt.Sprintf("Import of %d %s", b.Rows, b.Table)
	case *withdrawalBody:
		if b.WholeBatch != "" {
			return "An import taken back whole"
		}
		return "Withdrawn: an earlier entry"
	case *erasureBody:
		if b.Visit != "" {
			return "A visitor erased"
		}
		return "A person erased: " + b.Person
	case *accountBody:
		return fmt.Sprintf("Account %s, %s", b.Name, b.Role.Words())
	default:
		return e.Kind
	}
}

func saidOf(s *stintBody, facts map[string]factValue) string {
	var parts []string
	if s != nil {
		parts = append(parts, "from "+dayOr(s.First, "the beginning")+" to "+dayOr(s.Last, "no end yet"))
	}
	for _, k := range sortedKeys(facts) {
		parts = append(parts, strings.ReplaceAll(k, "_", " ")+" "+facts[k].show())
	}
	if len(parts) == 0 {
		return ""
	}
	return ": " + strings.Join(parts, ", ")
}

func (m *model) entryView(tx *store.Tx, actor Actor, e store.Entry) (EntryView, error) {
	line, bd, err := m.entryLine(tx, e)
	if err != nil {
		return EntryView{}, err
	}
	v := EntryView{EntryLine: line, Canonical: string(e.Bytes), Fields: m.fields(e, bd)}
	if r, ok := bd.(*recordBody); ok {
		s := subjectOf(r.Subject.Kind, r.Subject.Code)
		v.SubjectRef, v.Record = &s, r.Record
		v.Failed = r.Result == Fail && line.SupersededBy == "" && !line.Withdrawn
	}
	c := bd.shared()
	if c.Reason != "" {
		v.Reason = ReasonWords(c.Reason)
	}
	if !c.ReasonText.IsZero() {
		v.Reason = strings.TrimPrefix(v.Reason+": "+c.ReasonText.String(), ": ")
	}
	hidden, err := m.hides(tx, actor, e, bd)
	if hidden {
		v.veil(actor)
	}
	return v, err
}
