package main

import (
	"encoding/csv"
	"fmt"
	"strings"
	"text/tabwriter"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
)

type visitsCommand struct {
	bookFlag
	siteFlag
	asFlag
	formatFlag
	On   string `help:"The day (YYYY-MM-DD); default: today at the site." placeholder:"DAY"`
	Open bool   `help:"Only those who are here, or are still to come."`
}

// Run lists visits.
func (c *visitsCommand) Run(a *app) error {
	return a.openSite(c.bookFlag, c.Site, func(b *book.Book) error {
		actor, err := a.actor(b, c.asFlag)
		if err != nil {
			return err
		}
		q := book.VisitQuery{Site: c.Site, Open: c.Open}
		if c.On != "" {
			d, err := civil.ParseDay(c.On)
			if err != nil {
				return &book.Invalid{Faults: []book.Fault{{Field: "--on", Value: c.On, Problem: "is not a day", Accepted: "write it as YYYY-MM-DD"}}}
			}
			q.On = &d
		}
		list, err := b.Visits(a.ctx, actor, q)
		if err != nil {
			return err
		}
		if c.Format == "json" {
			out := make([]book.VisitJSON, len(list))
			for i, v := range list {
				out[i] = v.JSON()
			}
			return writeJSON(a.stdout, out)
		}
		rows := [][]string{{"id", "visitor", "employer", "kind", "zones", "from", "to", "escort", "person", "arrived", "over", "step", "screener", "outcome", "overdue"}}
		for _, v := range list {
			rows = append(rows, visitCells(v))
		}
		if c.Format == "csv" {
			return csv.NewWriter(a.stdout).WriteAll(rows)
		}
		return a.visitTable(rows)
	})
}

func visitCells(v book.VisitView) []string {
	step := string(v.Over)
	if v.Here() {
		step = string(book.Arrived)
	}
	return []string{
		v.Entry, v.Visitor, v.Employer, v.Kind, strings.Join(v.Zones, "; "), v.From.Format(time.RFC3339), v.To.Format(time.RFC3339), v.Escort, v.Person,
		instant(v.ArrivedAt), instant(v.OverAt), step, v.Screener, string(v.Outcome), fmt.Sprint(v.Overdue),
	}
}

// instant is an instant that may be absent.
func instant(t *time.Time) string {
	if t == nil {
		return ""
	}
	return t.Format(time.RFC3339)
}

func (a *app) visitTable(rows [][]string) error {
	w := tabwriter.NewWriter(a.stdout, 0, 4, 2, ' ', 0)
	for i, r := range rows {
		line := strings.Join([]string{r[1], r[2], r[4], r[5], r[6], r[7], r[11]}, "\t") + "\t"
		if i == 0 {
			line = strings.ToUpper(line)
		}
		if _, err := fmt.Fprintln(w, line); err != nil {
			return err
		}
	}
	if len(rows) == 1 {
		a.say("No visits.")
	}
	return w.Flush()
}
