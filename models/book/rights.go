package book

import (
	"cmp"
	"context"
	"slices"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/store"
	"lodebook/models/table"
)

// RightForm is a permission to enter a zone, as typed: From and To are days, both included, or instants, To
// excluded; without To it holds until it is withdrawn.
type RightForm struct {
	ID, Person, Zone, From, To string
	Reason, GrantedBy          string
}

// Grant puts on record that a person may enter a zone, as far as what guards it lets them.
func (b *Book) Grant(ctx context.Context, actor Actor, site string, f RightForm, fix Correction) (Receipt, error) {
	if err := actor.may(KeepRights, site); err != nil {
		return Receipt{}, err
	}
	return b.write(ctx, actor, func(s *session) error {
		c := s.check(site)
		body, faults := c.rightBody(f)
		if actor.Person != "" && actor.Person == body.Person {
			return &Denied{Action: KeepRights, Role: actor.Role, Why: "nobody grants a right to themselves; ask another safety officer"}
		}
		if len(faults) == 0 {
			faults = c.heldAlready(body, fix.Supersedes)
		}
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		fix.fill(&body.common)
		return s.add(draft{id: f.ID, site: site, supersedes: fix.Supersedes, body: body})
	})
}

func (c *check) rightBody(f RightForm) (*rightBody, []Fault) {
	person := strings.TrimSpace(f.Person)
	if s, faults := c.subject("person", "person:"+strings.TrimPrefix(person, "person:")); len(faults) == 0 {
		person = s.Code
	}
	body := &rightBody{
		Person: person, Zone: strings.TrimSpace(f.Zone), Because: veiled(strings.TrimSpace(f.Reason), person), GrantedBy: c.claim(f.GrantedBy),
	}
	var faults, more []Fault
	body.From, faults = c.readMoment("from", f.From)
	if strings.TrimSpace(f.To) != "" {
		body.To, more = c.readMoment("to", f.To)
		faults = append(faults, more...)
	}
	return body, faults
}

// heldAlready refuses what the person has been granted already; the entry that is superseded does not count.
func (c *check) heldAlready(b *rightBody, supersedes string) []Fault {
	from, to, faults := b.span(c.zone())
	if len(faults) > 0 {
		return nil // which validate says
	}
	for _, r := range c.m.rightsOf(c.site, b.Person) {
		apart := r.To != nil && !r.To.After(from) || to != nil && !to.After(r.From)
		if r.Zone == b.Zone && r.ID != supersedes && !apart {
			return []Fault{{"zone", b.Zone, "is open to this person already, from " + clockWords(r.From, c.zone()), "withdraw that right first, or correct it"}}
		}
	}
	return nil
}

// EndRight withdraws a right from a moment on: a day, with the end of which it ends, an instant, or
// nothing: now.
func (b *Book) EndRight(ctx context.Context, actor Actor, id, at, reason string) (Receipt, error) {
	return b.write(ctx, actor, func(s *session) error {
		old, ok, err := s.tx.EntryByID(id)
		if err != nil {
			return err
		}
		if !ok || old.Kind != kindRight {
			return &NotFound{"right", id}
		}
		if err := actor.may(KeepRights, old.Site); err != nil {
			return err
		}
		opened, err := s.open(old)
		if err != nil {
			return err
		}
		was, c := opened.(*rightBody), s.check(old.Site)
		now, faults := was.ended(c, at, reason)
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		Correction{Reason: "other", ReasonText: "It was withdrawn."}.fill(&now.common)
		return s.add(draft{site: old.Site, supersedes: id, body: now})
	})
}

// ended is the right with an end.
func (b *rightBody) ended(c *check, at, reason string) (*rightBody, []Fault) {
	now := &rightBody{
		Person: b.Person, Zone: b.Zone, From: b.From, Because: veiled(b.Because.Value, b.Because.person),
		GrantedBy: veiled(b.GrantedBy.Value, b.GrantedBy.person), Ended: veiled(strings.TrimSpace(reason), b.Person),
	}
	var faults []Fault
	if strings.TrimSpace(reason) == "" {
		faults = append(faults, Fault{"reason", "", "is empty", "say why the right is withdrawn"})
	}
	if strings.TrimSpace(at) == "" {
		now.To = moment{time: &c.now}.String()
	} else {
		to, more := c.readMoment("at", at)
		now.To, faults = to, append(faults, more...)
	}
	if len(faults) > 0 {
		return nil, faults
	}
	from, to, _ := now.span(c.zone())
	_, was, _ := b.span(c.zone())
	switch {
	case was != nil && to.After(*was):
		return nil, []Fault{{"at", at, "is after the right ends by itself", "a moment before " + clockWords(*was, c.zone())}}
	case !to.After(from):
		return nil, []Fault{{"at", now.To, "lies before the right begins", "a moment after " + clockWords(from, c.zone()) + "; take the entry back if it should never have been"}}
	}
	return now, nil
}

