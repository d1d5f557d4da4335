package book

import (
	"cmp"
	"context"
	"fmt"
	"slices"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/reach"
	"lodebook/models/standing"
	"lodebook/models/store"
)

// ReachQuery asks who is entitled to a restricted zone at a moment: a nil At is now, a nil KnownAt all that is
// recorded. Person (a code) narrows it.
type ReachQuery struct {
	Site, Zone  string
	At, KnownAt *time.Time
	Person      string
}

// Reached is the answer.
type Reached struct {
	Site    SiteView
	Zone    program.Zone
	At      time.Time
	KnownAt *time.Time
	Rows    []ReachRow // by person's code
}

// ReachRow is one person and the zone: whether they are entitled, until when, and what stands against it.
type ReachRow struct {
	Person, Name, Note string
	Zone               string
	Entitled           bool
	HasRight           bool
	Until              *time.Time    // the first instant after it at which the entitlement ends; nil: nothing known ends it
	Reasons            []ReachReason // why not
	Ends               []ReachReason // what ends it at Until
	Restore            []string      // what would restore it, each step once
}

// ReachReason is one thing that stands against an entitlement: an item with its standing, or without one no-right,
// right-ended, not-on-staff, paused or no-guard. Title is what answers the item.
type ReachReason struct {
	Item, Title string
	Standing    string
	Due         *civil.Day
}

// ReachJSON is a row as commands and the API give it.
type ReachJSON struct {
	Person   string            `json:"person"`
	Zone     string            `json:"zone"`
	Entitled bool              `json:"entitled"`
	Until    *time.Time        `json:"until"`
	Reasons  []ReachReasonJSON `json:"reasons"`
}

// ReachReasonJSON is a reason as commands and the API give it; a reason without an item has null in its place.
type ReachReasonJSON struct {
	Item     *string    `json:"item"`
	Standing string     `json:"standing"`
	Due      *civil.Day `json:"due"`
}

// JSON gives the row as commands and the API do.
func (r ReachRow) JSON() ReachJSON {
	return ReachJSON{Person: r.Person, Zone: r.Zone, Entitled: r.Entitled, Until: r.Until, Reasons: reasonsJSON(r.Reasons)}
}

func reasonsJSON(reasons []ReachReason) []ReachReasonJSON {
	out := make([]ReachReasonJSON, len(reasons))
	for i, x := range reasons {
		out[i] = ReachReasonJSON{Standing: x.Standing, Due: x.Due}
		if x.Item != "" {
			out[i].Item = &reasons[i].Item
		}
	}
	return out
}

// String is a reason in a cell of a table: the item and its standing, or the standing alone.
func (r ReachReason) String() string { return strings.TrimSpace(r.Item + " " + r.Standing) }

// Reach tells who is entitled to a zone at a moment: everybody on staff that day or with a right, or of an actor who
// sees only their own, only they.
func (b *Book) Reach(ctx context.Context, actor Actor, q ReachQuery) (Reached, error) {
	out := Reached{KnownAt: q.KnownAt, At: b.Now()}
	if q.At != nil {
		out.At = *q.At
	}
	own, err := b.mayRead(actor, q.Site)
	if err != nil {
		return out, err
	}
	k, err := b.knownAt(ctx, q.KnownAt)
	if err != nil {
		return out, err
	}
	return out, b.read(ctx, func(m *model) error {
		v, r, err := m.reaching(q.Site, out.At, k, b.Now())
		if err != nil {
			return err
		}
		out.Site = v.SiteView
		if out.Zone, err = v.restricted(q.Zone); err != nil {
			return err
		}
		only, err := m.narrow(actor, own, StandingQuery{Site: q.Site, Subject: personKey(q.Person)})
		if err != nil {
			return err
		}
		answers := []reach.Answer{}
		if only != nil {
			answers = append(answers, r.One(only.Code, q.Zone, out.At))
		} else {
			answers = r.At(q.Zone, out.At)
		}
		for _, a := range answers {
			out.Rows = append(out.Rows, v.reachRow(r, a))
		}
		return nil
	})
}

