package book

import (
	"slices"
	"time"

	"lodebook/models/program"
	"lodebook/models/store"
)

const (
	kindOutage = "out-of-service"
	kindReturn = "back-in-service"
)

// outageBody says that a fixture or a zone is out of service from an instant on, until it is signed back. It is no
// pause: what is asked of the subject goes on being asked.
type outageBody struct {
	common
	Subject subjectBody `json:"subject"`
	From    string      `json:"from"`             // an instant
	Record  string      `json:"record,omitempty"` // identifier of the failed record's entry
	Cause   string      `json:"cause,omitempty"`  // code of that record's fixture
	Another bool        `json:"another,omitempty"`
	Because Veiled      `json:"because,omitzero"`
}

func (b *outageBody) kind() string { return kindOutage }
func (b *outageBody) version() int { return 1 }

func (b *outageBody) validate(c *check) []Fault {
	faults := c.checkSubject("subject", b.Subject)
	if k := program.Asks(b.Subject.Kind); k != program.AsksFixture && k != program.AsksZone {
		faults = append(faults, Fault{"subject", b.Subject.Code, "is neither a fixture nor a zone", "the code of a fixture or a zone"})
	}
	at, more := c.moment("from", b.From)
	faults = append(faults, more...)
	if len(more) == 0 && at.time == nil {
		faults = append(faults, Fault{"from", b.From, "is a day and not a moment", "add the time of day, as in " + b.From + " 08:30"})
	}
	if b.Record == "" && b.Because.IsZero() {
		faults = append(faults, Fault{"because", "", "is empty", "say why it is taken out of service"})
	}
	return faults
}

func (b *outageBody) apply(at applied) []any {
	row := store.OutageRow{Line: at.line, Site: at.site, Subject: b.Subject.key(at.site), Cause: b.Cause, Record: b.Record, Another: b.Another, Account: at.actor}
	if t := parseMoment(b.From, at.zone(at.site)).time; t != nil {
		row.From = *t
	}
	return []any{row}
}

// returnBody signs a fixture or zone back: it ends the outages that it names, from the moment of the entry on.
type returnBody struct {
	common
	Subject subjectBody `json:"subject"`
	Outages []string    `json:"outages"` // identifiers of their entries
	Note    Veiled      `json:"note,omitzero"`
}

func (b *returnBody) kind() string { return kindReturn }
func (b *returnBody) version() int { return 1 }

func (b *returnBody) validate(c *check) []Fault {
	var faults []Fault
	open := c.m.outOfService(c.site, c.now)
	if len(b.Outages) == 0 {
		faults = append(faults, Fault{"subject", b.Subject.Code, "is not out of service", "a fixture or zone that is"})
	}
	for _, id := range b.Outages {
		if !slices.ContainsFunc(open, func(r store.OutageRow) bool { return r.ID == id }) {
			faults = append(faults, Fault{"subject", b.Subject.Code, "was signed back already", "a fixture or zone that is out of service"})
		}
	}
	if b.Note.IsZero() {
		faults = append(faults, Fault{"note", "", "is empty", "say what was done and looked at before it goes back"})
	}
	return faults
}

func (b *returnBody) apply(at applied) []any {
	return []any{store.ReturnRow{Line: at.line, Site: at.site, Outages: b.Outages, At: at.at}}
}

// outOfService gives what is out of service at a moment, in order of recording. One subject may stand there more than
// once, for more than one reason.
func (m *model) outOfService(site string, on time.Time) []store.OutageRow {
	var out []store.OutageRow
	back := m.signedBack(site)
	for _, r := range m.outages.get(site) {
		at, ended := back[r.ID]
		if r.Ended == 0 && !r.From.After(on) && (!ended || at.After(on)) {
			out = append(out, r)
		}
	}
	return out
}

// signedBack gives when each outage that was signed back ended, by its identifier.
func (m *model) signedBack(site string) map[string]time.Time {
	back := map[string]time.Time{}
	for _, r := range m.returns.get(site) {
		if r.Ended != 0 {
			continue
		}
		for _, id := range r.Outages {
			back[id] = r.At
		}
	}
	return back
}
