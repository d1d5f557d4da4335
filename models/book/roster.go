package book

import (
	"cmp"
	"context"
	"slices"
	"strings"
	"time"

	"lodebook/models/store"
	"lodebook/models/table"
)

// DutyForm is one turn of the roster, as typed: From and To are instants, To excluded; Duty is a word of the site's
// own, or on-call; empty: duty.
type DutyForm struct{ ID, Person, From, To, Duty string }

// KeepDuty puts a turn of the roster on record.
func (b *Book) KeepDuty(ctx context.Context, actor Actor, site string, f DutyForm, fix Correction) (Receipt, error) {
	if err := actor.may(KeepRoster, site); err != nil {
		return Receipt{}, err
	}
	return b.write(ctx, actor, func(s *session) error {
		body, faults := s.check(site).dutyBody(f)
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		fix.fill(&body.common)
		return s.add(draft{id: f.ID, site: site, supersedes: fix.Supersedes, body: body})
	})
}

func (c *check) dutyBody(f DutyForm) (*dutyBody, []Fault) {
	person := strings.TrimSpace(f.Person)
	if s, faults := c.subject("person", "person:"+strings.TrimPrefix(person, "person:")); len(faults) == 0 {
		person = s.Code
	}
	body := &dutyBody{Person: person, Duty: cmp.Or(strings.TrimSpace(f.Duty), usualDuty)}
	var faults []Fault
	for _, x := range []struct {
		field, text string
		to          *string
	}{{"from", f.From, &body.From}, {"to", f.To, &body.To}} {
		if strings.TrimSpace(x.text) == "" {
			continue // which validate says
		}
		m, bad := c.readMoment(x.field, x.text)
		faults = append(faults, bad...)
		*x.to = m
	}
	return body, faults
}

var rosterColumns = []string{"person", "from", "to", "duty"}

func dutyRow(in *importing, row table.Row) (rowDraft, []table.Fault) {
	c := in.cells(row)
	f := DutyForm{Person: c.text("person"), From: c.moment("from"), To: c.moment("to"), Duty: c.text("duty")}
	return f.draft(in, c.rowFaults)
}

func (DutyForm) table() string { return "roster" }

func (f DutyForm) draft(in *importing, c rowFaults) (rowDraft, []table.Fault) {
	in.c.m = in.m
	body, faults := in.c.dutyBody(f)
	c.add(faults)
	var says content
	for _, x := range [][2]string{{"person", body.Person}, {"from", body.From}, {"to", body.To}, {"duty", body.Duty}} {
		says.note(x[0], x[1])
	}
	d := rowDraft{key: personAt(in.o.Site, body.Person), body: body, content: says.String()}
	return c.finish(in, d, false)
}

// DutyLine is a turn of the roster that stands on record.
type DutyLine struct {
	Entry, Person, Name string
	From, To            time.Time
	Duty                string
	Imported            bool
}

// DutyQuery asks for the turns that reach into a time: From is included, To is not. Person narrows it.
type DutyQuery struct {
	Site, Person string
	From, To     time.Time
}

// Roster lists turns as they begin, of whoever sees not the whole site only their own.
func (b *Book) Roster(ctx context.Context, actor Actor, q DutyQuery) ([]DutyLine, error) {
	action := SeeSite
	if q.Person == actor.Person && q.Person != "" {
		action = SeeOwn
	}
	if err := actor.may(action, q.Site); err != nil {
		return nil, err
	}
	out := []DutyLine{}
	return out, b.read(ctx, func(m *model) error {
		if m.site(q.Site) == nil {
			return &NotFound{"site", q.Site}
		}
		for _, r := range m.dutiesOf(q.Site) {
			if r.From.Before(q.To) && r.To.After(q.From) && (q.Person == "" || q.Person == r.Person) {
				out = append(out, DutyLine{r.ID, r.Person, m.subjectWords(q.Site, subjectBody{"person", r.Person}), r.From, r.To, r.Duty, r.Batch != ""})
			}
		}
		slices.SortStableFunc(out, func(a, b DutyLine) int {
			return cmp.Or(a.From.Compare(b.From), a.To.Compare(b.To), cmp.Compare(a.Person, b.Person))
		})
		return nil
	})
}

// dutiesOf are the turns of a site that stand, in order of recording.
func (m *model) dutiesOf(site string) []store.DutyRow {
	var out []store.DutyRow
	for _, r := range m.duties.get(site) {
		if r.Ended == 0 {
			out = append(out, r)
		}
	}
	return out
}
