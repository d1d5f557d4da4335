package store

import (
	"cmp"
	"context"
	"database/sql"
	"errors"
	"fmt"
	"slices"
	"strings"
	"sync"

	"gorm.io/gorm"
)

// Delta is what changed in the projections: rows that are new or that ended or were blanked.
type Delta struct {
	Sites       []SiteRow
	Versions    []VersionRow
	People      []PersonRow
	Fixtures    []FixtureRow
	Stints      []StintRow
	Facts       []FactRow
	Records     []RecordRow
	Events      []EventRow
	Excusals    []ExcusalRow
	Rights      []RightRow
	Marks       []MarkRow
	Visits      []VisitRow
	VisitSteps  []VisitStepRow
	Duties      []DutyRow
	Stocks      []StockRow
	Incidents   []IncidentRow
	Reports     []ReportRow
	Remedies    []RemedyRow
	RemedySteps []RemedyStepRow
	Outages     []OutageRow
	Returns     []ReturnRow
	Plans       []PlanRow
	Accounts    []AccountRow
	Batches     []BatchRow
}

// table is one projection: its name and how its public rows T and stored rows R turn into each
// other.
type table[T, R any] struct {
	name    string
	in      func(T) R
	out     func(R) T
	columns func(*R) *lineColumns
	of      func(*Delta) *[]T
	blanks  bool // has the column touched
}

// projection is a table of whichever types.
type projection interface {
	title() string
	conditions() []string
	hold(t *Tx, rows any) (bool, error)
	changed(t *Tx, since int64, to *Delta) error
	add(to *Delta, rows any) bool
	count(d *Delta) int
	stream(t *Tx, site string, fn func(*Delta) error) error
}

