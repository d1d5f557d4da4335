package book

import (
	"context"
	"strings"

	"lodebook/models/civil"
)

// ExcusalForm is an exception for one obligation, as typed.
type ExcusalForm struct {
	ID, Item, Subject, From, To string
	Reason, ApprovedBy          string
	Opens                       string // yes or no; empty: no
}

// Excuse puts an excusal on record. An actor who is a safety officer confirms it by writing it.
func (b *Book) Excuse(ctx context.Context, actor Actor, site string, f ExcusalForm, fix Correction) (Receipt, error) {
	if err := actor.may(Excuse, site); err != nil {
		return Receipt{}, err
	}
	return b.write(ctx, actor, func(s *session) error {
		body, faults := s.check(site).excusalBody(f)
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		if actor.Person != "" && actor.Person == body.Subject.person() {
			return &Denied{Action: Excuse, Role: actor.Role, Why: "nobody excuses themselves; ask another safety officer"}
		}
		fix.fill(&body.common)
		return s.add(draft{id: f.ID, site: site, supersedes: fix.Supersedes, body: body})
	})
}

// ConfirmExcusal lets a safety officer stand behind an imported excusal that asks to open reach.
func (b *Book) ConfirmExcusal(ctx context.Context, actor Actor, id string) (Receipt, error) {
	return b.write(ctx, actor, func(s *session) error {
		old, ok, err := s.tx.EntryByID(id)
		if err != nil {
			return err
		}
		if !ok || old.Kind != kindExcusal {
			return &NotFound{"excusal", id}
		}
		if err := actor.may(Excuse, old.Site); err != nil {
			return err
		}
		opened, err := s.open(old)
		if err != nil {
			return err
		}
		was := opened.(*excusalBody)
		if actor.Person != "" && actor.Person == was.Subject.person() {
			return &Denied{Action: Excuse, Role: actor.Role, Why: "nobody excuses themselves; ask another safety officer"}
		}
		now := &excusalBody{
			Item: was.Item, Subject: was.Subject, From: was.From, To: was.To, Opens: was.Opens, Confirmed: true,
			Because: veiled(was.Because.Value, was.Because.person), ApprovedBy: veiled(was.ApprovedBy.Value, was.ApprovedBy.person),
		}
		Correction{Reason: "other", ReasonText: "Confirmed by a safety officer."}.fill(&now.common)
		return s.add(draft{site: old.Site, supersedes: id, body: now})
	})
}

func (c *check) excusalBody(f ExcusalForm) (*excusalBody, []Fault) {
	subject, faults := c.subject("subject", f.Subject)
	body := &excusalBody{Item: strings.TrimSpace(f.Item), Subject: subject, Because: veiled(strings.TrimSpace(f.Reason), subject.person()), ApprovedBy: c.claim(f.ApprovedBy)}
	var more []Fault
	body.From, more = needDay("from", f.From)
	faults = append(faults, more...)
	body.To, more = needDay("to", f.To)
	faults = append(faults, more...)
	if f.Opens != "" {
		yes, ok := readYesNo(f.Opens)
		if !ok {
			faults = append(faults, Fault{"opens", f.Opens, "is neither yes nor no", "write yes or no"})
		}
		body.Opens = yes == "yes"
	}
	body.Confirmed = body.Opens && c.actor.Role == SafetyOfficer
	return body, faults
}

func needDay(field, text string) (civil.Day, []Fault) {
	d, err := civil.ParseDay(strings.TrimSpace(text))
	if err != nil {
		return 0, []Fault{{field, text, "is not a day", "write it as YYYY-MM-DD"}}
	}
	return d, nil
}

// PauseForm is a span in which a subject is away or out of service, as typed.
type PauseForm struct{ ID, Subject, From, To, Reason string }

// Pause puts a pause on record.
func (b *Book) Pause(ctx context.Context, actor Actor, site string, f PauseForm, fix Correction) (Receipt, error) {
	if err := actor.may(Excuse, site); err != nil {
		return Receipt{}, err
	}
	return b.write(ctx, actor, func(s *session) error {
		body, faults := s.check(site).pauseBody(f)
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		fix.fill(&body.common)
		return s.add(draft{id: f.ID, site: site, supersedes: fix.Supersedes, body: body})
	})
}

func (c *check) pauseBody(f PauseForm) (*pauseBody, []Fault) {
	subject, faults := c.subject("subject", f.Subject)
	body := &pauseBody{Subject: subject, Because: veiled(strings.TrimSpace(f.Reason), subject.person())}
	var more []Fault
	body.From, more = needDay("from", f.From)
	faults = append(faults, more...)
	if f.To != "" {
		to, more := needDay("to", f.To)
		faults = append(faults, more...)
		body.To = &to
	}
	return body, faults
}

// EndPause gives an open pause its last day.
func (b *Book) EndPause(ctx context.Context, actor Actor, id string, last civil.Day) (Receipt, error) {
	return b.write(ctx, actor, func(s *session) error {
		old, ok, err := s.tx.EntryByID(id)
		if err != nil {
			return err
		}
		if !ok || old.Kind != kindPause {
			return &NotFound{"pause", id}
		}
		if err := actor.may(Excuse, old.Site); err != nil {
			return err
		}
		opened, err := s.open(old)
		if err != nil {
			return err
		}
		was := opened.(*pauseBody)
		now := &pauseBody{Subject: was.Subject, From: was.From, To: &last, Because: veiled(was.Because.Value, was.Because.person)}
		Correction{Reason: "other", ReasonText: "It ended."}.fill(&now.common)
		return s.add(draft{site: old.Site, supersedes: id, body: now})
	})
}