func personKey(code string) string {
	if code == "" {
		return ""
	}
	return "person:" + strings.TrimPrefix(code, "person:")
}

// reaching makes a site ready to tell who is entitled at a moment.
func (m *model) reaching(site string, at time.Time, k int64, now time.Time) (*siteOn, *reach.Reader, error) {
	if m.site(site) == nil {
		return nil, nil, &NotFound{"site", site}
	}
	day := civil.DayOf(at, m.zone(site))
	v, err := m.view(site, &day, k, now)
	if err != nil {
		return nil, nil, err
	}
	r, err := reach.New(m.engine, site, k)
	return v, r, err
}

// restricted finds a zone into which not everybody may go.
func (v *siteOn) restricted(code string) (program.Zone, error) {
	z, ok := v.Program.Zone(code)
	switch {
	case !ok:
		var codes []string
		for _, z := range v.Program.Zones {
			codes = append(codes, z.Code)
		}
		return program.Zone{}, invalid("zone", code, "is no zone of this site", "one of "+strings.Join(codes, ", "))
	case !z.Restricted:
		return *z, invalid("zone", code, "is not restricted: nobody needs a right there", "a zone that the program marks as restricted")
	}
	return *z, nil
}

func (v *siteOn) reachRow(r *reach.Reader, a reach.Answer) ReachRow {
	row := ReachRow{Person: a.Person, Zone: a.Zone, Entitled: a.Entitled, Until: a.Until, Reasons: v.reasons(a.Reasons)}
	row.Name, row.Note = v.nameAndNote(standing.Subject{Asks: program.AsksPerson, Code: a.Person})
	row.HasRight = !slices.ContainsFunc(a.Reasons, func(x reach.Reason) bool { return x.Standing == "no-right" || x.Standing == "right-ended" })
	if a.Entitled && a.Until != nil {
		row.Ends = v.reasons(r.One(a.Person, a.Zone, *a.Until).Reasons)
	}
	for _, x := range row.Reasons {
		if s := v.restores(x, a.Person, a.Zone); !slices.Contains(row.Restore, s) {
			row.Restore = append(row.Restore, s)
		}
	}
	return row
}

func (v *siteOn) reasons(list []reach.Reason) []ReachReason {
	out := make([]ReachReason, len(list))
	for i, x := range list {
		out[i] = ReachReason{Item: x.Item, Standing: x.Standing, Due: x.Due}
		if item, ok := v.Program.Item(x.Item); ok {
			out[i].Title = cmp.Or(item.Title, item.Code)
			if len(item.Records) > 0 {
				out[i].Title = v.whatTitle(item.Records[0])
			}
		}
	}
	return out
}

// restores says what takes a reason away.
func (v *siteOn) restores(x ReachReason, person, zone string) string {
	switch x.Standing {
	case "no-right":
		return "a right in zone " + zone
	case "right-ended":
		return "a new right in zone " + zone
	case "not-on-staff":
		return "a stint at this site"
	case "no-guard":
		return "an item of the checklist that guards zone " + zone + " and asks this person"
	case "paused":
		return v.pauseEnds(person)
	}
	item, ok := v.Program.Item(x.Item)
	if !ok || len(item.Records) == 0 {
		return "what " + x.Item + " asks for"
	}
	what := v.whatTitle(item.Records[0])
	switch {
	case x.Standing == string(standing.DataFault):
		return "the facts on record that " + x.Item + " reads"
	case x.Standing == "limited":
		return what + " that opens zone " + zone
	}
	for _, p := range v.plans() {
		if !p.Done && p.Day >= v.on && slices.Contains(item.Records, p.What) {
			return fmt.Sprintf("%s, planned for %s", what, p.Day.Format("2 Jan"))
		}
	}
	return what
}