// projections are all tables that are made from the entries.
var projections = []projection{
	table[SiteRow, siteLine]{"sites", siteIn, siteOut, func(r *siteLine) *lineColumns { return &r.Line }, func(d *Delta) *[]SiteRow { return &d.Sites }, false},
	table[VersionRow, versionLine]{"versions", versionIn, versionOut, func(r *versionLine) *lineColumns { return &r.Line }, func(d *Delta) *[]VersionRow { return &d.Versions }, false},
	table[PersonRow, personLine]{"people", personIn, personOut, func(r *personLine) *lineColumns { return &r.Line }, func(d *Delta) *[]PersonRow { return &d.People }, true},
	table[FixtureRow, fixtureLine]{"fixtures", fixtureIn, fixtureOut, func(r *fixtureLine) *lineColumns { return &r.Line }, func(d *Delta) *[]FixtureRow { return &d.Fixtures }, false},
	table[StintRow, stintLine]{"stints", stintIn, stintOut, func(r *stintLine) *lineColumns { return &r.Line }, func(d *Delta) *[]StintRow { return &d.Stints }, false},
	table[FactRow, factLine]{"facts", factIn, factOut, func(r *factLine) *lineColumns { return &r.Line }, func(d *Delta) *[]FactRow { return &d.Facts }, true},
	table[RecordRow, recordLine]{"records", recordIn, recordOut, func(r *recordLine) *lineColumns { return &r.Line }, func(d *Delta) *[]RecordRow { return &d.Records }, false},
	table[EventRow, eventLine]{"events", eventIn, eventOut, func(r *eventLine) *lineColumns { return &r.Line }, func(d *Delta) *[]EventRow { return &d.Events }, false},
	table[ExcusalRow, excusalLine]{"excusals", excusalIn, excusalOut, func(r *excusalLine) *lineColumns { return &r.Line }, func(d *Delta) *[]ExcusalRow { return &d.Excusals }, false},
	table[RightRow, rightLine]{"rights", rightIn, rightOut, func(r *rightLine) *lineColumns { return &r.Line }, func(d *Delta) *[]RightRow { return &d.Rights }, false},
	table[MarkRow, markLine]{"marks", markIn, markOut, func(r *markLine) *lineColumns { return &r.Line }, func(d *Delta) *[]MarkRow { return &d.Marks }, true},
	table[VisitRow, visitLine]{"visits", visitIn, visitOut, func(r *visitLine) *lineColumns { return &r.Line }, func(d *Delta) *[]VisitRow { return &d.Visits }, true},
	table[VisitStepRow, visitStepLine]{"visit_steps", visitStepIn, visitStepOut, func(r *visitStepLine) *lineColumns { return &r.Line }, func(d *Delta) *[]VisitStepRow { return &d.VisitSteps }, false},
	table[DutyRow, dutyLine]{"duties", dutyIn, dutyOut, func(r *dutyLine) *lineColumns { return &r.Line }, func(d *Delta) *[]DutyRow { return &d.Duties }, false},
	table[StockRow, stockLine]{"stocks", stockIn, stockOut, func(r *stockLine) *lineColumns { return &r.Line }, func(d *Delta) *[]StockRow { return &d.Stocks }, false},
	table[IncidentRow, incidentLine]{"incidents", incidentIn, incidentOut, func(r *incidentLine) *lineColumns { return &r.Line }, func(d *Delta) *[]IncidentRow { return &d.Incidents }, false},
	table[ReportRow, reportLine]{"reports", reportIn, reportOut, func(r *reportLine) *lineColumns { return &r.Line }, func(d *Delta) *[]ReportRow { return &d.Reports }, false},
	table[RemedyRow, remedyLine]{"remedies", remedyIn, remedyOut, func(r *remedyLine) *lineColumns { return &r.Line }, func(d *Delta) *[]RemedyRow { return &d.Remedies }, false},
	table[RemedyStepRow, remedyStepLine]{"remedy_steps", remedyStepIn, remedyStepOut, func(r *remedyStepLine) *lineColumns { return &r.Line }, func(d *Delta) *[]RemedyStepRow { return &d.RemedySteps }, false},
	table[OutageRow, outageLine]{"outages", outageIn, outageOut, func(r *outageLine) *lineColumns { return &r.Line }, func(d *Delta) *[]OutageRow { return &d.Outages }, false},
	table[ReturnRow, returnLine]{"returns", returnIn, returnOut, func(r *returnLine) *lineColumns { return &r.Line }, func(d *Delta) *[]ReturnRow { return &d.Returns }, false},
	table[PlanRow, planLine]{"plans", planIn, planOut, func(r *planLine) *lineColumns { return &r.Line }, func(d *Delta) *[]PlanRow { return &d.Plans }, false},
	table[AccountRow, accountLine]{"accounts", accountIn, accountOut, func(r *accountLine) *lineColumns { return &r.Line }, func(d *Delta) *[]AccountRow { return &d.Accounts }, true},
	table[BatchRow, batchLine]{"batches", batchIn, batchOut, func(r *batchLine) *lineColumns { return &r.Line }, func(d *Delta) *[]BatchRow { return &d.Batches }, false},
}

func (p table[T, R]) title() string { return p.name }

// Put adds projection rows: values or slices of any line type of rows.go. The entry that a row names by
// Seq must have been appended. Rows are written in batches, so an error may come with a later call
// or at the end of the transaction.
func (t *Tx) Put(rows ...any) error {
	for _, r := range rows {
		err := t.put(r)
		if err != nil {
			return err
		}
	}
	return nil
}

func (t *Tx) put(rows any) error {
	for _, p := range projections {
		held, err := p.hold(t, rows)
		if held || err != nil {
			return err
		}
	}
	return fmt.Errorf("%T is no row of a projection", rows)
}

// held are the rows of one table that wait to be written. seq and next say which entry the last
// row was of and which place the next one of it takes; above top no entry has rows in the table.
type held[R any] struct {
	name           string
	rows           []R
	seq, next, top int64
}

// hold takes the rows if they are of its type.
func (p table[T, R]) hold(t *Tx, rows any) (bool, error) {
	var list []T
	switch r := rows.(type) {
	case T:
		list = []T{r}
	case []T:
		list = r
	default:
		return false, nil
	}
	h, err := p.holding(t)
	if err != nil {
		return true, err
	}
	for _, row := range list {
		r := p.in(row)
		err = h.number(t, p.columns(&r))
		if err != nil {
			return true, err
		}
		h.rows = append(h.rows, r)
	}
	if len(h.rows) >= batchRows {
		return true, t.settle()
	}
	return true, nil
}

