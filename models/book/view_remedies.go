package book

import (
	"cmp"
	"context"
	"fmt"
	"slices"
	"strconv"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
	"lodebook/models/store"
)

// The subjects of the rows in which overdue remedies and reports stand among the gaps, and their item and rule.
const (
	AsksRemedy program.Asks = "remedy"
	AsksReport program.Asks = "report"
)

// RemedyLine is one remedy as a list shows it.
type RemedyLine struct {
	Number    int
	Entry     string
	Incident  int    // number, or 0
	Record    string // identifier of the failed record's entry, or empty
	Item      string
	Subject   *standing.Subject // of an item
	About     string            // what it is for, in words
	Severity  string
	Grave     string // the severity in words
	Owner     string // code of the person, or name of the account
	OwnerName string
	Made, Due civil.Day
	Confirm   bool
	State     string // open, done (and waiting for a second person) or closed
	DoneOn    *civil.Day
	Overdue   bool
	Mine      bool
	What      string
	Hidden    bool // what is to be done is kept for safety officers and the owner
	seq       int64
}

// The states of a remedy.
const (
	RemedyOpen   = "open"
	RemedyDone   = "done"
	RemedyClosed = "closed"
)

// RemedyJSON is a remedy as commands and the API give it.
type RemedyJSON struct {
	Site      string     `json:"site"`
	Number    int        `json:"number"`
	Incident  *int       `json:"incident"`
	Record    *string    `json:"record"`
	Item      *string    `json:"item"`
	Subject   *string    `json:"subject"`
	Severity  string     `json:"severity"`
	Owner     string     `json:"owner"`
	Made      civil.Day  `json:"made"`
	Due       civil.Day  `json:"due"`
	State     string     `json:"state"`
	Done      *civil.Day `json:"done"`
	Confirmed bool       `json:"confirmed"`
	Overdue   bool       `json:"overdue"`
	What      string     `json:"what"`
}

// JSON gives the line as commands and the API do.
func (l RemedyLine) JSON(site string) RemedyJSON {
	j := RemedyJSON{
		Site: site, Number: l.Number, Severity: l.Severity, Owner: l.Owner, Made: l.Made, Due: l.Due, State: l.State, Done: l.DoneOn,
		Confirmed: l.Confirm && l.State == RemedyClosed, Overdue: l.Overdue, What: l.What,
	}
	if l.Incident != 0 {
		j.Incident = &l.Incident
	}
	if l.Record != "" {
		j.Record = &l.Record
	}
	if l.Subject != nil {
		key := string(l.Subject.Asks) + ":" + l.Subject.Code
		j.Item, j.Subject = &l.Item, &key
	}
	return j
}

// Remedies lists the remedies that the actor may see: overdue ones first, then those of the actor, then by due
// day. Open leaves the closed ones out.
func (b *Book) Remedies(ctx context.Context, actor Actor, site string, open bool) ([]RemedyLine, error) {
	if _, err := b.mayRead(actor, site); err != nil {
		return nil, err
	}
	var out []RemedyLine
	err := b.withEntries(ctx, func(tx *store.Tx, m *model) error {
		if m.site(site) == nil {
			return &NotFound{"site", site}
		}
		today := m.dayAt(site, b.Now())
		for _, r := range m.remediesOf(site, always64) {
			if !m.seesRemedy(actor, r) {
				continue
			}
			if l := m.remedyLine(actor, r, today); !open || l.State != RemedyClosed {
				out = append(out, l)
			}
		}
		return fillWhat(tx, out)
	})
	slices.SortFunc(out, func(a, b RemedyLine) int {
		return cmp.Or(boolOrder(a.State == RemedyClosed, b.State == RemedyClosed), boolOrder(b.Overdue, a.Overdue), boolOrder(b.Mine, a.Mine), cmp.Compare(a.Due, b.Due), cmp.Compare(a.Number, b.Number))
	})
	return out, err
}

// fillWhat reads what is to be done from the entries, where it may be read.
func fillWhat(tx *store.Tx, lines []RemedyLine) error {
	for i := range lines {
		l := &lines[i]
		if l.Hidden {
			l.What = "(" + secretText + " and the owner)"
			continue
		}
		bd, err := bodyAt(tx, l.seq)
		if err != nil {
			return err
		}
		if r, ok := bd.(*remedyBody); ok {
			l.What = r.What.String()
		}
	}
	return nil
}

