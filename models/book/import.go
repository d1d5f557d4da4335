package book

import (
	"context"
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"

	"github.com/google/uuid"

	"lodebook/models/program"
	"lodebook/models/store"
	"lodebook/models/table"
)

// ImportOptions say what to import and how.
type ImportOptions struct {
	Table    string // one of Tables
	Site     string
	File     io.ReaderAt
	Size     int64
	FileName string
	Read     table.Options
	DryRun   bool // check everything, write nothing
	Partial  bool // write the rows without faults
	Progress func(rows int, done, total int64)
}

// ImportReport says what became of an import. Kept are rows that would have undone a later edit:
// they were left out, and are no faults.
type ImportReport struct {
	Batch     string        `json:"batch"`
	Read      int           `json:"read"`
	Written   int           `json:"written"`
	Unchanged int           `json:"unchanged"`
	Faults    []table.Fault `json:"faults"`
	Kept      []table.Fault `json:"kept,omitempty"`
	Notes     []string      `json:"-"`
}

// Refused tells whether faults kept the import from being written.
func (r ImportReport) Refused(partial bool) bool { return len(r.Faults) > 0 && !partial }

// importer is one kind of table: its columns, and how a row of it becomes an entry.
type importer struct {
	known, required []string
	facts           func(*importing) []string
	row             func(*importing, table.Row) (rowDraft, []table.Fault)
}

// Tables are the tables that can be imported.
var Tables = []string{"people", "fixtures", "records", "events", "excusals", "pauses", "rights", "roster", "passages", "holders"}

var importers map[string]importer

func init() {
	importers = map[string]importer{
		"people":   {peopleColumns, []string{"code"}, personFactColumns, personRow},
		"fixtures": {fixtureColumns, []string{"code"}, fixtureFactColumns, fixtureRow},
		"records":  {recordColumns, []string{"record", "subject", "on"}, nil, recordRow},
		"events":   {eventColumns, []string{"event", "subject", "on"}, nil, eventRow},
		"excusals": {excusalColumns, []string{"item", "subject", "from", "to"}, nil, excusalRow},
		"rights":   {rightColumns, []string{"person", "zone", "from"}, nil, rightRow},
		"roster":   {rosterColumns, []string{"person", "from", "to"}, nil, dutyRow},
		"pauses":   {pauseColumns, []string{"subject", "from"}, nil, pauseRow},
	}
}

// rowDraft is one row read: the entry that it would make (nil body: nothing new), the content by
// which the row is known again, and what it would undo.
type rowDraft struct {
	id      string // given in the row, or empty
	content string
	key     store.SubjectKey // where its projected row is found again
	run     string           // rows of one run that follow one another and are equal are one
	body    body
	undoes  *table.Fault
}

// importing is one import under way.
type importing struct {
	*session
	o       ImportOptions
	c       *check
	book    uuid.UUID
	batch   string
	report  *ImportReport
	seen    map[uuid.UUID]int    // how often content of that hash came before
	last    map[string]uuid.UUID // the last content of each run
	entries []store.Entry
	veils   [][]store.Veil
	drafts  []draft
	failed  failedSheets
	idle    map[string]bool // of each kind and code of record, whether it answers no item
}

const importChunk = 1000

// errNothingStays rolls an import back after its report was made.
var errNothingStays = errors.New("nothing is to stay of this import")

// Import reads a table into the book: one transaction, one batch. Faults of rows are in the report;
// the error is about the import as a whole.
func (b *Book) Import(ctx context.Context, actor Actor, o ImportOptions) (ImportReport, error) {
	report := ImportReport{Faults: []table.Fault{}}
	imp, ok := importers[o.Table]
	_, doors := doorTables[o.Table]
	if !ok && !doors {
		return report, invalid("table", o.Table, "is no table that can be imported", "one of "+strings.Join(Tables, ", "))
	}
	if err := actor.may(ImportTables, o.Site); err != nil {
		return report, err
	}
	_, err := b.writeAlone(ctx, actor, func(s *session) error {
		in, err := s.startImport(o, &report)
		if err != nil {
			return err
		}
		if doors {
			err = in.runDoors()
		} else {
			err = in.run(imp)
		}
		if err != nil {
			return err
		}
		if o.DryRun || report.Refused(o.Partial) {
			return errNothingStays
		}
		return nil
	})
	if errors.Is(err, errNothingStays) {
		if report.Refused(o.Partial) {
			report.Written = 0
		}
		report.Batch = ""
		return report, nil
	}
	return report, err
}

