package book

import (
	"cmp"
	"context"
	"slices"
	"strconv"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/store"
)

// ReportDue is one report to an outside body that the site's rule asks for of an incident.
type ReportDue struct {
	Code, To string
	Due      civil.Day
	Working  bool
	Done     *civil.Day
	Entry    string // that says it is done
	Left     int    // days that count up to the due day, from tomorrow on; below 0 where it is overdue
	seq      int64
}

// reportsOf are the reports that the version in force on the day of the incident asks for, in its order.
func (m *model) reportsOf(r store.IncidentRow, k int64) []ReportDue {
	sm := m.site(r.Site)
	if sm == nil {
		return nil
	}
	day := m.dayAt(r.Site, r.At)
	p := sm.on(day).program
	var out []ReportDue
	for _, x := range p.ReportsOf(r.Kind) {
		due := ReportDue{Code: x.Code, To: x.To, Due: x.Due(day, p.Calendar), Working: x.Working}
		for _, done := range m.reports.get(siteNumber{r.Site, r.Number}) {
			if done.Code == x.Code && stands(done.Line, k) {
				due.Done, due.Entry, due.seq = dayPtr(done.Day), done.ID, done.Seq
			}
		}
		out = append(out, due)
	}
	return out
}

// count fills in how many days are left after a day.
func (d *ReportDue) count(p *program.Program, today civil.Day) {
	counts := func(day civil.Day) bool { return !d.Working || p.Calendar.Operates(day) }
	for day := today + 1; day <= d.Due; day++ {
		if counts(day) {
			d.Left++
		}
	}
	for day := d.Due + 1; day <= today; day++ {
		if counts(day) || d.Left == 0 {
			d.Left--
		}
	}
}

// incidentsOf gives the last standing line of each incident, as known at k, by number.
func (m *model) incidentsOf(site string, k int64) []store.IncidentRow {
	at := map[int]int{}
	var out []store.IncidentRow
	for _, r := range m.incidents.get(site) {
		if !stands(r.Line, k) {
			continue
		}
		if i, ok := at[r.Number]; ok {
			out[i] = r
			continue
		}
		at[r.Number] = len(out)
		out = append(out, r)
	}
	return out
}

// IncidentLine is one incident as a safety officer sees it.
type IncidentLine struct {
	Number            int
	Entry             string
	Kind, KindName    string
	Zone              string
	At                time.Time
	Severity, Grave   string
	Anonymous         bool
	Reporter          string // name, or that there is none
	What, Who, Action string
	By                string
	People            []string // codes
	PeopleNames       []string
	Reports           []ReportDue
	Remedies          []RemedyLine
}

// IncidentJSON is an incident as commands and the API give it to a safety officer.
type IncidentJSON struct {
	Site      string       `json:"site"`
	Number    int          `json:"number"`
	Kind      string       `json:"kind"`
	Zone      *string      `json:"zone"`
	At        time.Time    `json:"at"`
	Severity  string       `json:"severity"`
	Anonymous bool         `json:"anonymous"`
	People    []string     `json:"people"`
	What      string       `json:"what"`
	Who       string       `json:"who"`
	Action    string       `json:"action"`
	Reports   []ReportJSON `json:"reports"`
	Remedies  []int        `json:"remedies"`
}

// ReportJSON is a report to an outside body in an incident's JSON.
type ReportJSON struct {
	Report string     `json:"report"`
	To     string     `json:"to"`
	Due    civil.Day  `json:"due"`
	Done   *civil.Day `json:"done"`
}

// JSON gives the incident as commands and the API do.
func (l IncidentLine) JSON(site string) IncidentJSON {
	j := IncidentJSON{
		Site: site, Number: l.Number, Kind: l.Kind, At: l.At, Severity: l.Severity, Anonymous: l.Anonymous, People: l.People,
		What: l.What, Who: l.Who, Action: l.Action, Reports: []ReportJSON{}, Remedies: []int{},
	}
	if j.People == nil {
		j.People = []string{}
	}
	if l.Zone != "" {
		j.Zone = &l.Zone
	}
	for _, r := range l.Reports {
		j.Reports = append(j.Reports, ReportJSON{r.Code, r.To, r.Due, r.Done})
	}
	for _, r := range l.Remedies {
		j.Remedies = append(j.Remedies, r.Number)
	}
	return j
}

