package main

import (
	"bufio"
	"encoding/csv"
	"encoding/json"
	"fmt"
	"strings"
	"text/tabwriter"
	"time"

	"lodebook/models/book"
)

type passagesCommand struct {
	bookFlag
	siteFlag
	asFlag
	formatFlag
	From    string `required:"" help:"The first moment (RFC 3339, or local time at the site)." placeholder:"MOMENT"`
	To      string `required:"" help:"The moment before which it ends." placeholder:"MOMENT"`
	KnownAt string `help:"Judged as the book knew it at this moment." placeholder:"MOMENT"`
}

// Run lists the door events of a time, each judged; it writes them as it reads them.
func (c *passagesCommand) Run(a *app) error {
	return a.openSite(c.bookFlag, c.Site, func(b *book.Book) error {
		actor, err := a.actor(b, c.asFlag)
		if err != nil {
			return err
		}
		q := book.PassageQuery{Site: c.Site}
		if q.From, err = b.Moment(a.ctx, c.Site, "--from", c.From); err != nil {
			return err
		}
		if q.To, err = b.Moment(a.ctx, c.Site, "--to", c.To); err != nil {
			return err
		}
		if q.KnownAt, err = a.maybeMoment(b, c.Site, "--known-at", c.KnownAt); err != nil {
			return err
		}
		out := bufio.NewWriterSize(a.stdout, 1<<16)
		w := passageWriters[c.Format](out)
		counts, err := b.Passages(a.ctx, actor, q, w.row)
		if err == nil {
			err = w.end()
		}
		if err == nil {
			err = out.Flush()
		}
		if err != nil {
			return err
		}
		a.say("%s.", upperFirst(verdictCounts(counts)))
		return nil
	})
}

// verdictCounts says how many passages there were of each verdict.
func verdictCounts(counts map[book.PassageVerdict]int) string {
	total := 0
	var parts []string
	for _, v := range book.Verdicts {
		total += counts[v]
		if counts[v] > 0 {
			parts = append(parts, fmt.Sprintf("%d %s", counts[v], v.Words()))
		}
	}
	if total == 0 {
		return "no passages"
	}
	return fmt.Sprintf("%d passages: %s", total, strings.Join(parts, ", "))
}

// passageWriter writes passages one by one.
type passageWriter struct {
	row func(book.PassageView) error
	end func() error
}

var passageWriters = map[string]func(*bufio.Writer) passageWriter{
	"json": passagesJSON, "csv": passagesCSV, "table": passagesTable,
}

func passagesJSON(w *bufio.Writer) passageWriter {
	sep := "[\n  "
	return passageWriter{
		func(p book.PassageView) error {
			line, err := json.Marshal(p.JSON())
			if err == nil {
				_, err = w.WriteString(sep)
			}
			if err == nil {
				_, err = w.Write(line)
			}
			sep = ",\n  "
			return err
		},
		func() error {
			text := "\n]\n"
			if strings.HasPrefix(sep, "[") {
				text = "[]\n"
			}
			_, err := w.WriteString(text)
			return err
		},
	}
}

func passagesCSV(w *bufio.Writer) passageWriter {
	c := csv.NewWriter(w)
	header := c.Write([]string{"at", "door", "zone", "badge", "person", "verdict", "verdict_then", "reasons"})
	return passageWriter{
		func(p book.PassageView) error {
			if header != nil {
				return header
			}
			return c.Write([]string{p.At.Format(time.RFC3339Nano), p.Door, p.Zone, p.Badge, p.Person, string(p.Verdict), string(p.Then), reasonCells(p.Reasons)})
		},
		func() error { c.Flush(); return c.Error() },
	}
}

func passagesTable(w *bufio.Writer) passageWriter {
	t := tabwriter.NewWriter(w, 0, 4, 2, ' ', 0)
	_, header := fmt.Fprintln(t, "AT\tDOOR\tZONE\tVERDICT\tTHEN\tPERSON\tWHY\t")
	n := 0
	return passageWriter{
		func(p book.PassageView) error {
			if header != nil {
				return header
			}
			_, err := fmt.Fprintf(t, "%s\t%s\t%s\t%s\t%s\t%s\t%s\t\n", p.At.Format(time.RFC3339), p.Door, p.Zone, p.Verdict, p.Then, p.Person, reasonCells(p.Reasons))
			if n++; n%1000 == 0 && err == nil {
				err = t.Flush() // columns are as wide as what is in memory
			}
			return err
		},
		t.Flush,
	}
}

type rightsDiffCommand struct {
	bookFlag
	siteFlag
	asFlag
	formatFlag
	At string `help:"The moment (RFC 3339, or local time at the site); default: now." placeholder:"MOMENT"`
}

// Run lists what has to change in the doors' own system.
func (c *rightsDiffCommand) Run(a *app) error {
	return a.openSite(c.bookFlag, c.Site, func(b *book.Book) error {
		actor, err := a.actor(b, c.asFlag)
		if err != nil {
			return err
		}
		at, err := a.maybeMoment(b, c.Site, "--at", c.At)
		if err != nil {
			return err
		}
		d, err := b.RightsDiff(a.ctx, actor, c.Site, at)
		if err != nil {
			return err
		}
		if err := c.list(a, d); err != nil {
			return err
		}
		if d.Listed == nil {
			a.say("No list of holders was brought in by then; import one with: lodebook import holders FILE")
			return nil
		}
		a.say("The list of %s has %d lines; %d changes.", d.Listed.In(d.Site.Location).Format("2006-01-02 15:04"), d.Holders, len(d.Rows))
		return nil
	})
}

func (c *rightsDiffCommand) list(a *app, d book.RightsDiff) error {
	if c.Format == "json" {
		out := make([]book.HolderChangeJSON, len(d.Rows))
		for i, r := range d.Rows {
			out[i] = r.JSON()
		}
		return writeJSON(a.stdout, out)
	}
	rows := [][]string{{"badge", "person", "door", "zone", "change", "reasons"}}
	for _, r := range d.Rows {
		rows = append(rows, []string{r.Badge, r.Person, r.Door, r.Zone, r.Change, reasonCells(r.Reasons)})
	}
	if c.Format == "csv" {
		return csv.NewWriter(a.stdout).WriteAll(rows)
	}
	w := tabwriter.NewWriter(a.stdout, 0, 4, 2, ' ', 0)
	for i, r := range rows {
		line := strings.Join(r, "\t") + "\t"
		if i == 0 {
			line = strings.ToUpper(line)
		}
		if _, err := fmt.Fprintln(w, line); err != nil {
			return err
		}
	}
	return w.Flush()
}
