package main

import (
	"encoding/csv"
	"fmt"
	"strconv"
	"strings"
	"text/tabwriter"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/standing"
)

// listing says how standings are written.
type listing struct {
	format string
	owner  bool
	why    bool
}

// list writes standings to standard output.
func (a *app) list(rows []book.Row, l listing) error {
	switch l.format {
	case "json":
		out := make([]book.RowJSON, len(rows))
		for i, r := range rows {
			out[i] = r.JSON(l.owner)
		}
		return writeJSON(a.stdout, out)
	case "csv":
		return a.listCSV(rows, l)
	default:
		return a.listTable(rows, l)
	}
}

func (a *app) listCSV(rows []book.Row, l listing) error {
	w := csv.NewWriter(a.stdout)
	header := []string{"site", "item", "version", "asks", "subject", "standing", "due", "start", "rule", "record", "in_grace", "excused_until"}
	if l.owner {
		header = append(header, "owner")
	}
	if l.why {
		header = append(header, "why")
	}
	if err := w.Write(header); err != nil {
		return err
	}
	for _, r := range rows {
		cells := []string{
			r.Site, r.Item, strconv.Itoa(r.Version), string(r.Subject.Asks), r.Subject.Code, string(r.Word), day(r.Due), day(r.Start),
			string(r.Rule), r.Record, strconv.FormatBool(r.InGrace), day(r.ExcusedUntil),
		}
		if l.owner {
			cells = append(cells, r.Owner)
		}
		if l.why {
			cells = append(cells, strings.Join(r.Why, "; "))
		}
		if err := w.Write(cells); err != nil {
			return err
		}
	}
	w.Flush()
	return w.Error()
}

func day(d *civil.Day) string {
	if d == nil {
		return ""
	}
	return d.String()
}

func (a *app) listTable(rows []book.Row, l listing) error {
	w := tabwriter.NewWriter(a.stdout, 0, 4, 2, ' ', 0)
	lines := []string{"STANDING\tITEM\tSUBJECT\tDUE\t"}
	for _, r := range rows {
		lines = append(lines, fmt.Sprintf("%s\t%s\t%s\t%s\t%s", r.Word, r.Item, r.Subject.Code, dueWords(r), r.SubjectName))
		if l.why {
			for _, s := range r.Why {
				lines = append(lines, "\t  "+s)
			}
		}
	}
	for _, s := range lines {
		if _, err := fmt.Fprintln(w, s); err != nil {
			return err
		}
	}
	if err := w.Flush(); err != nil {
		return err
	}
	if len(rows) == 0 {
		a.say("Nothing to list.")
	}
	return nil
}

func dueWords(r book.Row) string {
	if r.Word == standing.Excused && r.ExcusedUntil != nil {
		return "until " + r.ExcusedUntil.String()
	}
	if r.InGrace {
		return day(r.Due) + ", in grace"
	}
	return day(r.Due)
}
