package book

import (
	"context"
	"errors"
	"fmt"
	"iter"
	"runtime"
	"strings"
	"sync"

	"lodebook/models/store"
	"lodebook/models/table"
)

// BulkRow is a row of a table in the form that a person would type it: a PersonForm, FixtureForm, RecordForm,
// EventForm, ExcusalForm, PauseForm, RightForm or DutyForm without an ID. Days are written as YYYY-MM-DD, subjects best as kind:code.
type BulkRow interface {
	table() string
	draft(in *importing, c rowFaults) (rowDraft, []table.Fault)
}

// BulkTable is one table of one site.
type BulkTable struct {
	Table, Site, FileName string
	Rows                  iter.Seq[BulkRow]
}

// Bulk takes in many tables in one transaction, much quicker than Import does, and ends in the same entries, rows
// and tree as an Import of each in that order would. What makes it quick is that nothing is looked up: it
// takes a table only of a site that has none of its rows yet, and a single faulty row (a *table.Fault) refuses
// all of it. There is a report for each table.
func (b *Book) Bulk(ctx context.Context, actor Actor, tables iter.Seq[BulkTable]) ([]ImportReport, error) {
	var reports []ImportReport
	_, err := b.submit(&request{ctx: ctx, actor: actor, alone: true, bulk: true, fn: func(s *session) error {
		next, err := s.tx.Size()
		if err != nil {
			return err
		}
		k := newBulk(s, next)
		for t := range tables {
			var report ImportReport
			report, err = k.table(t)
			if err != nil {
				break
			}
			reports = append(reports, report)
		}
		return k.finish(err)
	}})
	if err != nil {
		return nil, err
	}
	return reports, nil
}

// bulk is a bulk under way: rows are made into drafts one after the other, drafts into entries by as many workers
// as there are cores, and entries are written in their order by one.
type bulk struct {
	*session
	next     int64 // sequence number of the next entry
	filling  *bulkChunk
	toEncode chan *bulkChunk
	toWrite  chan *bulkChunk
	workers  sync.WaitGroup
	written  chan error // once: how the writing ended
	failed   chan struct{}
}

// bulkChunk is what goes through the bulk together.
type bulkChunk struct {
	first    int64
	drafts   []draft
	veils    [][]store.Veil
	entries  []store.Entry
	rows     []any
	absent   *store.EntryFilter // entries that must not be there yet
	encoded  chan struct{}
	encoding error
}

const bulkChunkSize = 2000

func newBulk(s *session, next int64) *bulk {
	k := &bulk{
		session: s, next: next, toEncode: make(chan *bulkChunk, 2), toWrite: make(chan *bulkChunk, 4),
		written: make(chan error, 1), failed: make(chan struct{}),
	}
	for range runtime.GOMAXPROCS(0) {
		k.workers.Go(func() {
			for c := range k.toEncode {
				c.encoding = k.encode(c)
				close(c.encoded)
			}
		})
	}
	go k.write()
	return k
}

// table takes one table in.
func (k *bulk) table(t BulkTable) (ImportReport, error) {
	report := ImportReport{Faults: []table.Fault{}}
	if bulkKinds[t.Table] == "" {
		return report, invalid("table", t.Table, "is no table that can be imported", "one of "+strings.Join(sortedKeys(bulkKinds), ", "))
	}
	if err := k.actor.may(ImportTables, t.Site); err != nil {
		return report, err
	}
	if err := k.send(&bulkChunk{absent: &store.EntryFilter{Kinds: []string{bulkKinds[t.Table]}, Site: t.Site, Limit: 1}}); err != nil {
		return report, err
	}
	in, err := k.startImport(ImportOptions{Table: t.Table, Site: t.Site, FileName: t.FileName}, &report)
	if err != nil {
		return report, err
	}
	for row := range t.Rows {
		report.Read++
		if err := k.row(in, row); err != nil {
			return report, err
		}
	}
	return report, k.head(in)
}

// bulkKinds are the kinds of entry that the tables make.
var bulkKinds = map[string]string{
	"people": kindPerson, "fixtures": kindFixture, "records": kindRecord, "events": kindEvent, "excusals": kindExcusal, "pauses": kindPause, "rights": kindRight, "roster": kindDuty,
}

