package book

import (
	"context"
	"slices"
	"strconv"
	"strings"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// RemedyForm is a corrective action, as typed. It is for an incident, a failed record, or an item and its subject.
type RemedyForm struct {
	ID       string
	Incident string // number
	Record   string // identifier of the failed record's entry
	Item     string
	Subject  string
	Severity string
	Owner    string // code or name of a person, or the name of an account
	Due      string // empty: as the severity says
	Because  string // why the due day is another one
	What     string
}

// KeepRemedy puts a remedy on record.
func (b *Book) KeepRemedy(ctx context.Context, actor Actor, site string, f RemedyForm) (Receipt, error) {
	if err := actor.may(KeepRemedies, site); err != nil {
		return Receipt{}, err
	}
	return b.write(ctx, actor, func(s *session) error {
		body, faults := s.remedyBody(site, f, s.check(site).today())
		if body != nil && body.Incident != 0 {
			if err := actor.may(SeeIncidents, site); err != nil {
				return err
			}
		}
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		if err := s.failedRecord(site, body.Record); err != nil {
			return err
		}
		if severity, _ := s.m.severityOn(site, body.Severity, body.Made); s.m.isActor(actor, body.Owner, body.Account) && body.Due > body.Made.Add(severity.Due) {
			return &Denied{Action: KeepRemedies, Role: actor.Role, Why: noTimeForSelf}
		}
		var err error
		if body.Number, err = s.numberOf(f.ID, kindRemedy, s.m.nextRemedy(site)); err != nil {
			return err
		}
		return s.add(draft{id: f.ID, site: site, body: body})
	})
}

// ChangeRemedy changes the terms of a remedy: its owner, severity, due day or what is to be done. What it is for, and
// its number, stay. Its owner may not.
func (b *Book) ChangeRemedy(ctx context.Context, actor Actor, site string, number int, f RemedyForm, fix Correction) (Receipt, error) {
	if err := actor.may(KeepRemedies, site); err != nil {
		return Receipt{}, err
	}
	return b.write(ctx, actor, func(s *session) error {
		row, ok := s.m.remedy(site, number, always64)
		if !ok {
			return &NotFound{"remedy", strconv.Itoa(number)}
		}
		body, faults := s.remedyBody(site, RemedyForm{Severity: f.Severity, Owner: f.Owner, Due: f.Due, Because: f.Because, What: f.What}, row.Made)
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		body.Number, body.Incident, body.Record, body.Item = number, row.Incident, row.Record, row.Item
		if row.Subject.Kind != "" {
			body.Subject = &subjectBody{row.Subject.Kind, row.Subject.Code}
		}
		if fix.Supersedes == "" {
			fix.Supersedes = row.ID
		}
		fix.fill(&body.common)
		if s.m.isActor(actor, body.Owner, body.Account) && (body.Due > row.Due || row.Confirm && !body.Confirm) {
			return &Denied{Action: KeepRemedies, Role: actor.Role, Why: noTimeForSelf}
		}
		return s.add(draft{id: f.ID, site: site, supersedes: fix.Supersedes, body: body})
	})
}

const noTimeForSelf = "nobody gives themselves more time for a remedy, or takes its confirmation away; ask another safety officer"

func (m *model) nextRemedy(site string) int {
	n := 0
	for _, r := range m.remedies.get(site) {
		n = max(n, r.Number)
	}
	return n + 1
}

// remedyBody reads the form; made is the day from which the severity's time is counted.
func (s *session) remedyBody(site string, f RemedyForm, made civil.Day) (*remedyBody, []Fault) {
	c := s.check(site)
	if s.m.site(site) == nil {
		return nil, []Fault{{"site", site, "is not on record", "the code of a site"}}
	}
	subject := ""
	body := &remedyBody{Record: strings.TrimSpace(f.Record), Item: strings.TrimSpace(f.Item), Severity: strings.TrimSpace(f.Severity), Made: made}
	var faults []Fault
	if f.Incident != "" {
		n, err := strconv.Atoi(f.Incident)
		if err != nil || n < 1 {
			faults = append(faults, Fault{"incident", f.Incident, "is no number", "the number of an incident"})
		}
		body.Incident = n
	}
	if f.Subject != "" {
		x, more := c.subject("subject", f.Subject)
		faults = append(faults, more...)
		body.Subject, subject = &x, x.person()
	}
	body.What, body.Because = veiled(strings.TrimSpace(f.What), subject), veiled(strings.TrimSpace(f.Because), "")
	severity, ok := s.m.severityOn(site, body.Severity, made)
	if !ok {
		return body, append(faults, Fault{"severity", body.Severity, "is no severity of this site", "one of " + strings.Join(s.m.site(site).severityCodes(), ", ")})
	}
	body.Due, body.Confirm = made.Add(severity.Due), severity.Confirm
	if text := strings.TrimSpace(f.Due); text != "" {
		due, more := needDay("due", text)
		faults = append(faults, more...)
		body.Due = due
	}
	return body, append(faults, s.owner(site, body, f.Owner)...)
}

// owner finds whom a remedy is given to: a person by code or name, or an account by its name.
func (s *session) owner(site string, body *remedyBody, text string) []Fault {
	text = strings.TrimPrefix(strings.TrimSpace(text), "person:")
	if p, ok := s.m.person(text); ok && !p.Erased {
		body.Owner = text
		return nil
	}
	if code := s.m.personNamed(text); text != "" && code != "" {
		body.Owner = code
		return nil
	}
	if a, ok := s.m.accountNamed(text); ok && !a.Disabled && (len(a.Sites) == 0 || slices.Contains(a.Sites, site)) {
		body.Account, body.Owner = a.ID, a.Person
		if a.Person != "" {
			body.Account = ""
		}
		return nil
	}
	return []Fault{{"owner", text, "is neither a person on record nor an account of this site", "the code or name of a person, or the name of an account"}}
}

// severityOn finds a severity in the version of the program that is in force on a day.
func (m *model) severityOn(site, code string, on civil.Day) (program.Severity, bool) {
	sm := m.site(site)
	if sm == nil {
		return program.Severity{}, false
	}
	s, ok := sm.on(on).program.Severity(code)
	if !ok {
		return program.Severity{}, false
	}
	return *s, true
}

// failedRecord checks that an entry is a record of the site that failed.
func (s *session) failedRecord(site, id string) error {
	if id == "" {
		return nil
	}
	e, ok, err := s.tx.EntryByID(id)
	if err != nil {
		return err
	}
	if !ok || e.Kind != kindRecord || e.Site != site {
		return &NotFound{"record", id}
	}
	was, err := s.open(e)
	if err != nil {
		return err
	}
	if r, ok := was.(*recordBody); !ok || r.Result != Fail {
		return invalid("record", id, "did not fail", "a record that failed")
	}
	return nil
}

// RemedyDoneForm says that a remedy is done, as typed.
type RemedyDoneForm struct{ ID, Day, By, Note string }

// RemedyDone puts on record that what a remedy asks for is done. Its owner may say so, and whoever keeps remedies.
func (b *Book) RemedyDone(ctx context.Context, actor Actor, site string, number int, f RemedyDoneForm) (Receipt, error) {
	if err := actor.may(DoRemedies, site); err != nil {
		return Receipt{}, err
	}
	return b.write(ctx, actor, func(s *session) error {
		row, ok := s.m.remedy(site, number, always64)
		if !ok || !s.m.seesRemedy(actor, row) {
			return &NotFound{"remedy", strconv.Itoa(number)}
		}
		if !s.m.isActor(actor, row.Owner, row.Account) && !s.m.keepsRemedy(actor, row) {
			return &Denied{Action: DoRemedies, Role: actor.Role, Why: "this remedy belongs to somebody else; they say when it is done, or a safety officer"}
		}
		day, faults := needDay("day", f.Day)
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		by := s.check(site).claim(f.By)
		body := &remedyDoneBody{Remedy: number, Day: day, By: by, DoneBy: by.person, Note: veiled(strings.TrimSpace(f.Note), "")}
		return s.add(draft{id: f.ID, site: site, body: body})
	})
}

// RemedyCheckForm is the second person's word. Done names the entry that they looked at.
type RemedyCheckForm struct {
	ID, Done, Note string
	Refused        bool
}

// CheckRemedy confirms that a remedy is done, or sends it back with a reason. Neither its owner nor whoever did it may.
func (b *Book) CheckRemedy(ctx context.Context, actor Actor, site string, number int, f RemedyCheckForm) (Receipt, error) {
	if err := actor.may(ConfirmRemedies, site); err != nil {
		return Receipt{}, err
	}
	return b.write(ctx, actor, func(s *session) error {
		row, ok := s.m.remedy(site, number, always64)
		if !ok {
			return &NotFound{"remedy", strconv.Itoa(number)}
		}
		if why := s.m.mayNotConfirm(actor, row); why != "" {
			return &Denied{Action: ConfirmRemedies, Role: actor.Role, Why: why}
		}
		body := &remedyCheckBody{Remedy: number, Done: f.Done, Refused: f.Refused, Day: s.check(site).today(), Note: veiled(strings.TrimSpace(f.Note), "")}
		return s.add(draft{id: f.ID, site: site, body: body})
	})
}
