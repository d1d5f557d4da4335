package book

import (
	"lodebook/models/civil"
	"lodebook/models/store"
)

const (
	kindRemedy      = "remedy"
	kindRemedyDone  = "remedy-done"
	kindRemedyCheck = "remedy-check"
)

// remedyBody is the corrective action for an incident, a failed record or a gap (an item and its subject): just
// one of the three. Its number is the site's, and stays when the entry is corrected. Whether it needs a
// second person was fixed by the severity when it was made.
type remedyBody struct {
	common
	Number   int          `json:"number"`
	Incident int          `json:"incident,omitempty"` // number
	Record   string       `json:"record,omitempty"`   // identifier of the failed record's entry
	Item     string       `json:"item,omitempty"`
	Subject  *subjectBody `json:"subject,omitempty"`
	Severity string       `json:"severity"`
	Owner    string       `json:"owner,omitempty"`   // code of a person
	Account  string       `json:"account,omitempty"` // identifier of an account that is linked to no person
	Made     civil.Day    `json:"made"`
	Due      civil.Day    `json:"due"`
	Confirm  bool         `json:"confirm,omitempty"`
	What     Veiled       `json:"what,omitzero"`
	Because  Veiled       `json:"because,omitzero"` // why the due day is another one than the severity's
}

func (b *remedyBody) kind() string { return kindRemedy }
func (b *remedyBody) version() int { return 1 }

func (b *remedyBody) validate(c *check) []Fault {
	faults := append(b.checkTarget(c), c.checkSeverity("severity", b.Severity)...)
	if b.Owner != "" {
		faults = append(faults, c.checkSubject("owner", subjectBody{"person", b.Owner})...)
	} else if _, ok := c.m.account(b.Account); !ok {
		faults = append(faults, Fault{"owner", "", "names nobody", "the code of a person, or the name of an account"})
	}
	if b.What.IsZero() {
		faults = append(faults, Fault{"what", "", "is empty", "say what is to be done"})
	}
	if b.Due < b.Made {
		faults = append(faults, Fault{"due", b.Due.String(), "lies before the day on which it is asked for, " + b.Made.String(), "a day on or after it"})
	}
	if s, ok := c.m.severityOn(c.site, b.Severity, b.Made); ok && b.Due != b.Made.Add(s.Due) && b.Because.IsZero() {
		faults = append(faults, Fault{"because", "", "is empty, and the due day is not the one that the severity gives, " + b.Made.Add(s.Due).String(), "say why, or leave the due day empty"})
	}
	if old, ok := c.old.(*remedyBody); ok && old.Number != b.Number {
		faults = append(faults, Fault{"number", summaryNumber(b.Number), "is another remedy than the one that is changed", "change the remedy from its own page"})
	}
	return faults
}

// checkTarget checks that the remedy is for one thing that is on record. What it was for may be gone by the time
// that it is changed.
func (b *remedyBody) checkTarget(c *check) []Fault {
	given := 0
	for _, x := range []bool{b.Incident != 0, b.Record != "", b.Item != "" || b.Subject != nil} {
		if x {
			given++
		}
	}
	if given != 1 {
		return []Fault{{"for", "", "a remedy is for one thing", "an incident, a failed record, or an item and its subject"}}
	}
	switch {
	case c.old != nil || b.Record != "": // a record was looked up by the command
		return nil
	case b.Incident != 0:
		if _, ok := c.m.incident(c.site, b.Incident, always64); !ok {
			return []Fault{{"incident", summaryNumber(b.Incident), "is the number of no incident that stands", "the number of one"}}
		}
		return nil
	case b.Subject == nil:
		return []Fault{{"subject", "", "is empty", "the subject of whom the item is asked"}}
	}
	return append(c.checkItem("item", b.Item), c.checkSubject("subject", *b.Subject)...)
}

func (b *remedyBody) apply(at applied) []any {
	r := store.RemedyRow{
		Line: at.line, Site: at.site, Number: b.Number, Incident: b.Incident, Record: b.Record, Item: b.Item, Severity: b.Severity,
		Owner: b.Owner, Account: b.Account, Made: b.Made, Due: b.Due, Confirm: b.Confirm,
	}
	if b.Subject != nil {
		r.Subject = b.Subject.key(at.site)
	}
	return []any{r}
}

// remedyDoneBody says that what a remedy asks for is done.
type remedyDoneBody struct {
	common
	Remedy int       `json:"remedy"` // number
	Day    civil.Day `json:"day"`
	By     Veiled    `json:"by,omitzero"`
	DoneBy string    `json:"done_by,omitempty"` // code of the person whom By names
	Note   Veiled    `json:"note,omitzero"`
}

func (b *remedyDoneBody) kind() string { return kindRemedyDone }
func (b *remedyDoneBody) version() int { return 1 }