// row takes one row in.
func (k *bulk) row(in *importing, row BulkRow) error {
	if row.table() != in.o.Table {
		return fmt.Errorf("a row of %s was given among %s", row.table(), in.o.Table)
	}
	d, faults := row.draft(in, rowFaults{line: in.report.Read})
	if len(faults) > 0 {
		return &faults[0]
	}
	if d.id != "" {
		return &table.Fault{Line: in.report.Read, Column: "id", Value: d.id, Problem: "is given", Accepted: "no identifier: in bulk each row gets its own"}
	}
	hash, n, follows := in.known(&d)
	if d.undoes != nil {
		in.report.Kept = append(in.report.Kept, *d.undoes)
	}
	if follows || d.undoes != nil || d.body == nil {
		in.report.Unchanged++
		return nil
	}
	in.report.Written++
	return k.take(draft{id: contentID(hash, n, 0).String(), site: in.o.Site, batch: in.batch, body: d.body})
}

// head writes the entry that names the import.
func (k *bulk) head(in *importing) error {
	if in.report.Written == 0 {
		return nil
	}
	in.report.Batch = in.batch
	return k.take(draft{id: in.batch, site: in.o.Site, body: &batchBody{Table: in.o.Table, File: veiled(in.o.FileName, ""), Rows: in.report.Written}})
}

// take seals the draft and adds it to the chunk that is sent next. Rows about people and fixtures are taken
// in at once: those after them are checked against them.
func (k *bulk) take(d draft) error {
	k.sign(d.body)
	veils, err := seal(d.body, k.b.random)
	if err != nil {
		return err
	}
	c := k.filling
	if c == nil {
		c = &bulkChunk{first: k.next, drafts: make([]draft, 0, bulkChunkSize)}
		k.filling = c
	}
	c.drafts, c.veils = append(c.drafts, d), append(c.veils, veils)
	if kind := d.body.kind(); kind == kindPerson || kind == kindFixture {
		if err := k.m.takeRows(k.applied(d, k.next)); err != nil {
			return err
		}
	}
	k.next++
	if len(c.drafts) == bulkChunkSize {
		return k.flush()
	}
	return nil
}

func (k *bulk) applied(d draft, seq int64) []any {
	return d.body.apply(appliedOf(store.Entry{ID: d.id, Site: d.site, Batch: d.batch, Actor: k.actor.id(), RecordedAt: k.now}, seq, k.m.zone))
}

func (k *bulk) flush() error {
	c := k.filling
	k.filling = nil
	if c == nil {
		return nil
	}
	return k.send(c)
}

// send passes a chunk on, behind what is being filled. It fails once the writing has; why, finish tells.
func (k *bulk) send(c *bulkChunk) error {
	if c.absent != nil {
		if err := k.flush(); err != nil {
			return err
		}
	}
	c.encoded = make(chan struct{})
	for _, to := range []chan *bulkChunk{k.toWrite, k.toEncode} {
		select {
		case to <- c:
		case <-k.failed:
			return errBulkStopped
		}
	}
	return nil
}

// errBulkStopped ends the making of rows whose writing has failed.
var errBulkStopped = errors.New("the bulk was not written")

// encode makes the entries and the rows of a chunk.
func (k *bulk) encode(c *bulkChunk) error {
	c.entries = make([]store.Entry, len(c.drafts))
	for i := range c.drafts {
		e, err := c.drafts[i].encode(k.actor, k.now)
		if err != nil {
			return err
		}
		c.entries[i] = e
		c.rows = append(c.rows, k.applied(c.drafts[i], c.first+int64(i))...)
	}
	return nil
}

// write writes the chunks in order.
func (k *bulk) write() {
	var err error
	for c := range k.toWrite {
		if err != nil {
			continue // what is under way is let run out
		}
		<-c.encoded
		err = c.encoding
		if err == nil {
			err = k.put(c)
		}
		if err != nil {
			close(k.failed)
		}
	}
	k.written <- err
}

func (k *bulk) put(c *bulkChunk) error {
	if c.absent != nil {
		there, err := k.tx.Entries(*c.absent)
		if err == nil && len(there) > 0 {
			err = invalid("site", c.absent.Site, "has entries of the kind "+c.absent.Kinds[0]+" already", "a site without any; import the table instead")
		}
		return err
	}
	first, err := k.tx.Append(c.entries, c.veils)
	if err != nil {
		return err
	}
	if first != c.first {
		return fmt.Errorf("entry %d was written as entry %d", c.first, first)
	}
	return k.tx.Put(c.rows...)
}

// finish waits until everything is written, and tells why if it is not; err is why the rows ended before
// their end, or nil.
func (k *bulk) finish(err error) error {
	if err == nil {
		err = k.flush()
	}
	close(k.toEncode)
	close(k.toWrite)
	k.workers.Wait()
	written := <-k.written
	if errors.Is(err, errBulkStopped) {
		return written
	}
	return errors.Join(err, written)
}
