package book

import (
	"slices"

	"lodebook/models/store"
)

// What is written about incidents is for safety officers: also where all entries are listed, it stands there for
// everybody else without its content and without its writer.

// secretText is what stands in the place of what is kept for safety officers.
const secretText = "Kept for safety officers"

// Secret tells whether entries of a kind are kept for safety officers, whatever they say.
func Secret(kind string) bool { return kind == kindIncident || kind == kindIncidentReport }

// onOwnPage tells whether entries of a kind are corrected on a page of their own, if at all.
func onOwnPage(kind string) bool {
	return slices.Contains([]string{kindIncident, kindIncidentReport, kindRemedy, kindRemedyDone, kindRemedyCheck, kindOutage, kindReturn}, kind)
}

// hides tells whether the content of an entry is kept from the actor.
func (m *model) hides(tx *store.Tx, actor Actor, e store.Entry, bd body) (bool, error) {
	if actor.may(SeeIncidents, e.Site) == nil {
		return false, nil
	}
	return m.secret(tx, e, bd)
}

// secret tells whether the entry is about an incident. What withdraws such an entry is too.
func (m *model) secret(tx *store.Tx, e store.Entry, bd body) (bool, error) {
	remedy := 0
	switch b := bd.(type) {
	case *incidentBody, *incidentReportBody:
		return true, nil
	case *remedyBody:
		return b.Incident != 0, nil
	case *remedyDoneBody:
		remedy = b.Remedy
	case *remedyCheckBody:
		remedy = b.Remedy
	case *withdrawalBody:
		if e.Supersedes == "" {
			return false, nil
		}
		old, ok, err := tx.EntryByID(e.Supersedes)
		if err != nil || !ok {
			return false, err
		}
		was, err := decode(old, nil)
		if err != nil {
			return false, err
		}
		return m.secret(tx, old, was)
	default:
		return false, nil
	}
	for _, r := range m.remedies.get(e.Site) {
		if r.Number == remedy && r.Incident != 0 {
			return true, nil // also where the remedy itself was withdrawn since
		}
	}
	return false, nil
}

// veil takes the content and the writer out of an entry's line. Who wrote it sees that they did.
func (l *EntryLine) veil(actor Actor) {
	l.Summary = secretText
	if actor.Account == "" || l.ActorID != actor.Account {
		l.Actor, l.ActorID = "somebody", ""
	}
}

func (v *EntryView) veil(actor Actor) {
	v.EntryLine.veil(actor)
	v.Fields, v.Reason, v.Canonical, v.SubjectRef, v.Record = nil, "", "", nil, ""
	v.Hidden = true
}

// conflict tells that an identifier is taken. What is on record is shown to whoever may see it only.
func (s *session) conflict(old store.Entry, was body, recorded, given string) error {
	hidden, err := s.m.hides(s.tx, s.actor, old, was)
	if err != nil {
		return err
	}
	if hidden {
		recorded = secretText
	}
	return &Conflict{old.ID, recorded, given}
}

// mayRevise checks what may not be corrected or withdrawn by everybody who may correct an entry: what is about
// incidents is for safety officers, the terms of a remedy are not for its owner, what is out of service is
// signed back, and what a person reported of themselves is taken back by somebody else, with a reason.
func (s *session) mayRevise(old store.Entry, was body, given *common) error {
	if Secret(old.Kind) {
		return s.actor.may(SeeIncidents, old.Site)
	}
	switch b := was.(type) {
	case *eventBody:
		if !s.m.selfReported(old.Site, b) {
			return nil
		}
		if err := s.m.mayReviseReport(s.actor, old.Site, b); err != nil {
			return err
		}
		if given.Reason == "" {
			return invalid("reason", "", "is empty", "choose why the report is taken back")
		}
	case *outageBody:
		return invalid("entry", old.ID, "is not withdrawn", "sign the fixture or zone back, and say there why")
	case *remedyBody:
		if err := s.actor.may(Correct, old.Site); err != nil {
			return err
		}
		return s.notOwner(old.Site, b.Owner, b.Account, "nobody changes or withdraws a remedy of their own; ask a safety officer who does not own it")
	}
	return nil
}

// notOwner refuses an actor who is that person, has that account, or whose account is linked to the same person.
func (s *session) notOwner(site, person, account, why string) error {
	if s.m.isActor(s.actor, person, account) {
		return &Denied{Action: KeepRemedies, Role: s.actor.Role, Why: why}
	}
	return nil
}

// isActor tells whether a person, or the person behind an account, is the actor.
func (m *model) isActor(a Actor, person, account string) bool {
	if a.Account != "" && a.Account == account || a.Person != "" && a.Person == person {
		return true
	}
	linked, ok := m.account(account)
	return ok && a.Person != "" && linked.Person == a.Person
}

// veilsNaming are the erasable texts of the incidents in which a person was named, and of all that was written
// about those: they are texts about this person too.
func (s *session) veilsNaming(person string) ([]store.Veil, error) {
	var seqs []int64
	for _, site := range s.m.siteCodes() {
		seqs = append(seqs, s.m.linesNaming(site, person)...)
	}
	byEntry, err := s.tx.Veils(seqs...)
	var out []store.Veil
	for _, list := range byEntry {
		for _, v := range list {
			if !v.Erased && v.Path != "operator" {
				out = append(out, v)
			}
		}
	}
	return out, err
}

// linesNaming are the entries of a site about incidents in which the person was ever named.
func (m *model) linesNaming(site, person string) []int64 {
	named := map[int]bool{}
	for _, r := range m.incidents.get(site) {
		for _, code := range r.People {
			named[r.Number] = named[r.Number] || code == person
		}
	}
	var seqs []int64
	for _, r := range m.incidents.get(site) {
		if named[r.Number] {
			seqs = append(seqs, r.Seq)
		}
	}
	for _, r := range m.remedies.get(site) {
		if r.Incident == 0 || !named[r.Incident] {
			continue
		}
		seqs = append(seqs, r.Seq)
		for _, step := range m.steps.get(siteNumber{site, r.Number}) {
			seqs = append(seqs, step.Seq)
		}
	}
	return seqs
}