func (s *session) startImport(o ImportOptions, report *ImportReport) (*importing, error) {
	if s.m.site(o.Site) == nil {
		return nil, &NotFound{"site", o.Site}
	}
	id, _, err := s.tx.Meta(store.MetaBookID)
	if err != nil {
		return nil, err
	}
	ns, err := uuid.Parse(id)
	if err != nil {
		return nil, fmt.Errorf("the book's identity is not readable: %w", err)
	}
	batch, err := s.b.newID(s.now)
	if err != nil {
		return nil, err
	}
	c := s.check(o.Site)
	c.imported = true
	return &importing{session: s, o: o, c: c, book: ns, batch: batch, report: report, seen: map[uuid.UUID]int{}, last: map[string]uuid.UUID{}, failed: failedSheets{}, idle: map[string]bool{}}, nil
}

func (in *importing) run(imp importer) error {
	var facts []string
	if imp.facts != nil {
		facts = imp.facts(in)
	}
	r, faults, err := table.Open(in.o.File, in.o.Size, imp.known, imp.required, facts, in.o.Read)
	if err != nil {
		return asImportError(err)
	}
	if len(faults) > 0 {
		in.report.Faults = append(in.report.Faults, faults...)
		return nil
	}
	err = in.rows(imp, r)
	if n := r.Serials(); n > 0 {
		in.report.Notes = append(in.report.Notes, fmt.Sprintf("%d dates were serial numbers of a spreadsheet", n))
	}
	return errors.Join(err, r.Close())
}

// asImportError makes what a person can mend of a file that is no table.
func asImportError(err error) error {
	var f *table.Fault
	if errors.As(err, &f) {
		return invalid("file", f.Value, f.Problem, f.Accepted)
	}
	return err
}

func (in *importing) rows(imp importer, r *table.Reader) error {
	for {
		row, faults, err := r.Next()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			return asImportError(err)
		}
		in.report.Read++
		if len(faults) == 0 {
			faults, err = in.one(imp, row)
			if err != nil {
				return err
			}
		}
		in.report.Faults = append(in.report.Faults, faults...)
		if in.o.Progress != nil && in.report.Read%500 == 0 {
			done, total := r.Progress()
			in.o.Progress(in.report.Read, done, total)
		}
	}
	return in.finish()
}

// one takes in one row.
func (in *importing) one(imp importer, row table.Row) ([]table.Fault, error) {
	d, faults := imp.row(in, row)
	if len(faults) > 0 {
		return faults, nil
	}
	id, again, err := in.identify(&d, row.Line)
	if err != nil {
		var conflict *Conflict
		if errors.As(err, &conflict) {
			return []table.Fault{{Line: row.Line, Column: "id", Value: d.id, Problem: "stands for another entry already: " + conflict.Recorded + "; given: " + conflict.Given, Accepted: "another identifier, or none"}}, nil
		}
		return nil, err
	}
	if d.undoes != nil {
		in.report.Kept = append(in.report.Kept, *d.undoes)
	}
	if again || d.undoes != nil || d.body == nil {
		in.report.Unchanged++
		return nil, nil
	}
	in.sign(d.body)
	in.failed.note(in, d.body)
	return nil, in.take(draft{id: id, site: in.o.Site, batch: in.batch, body: d.body})
}

// identify gives the row's identifier, and whether it is on record already (or follows its equal).
func (in *importing) identify(d *rowDraft, line int) (string, bool, error) {
	if d.id != "" {
		again, err := in.recorded(draft{id: d.id, site: in.o.Site, body: d.body})
		in.receipt = Receipt{}
		return d.id, again, err
	}
	hash, n, follows := in.known(d)
	if follows {
		return "", true, nil
	}
	for again := 0; ; again++ {
		id := contentID(hash, n, again)
		found, err := in.tx.EntryIDs([]string{id.String()})
		if err != nil {
			return "", false, err
		}
		seq, ok := found[id.String()]
		if !ok {
			return id.String(), false, nil
		}
		again, err := in.undone(seq)
		if err != nil {
			return "", false, err
		}
		if again {
			continue
		}
		return id.String(), true, in.keepCorrected(d, seq, line)
	}
}

