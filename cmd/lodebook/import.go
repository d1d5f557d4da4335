package main

import (
	"encoding/json"
	"errors"
	"fmt"
	"os"
	"path/filepath"

	"lodebook/models/book"
	"lodebook/models/table"
)

type importCommand struct {
	What string `arg:"" optional:"" help:"people, fixtures, records, events, excusals, pauses, rights or roster."`
	File string `arg:"" optional:"" help:"The CSV or XLSX file."`
	bookFlag
	asFlag
	Site    string `help:"Code of the site." placeholder:"CODE"`
	DryRun  bool   `help:"Check every row, write nothing."`
	Partial bool   `help:"Write the rows without faults and leave the others out."`
	Dates   string `enum:",dmy,mdy" default:"" help:"How a date such as 03/04/2025 is meant: dmy or mdy."`
	Serials string `enum:"1900,1904" default:"1900" help:"The date system of serial numbers in a CSV file."`
	Undo    string `help:"Identifier of an import to take back whole." placeholder:"BATCH"`
	Format  string `enum:"table,json" default:"table" help:"table or json."`
}

// Run imports a table, or takes an import back.
func (c *importCommand) Run(a *app) error {
	if c.Undo != "" {
		return a.open(c.bookFlag, func(b *book.Book) error { return c.undo(a, b) })
	}
	if c.What == "" || c.File == "" || c.Site == "" {
		return &exit{exitUsage, errors.New("give WHAT, FILE and --site, or --undo BATCH")}
	}
	f, err := os.Open(c.File)
	if err != nil {
		return err
	}
	info, err := f.Stat()
	if err != nil {
		return errors.Join(err, f.Close())
	}
	err = a.open(c.bookFlag, func(b *book.Book) error { return c.read(a, b, f, info.Size()) })
	return errors.Join(err, f.Close())
}

func (c *importCommand) undo(a *app, b *book.Book) error {
	actor, err := a.actor(b, c.asFlag)
	if err != nil {
		return err
	}
	if _, err := b.UndoImport(a.ctx, actor, c.Undo); err != nil {
		return err
	}
	a.say("The import %s is taken back.", c.Undo)
	return nil
}

func (c *importCommand) read(a *app, b *book.Book, f *os.File, size int64) error {
	actor, err := a.actor(b, c.asFlag)
	if err != nil {
		return err
	}
	read := table.Options{Dates: table.DateOrder(c.Dates)}
	if c.Serials == "1904" {
		read.Serials = table.Epoch1904
	}
	report, err := b.Import(a.ctx, actor, book.ImportOptions{
		Table: c.What, Site: c.Site, File: f, Size: size, FileName: filepath.Base(c.File), Read: read,
		DryRun: c.DryRun, Partial: c.Partial, Progress: a.progress(),
	})
	if a.terminal {
		_, _ = fmt.Fprint(a.stderr, "\r\x1b[K")
	}
	if err != nil {
		return err
	}
	return c.tell(a, report)
}

// progress draws how far a long import is, where somebody is looking.
func (a *app) progress() func(rows int, done, total int64) {
	if !a.terminal {
		return nil
	}
	return func(rows int, done, total int64) {
		share := int64(100)
		if total > 0 {
			share = done * 100 / total
		}
		_, _ = fmt.Fprintf(a.stderr, "\r\x1b[K%d rows, %d %%", rows, share)
	}
}

func (c *importCommand) tell(a *app, r book.ImportReport) error {
	if c.Format == "json" {
		if err := writeJSON(a.stdout, r); err != nil {
			return err
		}
	}
	for _, f := range r.Faults {
		a.say("%s", f.Error())
	}
	for _, k := range r.Kept {
		a.say("Left out: %s", k.Error())
	}
	for _, n := range r.Notes {
		a.say("%s.", upperFirst(n))
	}
	refused := r.Refused(c.Partial)
	switch {
	case refused:
		a.say("%d rows read, %d faults; nothing was written.", r.Read, len(r.Faults))
		return &exit{status: exitRefused}
	case c.DryRun:
		a.say("%d rows read; %d would be written, %d are on record already. Nothing was written.", r.Read, r.Written, r.Unchanged)
	case r.Written == 0:
		a.say("%d rows read; all of them are on record already. Nothing changed.", r.Read)
	default:
		a.say("%d rows read, %d written, %d on record already. Import %s.", r.Read, r.Written, r.Unchanged, r.Batch)
	}
	if len(r.Faults) > 0 {
		a.say("%d faulty rows were left out.", len(r.Faults))
		return &exit{status: exitPartial}
	}
	return nil
}

func upperFirst(s string) string {
	if s == "" || s[0] < 'a' || s[0] > 'z' {
		return s
	}
	return string(s[0]-'a'+'A') + s[1:]
}

func writeJSON(w interface{ Write([]byte) (int, error) }, v any) error {
	e := json.NewEncoder(w)
	e.SetIndent("", "  ")
	e.SetEscapeHTML(false)
	return e.Encode(v)
}