// Incidents lists the incidents of a site to a safety officer, newest first.
func (b *Book) Incidents(ctx context.Context, actor Actor, site string) ([]IncidentLine, error) {
	if err := actor.may(SeeIncidents, site); err != nil {
		return nil, err
	}
	var out []IncidentLine
	err := b.withEntries(ctx, func(tx *store.Tx, m *model) error {
		if m.site(site) == nil {
			return &NotFound{"site", site}
		}
		for _, r := range m.incidentsOf(site, always64) {
			l, err := m.incidentLine(tx, actor, r, m.dayAt(site, b.Now()))
			if err != nil {
				return err
			}
			out = append(out, l)
		}
		return nil
	})
	slices.SortFunc(out, func(a, b IncidentLine) int { return cmp.Or(b.At.Compare(a.At), cmp.Compare(b.Number, a.Number)) })
	return out, err
}

// Incident gives one incident to a safety officer.
func (b *Book) Incident(ctx context.Context, actor Actor, site string, number int) (IncidentLine, error) {
	var out IncidentLine
	if err := actor.may(SeeIncidents, site); err != nil {
		return out, err
	}
	err := b.withEntries(ctx, func(tx *store.Tx, m *model) error {
		row, ok := m.incident(site, number, always64)
		if !ok {
			return &NotFound{"incident", strconv.Itoa(number)}
		}
		var err error
		out, err = m.incidentLine(tx, actor, row, m.dayAt(site, b.Now()))
		if err != nil {
			return err
		}
		return fillWhat(tx, out.Remedies)
	})
	return out, err
}

func (m *model) incidentLine(tx *store.Tx, actor Actor, r store.IncidentRow, today civil.Day) (IncidentLine, error) {
	l := IncidentLine{
		Number: r.Number, Entry: r.ID, Kind: r.Kind, KindName: m.incidentKindWords(r.Site, r.Kind), Zone: r.Zone, At: r.At, Severity: r.Severity,
		Grave: m.severityWords(r.Site, r.Severity), Anonymous: r.Anonymous, People: r.People, PeopleNames: m.peopleWords(r.Site, r.People), Reporter: "nobody named",
	}
	first := m.firstReport(r)
	e, err := tx.EntryAt(first.Seq)
	if err != nil {
		return l, err
	}
	bd, err := bodyAt(tx, r.Seq)
	if err != nil {
		return l, err
	}
	if !r.Anonymous {
		l.Reporter = m.actorName(e.Actor, bd)
	}
	if x, ok := bd.(*incidentBody); ok {
		l.What, l.Who, l.Action, l.By = x.What.String(), x.Who.String(), x.Action.String(), x.By.String()
	}
	l.Reports = m.reportsOf(r, always64)
	p := m.site(r.Site).on(m.dayAt(r.Site, r.At)).program
	for i := range l.Reports {
		l.Reports[i].count(p, today)
	}
	for _, x := range m.remediesOf(r.Site, always64) {
		if x.Incident == r.Number {
			l.Remedies = append(l.Remedies, m.remedyLine(actor, x, today))
		}
	}
	return l, nil
}

// firstReport is the first line of an incident, which says who reported it.
func (m *model) firstReport(r store.IncidentRow) store.IncidentRow {
	for _, x := range m.incidents.get(r.Site) {
		if x.Number == r.Number {
			return x
		}
	}
	return r
}

// OwnIncident is what whoever reported an incident in their own name is told of it: that it was received.
type OwnIncident struct {
	Number int
	At     time.Time
}