func (v *siteOn) pauseEnds(person string) string {
	key := store.SubjectKey{Kind: string(program.AsksPerson), Code: person}
	var last *civil.Day
	for _, x := range v.m.excusals.get(key) {
		if x.Ended != 0 || x.Item != "" || !covers(&x.From, x.To, v.on) {
			continue
		}
		if x.To == nil {
			return "the end of the pause"
		}
		if last == nil || *x.To > *last {
			last = x.To
		}
	}
	if last == nil {
		return "the end of the pause"
	}
	return "the end of the pause, on " + last.Format("2 Jan")
}

// RibbonQuery asks for the entitlement of people to a zone over a time: From is included, To is not.
type RibbonQuery struct {
	Site, Zone string
	People     []string
	From, To   time.Time
	KnownAt    *time.Time
}

// Ribbon is one person's entitlement to a zone over a time.
type Ribbon struct {
	Person, Name string
	Zone         string
	Spans        []reach.Span // in order, without holes, cut to the time
	Rights       []TimeSpan   // when a right was in force
}

// TimeSpan is a span of time: From is included, To is not.
type TimeSpan struct{ From, To time.Time }

// Ribbons gives a ribbon for each person asked for.
func (b *Book) Ribbons(ctx context.Context, actor Actor, q RibbonQuery) ([]Ribbon, error) {
	own, err := b.mayRead(actor, q.Site)
	if err != nil {
		return nil, err
	}
	if own && (actor.Person == "" || slices.ContainsFunc(q.People, func(p string) bool { return p != actor.Person })) {
		return nil, &Denied{Action: SeeSite, Role: actor.Role}
	}
	if !q.To.After(q.From) {
		return nil, invalid("to", q.To.Format(time.RFC3339), "is not after the beginning", "a moment after "+q.From.Format(time.RFC3339))
	}
	k, err := b.knownAt(ctx, q.KnownAt)
	if err != nil {
		return nil, err
	}
	out := make([]Ribbon, 0, len(q.People))
	return out, b.read(ctx, func(m *model) error {
		v, r, err := m.reaching(q.Site, q.From, k, b.Now())
		if err != nil {
			return err
		}
		for _, p := range q.People {
			name, _ := v.nameAndNote(standing.Subject{Asks: program.AsksPerson, Code: p})
			out = append(out, Ribbon{Person: p, Name: name, Zone: q.Zone, Spans: cut(r.Ribbon(p, q.Zone), q.From, q.To), Rights: m.rightSpans(q, p)})
		}
		return nil
	})
}

// cut leaves of spans what lies in a time.
func cut(spans []reach.Span, from, to time.Time) []reach.Span {
	var out []reach.Span
	for _, s := range spans {
		if s.From.IsZero() || s.From.Before(from) {
			s.From = from
		}
		if s.To.IsZero() || s.To.After(to) {
			s.To = to
		}
		if s.From.Before(s.To) {
			out = append(out, s)
		}
	}
	return out
}

// rightSpans are the times within that of the query in which a right was in force.
func (m *model) rightSpans(q RibbonQuery, person string) []TimeSpan {
	var out []TimeSpan
	for _, r := range m.rightsOf(q.Site, person) {
		if r.Zone != q.Zone {
			continue
		}
		s := TimeSpan{r.From, q.To}
		if r.To != nil && r.To.Before(q.To) {
			s.To = *r.To
		}
		if s.From.Before(q.From) {
			s.From = q.From
		}
		if end := m.stintEnds(q.Site, person, r.From); end != nil && end.Before(s.To) {
			s.To = *end
		}
		if s.From.Before(s.To) {
			out = append(out, s)
		}
	}
	slices.SortFunc(out, func(a, b TimeSpan) int { return a.From.Compare(b.From) })
	return out
}

// stintEnds is the end of the stint of the person at the site that holds the moment, nil where it is open.
func (m *model) stintEnds(site, person string, at time.Time) *time.Time {
	loc := m.zone(site)
	day := civil.DayOf(at, loc)
	for _, s := range m.stintsAt(site, string(program.AsksPerson), person) {
		if covers(s.First, s.Last, day) && s.Last != nil {
			end := (*s.Last + 1).Midnight(loc)
			return &end
		}
	}
	return nil
}
