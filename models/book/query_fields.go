package book

import (
	"cmp"
	"strconv"
	"strings"

	"lodebook/models/program"
	"lodebook/models/store"
)

// fieldList gathers labelled values, leaving out what is empty.
type fieldList struct{ fields []Field }

func (l *fieldList) add(label, value string) {
	if value != "" {
		l.fields = append(l.fields, Field{Label: label, Value: value})
	}
}

func (l *fieldList) veil(label string, v Veiled) {
	if !v.IsZero() {
		l.fields = append(l.fields, Field{Label: label, Value: v.String(), Erased: v.Erased})
	}
}

func (l *fieldList) facts(facts map[string]factValue, label func(string) string) {
	for _, k := range sortedKeys(facts) {
		f := facts[k]
		switch f.Type {
		case noFact:
			l.add(label(k), "taken off the record")
		case string(program.FactText):
			l.veil(label(k), f.Text)
		default:
			l.add(label(k), f.Value)
		}
	}
}

func (l *fieldList) stint(s *stintBody, first, last string) {
	if s != nil {
		l.add(first, dayOr(s.First, "always"))
		l.add(last, dayOr(s.Last, "not yet"))
	}
}

// fields gives the body's content as labelled values.
func (m *model) fields(e store.Entry, bd body) []Field {
	l := &fieldList{}
	same := func(s string) string { return upperFirst(strings.ReplaceAll(s, "_", " ")) }
	switch b := bd.(type) {
	case *recordBody:
		m.recordFields(l, e.Site, b)
	case *personBody:
		l.add("Code", b.Code)
		l.veil("Name", b.Name)
		l.veil("E-mail", b.Email)
		l.veil("Badge", b.Badge)
		l.stint(b.Stint, "Joined", "Left")
		l.add("Facts hold from", dayOr(b.From, ""))
		l.facts(b.Facts, same)
	case *fixtureBody:
		l.add("Code", b.Code)
		l.add("Kind", b.Kind)
		l.add("Name", b.Name)
		l.stint(b.Stint, "Since", "Until")
		l.add("Facts hold from", dayOr(b.From, ""))
		l.facts(b.Facts, same)
	case *eventBody:
		l.add("Event", m.eventWords(e.Site, b.Event))
		l.add("Subject", m.subjectWords(e.Site, b.Subject))
		l.add("Happened", m.onWords(e.Site, b.On))
		l.veil("Note", b.Note)
	case *excusalBody:
		m.excusalFields(l, e.Site, b)
	case *pauseBody:
		l.add("Subject", m.subjectWords(e.Site, b.Subject))
		l.add("From", b.From.String())
		l.add("To", dayOr(b.To, "no end yet"))
		l.veil("Why", b.Because)
	case *visitBody:
		l.veil("Visitor", b.Visitor)
		l.veil("Employer", b.Employer)
		l.veil("Purpose", b.Purpose)
		l.add("Zones", strings.Join(b.Zones, ", "))
		l.add("From", m.onWords(e.Site, b.From))
		l.add("To", m.onWords(e.Site, b.To))
		if b.Escort != "" {
			l.add("Escort", m.subjectWords(e.Site, subjectBody{"person", b.Escort}))
		}
		l.veil("Tools", b.Tools)
	case *visitStepBody:
		l.add("Visit", b.Announced)
		l.add("At", m.onWords(e.Site, b.At))
		if b.Screener != "" {
			l.add("Screened by", m.subjectWords(e.Site, subjectBody{"person", b.Screener}))
		}
		l.add("Outcome", strings.ReplaceAll(string(b.Outcome), "-", " "))
		l.veil("Tools", b.Tools)
		l.veil("Note", b.Note)
	case *markBody:
		l.add("Passage at", m.onWords(e.Site, b.At))
		l.add("Door", m.subjectWords(e.Site, subjectBody{"fixture", b.Door}))
		l.veil("Badge", b.Badge)
		l.veil("Explained", b.Note)
	case *rightBody:
		l.add("Person", m.subjectWords(e.Site, subjectBody{"person", b.Person}))
		l.add("Zone", b.Zone)
		l.add("From", m.onWords(e.Site, b.From))
		l.add("To", cmp.Or(m.onWords(e.Site, b.To), "no end yet"))
		l.veil("Why", b.Because)
		l.veil("Why it was withdrawn", b.Ended)
		l.veil("Granted by", b.GrantedBy)
	case *dutyBody:
		l.add("Person", m.subjectWords(e.Site, subjectBody{"person", b.Person}))
		l.add("From", m.onWords(e.Site, b.From))
		l.add("To", m.onWords(e.Site, b.To))
		l.add("Duty", b.Duty)
	case *stockBody:
		b.addFields(l, m, e.Site)
	case *incidentBody, *incidentReportBody, *remedyBody, *remedyDoneBody, *remedyCheckBody, *outageBody, *returnBody:
		m.addRemedyFields(l, e.Site, b)
	case *planBody:
		l.add("What", m.whatWords(e.Site, b.Record))
		if b.Crew != "" {
			l.add("Crew", m.subjectWords(e.Site, subjectBody{string(program.AsksCrew), b.Crew}))
		}
		l.add("Day", strings.TrimSpace(b.Day.String()+" "+b.At))
		l.veil("Note", b.Note)
	case *programBody:
		l.add("Version", summaryNumber(b.Number))
		l.add("In force from", b.InForceFrom.String())
		l.veil("Why it reaches back", b.Why)
	case *batchBody:
		l.add("Table", b.Table)
		l.veil("File", b.File)
		l.add("Rows written", summaryNumber(b.Rows))
	case *withdrawalBody:
		l.add("Import taken back", b.WholeBatch)
	case *erasureBody:
		l.add("Person", b.Person)
	case *accountBody:
		l.veil("Name", b.Name)
		l.add("Role", b.Role.Words())
		l.add("Sites", strings.Join(b.Sites, ", "))
		l.add("Person", b.Person)
		l.add("Until", dayOr(b.Until, ""))
		if b.Disabled {
			l.add("Disabled", "yes")
		}
	}
	return l.fields
}