// OwnIncidents lists what the actor reported in their own name at a site and was not withdrawn, newest first.
func (b *Book) OwnIncidents(ctx context.Context, actor Actor, site string) ([]OwnIncident, error) {
	if err := actor.may(ReportIncident, site); err != nil {
		return nil, err
	}
	var out []OwnIncident
	err := b.read(ctx, func(m *model) error {
		for _, r := range m.incidentsOf(site, always64) {
			if first := m.firstReport(r); !first.Anonymous && actor.Account != "" && first.Reporter == actor.Account {
				out = append(out, OwnIncident{r.Number, first.At})
			}
		}
		return nil
	})
	slices.Reverse(out)
	return out, err
}

// IncidentNow is the present moment as the form of an incident opens with it.
func (b *Book) IncidentNow(ctx context.Context, site string) (string, error) {
	var out string
	err := b.read(ctx, func(m *model) error {
		out = m.nowAt(site, b.Now())
		return nil
	})
	return out, err
}

// ClockWords is an instant as it is typed into a form of a site.
func ClockWords(t time.Time, zone *time.Location) string { return clockWords(t, zone) }

// IncidentColumns and RemedyColumns head the tables of incidents and remedies.
var (
	IncidentColumns = []string{"site", "number", "kind", "zone", "at", "severity", "anonymous", "people", "what", "who", "action", "reports", "remedies"}
	RemedyColumns   = []string{"site", "number", "incident", "record", "item", "subject", "severity", "owner", "made", "due", "state", "done", "confirmed", "overdue", "what"}
)

// Cells are the incident as a row of a table: lists are joined by "; ".
func (l IncidentLine) Cells(site string) []string {
	var reports, remedies []string
	for _, r := range l.Reports {
		reports = append(reports, strings.TrimSpace(r.Code+" due "+r.Due.String()+" "+map[bool]string{true: "done " + dayOr(r.Done, "")}[r.Done != nil]))
	}
	for _, r := range l.Remedies {
		remedies = append(remedies, strconv.Itoa(r.Number))
	}
	return []string{
		site, strconv.Itoa(l.Number), l.Kind, l.Zone, l.At.Format(time.RFC3339), l.Severity, strconv.FormatBool(l.Anonymous), strings.Join(l.People, "; "),
		l.What, l.Who, l.Action, strings.Join(reports, "; "), strings.Join(remedies, "; "),
	}
}

// Cells are the remedy as a row of a table.
func (l RemedyLine) Cells(site string) []string {
	j := l.JSON(site)
	text := func(s *string) string {
		if s == nil {
			return ""
		}
		return *s
	}
	incident := ""
	if l.Incident != 0 {
		incident = strconv.Itoa(l.Incident)
	}
	return []string{
		site, strconv.Itoa(l.Number), incident, l.Record, text(j.Item), text(j.Subject), l.Severity, l.Owner, l.Made.String(), l.Due.String(), l.State,
		dayOr(l.DoneOn, ""), strconv.FormatBool(j.Confirmed), strconv.FormatBool(l.Overdue), l.What,
	}
}

// ReportWaiting is a report to an outside body that is still to be made.
type ReportWaiting struct {
	Incident int
	ReportDue
}

// ReportsWaiting lists the reports that are still to be made, the soonest first, to a safety officer.
func (b *Book) ReportsWaiting(ctx context.Context, actor Actor, site string) ([]ReportWaiting, error) {
	if err := actor.may(SeeIncidents, site); err != nil {
		return nil, err
	}
	var out []ReportWaiting
	err := b.read(ctx, func(m *model) error {
		today := m.dayAt(site, b.Now())
		for _, r := range m.incidentsOf(site, always64) {
			p := m.site(site).on(m.dayAt(site, r.At)).program
			for _, x := range m.reportsOf(r, always64) {
				if x.Done == nil {
					x.count(p, today)
					out = append(out, ReportWaiting{r.Number, x})
				}
			}
		}
		return nil
	})
	slices.SortStableFunc(out, func(a, b ReportWaiting) int { return cmp.Compare(a.Due, b.Due) })
	return out, err
}
