package book

import (
	"cmp"
	"fmt"
	"slices"
	"strings"

	"lodebook/models/program"
	"lodebook/models/store"
)

// Words for what is said of incidents, remedies and what is out of service.

// called gives what a program calls a code, the newest version that has it first.
func (s *siteModel) called(code string, name func(*program.Program) (string, bool)) string {
	if s == nil {
		return code
	}
	for _, v := range slices.Backward(s.versions) {
		if n, ok := name(v.program); ok {
			return cmp.Or(n, code)
		}
	}
	return code
}

func (m *model) incidentKindWords(site, code string) string {
	return m.site(site).called(code, func(p *program.Program) (string, bool) {
		k, ok := p.Incident(code)
		if !ok {
			return "", false
		}
		return k.Name, true
	})
}

func (m *model) severityWords(site, code string) string {
	return m.site(site).called(code, func(p *program.Program) (string, bool) {
		s, ok := p.Severity(code)
		if !ok {
			return "", false
		}
		return s.Name, true
	})
}

func (m *model) reportTo(site, code string) string {
	return m.site(site).called(code, func(p *program.Program) (string, bool) {
		for _, r := range p.Reports {
			if r.Code == code {
				return r.To, true
			}
		}
		return "", false
	})
}

// ownerWords names who owns a remedy: a person, or an account.
func (m *model) ownerWords(site, person, account string) string {
	if person != "" {
		return m.subjectWords(site, subjectBody{"person", person})
	}
	if a, ok := m.account(account); ok {
		return cmp.Or(a.Name, "an account")
	}
	return "nobody"
}

// remedySummary says in one line what an entry says.
func (m *model) remedySummary(site string, bd body) string {
	switch b := bd.(type) {
	case *incidentBody:
		return fmt.Sprintf("Incident %d, %s, %s", b.Number, m.incidentKindWords(site, b.Kind), m.onWords(site, b.At))
	case *incidentReportBody:
		return fmt.Sprintf("Incident %d was reported to %s on %s", b.Incident, m.reportTo(site, b.Report), b.Day)
	case *remedyBody:
		return fmt.Sprintf("Remedy %d for %s, %s, due %s", b.Number, m.ownerWords(site, b.Owner, b.Account), m.severityWords(site, b.Severity), b.Due)
	case *remedyDoneBody:
		return fmt.Sprintf("Remedy %d is done, %s", b.Remedy, b.Day)
	case *remedyCheckBody:
		if b.Refused {
			return fmt.Sprintf("Remedy %d was sent back, %s", b.Remedy, b.Day)
		}
		return fmt.Sprintf("Remedy %d is confirmed, %s", b.Remedy, b.Day)
	case *outageBody:
		return fmt.Sprintf("%s is out of service from %s", m.subjectWords(site, b.Subject), m.onWords(site, b.From))
	case *returnBody:
		return m.subjectWords(site, b.Subject) + " is back in service"
	}
	return ""
}

// addRemedyFields adds the labelled values of such an entry.
func (m *model) addRemedyFields(l *fieldList, site string, bd body) {
	switch b := bd.(type) {
	case *incidentBody:
		m.incidentFields(l, site, b)
	case *incidentReportBody:
		l.add("Incident", summaryNumber(b.Incident))
		l.add("Told", m.reportTo(site, b.Report))
		l.add("On", b.Day.String())
		l.veil("Reference", b.Reference)
	case *remedyBody:
		m.remedyFields(l, site, b)
	case *remedyDoneBody:
		l.add("Remedy", summaryNumber(b.Remedy))
		l.add("Done", b.Day.String())
		l.veil("By", b.By)
		l.veil("Note", b.Note)
	case *remedyCheckBody:
		l.add("Remedy", summaryNumber(b.Remedy))
		l.add("Word", map[bool]string{true: "sent back", false: "confirmed"}[b.Refused])
		l.add("On", b.Day.String())
		l.veil("Note", b.Note)
	case *outageBody:
		l.add("Subject", m.subjectWords(site, b.Subject))
		l.add("From", m.onWords(site, b.From))
		l.veil("Why", b.Because)
		if b.Record != "" {
			l.add("Because of", "a failed record of "+m.subjectWords(site, subjectBody{"fixture", b.Cause}))
		}
		if b.Another {
			l.add("Signed back", "by somebody else than who recorded the failure")
		}
	case *returnBody:
		l.add("Subject", m.subjectWords(site, b.Subject))
		l.veil("Note", b.Note)
	}
}

func (m *model) incidentFields(l *fieldList, site string, b *incidentBody) {
	l.add("Number", summaryNumber(b.Number))
	l.add("Kind", m.incidentKindWords(site, b.Kind))
	l.add("Zone", b.Zone)
	l.add("Happened", m.onWords(site, b.At))
	l.add("Severity", m.severityWords(site, b.Severity))
	l.veil("What happened", b.What)
	l.veil("Who was involved", b.Who)
	l.add("On record as involved", strings.Join(m.peopleWords(site, b.People), ", "))
	l.veil("Done at once", b.Action)
	l.veil("Told by", b.By)
	if b.Anonymous {
		l.add("Reported", "without a name")
	}
}

func (m *model) peopleWords(site string, codes []string) []string {
	out := make([]string, len(codes))
	for i, code := range codes {
		out[i] = m.subjectWords(site, subjectBody{"person", code})
	}
	return out
}

func (m *model) remedyFields(l *fieldList, site string, b *remedyBody) {
	l.add("Number", summaryNumber(b.Number))
	row := store.RemedyRow{Site: site, Incident: b.Incident, Record: b.Record, Item: b.Item}
	if b.Subject != nil {
		row.Subject = b.Subject.key(site)
	}
	l.add("For", m.targetWords(row))
	l.veil("What is to be done", b.What)
	l.add("Owner", m.ownerWords(site, b.Owner, b.Account))
	l.add("Severity", m.severityWords(site, b.Severity))
	l.add("Due", b.Due.String())
	l.veil("Why that day", b.Because)
	if b.Confirm {
		l.add("Confirmed", "by a second person")
	}
}

// targetWords says what a remedy is for.
func (m *model) targetWords(r store.RemedyRow) string {
	switch {
	case r.Incident != 0:
		return fmt.Sprintf("Incident %d", r.Incident)
	case r.Item != "":
		return m.inWords(r.Site).itemTitle(r.Item) + ", " + m.subjectWords(r.Site, subjectBody{r.Subject.Kind, r.Subject.Code})
	default:
		return "A failed record"
	}
}

func (v *siteOn) itemTitle(code string) string {
	if i, ok := v.Program.Item(code); ok {
		return cmp.Or(i.Title, code)
	}
	return code
}
