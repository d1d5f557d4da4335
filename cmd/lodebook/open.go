package main

import (
	"errors"
	"fmt"
	"os"

	"lodebook/models/book"
	"lodebook/models/program"
	"lodebook/models/program/starter"
)

type openCommand struct {
	bookFlag
	asFlag
	Program     string `type:"existingfile" help:"The program file of the site (YAML)." placeholder:"FILE"`
	Retroactive string `help:"Why this version reaches back before the newest one's first day." placeholder:"WHY"`
	Code        string `help:"Code of a new site that begins with the starter program."`
	Name        string `help:"Name of the new site."`
	TimeZone    string `help:"Time zone of the new site, as in Atlantic/Azores."`
	PublicURL   string `default:"http://127.0.0.1:8470" help:"Address under which the book will be served, for the printed link."`
}

// Run makes a new book, adds a site or gives a site a new version.
func (c *openCommand) Run(a *app) error {
	source, err := c.source()
	if err != nil {
		return err
	}
	if _, err := program.Parse(source); err != nil {
		return err
	}
	if err := named("--book", c.Book); err != nil {
		return err
	}
	there, err := book.IsThere(a.ctx, c.Book)
	switch {
	case err != nil:
		return err
	case !there:
		return c.create(a, source)
	case c.Code != "":
		return fmt.Errorf("--book: %s exists; --code makes a new book, so name a path where there is none, or add a site with --program", book.Place(c.Book))
	}
	return a.open(c.bookFlag, func(b *book.Book) error { return c.openIn(a, b, source) })
}

// source is the text of the program: the file's, or the starter's.
func (c *openCommand) source() ([]byte, error) {
	switch {
	case c.Program != "" && c.Code != "":
		return nil, &exit{exitUsage, errors.New("give either --program, or --code with --name and --time-zone")}
	case c.Program != "":
		return os.ReadFile(c.Program)
	case c.Code == "" || c.Name == "" || c.TimeZone == "":
		return nil, &exit{exitUsage, errors.New("give --program FILE, or all of --code, --name and --time-zone")}
	}
	return starter.New(c.Code, c.Name, c.TimeZone)
}

// create makes the book; nothing is left of it when its first site is refused.
func (c *openCommand) create(a *app, source []byte) error {
	b, err := book.Create(a.ctx, c.Book, a.options())
	if err != nil {
		return err
	}
	err = c.openIn(a, b, source)
	if err == nil {
		err = c.firstAdministrator(a, b)
	}
	if err = errors.Join(err, b.Close()); err != nil {
		return errors.Join(err, book.Discard(a.ctx, c.Book))
	}
	return nil
}

func (c *openCommand) firstAdministrator(a *app, b *book.Book) error {
	actor, err := a.actor(b, asFlag{})
	if err != nil {
		return err
	}
	const name = "administrator"
	if _, err := b.AddAccount(a.ctx, actor, book.AccountForm{Name: name, Role: book.Administrator}); err != nil {
		return err
	}
	secret, err := b.NewLink(a.ctx, actor, name)
	if err != nil {
		return err
	}
	a.say("Sign in as %q once, within two days, at:", name)
	_, err = fmt.Fprintf(a.stdout, "%s/link/%s\n", c.PublicURL, secret)
	return err
}

func (c *openCommand) openIn(a *app, b *book.Book, source []byte) error {
	actor, err := a.actor(b, c.asFlag)
	if err != nil {
		return err
	}
	r, err := b.OpenProgram(a.ctx, actor, source, c.Retroactive)
	if err != nil {
		return err
	}
	c.report(a, r)
	return nil
}

func (c *openCommand) report(a *app, r book.OpenReport) {
	switch {
	case r.Unchanged:
		a.say("Site %s has this program already, as version %d; nothing was written.", r.Site, r.Version)
	case r.New:
		a.say("Site %s is open, with version 1 of its program in force from %s.", r.Site, r.From)
	default:
		a.say("Site %s has version %d of its program, in force from %s.", r.Site, r.Version, r.From)
	}
	for _, o := range r.Overruled {
		a.say("It overrules version %d from %s.", o.Version, o.From)
	}
	for _, s := range r.Changed {
		a.say("%s to %s: %s of %s %s was %s and is now %s.", s.From, s.To, s.Item, s.Subject.Asks, s.Subject.Code, orNothing(string(s.Was)), orNothing(string(s.Now)))
	}
	for _, w := range r.Warnings {
		a.say("Warning: %s", w)
	}
}

func orNothing(word string) string {
	if word == "" {
		return "not asked"
	}
	return word
}
