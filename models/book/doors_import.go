package book

import (
	"context"
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/store"
	"lodebook/models/table"
)

// doorTables are the tables that come from the doors' own system. Their rows are no entries: only that they were
// brought in is one.
var doorTables = map[string]struct {
	known, required []string
	read            func(*importing, *table.Reader) error
}{
	"passages": {[]string{"at", "door", "badge", "direction"}, []string{"at", "door", "badge"}, (*importing).passages},
	"holders":  {[]string{"badge", "door"}, []string{"badge", "door"}, (*importing).holders},
}

// runDoors reads a table of the doors' own system.
func (in *importing) runDoors() error {
	t := doorTables[in.o.Table]
	r, faults, err := table.Open(in.o.File, in.o.Size, t.known, t.required, nil, in.o.Read)
	if err != nil {
		return asImportError(err)
	}
	if len(faults) > 0 {
		in.report.Faults = append(in.report.Faults, faults...)
		return nil
	}
	err = t.read(in, r)
	if n := r.Serials(); n > 0 {
		in.report.Notes = append(in.report.Notes, fmt.Sprintf("%d dates were serial numbers of a spreadsheet", n))
	}
	return errors.Join(err, r.Close())
}

const (
	passageChunk = 2048
	mostFaults   = 1000 // of millions of rows so many faults are listed
)

// passing is an import of passages under way. It keeps a chunk of them in memory, and of each door where its rows are.
type passing struct {
	*importing
	ctx    context.Context
	w      *store.PassageWriter
	rows   []store.PassageRow
	doors  map[string]*doorClock
	faults int
}

// doorClock follows the rows of one door through a file, to tell the two passes of an hour that comes twice.
type doorClock struct {
	last    time.Time   // the latest instant so far that is certain
	wall    time.Time   // the first instant of the last unsure row
	unsure  []unsureRow // in an hour that comes twice, in the order of the file
	ordered bool        // each row was as late as the one before, so far
	second  bool        // the clocks have been put back
}

// unsureRow is a row whose local time stands for either of two instants.
type unsureRow struct {
	row           store.PassageRow
	first, second time.Time
	fault         table.Fault
}

func (in *importing) passages(r *table.Reader) (err error) {
	ctx := context.Background() // the transaction has its own
	w, err := in.tx.PassageWriter(ctx)
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, w.Close()) }()
	p := &passing{importing: in, ctx: ctx, w: w, doors: map[string]*doorClock{}}
	err = eachRow(r, in, func(row table.Row, faults []table.Fault) error {
		if len(faults) == 0 {
			faults, err = p.one(row)
		}
		p.refuse(faults...)
		return err
	})
	if err != nil {
		return err
	}
	for _, door := range sortedKeys(p.doors) {
		p.settle(p.doors[door])
	}
	if err := p.flush(); err != nil {
		return err
	}
	if p.faults > len(in.report.Faults) {
		in.report.Notes = append(in.report.Notes, fmt.Sprintf("%d more faulty rows are not listed", p.faults-len(in.report.Faults)))
	}
	in.report.Unchanged = in.report.Read - in.report.Written - p.faults
	return in.head(in.report.Written > 0)
}

// eachRow calls fn with every row of a table, and tells how far it is.
func eachRow(r *table.Reader, in *importing, fn func(table.Row, []table.Fault) error) error {
	for {
		row, faults, err := r.Next()
		if errors.Is(err, io.EOF) {
			return nil
		}
		if err != nil {
			return asImportError(err)
		}
		in.report.Read++
		if err := fn(row, faults); err != nil {
			return err
		}
		if in.o.Progress != nil && in.report.Read%2000 == 0 {
			done, total := r.Progress()
			in.o.Progress(in.report.Read, done, total)
		}
	}
}

func (p *passing) refuse(faults ...table.Fault) {
	if len(faults) == 0 {
		return
	}
	p.faults++
	if len(p.report.Faults) < mostFaults {
		p.report.Faults = append(p.report.Faults, faults...)
	}
}

// one takes in one row.
func (p *passing) one(row table.Row) ([]table.Fault, error) {
	var faults []table.Fault
	instants, f := row.Instants("at", p.c.zone())
	if f != nil {
		faults = append(faults, *f)
	}
	x := store.PassageRow{Site: p.o.Site, Door: row.Text("door"), Badge: row.Text("badge"), Direction: strings.ToLower(row.Text("direction")), Batch: p.batch}
	if x.Door == "" {
		faults = append(faults, *row.Fault("door", "is empty", "the code of a door"))
	}
	if !slices.Contains([]string{"", "in", "out"}, x.Direction) {
		faults = append(faults, *row.Fault("direction", "is no direction", "in, out or nothing"))
	}
	if len(faults) > 0 {
		return faults, nil
	}
	if latest := instants[len(instants)-1]; latest.After(p.now.Add(5 * time.Minute)) {
		return []table.Fault{*row.Fault("at", "lies in the future", "an instant up to now")}, nil
	}
	d := p.doors[x.Door]
	if d == nil {
		d = &doorClock{ordered: true}
		p.doors[x.Door] = d
	}
	if len(instants) == 2 {
		_, _, f := row.Moment("at", p.c.zone()) // which says what would do
		p.unsure(d, unsureRow{x, instants[0], instants[1], *f})
		return nil, p.full()
	}
	x.At = instants[0]
	p.certain(d, x.At)
	p.rows = append(p.rows, x)
	return nil, p.full()
}