func (p table[T, R]) holding(t *Tx) (*held[R], error) {
	if h, ok := t.held[p.name].(*held[R]); ok {
		return h, nil
	}
	h := &held[R]{name: p.name, seq: -1}
	err := t.db.Raw("SELECT COALESCE(MAX(seq), -1) FROM " + p.name).Scan(&h.top).Error
	if err != nil {
		return nil, err
	}
	if t.held == nil {
		t.held = make(map[string]holding)
	}
	t.held[p.name] = h
	return h, nil
}

// number gives a row its place among the rows of its entry.
func (h *held[R]) number(t *Tx, c *lineColumns) error {
	switch {
	case c.Seq == h.seq:
		h.next++
	case c.Seq > h.top:
		h.next = 0
	default:
		err := t.settle()
		if err != nil {
			return err
		}
		err = t.db.Raw("SELECT COALESCE(MAX(n) + 1, 0) FROM "+h.name+" WHERE seq = ?", c.Seq).Scan(&h.next).Error
		if err != nil {
			return err
		}
	}
	h.seq = c.Seq
	h.top = max(h.top, c.Seq)
	c.N = h.next
	return nil
}

func (h *held[R]) flush(t *Tx) error {
	err := insert(t, h.name, h.rows)
	h.rows = h.rows[:0]
	return err
}

// mark remembers what is held; back comes back to it, as long as none of it has been written.
func (h *held[R]) mark() (back func()) {
	was := *h
	return func() { *h = was }
}

// splitAt leaves what was held at the mark (nil: nothing) to be written; restore takes up again what
// came after it.
func (h *held[R]) splitAt(back func()) (restore func() error) {
	now := *h
	if back == nil {
		h.rows = nil
	} else {
		back()
	}
	n := len(h.rows)
	return func() error {
		if len(now.rows) < n {
			return fmt.Errorf("rows of %s went away while they were held back", h.name)
		}
		now.rows = slices.Clone(now.rows[n:])
		*h = now
		return nil
	}
}

func (h *held[R]) drop() { h.rows = h.rows[:0] }

// Changed gives the rows that entries after the sequence number since have written, ended or
// blanked, in order of their entry (records in their order of recording). Since -1 is everything.
func (t *Tx) Changed(since int64) (Delta, error) {
	var d Delta
	err := t.settle()
	if err != nil {
		return d, err
	}
	names, err := t.changedTables(since)
	if err != nil {
		return d, err
	}
	for _, p := range projections {
		if since >= 0 && !slices.Contains(names, p.title()) {
			continue
		}
		err = p.changed(t, since, &d)
		if err != nil {
			return d, err
		}
	}
	slices.SortStableFunc(d.Records, func(a, b RecordRow) int { return cmp.Compare(a.Order, b.Order) })
	return d, nil
}

// changedTables names the tables that Changed has to look at. One statement finds them out: of the
// dozen tables most writes change one or two.
func (t *Tx) changedTables(since int64) ([]string, error) {
	if since < 0 {
		return nil, nil
	}
	var names []string
	err := t.db.Raw(changedSQL(), sql.Named("since", since)).Scan(&names).Error
	return names, err
}

var changedSQL = sync.OnceValue(func() string {
	var parts []string
	for _, p := range projections {
		var ways []string
		for _, c := range p.conditions() {
			ways = append(ways, "EXISTS (SELECT 1 FROM "+p.title()+" WHERE "+c+")")
		}
		parts = append(parts, "SELECT '"+p.title()+"' WHERE "+strings.Join(ways, " OR "))
	}
	return strings.Join(parts, " UNION ALL ")
})

func (p table[T, R]) changed(t *Tx, since int64, to *Delta) error {
	rows, err := p.since(t.db.Table(p.name), since)
	if err != nil {
		return err
	}
	list := make([]T, len(rows))
	for i, r := range rows {
		list[i] = p.out(r)
	}
	*p.of(to) = list
	return nil
}