// rightsOf are the rights of a person at a site that stand: of those in one zone from one moment on, the last
// recorded.
func (m *model) rightsOf(site, person string) []store.RightRow {
	var out []store.RightRow
	for _, r := range m.rights.get(personAt(site, person)) {
		if r.Ended != 0 {
			continue
		}
		out = slices.DeleteFunc(out, func(o store.RightRow) bool { return o.Zone == r.Zone && o.From.Equal(r.From) })
		out = append(out, r)
	}
	return out
}

func personAt(site, person string) store.SubjectKey {
	return store.SubjectKey{Site: site, Kind: string(program.AsksPerson), Code: person}
}

// onStaff tells whether a person is posted to the site on the day.
func (m *model) onStaff(site, person string, on civil.Day) bool {
	return slices.ContainsFunc(m.stintsAt(site, string(program.AsksPerson), person), func(s store.StintRow) bool { return covers(s.First, s.Last, on) })
}

// begins is the instant of the moment, or the first one of its day.
func (m moment) begins(loc *time.Location) time.Time {
	if m.time != nil {
		return *m.time
	}
	return m.day.Midnight(loc).UTC()
}

// ends is the instant of the moment, or the first one after its day.
func (m moment) ends(loc *time.Location) time.Time {
	if m.time != nil {
		return *m.time
	}
	return (m.day + 1).Midnight(loc).UTC()
}

var rightColumns = []string{"person", "zone", "from", "to", "granted_by"}

func rightRow(in *importing, row table.Row) (rowDraft, []table.Fault) {
	c := in.cells(row)
	f := RightForm{Person: c.text("person"), Zone: c.text("zone"), From: c.moment("from"), To: c.moment("to"), GrantedBy: c.text("granted_by")}
	return f.draft(in, c.rowFaults)
}

func (RightForm) table() string { return "rights" }

func (f RightForm) draft(in *importing, c rowFaults) (rowDraft, []table.Fault) {
	in.c.m = in.m
	body, faults := in.c.rightBody(f)
	c.add(faults)
	var says content
	for _, x := range [][2]string{{"person", f.Person}, {"zone", f.Zone}, {"from", body.From}, {"to", body.To}, {"granted_by", f.GrantedBy}} {
		says.note(x[0], x[1])
	}
	d := rowDraft{key: personAt(in.o.Site, body.Person), body: body, content: says.String()}
	if len(c.faults) == 0 {
		d.undoes = in.rightUndoes(body, c.line)
	}
	return c.finish(in, d, false)
}

// rightUndoes compares the end of a right of the same person and zone that begins at the same moment.
func (in *importing) rightUndoes(b *rightBody, line int) *table.Fault {
	from, to, _ := b.span(in.c.zone())
	for _, r := range in.m.rightsOf(in.o.Site, b.Person) {
		if r.Zone != b.Zone || !r.From.Equal(from) || r.Batch != "" || r.To == nil || to != nil && !to.After(*r.To) {
			continue
		}
		return laterEdit(line, "to", b.To, "an end at "+clockWords(*r.To, in.c.zone()))
	}
	return nil
}

// RightLine is a right that stands on record; To is nil until its end is known.
type RightLine struct {
	Entry, Person, Name, Zone string
	From                      time.Time
	To                        *time.Time
	Imported                  bool
}

// Rights lists the rights on record of a person, of whom whoever sees not the whole site sees only their own, by
// zone and then as they begin.
func (b *Book) Rights(ctx context.Context, actor Actor, site, person string) ([]RightLine, error) {
	action := SeeSite
	if person == actor.Person && person != "" {
		action = SeeOwn
	}
	if err := actor.may(action, site); err != nil {
		return nil, err
	}
	out := []RightLine{}
	return out, b.read(ctx, func(m *model) error {
		if m.site(site) == nil {
			return &NotFound{"site", site}
		}
		if _, ok := m.person(person); !ok {
			return &NotFound{"person", person}
		}
		for _, r := range m.rightsOf(site, person) {
			out = append(out, RightLine{r.ID, person, m.subjectWords(site, subjectBody{"person", person}), r.Zone, r.From, r.To, r.Batch != ""})
		}
		slices.SortStableFunc(out, func(a, b RightLine) int {
			return cmp.Or(cmp.Compare(a.Zone, b.Zone), a.From.Compare(b.From))
		})
		return nil
	})
}
