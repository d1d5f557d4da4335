package book

import (
	"context"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"time"
)

// IncidentForm is an incident or near miss, as typed.
type IncidentForm struct {
	ID        string
	Kind      string
	Zone      string
	At        string // an instant, or a date and a time of day by the site's clocks
	Severity  string
	What      string
	Who       string
	Action    string
	By        string
	People    []string // codes
	Anonymous bool     // leave no trace of who writes this
	Sure      bool     // what looks like a number of a patient is none
}

// anonymous writes what is reported without a name: its entries tell of no account.
func anonymous() Actor { return Actor{Role: Anonymous} }

// ReportIncident puts an incident on record. Everybody who signs in may.
func (b *Book) ReportIncident(ctx context.Context, actor Actor, site string, f IncidentForm) (Receipt, error) {
	if err := actor.may(ReportIncident, site); err != nil {
		return Receipt{}, err
	}
	writer := actor
	if f.Anonymous {
		writer = anonymous()
	}
	return b.write(ctx, writer, func(s *session) error {
		c := s.check(site)
		body, err := c.incidentBody(f)
		if err != nil {
			return err
		}
		if body.Number, err = s.numberOf(f.ID, kindIncident, s.m.nextIncident(site)); err != nil {
			return err
		}
		return s.add(draft{id: f.ID, site: site, body: body})
	})
}

// CorrectIncident takes the place of what was said of an incident; its number and whether it was reported
// without a name stay.
func (b *Book) CorrectIncident(ctx context.Context, actor Actor, site string, number int, f IncidentForm, fix Correction) (Receipt, error) {
	if err := actor.may(SeeIncidents, site); err != nil {
		return Receipt{}, err
	}
	return b.write(ctx, actor, func(s *session) error {
		row, ok := s.m.incident(site, number, always64)
		if !ok {
			return &NotFound{"incident", strconv.Itoa(number)}
		}
		body, err := s.check(site).incidentBody(f)
		if err != nil {
			return err
		}
		body.Number, body.Anonymous = number, row.Anonymous
		if fix.Supersedes == "" {
			fix.Supersedes = row.ID
		}
		fix.fill(&body.common)
		return s.add(draft{id: f.ID, site: site, supersedes: fix.Supersedes, body: body})
	})
}

func (m *model) nextIncident(site string) int {
	n := 0
	for _, r := range m.incidents.get(site) {
		n = max(n, r.Number)
	}
	return n + 1
}

// numberOf is the number of a new entry: a form that is sent twice gets the one that it got first.
func (s *session) numberOf(id, kind string, next int) (int, error) {
	if id == "" {
		return next, nil
	}
	old, ok, err := s.tx.EntryByID(id)
	if err != nil || !ok || old.Kind != kind {
		return next, err
	}
	was, err := s.open(old)
	if err != nil {
		return next, err
	}
	switch b := was.(type) {
	case *incidentBody:
		return b.Number, nil
	case *remedyBody:
		return b.Number, nil
	}
	return next, nil
}

func (c *check) incidentBody(f IncidentForm) (*incidentBody, error) {
	if c.m.site(c.site) == nil {
		return nil, &NotFound{"site", c.site}
	}
	body := &incidentBody{
		Kind: strings.TrimSpace(f.Kind), Zone: strings.TrimSpace(f.Zone), Severity: strings.TrimSpace(f.Severity), Anonymous: f.Anonymous,
		What: veiled(strings.TrimSpace(f.What), ""), Who: veiled(strings.TrimSpace(f.Who), ""), Action: veiled(strings.TrimSpace(f.Action), ""), By: c.claim(f.By),
	}
	for _, code := range f.People {
		if code = strings.TrimPrefix(strings.TrimSpace(code), "person:"); code != "" && !slices.Contains(body.People, code) {
			body.People = append(body.People, code)
		}
	}
	slices.Sort(body.People)
	var faults []Fault
	body.At, faults = c.readMoment("at", f.At)
	if !f.Sure {
		faults = append(faults, patientLike(f, c.now.Year())...)
	}
	if len(faults) > 0 {
		faults = append(faults, besides(body.validate(c), faults)...)
		return nil, &Invalid{faults}
	}
	return body, nil
}

// besides are faults of fields that have none yet, so that all that is wrong is said at once.
func besides(more, faults []Fault) []Fault {
	return slices.DeleteFunc(more, func(f Fault) bool {
		return slices.ContainsFunc(faults, func(o Fault) bool { return o.Field == f.Field })
	})
}

var (
	longNumber = regexp.MustCompile(`\b\d{6,14}\b|\b\d{3}[ -]\d{3}[ -]\d{3,4}\b`)
	writtenDay = regexp.MustCompile(`\b\d{1,2}[./-]\d{1,2}[./-](\d{4}|\d{2})\b|\b(\d{4})-\d{2}-\d{2}\b`)
)

// patientLike finds what looks like a date of birth or the number of a record in the texts of an incident. It is
// a warning: whoever has looked may keep the text.
func patientLike(f IncidentForm, year int) []Fault {
	var faults []Fault
	for _, x := range []struct{ field, text string }{{"what", f.What}, {"who", f.Who}, {"action", f.Action}} {
		found := longNumber.FindString(x.text)
		for _, m := range writtenDay.FindAllStringSubmatch(x.text, -1) {
			if y := m[1] + m[2]; y != strconv.Itoa(year) && y != strconv.Itoa(year)[2:] {
				found = m[0]
			}
		}
		if found != "" {
			faults = append(faults, Fault{x.field, found, "looks like a date of birth or the number of a record", "take it out, or tick that you have looked and that it tells of no patient"})
		}
	}
	return faults
}

// IncidentReportForm says that an outside body was told, as typed.
type IncidentReportForm struct{ ID, Report, Day, Reference string }

// MarkReported puts on record that an outside body was told of an incident.
func (b *Book) MarkReported(ctx context.Context, actor Actor, site string, incident int, f IncidentReportForm) (Receipt, error) {
	if err := actor.may(SeeIncidents, site); err != nil {
		return Receipt{}, err
	}
	return b.write(ctx, actor, func(s *session) error {
		day, faults := needDay("day", f.Day)
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		body := &incidentReportBody{Incident: incident, Report: strings.TrimSpace(f.Report), Day: day, Reference: veiled(strings.TrimSpace(f.Reference), "")}
		return s.add(draft{id: f.ID, site: site, body: body})
	})
}

// nowAt is the moment as a form of the site is filled in with.
func (m *model) nowAt(site string, now time.Time) string {
	return clockWords(now.Truncate(time.Minute), m.zone(site))
}