// known gives the hash of the row's content, how many rows before it said the same, and whether it follows
// its equal and is one with it.
func (in *importing) known(d *rowDraft) (hash uuid.UUID, n int, follows bool) {
	hash = uuid.NewSHA1(in.book, []byte(strings.Join([]string{in.o.Site, in.o.Table, d.content}, "\x1f")))
	if d.run != "" {
		if in.last[d.run] == hash {
			return hash, 0, true
		}
		in.last[d.run] = hash
	}
	n = in.seen[hash]
	in.seen[hash]++
	return hash, n, false
}

// contentID is the identifier of the row after n equal ones; again counts how often its import was taken back.
func contentID(hash uuid.UUID, n, again int) uuid.UUID {
	if n == 0 && again == 0 {
		return hash
	}
	return uuid.NewSHA1(hash, fmt.Appendf(nil, "%d %d", n, again))
}

// undone tells whether the entry was taken back with the whole of its import: then the row may be
// imported anew.
func (in *importing) undone(seq int64) (bool, error) {
	l, ok, err := in.lineOf(seq)
	if err != nil || !ok || l.Ended == 0 {
		return false, err
	}
	for _, b := range in.m.batches {
		if b.ID == l.Batch {
			return b.Ended == l.Ended, nil
		}
	}
	return false, nil
}

// lineOf is the projected row that an entry of the table made.
func (in *importing) lineOf(seq int64) (store.Line, bool, error) {
	name := in.o.Table
	switch name {
	case "pauses":
		name = "excusals"
	case "roster":
		name = "duties"
	}
	return in.tx.LineAt(name, seq)
}

// keepCorrected lists a row whose entry was corrected or withdrawn by hand since.
func (in *importing) keepCorrected(d *rowDraft, seq int64, line int) error {
	l, ok, err := in.lineOf(seq)
	if ok && l.Ended != 0 && d.undoes == nil {
		d.undoes = &table.Fault{Line: line, Problem: "was imported before and has been corrected or withdrawn since", Accepted: "the later entry stands; change it on its page"}
	}
	return err
}

// take adds an entry to the chunk that is written next.
func (in *importing) take(d draft) error {
	e, v, err := in.b.encode(d, in.actor, in.now)
	if err != nil {
		return err
	}
	in.entries, in.veils, in.drafts = append(in.entries, e), append(in.veils, v), append(in.drafts, d)
	in.report.Written++
	// Rows about people and fixtures must see those before them, so they are written at once.
	if len(in.drafts) < importChunk && !slices.Contains([]string{"people", "fixtures"}, in.o.Table) {
		return nil
	}
	return in.flush()
}

func (in *importing) flush() error {
	err := in.session.append(in.entries, in.veils, in.drafts)
	in.entries, in.veils, in.drafts = in.entries[:0], in.veils[:0], in.drafts[:0]
	in.receipt = Receipt{}
	return err
}

// finish writes what is left and the entry that names the import.
func (in *importing) finish() error {
	if err := in.flush(); err != nil {
		return err
	}
	if err := in.failed.takeOut(in); err != nil {
		return err
	}
	for _, what := range sortedKeys(in.idle) {
		if in.idle[what] {
			in.report.Notes = append(in.report.Notes, "no item of the checklist asks for "+what+"; its records are kept but answer nothing")
		}
	}
	if in.report.Written == 0 {
		return nil
	}
	in.report.Batch = in.batch
	head := &batchBody{Table: in.o.Table, File: veiled(in.o.FileName, ""), Rows: in.report.Written}
	in.sign(head)
	e, v, err := in.b.encode(draft{id: in.batch, site: in.o.Site, body: head}, in.actor, in.now)
	if err != nil {
		return err
	}
	return in.session.append([]store.Entry{e}, [][]store.Veil{v}, []draft{{id: in.batch, site: in.o.Site, body: head}})
}

// answers tells whether some item of some version asks for the record.
func (s *siteModel) answers(what string) bool {
	if strings.HasPrefix(what, "appointment/") {
		return true // it fills a post, which items ask by who holds it
	}
	return s.declares(func(p *program.Program) bool {
		return slices.ContainsFunc(p.Items, func(i program.Item) bool { return slices.Contains(i.Records, what) })
	})
}