func (b *remedyDoneBody) validate(c *check) []Fault {
	row, ok := c.m.remedy(c.site, b.Remedy, always64)
	if !ok {
		return []Fault{{"remedy", summaryNumber(b.Remedy), "is the number of no remedy that stands", "the number of one"}}
	}
	state := c.m.remedyState(row, civil.LastDay, always64)
	if state.done != nil && !c.supersedesSeq(state.done.Seq) {
		return []Fault{{"remedy", summaryNumber(b.Remedy), "is done already", "a remedy that is open"}}
	}
	if b.Day > c.today() {
		return []Fault{{"day", b.Day.String(), "lies in the future", "a day up to today, " + c.today().String()}}
	}
	if state.refused != nil && b.Day < state.refused.Day {
		return []Fault{{"day", b.Day.String(), "lies before the day on which it was sent back, " + state.refused.Day.String(), "the day on which it was done again"}}
	}
	return nil
}

func (b *remedyDoneBody) apply(at applied) []any {
	return []any{store.RemedyStepRow{Line: at.line, Site: at.site, Remedy: b.Remedy, Step: stepDone, Day: b.Day, Account: at.actor, DoneBy: b.DoneBy}}
}

// remedyCheckBody is the second person's word on what was done: confirmed, or refused with a reason, which
// opens the remedy again.
type remedyCheckBody struct {
	common
	Remedy  int       `json:"remedy"` // number
	Done    string    `json:"done"`   // identifier of the entry that says it is done
	Refused bool      `json:"refused,omitempty"`
	Day     civil.Day `json:"day"`
	Note    Veiled    `json:"note,omitzero"`
}

func (b *remedyCheckBody) kind() string { return kindRemedyCheck }
func (b *remedyCheckBody) version() int { return 1 }

func (b *remedyCheckBody) validate(c *check) []Fault {
	row, ok := c.m.remedy(c.site, b.Remedy, always64)
	if !ok {
		return []Fault{{"remedy", summaryNumber(b.Remedy), "is the number of no remedy that stands", "the number of one"}}
	}
	state := c.m.remedyState(row, civil.LastDay, always64)
	switch {
	case !row.Confirm:
		return []Fault{{"remedy", summaryNumber(b.Remedy), "needs no confirmation", "a remedy of a graver severity"}}
	case state.closed:
		return []Fault{{"remedy", summaryNumber(b.Remedy), "was confirmed already", ""}}
	case state.done == nil || state.done.ID != b.Done:
		return []Fault{{"remedy", summaryNumber(b.Remedy), "is not done, or was done again since", "open its page again and look at what stands there now"}}
	case b.Refused && b.Note.IsZero():
		return []Fault{{"note", "", "is empty", "say what is still to be done"}}
	}
	return nil
}

func (b *remedyCheckBody) apply(at applied) []any {
	step := stepConfirmed
	if b.Refused {
		step = stepRefused
	}
	return []any{store.RemedyStepRow{Line: at.line, Site: at.site, Remedy: b.Remedy, Step: step, Day: b.Day, Account: at.actor}}
}

// The steps of a remedy, as rows have them.
const (
	stepDone      = "done"
	stepConfirmed = "confirmed"
	stepRefused   = "refused"
)

// remedy gives the last standing line of a remedy, as known at k.
func (m *model) remedy(site string, number int, k int64) (store.RemedyRow, bool) {
	var out store.RemedyRow
	found := false
	for _, r := range m.remedies.get(site) {
		if r.Number == number && stands(r.Line, k) {
			out, found = r, true
		}
	}
	return out, found
}

// remedyState is how far a remedy is.
type remedyState struct {
	done    *store.RemedyStepRow // what stands of it as done
	refused *store.RemedyStepRow // the last time that it was sent back
	check   *store.RemedyStepRow // what confirmed it
	closed  bool                 // done, and confirmed where that is needed
}

// remedyState follows the steps up to a day, as known at k. A confirmation of what was withdrawn since
// confirms nothing.
func (m *model) remedyState(r store.RemedyRow, on civil.Day, k int64) remedyState {
	var s remedyState
	for i, step := range m.steps.get(siteNumber{r.Site, r.Number}) {
		if !stands(step.Line, k) || step.Day > on {
			continue
		}
		row := &m.steps.get(siteNumber{r.Site, r.Number})[i]
		switch {
		case step.Step == stepDone:
			s.done, s.check = row, nil
		case s.done == nil:
		case step.Step == stepRefused:
			s.done, s.refused, s.check = nil, row, nil
		default:
			s.check = row
		}
	}
	s.closed = s.done != nil && (!r.Confirm || s.check != nil)
	return s
}

// siteNumber names an incident or a remedy.
type siteNumber struct {
	site   string
	number int
}
