package book

import (
	"context"
	"strings"
	"time"

	"lodebook/models/program"
	"lodebook/models/standing"
	"lodebook/models/store"
)

// OutageForm takes a fixture or zone out of service by hand, as typed. An empty From is now.
type OutageForm struct{ ID, Subject, From, Because string }

// TakeOut puts a fixture or zone out of service until a safety officer signs it back.
func (b *Book) TakeOut(ctx context.Context, actor Actor, site string, f OutageForm) (Receipt, error) {
	if err := actor.may(TakeOut, site); err != nil {
		return Receipt{}, err
	}
	return b.write(ctx, actor, func(s *session) error {
		c := s.check(site)
		subject, faults := c.subject("subject", f.Subject)
		body := &outageBody{Subject: subject, From: s.now.Format(time.RFC3339), Because: veiled(strings.TrimSpace(f.Because), "")}
		if strings.TrimSpace(f.From) != "" {
			from, more := c.readMoment("from", f.From)
			body.From, faults = from, append(faults, more...)
		}
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		return s.add(draft{id: f.ID, site: site, body: body})
	})
}

// ReturnForm signs a fixture or zone back, as typed.
type ReturnForm struct{ ID, Subject, Note string }

// SignBack ends all for which a fixture or zone is out of service; with a fixture go the zones that its failed
// records closed.
func (b *Book) SignBack(ctx context.Context, actor Actor, site string, f ReturnForm) (Receipt, error) {
	if err := actor.may(SignBack, site); err != nil {
		return Receipt{}, err
	}
	return b.write(ctx, actor, func(s *session) error {
		if was, err := s.keptReturn(f.ID, site); was || err != nil {
			return err
		}
		c := s.check(site)
		subject, faults := c.subject("subject", f.Subject)
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		body := &returnBody{Subject: subject, Note: veiled(strings.TrimSpace(f.Note), "")}
		for _, r := range s.m.outagesOf(site, subject, s.now) {
			if r.Another && s.m.isActor(actor, "", r.Account) {
				return &Denied{Action: SignBack, Role: actor.Role, Why: "whoever recorded the failure does not sign it back here; ask another safety officer"}
			}
			body.Outages = append(body.Outages, r.ID)
		}
		return s.add(draft{id: f.ID, site: site, body: body})
	})
}

// keptReturn tells whether the form was kept before.
func (s *session) keptReturn(id, site string) (bool, error) {
	if id == "" {
		return false, nil
	}
	old, ok, err := s.tx.EntryByID(id)
	if err != nil || !ok || old.Kind != kindReturn || old.Site != site {
		return false, err
	}
	s.receipt.Unchanged = append(s.receipt.Unchanged, id)
	return true, nil
}

// outagesOf are the outages of a subject at a moment; of a fixture also those of the zones that it closed.
func (m *model) outagesOf(site string, subject subjectBody, on time.Time) []store.OutageRow {
	var out []store.OutageRow
	for _, r := range m.outOfService(site, on) {
		caused := subject.Kind == string(program.AsksFixture) && r.Cause == subject.Code
		if r.Subject == subject.key(site) || caused {
			out = append(out, r)
		}
	}
	return out
}

// addRecord writes a record, and with it what a failed sheet takes out of service.
func (s *session) addRecord(d draft, body *recordBody) error {
	sheet, out := s.m.takesOut(d.site, body, s.now)
	if !out {
		return s.add(d)
	}
	if d.id == "" {
		id, err := s.b.newID(s.now)
		if err != nil {
			return err
		}
		d.id = id
	}
	written := len(s.receipt.Written)
	if err := s.add(d); err != nil || len(s.receipt.Written) == written {
		return err // or the record was on record already
	}
	return s.add(s.m.outageDrafts(d, body, sheet)...)
}

// takesOut tells whether a record is one of a failed sheet that takes its fixture out of service.
func (m *model) takesOut(site string, b *recordBody, now time.Time) (*program.Sheet, bool) {
	sm := m.site(site)
	if b.Result != Fail || b.Subject.Kind != string(program.AsksFixture) || sm == nil {
		return nil, false
	}
	sheet, ok := sm.on(m.dayAt(site, now)).program.SheetFor(b.Record)
	return sheet, ok && sheet.OnFailOut
}

// outageDrafts are the outages of a failed record: of its fixture, and of the fixture's zone where the sheet says so. A
// correction that fails again leaves it at what the corrected record took out.
func (m *model) outageDrafts(d draft, b *recordBody, sheet *program.Sheet) []draft {
	zone := m.zone(d.site)
	at := parseMoment(b.On, zone)
	from := at.day.Midnight(zone)
	if at.time != nil {
		from = *at.time
	}
	subjects := []subjectBody{b.Subject}
	profile := m.engine.Profile(d.site, standing.Subject{Asks: program.AsksFixture, Code: b.Subject.Code}, at.day, always64)
	if sheet.AlsoZone && profile.Zone != "" {
		subjects = append(subjects, subjectBody{string(program.AsksZone), profile.Zone})
	}
	out := map[store.SubjectKey]bool{}
	for _, r := range m.outages.get(d.site) {
		if d.supersedes != "" && r.Record == d.supersedes && m.stillOut(r) {
			out[r.Subject] = true
		}
	}
	var drafts []draft
	for _, subject := range subjects {
		if out[subject.key(d.site)] {
			continue
		}
		drafts = append(drafts, draft{id: partID(d.id, subject), site: d.site, body: &outageBody{
			Subject: subject, From: from.UTC().Format(time.RFC3339), Record: d.id, Cause: b.Subject.Code, Another: sheet.BackByAnother,
		}})
	}
	return drafts
}

// stillOut tells whether nobody has signed an outage back.
func (m *model) stillOut(r store.OutageRow) bool {
	_, back := m.signedBack(r.Site)[r.ID]
	return r.Ended == 0 && !back
}
