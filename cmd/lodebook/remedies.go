package main

import (
	"fmt"
	"slices"
	"strconv"
	"text/tabwriter"

	"lodebook/models/book"
	"lodebook/models/table"
)

type remediesCommand struct {
	bookFlag
	siteFlag
	asFlag
	formatFlag
	Open bool `help:"Only those that are not closed."`
}

// Run lists the remedies: overdue ones first.
func (c *remediesCommand) Run(a *app) error {
	return a.openSite(c.bookFlag, c.Site, func(b *book.Book) error {
		actor, err := a.actor(b, c.asFlag)
		if err != nil {
			return err
		}
		list, err := b.Remedies(a.ctx, actor, c.Site, c.Open)
		if err != nil {
			return err
		}
		if c.Format == "json" {
			out := make([]book.RemedyJSON, len(list))
			for i, x := range list {
				out[i] = x.JSON(c.Site)
			}
			return writeJSON(a.stdout, out)
		}
		rows := make([][]string, len(list))
		for i, x := range list {
			rows[i] = x.Cells(c.Site)
			if c.Format == "table" {
				state := x.State
				if x.Overdue {
					state = "overdue"
				}
				rows[i] = []string{strconv.Itoa(x.Number), state, x.Due.String(), x.Severity, x.OwnerName, x.About}
			}
		}
		return a.listRows(c.Format, []string{"NUMBER", "STATE", "DUE", "SEVERITY", "OWNER", "FOR"}, book.RemedyColumns, rows)
	})
}

type incidentsCommand struct {
	bookFlag
	siteFlag
	asFlag
	formatFlag
}

// Run lists the incidents to a safety officer.
func (c *incidentsCommand) Run(a *app) error {
	return a.openSite(c.bookFlag, c.Site, func(b *book.Book) error {
		actor, err := a.actor(b, c.asFlag)
		if err != nil {
			return err
		}
		list, err := b.Incidents(a.ctx, actor, c.Site)
		if err != nil {
			return fmt.Errorf("%w; name a safety officer with --as", err)
		}
		if c.Format == "json" {
			out := make([]book.IncidentJSON, len(list))
			for i, x := range list {
				out[i] = x.JSON(c.Site)
			}
			return writeJSON(a.stdout, out)
		}
		rows := make([][]string, len(list))
		for i, x := range list {
			rows[i] = x.Cells(c.Site)
			if c.Format == "table" {
				rows[i] = []string{strconv.Itoa(x.Number), x.At.Format("2006-01-02 15:04Z"), x.Kind, x.Zone, x.Severity, strconv.Itoa(len(x.Remedies)), x.What}
			}
		}
		return a.listRows(c.Format, []string{"NUMBER", "AT", "KIND", "ZONE", "SEVERITY", "REMEDIES", "WHAT"}, book.IncidentColumns, rows)
	})
}

// listRows writes rows as a table for a person, or as CSV, each with its own header.
func (a *app) listRows(format string, head, columns []string, rows [][]string) error {
	if format == "csv" {
		return table.Write(a.stdout, columns, slices.Values(rows))
	}
	w := tabwriter.NewWriter(a.stdout, 0, 4, 2, ' ', 0)
	for _, row := range append([][]string{head}, rows...) {
		for _, cell := range row {
			if _, err := fmt.Fprint(w, cell+"\t"); err != nil {
				return err
			}
		}
		if _, err := fmt.Fprintln(w); err != nil {
			return err
		}
	}
	if len(rows) == 0 {
		a.say("Nothing to list.")
	}
	return w.Flush()
}
