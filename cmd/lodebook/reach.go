package main

import (
	"encoding/csv"
	"fmt"
	"strconv"
	"strings"
	"text/tabwriter"
	"time"

	"lodebook/models/book"
)

type reachCommand struct {
	bookFlag
	siteFlag
	asFlag
	formatFlag
	Zone    string `required:"" help:"The restricted zone." placeholder:"CODE"`
	At      string `help:"The moment (RFC 3339, or local time at the site); default: now." placeholder:"MOMENT"`
	KnownAt string `help:"As the book knew it at this moment." placeholder:"MOMENT"`
	Person  string `help:"Only this person." placeholder:"CODE"`
}

// Run lists who is entitled to a zone, until when, and why not.
func (c *reachCommand) Run(a *app) error {
	return a.openSite(c.bookFlag, c.Site, func(b *book.Book) error {
		actor, err := a.actor(b, c.asFlag)
		if err != nil {
			return err
		}
		q := book.ReachQuery{Site: c.Site, Zone: c.Zone, Person: c.Person}
		if q.At, err = a.maybeMoment(b, c.Site, "--at", c.At); err != nil {
			return err
		}
		if q.KnownAt, err = a.maybeMoment(b, c.Site, "--known-at", c.KnownAt); err != nil {
			return err
		}
		x, err := b.Reach(a.ctx, actor, q)
		if err != nil {
			return err
		}
		switch c.Format {
		case "json":
			out := make([]book.ReachJSON, len(x.Rows))
			for i, r := range x.Rows {
				out[i] = r.JSON()
			}
			return writeJSON(a.stdout, out)
		case "csv":
			return a.reachCSV(x.Rows)
		default:
			return a.reachTable(x)
		}
	})
}

// maybeMoment reads an instant that may be left out: nil.
func (a *app) maybeMoment(b *book.Book, site, flag, text string) (*time.Time, error) {
	if text == "" {
		return nil, nil
	}
	t, err := b.Moment(a.ctx, site, flag, text)
	return &t, err
}

func (a *app) reachCSV(rows []book.ReachRow) error {
	w := csv.NewWriter(a.stdout)
	if err := w.Write([]string{"person", "zone", "entitled", "until", "reasons"}); err != nil {
		return err
	}
	for _, r := range rows {
		until := ""
		if r.Until != nil {
			until = r.Until.UTC().Format(time.RFC3339)
		}
		if err := w.Write([]string{r.Person, r.Zone, strconv.FormatBool(r.Entitled), until, reasonCells(r.Reasons)}); err != nil {
			return err
		}
	}
	w.Flush()
	return w.Error()
}

func reasonCells(reasons []book.ReachReason) string {
	cells := make([]string, len(reasons))
	for i, x := range reasons {
		cells[i] = x.String()
	}
	return strings.Join(cells, "; ")
}

func (a *app) reachTable(x book.Reached) error {
	w := tabwriter.NewWriter(a.stdout, 0, 4, 2, ' ', 0)
	if _, err := fmt.Fprintln(w, "ENTITLED\tPERSON\tUNTIL\tWHY NOT\t"); err != nil {
		return err
	}
	in := 0
	for _, r := range x.Rows {
		word, until := "no", ""
		if r.Entitled {
			word, in = "yes", in+1
		}
		if r.Until != nil {
			until = r.Until.In(x.Site.Location).Format("2006-01-02 15:04")
		}
		if _, err := fmt.Fprintf(w, "%s\t%s\t%s\t%s\t%s\n", word, r.Person, until, reasonCells(r.Reasons), r.Name); err != nil {
			return err
		}
	}
	a.say("%d of %d are entitled to zone %s at %s. It is a record and no permission: everybody is screened at the door.",
		in, len(x.Rows), x.Zone.Code, x.At.In(x.Site.Location).Format("2006-01-02 15:04"))
	return w.Flush()
}