// conditions ask for new, ended and (of a table that has them) blanked rows, each by its index:
// SQLite would answer them in one condition, or in order, by reading the whole table. The indexes
// on ended and touched hold only what is above 0; the plus 0 keeps the database from choosing another.
func (p table[T, R]) conditions() []string {
	c := []string{"seq > @since", "ended > 0 AND ended > @since AND seq + 0 <= @since"}
	if p.blanks {
		c = append(c, "touched > 0 AND touched > @since AND seq + 0 <= @since AND ended + 0 <= @since")
	}
	return c
}

// since gives the rows that changed, in order.
func (p table[T, R]) since(q *gorm.DB, since int64) ([]R, error) {
	if since < 0 {
		return find[R](q.Order("seq, n"))
	}
	var all []R
	for _, c := range p.conditions() {
		rows, err := find[R](q.Session(&gorm.Session{}).Where(c, sql.Named("since", since)))
		if err != nil {
			return nil, err
		}
		all = append(all, rows...)
	}
	slices.SortFunc(all, func(a, b R) int { return p.columns(&a).compare(p.columns(&b)) })
	return all, nil
}

// compare orders rows by their entry and their place in it.
func (c *lineColumns) compare(d *lineColumns) int {
	return cmp.Or(cmp.Compare(c.Seq, d.Seq), cmp.Compare(c.N, d.N))
}

// End marks the rows of entry seq that stand as ended by entry by.
func (t *Tx) End(seq, by int64) error {
	return t.end(by, "seq = ?", seq)
}

// EndBatch marks the rows of all entries of an import that stand as ended by entry by.
func (t *Tx) EndBatch(batch string, by int64) error {
	if batch == "" {
		return fmt.Errorf("no import is named to be ended by entry %d", by)
	}
	return t.end(by, "seq IN (SELECT seq FROM entries WHERE batch = ? AND batch <> '')", batch)
}

func (t *Tx) end(by int64, which string, arg any) error {
	t.ends()
	if by <= 0 {
		return fmt.Errorf("entry %d cannot end a row", by)
	}
	err := t.settle()
	if err != nil {
		return err
	}
	for _, p := range projections {
		err = t.db.Exec("UPDATE "+p.title()+" SET ended = ? WHERE ended = 0 AND "+which, by, arg).Error
		if err != nil {
			return err
		}
	}
	return nil
}

// BlankPerson empties the name, e-mail and badge in every row of a person and marks them erased.
// Seq is the erasing entry: Changed gives the rows again to whoever knows the book up to before it.
func (t *Tx) BlankPerson(code string, seq int64) error {
	return t.blank("UPDATE people SET name = '', email = '', badge = '', erased = ?, touched = ? WHERE code = ?", true, seq, code)
}

// BlankAccounts empties the name in every row of the accounts that belong to a person. Seq is the
// erasing entry, as in BlankPerson.
func (t *Tx) BlankAccounts(person string, seq int64) error {
	return t.blank("UPDATE accounts SET name = '', touched = ? WHERE person = ? AND person <> ''", seq, person)
}

// BlankFacts sets the values of the named facts that entry seq put on record to null. By is the
// erasing entry, as in BlankPerson.
func (t *Tx) BlankFacts(seq, by int64, facts ...string) error {
	return t.blank("UPDATE facts SET value = 'null', touched = ? WHERE seq = ? AND fact IN ?", by, seq, facts)
}

// BlankMark empties the badge in the mark that entry seq made. By is the erasing entry, as in BlankPerson.
func (t *Tx) BlankMark(seq, by int64) error {
	return t.blank("UPDATE marks SET badge = '', touched = ? WHERE seq = ?", by, seq)
}

// BlankVisit empties what tells who came in the visit that entry seq announced. By is the erasing entry, as in BlankPerson.
func (t *Tx) BlankVisit(seq, by int64) error {
	return t.blank("UPDATE visits SET visitor = '', employer = '', badge = '', tools = '[]', touched = ? WHERE seq = ?", by, seq)
}

// ends notes that the part under way, if any, ends or blanks rows.
func (t *Tx) ends() {
	t.ended = true
	if t.part != nil {
		t.part.ended = true
	}
}