// certain follows a row whose instant is certain.
func (p *passing) certain(d *doorClock, at time.Time) {
	d.ordered = d.ordered && !at.Before(d.last)
	p.settle(d)
	d.last, d.second = at, false
}

// unsure follows a row in an hour that comes twice. Where the rows of a door are in order and their clock jumps back, all
// before were of the first pass and all from there on are of the second.
func (p *passing) unsure(d *doorClock, u unsureRow) {
	switch {
	case d.second:
		u.row.At = u.second
		p.rows = append(p.rows, u.row)
	case len(d.unsure) > 0 && d.ordered && u.first.Before(d.wall):
		for _, before := range d.unsure {
			before.row.At = before.first
			p.rows = append(p.rows, before.row)
		}
		u.row.At = u.second
		p.rows = append(p.rows, u.row)
		d.unsure, d.second = nil, true
	default:
		d.unsure = append(d.unsure, u)
	}
	d.wall = u.first
}

// settle refuses what is left unsure: nothing in the file tells which of the two instants is meant.
func (p *passing) settle(d *doorClock) {
	for _, u := range d.unsure {
		p.refuse(u.fault)
	}
	d.unsure = nil
}

func (p *passing) full() error {
	if len(p.rows) < passageChunk {
		return nil
	}
	return p.flush()
}

func (p *passing) flush() error {
	n, err := p.w.Add(p.rows)
	p.report.Written += n
	p.rows = p.rows[:0]
	return err
}

// head writes the entry that says what was brought in.
func (in *importing) head(written bool) error {
	if !written {
		return nil
	}
	in.report.Batch = in.batch
	body := &batchBody{Table: in.o.Table, File: veiled(in.o.FileName, ""), Rows: in.report.Written}
	in.sign(body)
	d := draft{id: in.batch, site: in.o.Site, body: body}
	e, v, err := in.b.encode(d, in.actor, in.now)
	if err != nil {
		return err
	}
	return in.append([]store.Entry{e}, [][]store.Veil{v}, []draft{d})
}

// holders reads the list of who can open which door. It takes the place of the list before.
func (in *importing) holders(r *table.Reader) error {
	var list []store.HolderRow
	err := eachRow(r, in, func(row table.Row, faults []table.Fault) error {
		x := store.HolderRow{Badge: row.Text("badge"), Door: row.Text("door")}
		for _, c := range [][2]string{{"badge", x.Badge}, {"door", x.Door}} {
			if c[1] == "" && len(faults) == 0 {
				faults = append(faults, *row.Fault(c[0], "is empty", "the "+c[0]+" as the doors' system knows it"))
			}
		}
		if len(faults) > 0 {
			in.report.Faults = append(in.report.Faults, faults...)
			return nil
		}
		list = append(list, x)
		return nil
	})
	if err != nil || in.report.Refused(in.o.Partial) {
		return err
	}
	slices.SortFunc(list, func(a, b store.HolderRow) int {
		return strings.Compare(a.Door+"\x00"+a.Badge, b.Door+"\x00"+b.Badge)
	})
	list = slices.Compact(list)
	same, err := in.sameList(list)
	if err != nil {
		return err
	}
	if same {
		in.report.Unchanged = len(list)
		return nil
	}
	in.report.Written = len(list)
	if err := in.tx.PutHolders(context.Background(), in.batch, list); err != nil {
		return err
	}
	return in.head(true)
}

// sameList tells whether the list was brought in today already, as it is.
func (in *importing) sameList(list []store.HolderRow) (bool, error) {
	last, ok := in.m.holderList(in.o.Site, in.now)
	if !ok || civil.DayOf(last.At, in.c.zone()) != in.c.today() {
		return false, nil
	}
	before, err := in.tx.Holders(last.ID)
	return slices.Equal(before, list), err
}

// holderList is the import of the list of holders that was the last at a moment.
func (m *model) holderList(site string, at time.Time) (store.BatchRow, bool) {
	for i := len(m.batches) - 1; i >= 0; i-- {
		if b := m.batches[i]; b.Table == "holders" && b.Site == site && b.Ended == 0 && !b.At.After(at) {
			return b, true
		}
	}
	return store.BatchRow{}, false
}
