package main

import (
	"lodebook/models/book"
)

type moveCommand struct {
	From string `required:"" help:"The book: a path, or the address of a PostgreSQL database." placeholder:"BOOK"`
	To   string `required:"" help:"Where to: a path where there is nothing, or the address of an empty PostgreSQL database." placeholder:"BOOK"`
}

// Run copies a book to another home, where it goes on.
func (c *moveCommand) Run(a *app) error {
	for _, f := range []struct{ name, value string }{{"--from", c.From}, {"--to", c.To}} {
		if err := named(f.name, f.value); err != nil {
			return err
		}
	}
	report, err := book.Move(a.ctx, c.From, c.To, a.moving())
	if err != nil {
		return err
	}
	a.say("Copied %d entries and verified them there; the head of their tree is %s.", report.Entries, report.Head)
	a.say("The old book is as it was. Let nothing write to it any more.")
	return nil
}

// moving tells of the rows of each table that have been copied.
func (a *app) moving() func(table string, rows int64) {
	const step = 1_000_000
	last, said := "", int64(0)
	return func(table string, rows int64) {
		if table != last {
			last, said = table, 0
		}
		if rows/step > said {
			said = rows / step
			a.say("Copying %s: %d million rows so far.", table, said)
		}
	}
}
