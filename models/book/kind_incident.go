package book

import (
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/store"
)

const (
	kindIncident       = "incident"
	kindIncidentReport = "incident-report"
)

// incidentBody is an incident or near miss. Its number is the site's, and stays when the entry is corrected.
// Whoever reports without a name leaves none: Anonymous says so, and the entry's writer is a fixed word.
type incidentBody struct {
	common
	Number    int      `json:"number"`
	Kind      string   `json:"incident"` // a kind of the program
	Zone      string   `json:"zone,omitempty"`
	At        string   `json:"at"` // an instant
	Severity  string   `json:"severity"`
	Anonymous bool     `json:"anonymous,omitempty"`
	People    []string `json:"people,omitempty"` // codes of those who were involved
	What      Veiled   `json:"what,omitzero"`
	Who       Veiled   `json:"who,omitzero"`
	Action    Veiled   `json:"action,omitzero"` // what was done at once
	By        Veiled   `json:"by,omitzero"`     // who told the writer, where that is somebody else
}

func (b *incidentBody) kind() string { return kindIncident }
func (b *incidentBody) version() int { return 1 }

func (b *incidentBody) validate(c *check) []Fault {
	var faults []Fault
	site := c.m.site(c.site)
	if !site.declares(func(p *program.Program) bool { _, ok := p.Incident(b.Kind); return ok }) {
		faults = append(faults, Fault{"incident", b.Kind, "is no kind of incident of this site", "one of " + strings.Join(site.incidentCodes(), ", ")})
	}
	faults = append(faults, c.checkSeverity("severity", b.Severity)...)
	if b.Zone != "" {
		faults = append(faults, c.checkZones("zone", []string{b.Zone})...)
	}
	at, more := c.moment("at", b.At)
	faults = append(faults, more...)
	if len(more) == 0 && at.time == nil {
		faults = append(faults, Fault{"at", b.At, "is a day and not a moment", "add the time of day, as near as it is known, as in " + b.At + " 08:30"})
	}
	for _, code := range b.People {
		faults = append(faults, c.checkSubject("people", subjectBody{"person", code})...)
	}
	if b.What.IsZero() {
		faults = append(faults, Fault{"what", "", "is empty", "say in a sentence or two what happened"})
	}
	if old, ok := c.old.(*incidentBody); ok && (old.Number != b.Number || old.Anonymous != b.Anonymous) {
		faults = append(faults, Fault{"number", "", "is another one than that of the entry that is corrected", "correct the incident from its own page"})
	}
	return faults
}

func (b *incidentBody) apply(at applied) []any {
	m := parseMoment(b.At, at.zone(at.site))
	when := m.day.Midnight(at.zone(at.site))
	if m.time != nil {
		when = *m.time
	}
	return []any{store.IncidentRow{
		Line: at.line, Site: at.site, Number: b.Number, Kind: b.Kind, Zone: b.Zone, Severity: b.Severity, At: when,
		Anonymous: b.Anonymous, Reporter: at.actor, People: b.People,
	}}
}

// checkSeverity checks that some version of the program has the severity.
func (c *check) checkSeverity(field, code string) []Fault {
	site := c.m.site(c.site)
	if site.declares(func(p *program.Program) bool { _, ok := p.Severity(code); return ok }) {
		return nil
	}
	return []Fault{{field, code, "is no severity of this site", "one of " + strings.Join(site.severityCodes(), ", ")}}
}

func (s *siteModel) incidentCodes() []string {
	return s.codes(func(p *program.Program) []string {
		return codesOf(p.Incidents, func(k program.IncidentKind) string { return k.Code })
	})
}

func (s *siteModel) severityCodes() []string {
	return s.codes(func(p *program.Program) []string {
		return codesOf(p.Severities, func(x program.Severity) string { return x.Code })
	})
}

// incidentReportBody says that an outside body was told of an incident, as the site's rule asks.
type incidentReportBody struct {
	common
	Incident  int       `json:"incident"`
	Report    string    `json:"report"` // code of the site's rule
	Day       civil.Day `json:"day"`
	Reference Veiled    `json:"reference,omitzero"` // what the body calls it
}

func (b *incidentReportBody) kind() string { return kindIncidentReport }
func (b *incidentReportBody) version() int { return 1 }

func (b *incidentReportBody) validate(c *check) []Fault {
	row, ok := c.m.incident(c.site, b.Incident, always64)
	if !ok {
		return []Fault{{"incident", summaryNumber(b.Incident), "is the number of no incident that stands", "the number of one"}}
	}
	var faults []Fault
	if happened := civil.DayOf(row.At, c.zone()); b.Day < happened || b.Day > c.today() {
		faults = append(faults, Fault{"day", b.Day.String(), "is before the incident or lies in the future", "a day from " + happened.String() + " to " + c.today().String()})
	}
	asked := c.m.reportsOf(row, always64)
	var open []string
	for _, r := range asked {
		if r.Done == nil {
			open = append(open, r.Code)
		}
		if r.Code == b.Report && (r.Done == nil || c.supersedesSeq(r.seq)) {
			return faults
		}
	}
	accepted := "nothing is left to be told"
	if len(open) > 0 {
		accepted = "one of " + strings.Join(open, ", ")
	}
	return append(faults, Fault{"report", b.Report, "is not asked for of this incident, or was made already", accepted})
}

func (b *incidentReportBody) apply(at applied) []any {
	return []any{store.ReportRow{Line: at.line, Site: at.site, Incident: b.Incident, Code: b.Report, Day: b.Day}}
}

// stands tells whether a line counts as known at a sequence number.
func stands(l store.Line, k int64) bool { return known(l).KnownAt(k) }

// incident gives the last standing line of an incident, as known at k.
func (m *model) incident(site string, number int, k int64) (store.IncidentRow, bool) {
	var out store.IncidentRow
	found := false
	for _, r := range m.incidents.get(site) {
		if r.Number == number && stands(r.Line, k) {
			out, found = r, true
		}
	}
	return out, found
}

// dayAt is the civil day of an instant at a site.
func (m *model) dayAt(site string, t time.Time) civil.Day { return civil.DayOf(t, m.zone(site)) }