func summaryNumber(n int) string { return strconv.Itoa(n) }

func (m *model) recordFields(l *fieldList, site string, b *recordBody) {
	l.add("What", m.whatWords(site, b.Record))
	l.add("Subject", m.subjectWords(site, b.Subject))
	l.add("Done", m.onWords(site, b.On))
	result := map[string]string{Pass: "passed", Fail: "failed"}[b.Result]
	if b.Remark {
		result = "passed, with a remark"
	}
	l.add("Result", result)
	l.add("Because", strings.Join(b.Reasons, " "))
	l.add("Good until", dayOr(b.Until, ""))
	l.add("Only for zones", strings.Join(b.Limit, ", "))
	l.veil("By", b.By)
	l.veil("Note", b.Note)
	label := func(code string) string { return code }
	if sm := m.site(site); sm != nil {
		if sh, ok := sm.newest().program.Sheet(sheetCode(b.Record)); ok {
			label = func(code string) string {
				for _, f := range sh.Fields {
					if f.Code == code {
						return cmp.Or(f.Label, code)
					}
				}
				return code
			}
		}
	}
	l.facts(b.Values, label)
	if len(b.Takers) > 0 {
		names := make([]string, len(b.Takers))
		for i, code := range b.Takers {
			names[i] = m.subjectWords(site, subjectBody{"person", code})
		}
		l.add("Took part", strings.Join(names, ", "))
	}
}

func (m *model) excusalFields(l *fieldList, site string, b *excusalBody) {
	l.add("Item", b.Item)
	l.add("Subject", m.subjectWords(site, b.Subject))
	l.add("From", b.From.String())
	l.add("To", b.To.String())
	l.veil("Why", b.Because)
	l.veil("Approved by", b.ApprovedBy)
	switch {
	case b.Opens && b.Confirmed:
		l.add("Opens zones", "yes")
	case b.Opens:
		l.add("Opens zones", "asked for; waits for a safety officer")
	}
}