// bodyAt reads an entry's body with its veiled values.
func bodyAt(tx *store.Tx, seq int64) (body, error) {
	e, err := tx.EntryAt(seq)
	if err != nil {
		return nil, err
	}
	veils, err := tx.Veils(seq)
	if err != nil {
		return nil, err
	}
	return decode(e, veils[seq])
}

// remediesOf gives the last standing line of each remedy of a site, as known at k, by number.
func (m *model) remediesOf(site string, k int64) []store.RemedyRow {
	at := map[int]int{}
	var out []store.RemedyRow
	for _, r := range m.remedies.get(site) {
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

// seesRemedy tells whether the actor may see that there is such a remedy: who sees the site, and its owner.
func (m *model) seesRemedy(actor Actor, r store.RemedyRow) bool {
	return actor.may(SeeSite, r.Site) == nil || m.isActor(actor, r.Owner, r.Account)
}

// readsRemedy tells whether the actor may read what is to be done.
func (m *model) readsRemedy(actor Actor, r store.RemedyRow) bool {
	return r.Incident == 0 || actor.may(SeeIncidents, r.Site) == nil || m.isActor(actor, r.Owner, r.Account)
}

// keepsRemedy tells whether the actor may speak for a remedy that is somebody else's.
func (m *model) keepsRemedy(actor Actor, r store.RemedyRow) bool {
	return actor.may(KeepRemedies, r.Site) == nil && m.readsRemedy(actor, r)
}

// mayNotConfirm says why the actor may not confirm a remedy, or nothing.
func (m *model) mayNotConfirm(actor Actor, r store.RemedyRow) string {
	if actor.Account == "" || actor.may(ConfirmRemedies, r.Site) != nil {
		return "a safety officer confirms it"
	}
	if m.isActor(actor, r.Owner, r.Account) {
		return "nobody confirms a remedy of their own; ask another safety officer"
	}
	if done := m.remedyState(r, civil.LastDay, always64).done; done != nil && (m.isActor(actor, done.DoneBy, done.Account)) {
		return "nobody confirms what they did or recorded themselves; ask another safety officer"
	}
	return ""
}

func (m *model) remedyLine(actor Actor, r store.RemedyRow, on civil.Day) RemedyLine {
	l := RemedyLine{
		Number: r.Number, Entry: r.ID, Incident: r.Incident, Record: r.Record, Item: r.Item, About: m.targetWords(r), Severity: r.Severity,
		Grave: m.severityWords(r.Site, r.Severity), Owner: r.Owner, OwnerName: m.ownerWords(r.Site, r.Owner, r.Account), Made: r.Made, Due: r.Due, Confirm: r.Confirm,
		State: RemedyOpen, Mine: m.isActor(actor, r.Owner, r.Account), Hidden: !m.readsRemedy(actor, r), seq: r.Seq,
	}
	if l.Owner == "" {
		l.Owner = l.OwnerName
	}
	if r.Item != "" {
		s := subjectOf(r.Subject.Kind, r.Subject.Code)
		l.Subject = &s
	}
	state := m.remedyState(r, on, always64)
	if state.done != nil {
		l.State, l.DoneOn = RemedyDone, dayPtr(state.done.Day)
	}
	if state.closed {
		l.State = RemedyClosed
	}
	l.Overdue = !state.closed && r.Due < on
	return l
}

// RemedyStep is one entry in the history of a remedy.
type RemedyStep struct {
	Entry, Kind, Words string
	At                 time.Time
	Who                string
	Day                *civil.Day
	By, Note           string
	Over               bool // superseded or withdrawn
}

// RemedyView is one remedy with its history.
type RemedyView struct {
	RemedyLine
	Because    string
	History    []RemedyStep
	DoneEntry  string // what a second person looks at
	MayDo      bool
	MayConfirm bool
	MayNot     string // why the actor may not confirm what waits for it
	MayChange  bool
}

// Remedy gives one remedy with its history, to whoever may see it. To whom its content is hidden its history is too.
func (b *Book) Remedy(ctx context.Context, actor Actor, site string, number int) (RemedyView, error) {
	var out RemedyView
	if _, err := b.mayRead(actor, site); err != nil {
		return out, err
	}
	err := b.withEntries(ctx, func(tx *store.Tx, m *model) error {
		row, ok := m.remedy(site, number, always64)
		if !ok || !m.seesRemedy(actor, row) {
			return &NotFound{"remedy", strconv.Itoa(number)}
		}
		lines := []RemedyLine{m.remedyLine(actor, row, m.dayAt(site, b.Now()))}
		if err := fillWhat(tx, lines); err != nil {
			return err
		}
		out.RemedyLine = lines[0]
		state := m.remedyState(row, civil.LastDay, always64)
		out.MayDo = state.done == nil && actor.may(DoRemedies, site) == nil && (out.Mine || m.keepsRemedy(actor, row))
		out.MayChange = !state.closed && actor.may(Correct, site) == nil && m.keepsRemedy(actor, row) && !out.Mine
		if state.done != nil && !state.closed {
			out.DoneEntry, out.MayNot = state.done.ID, m.mayNotConfirm(actor, row)
			out.MayConfirm = out.MayNot == ""
		}
		if out.Hidden {
			return nil
		}
		return m.remedyHistory(tx, row, &out)
	})
	return out, err
}

func (m *model) remedyHistory(tx *store.Tx, row store.RemedyRow, out *RemedyView) error {
	type line struct {
		store.Line
		day *civil.Day
	}
	var lines []line
	for _, r := range m.remedies.get(row.Site) {
		if r.Number == row.Number {
			lines = append(lines, line{r.Line, nil})
		}
	}
	for _, r := range m.steps.get(siteNumber{row.Site, row.Number}) {
		lines = append(lines, line{r.Line, dayPtr(r.Day)})
	}
	slices.SortFunc(lines, func(a, b line) int { return cmp.Compare(a.Seq, b.Seq) })
	for _, l := range lines {
		e, err := tx.EntryAt(l.Seq)
		if err != nil {
			return err
		}
		bd, err := bodyAt(tx, l.Seq)
		if err != nil {
			return err
		}
		step := RemedyStep{Entry: e.ID, Kind: e.Kind, At: e.RecordedAt, Who: m.actorName(e.Actor, bd), Day: l.day, Over: l.Ended != 0, Words: m.remedySummary(row.Site, bd)}
		switch x := bd.(type) {
		case *remedyBody:
			step.Note = x.Because.String()
			if l.Seq == row.Seq {
				out.Because = step.Note
			}
		case *remedyDoneBody:
			step.By, step.Note = x.By.String(), x.Note.String()
		case *remedyCheckBody:
			step.Note = x.Note.String()
		}
		out.History = append(out.History, step)
	}
	return nil
}

// OpenRemedies gives the number of an open remedy of each gap that has one, by item and subject as in
// "VENT fixture:V1", to who sees the site.
func (b *Book) OpenRemedies(ctx context.Context, actor Actor, site string) (map[string]int, error) {
	out := map[string]int{}
	err := b.at(ctx, actor, site, nil, func(v *siteOn) error {
		for _, r := range v.m.remediesOf(site, always64) {
			if r.Item != "" && !v.m.remedyState(r, v.on, v.k).closed {
				out[r.Item+" "+r.Subject.Kind+":"+r.Subject.Code] = r.Number
			}
		}
		return nil
	})
	return out, err
}

// overdueRemedies are the remedies that were not closed by their due day, as gaps of that day, in order of number as
// text.
func (m *model) overdueRemedies(site string, on civil.Day, k int64) []Row {
	var out []Row
	for _, r := range m.remediesOf(site, k) {
		if r.Made > on || r.Due >= on || m.remedyState(r, on, k).closed {
			continue
		}
		row := m.gapRow(site, AsksRemedy, strconv.Itoa(r.Number), r.Made, r.Due)
		row.Record, row.Title, row.Cadence = r.Record, "A remedy is overdue", "severity "+m.severityWords(site, r.Severity)
		row.Owner, row.OwnerName = r.Owner, m.ownerWords(site, r.Owner, r.Account)
		if row.Owner == "" {
			row.Owner = row.OwnerName
		}
		row.SubjectName, row.SubjectNote = m.remedyNames(r)
		if m.remedyState(r, on, k).done != nil {
			row.Title = "A remedy waits for its confirmation"
		}
		row.Why = []string{fmt.Sprintf("Remedy %d was due on %s and is not closed.", r.Number, r.Due)}
		out = append(out, row)
	}
	return sortRows(out)
}

// overdueReports are the reports to outside bodies that were not made by their due day. Of the incident they tell no
// more than its number.
func (m *model) overdueReports(site string, on civil.Day, k int64) []Row {
	var out []Row
	for _, r := range m.incidentsOf(site, k) {
		for i, x := range m.reportsOf(r, k) {
			if x.Due >= on || x.Done != nil && *x.Done <= on {
				continue
			}
			row := m.gapRow(site, AsksReport, fmt.Sprintf("%d.%d", r.Number, i+1), m.dayAt(site, r.At), x.Due)
			row.Title, row.Owner, row.Cadence = "A report to an outside body is overdue", string(SafetyOfficer), "the site's own rule"
			row.SubjectName, row.SubjectNote = fmt.Sprintf("Incident %d", r.Number), ""
			row.Why = []string{fmt.Sprintf("The site's rule asked for the report by %s.", x.Due)}
			out = append(out, row)
		}
	}
	return sortRows(out)
}

func sortRows(rows []Row) []Row {
	slices.SortFunc(rows, func(a, b Row) int { return cmp.Compare(a.Subject.Code, b.Subject.Code) })
	return rows
}

// gapRow is the row of something overdue that no item asks for.
func (m *model) gapRow(site string, asks program.Asks, code string, start, due civil.Day) Row {
	r := Row{Site: site, Asked: true}
	r.Item, r.Rule, r.Word = string(asks), program.CadenceRule(asks), standing.Lapsed
	r.Subject = standing.Subject{Asks: asks, Code: code}
	r.Start, r.Due, r.Since = dayPtr(start), dayPtr(due), dayPtr(due+1)
	if sm := m.site(site); sm != nil {
		r.Version = sm.on(due).row.Number
	}
	return r
}

// remedyNames is how a remedy is called among the gaps.
func (m *model) remedyNames(r store.RemedyRow) (name, note string) {
	return fmt.Sprintf("Remedy %d", r.Number), m.targetWords(r) + ", " + m.ownerWords(r.Site, r.Owner, r.Account)
}

// alsoOverdue adds what is overdue to rows in order of item: for an actor who sees only their own, their own
// remedies. Item and Subject are those of the question.
func (m *model) alsoOverdue(rows []Row, actor Actor, own bool, q StandingQuery, on civil.Day, k int64) []Row {
	if q.Subject != "" || q.Item != "" && q.Item != string(AsksRemedy) && q.Item != string(AsksReport) {
		return rows
	}
	overdue := m.overdueRemedies(q.Site, on, k)
	if own {
		overdue = slices.DeleteFunc(overdue, func(r Row) bool { return !m.ownsRemedy(actor, q.Site, r.Subject) })
	} else {
		overdue = append(overdue, m.overdueReports(q.Site, on, k)...)
	}
	if q.Item != "" {
		overdue = slices.DeleteFunc(overdue, func(r Row) bool { return r.Item != q.Item })
	}
	for len(overdue) > 0 {
		n := 1
		for n < len(overdue) && overdue[n].Item == overdue[0].Item {
			n++
		}
		at, _ := slices.BinarySearchFunc(rows, overdue[0].Item, func(r Row, item string) int { return cmp.Compare(r.Item, item) })
		rows = slices.Insert(rows, at, overdue[:n]...)
		overdue = overdue[n:]
	}
	return rows
}

// ownsRemedy tells whether a subject is a remedy of the actor's.
func (m *model) ownsRemedy(actor Actor, site string, s standing.Subject) bool {
	n, err := strconv.Atoi(s.Code)
	if s.Asks != AsksRemedy || err != nil {
		return false
	}
	r, ok := m.remedy(site, n, always64)
	return ok && m.isActor(actor, r.Owner, r.Account)
}

// overdueNames names the subject of a row of something overdue.
func (v *siteOn) overdueNames(s standing.Subject) (name, note string) {
	number, _, _ := strings.Cut(s.Code, ".")
	n, err := strconv.Atoi(number)
	if r, ok := v.m.remedy(v.Code, n, v.k); ok && err == nil && s.Asks == AsksRemedy {
		return v.m.remedyNames(r)
	}
	return upperFirst(map[bool]string{true: "remedy ", false: "incident "}[s.Asks == AsksRemedy]) + number, ""
}
