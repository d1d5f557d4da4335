package book

import (
	"strings"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/store"
)

const kindRecord = "record"

// subjectBody names a subject: a kind of program.AllAsks and a code.
type subjectBody struct {
	Kind string `json:"kind"`
	Code string `json:"code"`
}

// key is the subject's key in the store: a person belongs to the book, every other to its site.
func (s subjectBody) key(site string) store.SubjectKey {
	if s.Kind == string(program.AsksPerson) {
		return store.SubjectKey{Kind: s.Kind, Code: s.Code}
	}
	return store.SubjectKey{Site: site, Kind: s.Kind, Code: s.Code}
}

// person is the code of the person who is the subject, or empty.
func (s subjectBody) person() string {
	if s.Kind == string(program.AsksPerson) {
		return s.Code
	}
	return ""
}

// recordBody is something done. Values are those of a filled-in sheet; its result was fixed when
// it was recorded.
type recordBody struct {
	common
	Record  string               `json:"record"` // kind/code
	Subject subjectBody          `json:"subject"`
	On      string               `json:"on"`     // a day, or an instant in RFC 3339
	Result  string               `json:"result"` // pass or fail
	Remark  bool                 `json:"remark,omitempty"`
	Until   *civil.Day           `json:"until,omitempty"`
	Limit   []string             `json:"limit,omitempty"`
	By      Veiled               `json:"by,omitzero"`
	Note    Veiled               `json:"note,omitzero"`
	Version int                  `json:"program_version,omitempty"` // of the sheet that was filled in
	Values  map[string]factValue `json:"values,omitempty"`
	Reasons []string             `json:"reasons,omitempty"` // why the sheet failed or has a remark
	Session string               `json:"session,omitempty"` // what was recorded in one form, or the plan it answers
	Takers  []string             `json:"takers,omitempty"`  // of a crew's drill: codes of those who took part
}

// The results of a record.
const (
	Pass = "pass"
	Fail = "fail"
)

func (b *recordBody) kind() string { return kindRecord }
func (b *recordBody) version() int { return 1 }

func (b *recordBody) validate(c *check) []Fault {
	faults := c.checkWhat("record", b.Record)
	faults = append(faults, c.checkSubject("subject", b.Subject)...)
	when, f := c.moment("on", b.On)
	faults = append(faults, f...)
	if b.Result != Pass && b.Result != Fail {
		faults = append(faults, Fault{"result", b.Result, "is no result", "pass or fail"})
	}
	if b.Until != nil && len(f) == 0 && *b.Until < when.day {
		faults = append(faults, Fault{"until", b.Until.String(), "lies before the day of the record, " + when.day.String(), "a day on or after it"})
	}
	return append(faults, c.checkZones("limit", b.Limit)...)
}

func (b *recordBody) apply(at applied) []any {
	m := parseMoment(b.On, at.zone(at.site))
	return []any{store.RecordRow{
		Line: at.line, Order: at.line.Seq, Site: at.site, Subject: b.Subject.key(at.site), What: b.Record,
		Day: m.day, Time: m.time, Passed: b.Result == Pass, Remark: b.Remark, Until: b.Until,
		Limit: strings.Join(b.Limit, " "), Session: b.Session,
	}}
}
