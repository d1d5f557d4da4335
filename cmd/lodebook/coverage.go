package main

import (
	"encoding/csv"
	"fmt"
	"strconv"
	"text/tabwriter"
	"time"

	"lodebook/models/book"
)

type coverageCommand struct {
	bookFlag
	siteFlag
	asFlag
	formatFlag
	From    string `help:"The first day (YYYY-MM-DD); default: today at the site." placeholder:"DAY"`
	To      string `help:"The last day (YYYY-MM-DD); default: four weeks from the first." placeholder:"DAY"`
	Item    string `help:"Only this item." placeholder:"CODE"`
	KnownAt string `help:"As the book knew it at this moment." placeholder:"MOMENT"`
}

// Run lists when a site is short of people.
func (c *coverageCommand) Run(a *app) error {
	return a.openSite(c.bookFlag, c.Site, func(b *book.Book) error {
		actor, err := a.actor(b, c.asFlag)
		if err != nil {
			return err
		}
		q := book.CoverQuery{Site: c.Site, Item: c.Item}
		if q.From, q.To, err = b.CoverTime(a.ctx, c.Site, c.From, c.To); err != nil {
			return err
		}
		if q.KnownAt, err = a.maybeMoment(b, c.Site, "--known-at", c.KnownAt); err != nil {
			return err
		}
		x, err := b.Coverage(a.ctx, actor, q)
		if err != nil {
			return err
		}
		switch c.Format {
		case "json":
			out := make([]book.UncoveredJSON, len(x.Rows))
			for i, r := range x.Rows {
				out[i] = r.JSON()
			}
			return writeJSON(a.stdout, out)
		case "csv":
			return a.coverageCSV(x)
		default:
			return a.coverageTable(x)
		}
	})
}

func (a *app) coverageCSV(x book.Coverage) error {
	w := csv.NewWriter(a.stdout)
	if err := w.Write(book.CoverColumns); err != nil {
		return err
	}
	for _, r := range x.Rows {
		if err := w.Write(r.Cells()); err != nil {
			return err
		}
	}
	w.Flush()
	return w.Error()
}

func (a *app) coverageTable(x book.Coverage) error {
	w := tabwriter.NewWriter(a.stdout, 0, 4, 2, ' ', 0)
	if _, err := fmt.Fprintln(w, "ITEM\tFROM\tTO\tTHERE\tNEEDED\t"); err != nil {
		return err
	}
	at := func(t time.Time) string { return t.In(x.Site.Location).Format("2006-01-02 15:04") }
	for _, r := range x.Rows {
		if _, err := fmt.Fprintf(w, "%s\t%s\t%s\t%s\t%s\t%s\n", r.Item, at(r.From), at(r.To), strconv.Itoa(r.There), strconv.Itoa(r.Needed), r.Title); err != nil {
			return err
		}
	}
	for _, i := range x.Items {
		if i.To.IsZero() {
			a.say("%s: no roster is on record.", i.Code)
		} else {
			a.say("%s: reckoned from %s to %s.", i.Code, at(i.From), at(i.To))
		}
	}
	if len(x.Items) == 0 {
		a.say("No item of the checklist asks for people on duty.")
	}
	return w.Flush()
}
