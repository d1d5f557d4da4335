package book

import (
	"context"
	"fmt"
	"slices"
	"strings"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// RecordForm is something done, as typed. Subject is a code, or kind:code where two kinds share one.
type RecordForm struct {
	ID      string // the entry's identifier; empty: a new one
	Record  string // kind/code
	Subject string
	On      string // YYYY-MM-DD, or an instant in RFC 3339
	Result  string // pass or fail; empty: pass
	Until   string
	Limit   string // zones, separated by spaces
	By      string
	Note    string
}

// Record puts one thing done on record.
func (b *Book) Record(ctx context.Context, actor Actor, site string, f RecordForm, fix Correction) (Receipt, error) {
	return b.write(ctx, actor, func(s *session) error {
		body, faults := s.check(site).recordBody(f)
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		if err := s.mayRecord(site, body); err != nil {
			return err
		}
		if err := s.inherit(body, fix.Supersedes); err != nil {
			return err
		}
		fix.fill(&body.common)
		return s.addRecord(draft{id: f.ID, site: site, supersedes: fix.Supersedes, body: body}, body)
	})
}

// inherit keeps what a form does not show of the record that it corrects: which session it belongs
// to, and who took part in a crew's drill.
func (s *session) inherit(body *recordBody, corrected string) error {
	if corrected == "" {
		return nil
	}
	old, ok, err := s.tx.EntryByID(corrected)
	if err != nil || !ok || old.Kind != kindRecord {
		return err // that it is not there is said where the correction is checked
	}
	was, err := s.open(old)
	if err != nil {
		return err
	}
	r := was.(*recordBody)
	body.Session = r.Session
	if body.Subject == r.Subject {
		body.Takers = r.Takers
	}
	return nil
}

// recordBody reads the form.
func (c *check) recordBody(f RecordForm) (*recordBody, []Fault) {
	subject, faults := c.subject("subject", f.Subject)
	on, bad := c.readMoment("on", f.On)
	faults = append(faults, bad...)
	body := &recordBody{
		Record: strings.TrimSpace(f.Record), Subject: subject, On: on, Result: strings.TrimSpace(f.Result),
		Limit: strings.Fields(f.Limit), By: c.claim(f.By), Note: veiled(strings.TrimSpace(f.Note), subject.person()),
	}
	if body.Result == "" {
		body.Result = Pass
	}
	if f.Until != "" {
		d, err := civil.ParseDay(f.Until)
		if err != nil {
			faults = append(faults, Fault{"until", f.Until, "is not a day", "write it as YYYY-MM-DD"})
		}
		body.Until = &d
	}
	return body, faults
}

// claim veils the name of whoever is said to have done or approved something; where it is a person
// of the book it goes with them when they are erased.
func (c *check) claim(by string) Veiled {
	by = strings.TrimSpace(by)
	if by == "" {
		return Veiled{}
	}
	if _, ok := c.m.person(by); ok {
		return veiled(by, by)
	}
	return veiled(by, c.m.personNamed(by))
}

// subject resolves a code, or kind:code, to the subject that bears it.
func (c *check) subject(field, text string) (subjectBody, []Fault) {
	text = strings.TrimSpace(text)
	if kind, code, ok := strings.Cut(text, ":"); ok && slices.Contains(program.AllAsks, program.Asks(kind)) {
		return subjectBody{kind, code}, nil
	}
	kinds := c.m.kindsOf(c.site, text)
	switch len(kinds) {
	case 1:
		return subjectBody{kinds[0], text}, nil
	case 0:
		return subjectBody{}, []Fault{{field, text, "is on record neither as a person nor as anything of this site", "the code of a person, fixture, zone, crew, post or document"}}
	default:
		forms := make([]string, len(kinds))
		for i, k := range kinds {
			forms[i] = k + ":" + text
		}
		return subjectBody{}, []Fault{{field, text, "is the code of more than one thing", "write " + strings.Join(forms, " or ")}}
	}
}

// mayRecord checks the actor's permission for a kind of record and its subject.
func (s *session) mayRecord(site string, b *recordBody) error {
	kind, code, _ := strings.Cut(b.Record, "/")
	self := s.actor.Person != "" && s.actor.Person == b.Subject.person()
	switch kind {
	case "inspection", "check":
		return s.mayFill(site, code)
	case "acknowledgement":
		if self {
			return s.actor.may(Acknowledge, site)
		}
	case "screening", "appointment":
		if self {
			return &Denied{Action: RecordDone, Role: s.actor.Role, Why: "nobody records their own " + kind + "; ask another safety officer"}
		}
	}
	return s.actor.may(RecordDone, site)
}

// mayFill checks that the sheet's recorded_by names the actor's role, crew or level.
func (s *session) mayFill(site, sheet string) error {
	if err := s.actor.may(FillSheet, site); err != nil {
		return err
	}
	return s.m.mayFill(s.actor, site, sheet, s.check(site).today())
}

func (m *model) mayFill(actor Actor, site, sheet string, on civil.Day) error {
	recorders := []string{string(Facilities), string(SafetyOfficer)}
	sm := m.site(site)
	if sm == nil {
		return &NotFound{"site", site}
	}
	p := sm.on(on).program
	if sh, ok := p.Sheet(sheet); ok {
		recorders = p.Recorders(sh)
	}
	names := []string{string(actor.Role)}
	if actor.Person != "" {
		profile := m.engine.Profile(site, subjectOf("person", actor.Person), on, always64)
		names = append(names, profile.Crew, profile.Level)
	}
	for _, n := range names {
		if n != "" && slices.Contains(recorders, n) {
			return nil
		}
	}
	return &Denied{Action: FillSheet, Role: actor.Role, Why: fmt.Sprintf("this sheet is recorded by %s", strings.Join(recorders, ", "))}
}

// SessionForm is one training, screening or review that many people took part in.
type SessionForm struct {
	ID     string // a fresh UUID of the form, so that it is kept once; empty: a new one
	Record string
	On     string
	Until  string
	By     string
	Note   string
	People []string // codes of those who passed
	Failed []string // codes of those who did not
}

// RecordSession puts one record for each person on record, all in one write.
func (b *Book) RecordSession(ctx context.Context, actor Actor, site string, f SessionForm) (Receipt, error) {
	if err := actor.may(RecordDone, site); err != nil {
		return Receipt{}, err
	}
	if len(f.People)+len(f.Failed) == 0 {
		return Receipt{}, invalid("people", "", "nobody is chosen", "tick everybody who took part")
	}
	return b.write(ctx, actor, func(s *session) error {
		id, err := s.sessionID(f.ID)
		if err != nil {
			return err
		}
		return s.addRecords(site, id, f, nil)
	})
}

// sessionID is the identifier given, which must be a UUID, or a fresh one.
func (s *session) sessionID(given string) (string, error) {
	if given == "" {
		return s.b.newID(s.now)
	}
	return given, checkID(given)
}

// addRecords writes a record for each person of a session, and for its crew where it is a drill.
// The records' identifiers follow from that of the form, where it has one.
func (s *session) addRecords(site, session string, f SessionForm, crew *recordBody) error {
	var drafts []draft
	var all []Fault
	seen := map[string]bool{}
	if crew != nil {
		drafts = append(drafts, draft{id: partID(f.ID, crew.Subject), site: site, body: crew})
	}
	for _, who := range []struct {
		codes  []string
		result string
	}{{f.People, Pass}, {f.Failed, Fail}} {
		for _, code := range who.codes {
			if seen[code] {
				return invalid("people", code, "is named twice", "name everybody once, as passed or as not passed")
			}
			seen[code] = true
			body, faults := s.check(site).recordBody(RecordForm{Record: f.Record, Subject: "person:" + code, On: f.On, Until: f.Until, By: f.By, Note: f.Note, Result: who.result})
			for _, x := range faults {
				if !slices.Contains(all, x) { // what is wrong for all is said once
					all = append(all, x)
				}
			}
			body.Session = session
			if err := s.mayRecord(site, body); err != nil {
				return err
			}
			drafts = append(drafts, draft{id: partID(f.ID, body.Subject), site: site, body: body})
		}
	}
	if len(all) > 0 {
		return &Invalid{all}
	}
	return s.add(drafts...)
}

// DrillForm is a drill that was held: with a crew, and with who took part.
type DrillForm struct {
	ID     string // a fresh UUID of the form, so that it is kept once; empty: a new one
	Plan   string // identifier of the plan that it answers, or empty
	Record string // drill/code
	Crew   string
	On     string
	People []string
	Result string
	By     string
	Note   string
}

// RecordDrill puts a drill on record: for its crew and for each person who took part.
func (b *Book) RecordDrill(ctx context.Context, actor Actor, site string, f DrillForm) (Receipt, error) {
	if err := actor.may(RecordDone, site); err != nil {
		return Receipt{}, err
	}
	if f.Crew == "" && len(f.People) == 0 {
		return Receipt{}, invalid("crew", "", "neither a crew nor anybody is named", "choose the crew, or tick who took part")
	}
	return b.write(ctx, actor, func(s *session) error {
		id := f.Plan
		if id == "" {
			var err error
			if id, err = s.sessionID(f.ID); err != nil {
				return err
			}
		}
		var crew *recordBody
		if f.Crew != "" {
			body, faults := s.check(site).recordBody(RecordForm{Record: f.Record, Subject: "crew:" + f.Crew, On: f.On, By: f.By, Note: f.Note, Result: f.Result})
			if len(faults) > 0 {
				return &Invalid{faults}
			}
			body.Session, body.Takers = id, f.People
			crew = body
		}
		people := SessionForm{ID: f.ID, Record: f.Record, On: f.On, By: f.By, Note: f.Note, People: f.People}
		if f.Result == Fail {
			people.People, people.Failed = nil, f.People
		}
		return s.addRecords(site, id, people, crew)
	})
}

// PlanForm is a drill or session to come.
type PlanForm struct{ ID, Record, Crew, Day, At, Note string }

// PlanDrill puts a plan on record.
func (b *Book) PlanDrill(ctx context.Context, actor Actor, site string, f PlanForm, fix Correction) (Receipt, error) {
	if err := actor.may(PlanDrills, site); err != nil {
		return Receipt{}, err
	}
	day, err := civil.ParseDay(f.Day)
	if err != nil {
		return Receipt{}, invalid("day", f.Day, "is not a day", "write it as YYYY-MM-DD")
	}
	return b.write(ctx, actor, func(s *session) error {
		body := &planBody{Record: f.Record, Crew: f.Crew, Day: day, At: f.At, Note: veiled(strings.TrimSpace(f.Note), "")}
		fix.fill(&body.common)
		return s.add(draft{id: f.ID, site: site, supersedes: fix.Supersedes, body: body})
	})
}

// EventForm is something that happened to a subject, as typed.
type EventForm struct{ ID, Event, Subject, On, Note string }

// ReportEvent puts an event on record.
func (b *Book) ReportEvent(ctx context.Context, actor Actor, site string, f EventForm, fix Correction) (Receipt, error) {
	if err := actor.may(ReportEvent, site); err != nil {
		return Receipt{}, err
	}
	return b.write(ctx, actor, func(s *session) error {
		body, faults := s.check(site).eventBody(f)
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		fix.fill(&body.common)
		return s.add(draft{id: f.ID, site: site, supersedes: fix.Supersedes, body: body})
	})
}

// ReportSelf says that something about the actor's own screening has changed, without saying what: an event of now, of
// the kind that the program names for it.
func (b *Book) ReportSelf(ctx context.Context, actor Actor, site string) (Receipt, error) {
	if err := actor.may(SelfReport, site); err != nil {
		return Receipt{}, err
	}
	if actor.Person == "" {
		return Receipt{}, &Denied{Action: SelfReport, Role: actor.Role, Why: "this account is linked to no person; ask an administrator to link it"}
	}
	return b.write(ctx, actor, func(s *session) error {
		c := s.check(site)
		ev, ok := c.selfEvent()
		if !ok {
			return invalid("event", "", "is named by no line of the program", "an event of a person with self_report: true")
		}
		if !s.m.onStaff(site, actor.Person, c.today()) {
			return &Denied{Action: SelfReport, Role: actor.Role, Why: "you are not on staff here today"}
		}
		return s.add(draft{site: site, body: &eventBody{Event: ev, Subject: subjectBody{"person", actor.Person}, On: moment{time: &s.now}.String()}})
	})
}

// selfEvent is the event that people report of themselves.
func (c *check) selfEvent() (string, bool) {
	if c.m.site(c.site) == nil {
		return "", false
	}
	for _, e := range c.m.site(c.site).on(c.today()).program.Events {
		if e.SelfReport {
			return e.Code, true
		}
	}
	return "", false
}

// selfReported tells whether an event is one that people report of themselves.
func (m *model) selfReported(site string, b *eventBody) bool {
	e, ok := m.site(site).event(b.Event)
	return ok && e.SelfReport
}

// mayReviseReport checks that a report about oneself is taken back by a safety officer, and by nobody for themselves: it
// would open their zones again.
func (m *model) mayReviseReport(actor Actor, site string, b *eventBody) error {
	if err := actor.may(Correct, site); err != nil {
		return err
	}
	if m.isActor(actor, b.Subject.person(), "") {
		return &Denied{Action: Correct, Role: actor.Role, Why: "nobody takes back what was reported about themselves; ask another safety officer"}
	}
	return nil
}

func (c *check) eventBody(f EventForm) (*eventBody, []Fault) {
	subject, faults := c.subject("subject", f.Subject)
	on, bad := c.readMoment("on", f.On)
	faults = append(faults, bad...)
	return &eventBody{Event: strings.TrimSpace(f.Event), Subject: subject, On: on, Note: veiled(strings.TrimSpace(f.Note), subject.person())}, faults
}