func (t *Tx) blank(statement string, args ...any) error {
	t.ends()
	err := t.settle()
	if err != nil {
		return err
	}
	return t.db.Exec(statement, args...).Error
}

// DropProjections empties every projection, to be made again from the entries.
func (t *Tx) DropProjections() error {
	t.held = nil
	for _, p := range projections {
		err := t.db.Exec("DELETE FROM " + p.title()).Error
		if err != nil {
			return err
		}
	}
	return nil
}

// Dump gives every projection's rows as text, sorted, by table: two books with equal dumps have
// equal projections.
func (s *Store) Dump(ctx context.Context) (map[string][]string, error) {
	out := make(map[string][]string)
	err := s.Read(ctx, func(t *Tx) error {
		for _, p := range projections {
			lines, err := t.dump(p.title())
			if err != nil {
				return err
			}
			out[p.title()] = lines
		}
		return nil
	})
	return out, err
}

func (t *Tx) dump(name string) (lines []string, err error) {
	rows, err := t.db.Table(name).Rows()
	if err != nil {
		return nil, err
	}
	defer func() { err = errors.Join(err, rows.Close()) }()
	return rowsAsText(rows)
}

// rowsAsText writes each row as name="value" for every column, and sorts the rows.
func rowsAsText(rows *sql.Rows) ([]string, error) {
	columns, err := rows.Columns()
	if err != nil {
		return nil, err
	}
	cells := make([]sql.NullString, len(columns))
	into := make([]any, len(columns))
	for i := range cells {
		into[i] = &cells[i]
	}
	lines := []string{}
	for rows.Next() {
		err = rows.Scan(into...)
		if err != nil {
			return nil, err
		}
		lines = append(lines, rowAsText(columns, cells))
	}
	slices.Sort(lines)
	return lines, rows.Err()
}

func rowAsText(columns []string, cells []sql.NullString) string {
	parts := make([]string, len(columns))
	for i, c := range cells {
		parts[i] = fmt.Sprintf("%s=%q", columns[i], c.String)
		if !c.Valid {
			parts[i] = columns[i] + "=null"
		}
	}
	return strings.Join(parts, " ")
}

// Add adds a row, or a slice of rows, of any line type to the delta.
func (d *Delta) Add(rows any) error {
	for _, p := range projections {
		if p.add(d, rows) {
			return nil
		}
	}
	return fmt.Errorf("%T is no row of a projection", rows)
}

func (p table[T, R]) add(to *Delta, rows any) bool {
	switch r := rows.(type) {
	case T:
		*p.of(to) = append(*p.of(to), r)
	case []T:
		*p.of(to) = append(*p.of(to), r...)
	default:
		return false
	}
	return true
}

// LineAt gives what a projection has of the first row that an entry wrote in it, and whether there is one.
func (t *Tx) LineAt(table string, seq int64) (Line, bool, error) {
	rows, err := find[lineColumns](t.db.Table(table).Select("seq, n, ended, entry, batch").Where("seq = ?", seq).Order("n").Limit(1))
	if err != nil || len(rows) == 0 {
		return Line{}, false, err
	}
	return rows[0].out(), true, nil
}

// RecordsAt gives the rows of records that entries of those sequence numbers wrote, in order of
// recording.
func (t *Tx) RecordsAt(seqs []int64) ([]RecordRow, error) {
	if err := t.settle(); err != nil {
		return nil, err
	}
	slices.Sort(seqs)
	var out []RecordRow
	for len(seqs) > 0 {
		n := min(len(seqs), batchRows)
		rows, err := find[recordLine](t.db.Table("records").Where("seq IN ?", seqs[:n]).Order("seq, n"))
		if err != nil {
			return nil, err
		}
		for _, r := range rows {
			out = append(out, recordOut(r))
		}
		seqs = seqs[n:]
	}
	return out, nil
}

// Len is how many rows there are in the delta.
func (d *Delta) Len() int {
	n := 0
	for _, p := range projections {
		n += p.count(d)
	}
	return n
}

func (p table[T, R]) count(d *Delta) int { return len(*p.of(d)) }
