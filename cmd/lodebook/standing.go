package main

import (
	"lodebook/models/book"
	"lodebook/models/civil"
)

type standingCommand struct {
	bookFlag
	siteFlag
	asFlag
	formatFlag
	On      string `help:"The day (YYYY-MM-DD); default: today at the site." placeholder:"DAY"`
	KnownAt string `help:"As the book knew it at this moment (RFC 3339, or local time at the site)." placeholder:"MOMENT"`
	Item    string `help:"Only this item." placeholder:"CODE"`
	Subject string `help:"Only this subject." placeholder:"CODE"`
	Why     bool   `help:"Say why, in sentences."`
}

// Run lists standings.
func (c *standingCommand) Run(a *app) error {
	return a.openSite(c.bookFlag, c.Site, func(b *book.Book) error {
		q := book.StandingQuery{Site: c.Site, Item: c.Item, Subject: c.Subject, Why: c.Why}
		st, err := a.standings(b, c.asFlag, q, c.On, c.KnownAt)
		if err != nil {
			return err
		}
		return a.list(st.Rows, listing{format: c.Format, why: c.Why})
	})
}

// standings asks the question with its day and moment read.
func (a *app) standings(b *book.Book, as asFlag, q book.StandingQuery, on, knownAt string) (book.Standings, error) {
	actor, err := a.actor(b, as)
	if err != nil {
		return book.Standings{}, err
	}
	if on != "" {
		day, err := civil.ParseDay(on)
		if err != nil {
			return book.Standings{}, &book.Invalid{Faults: []book.Fault{{Field: "--on", Value: on, Problem: "is not a day", Accepted: "write it as YYYY-MM-DD"}}}
		}
		q.On = &day
	}
	if knownAt != "" {
		at, err := b.Moment(a.ctx, q.Site, "--known-at", knownAt)
		if err != nil {
			return book.Standings{}, err
		}
		q.KnownAt = &at
	}
	return b.Standings(a.ctx, actor, q)
}
