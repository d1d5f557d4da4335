package main

import (
	"bytes"
	"crypto/rand"
	"encoding/base32"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"text/tabwriter"
	"time"

	"lodebook/cmd/lodebook/scenario"
	"lodebook/jobs"
	"lodebook/models/book"
	"lodebook/models/civil"
)

type demoCommand struct {
	serveFlags
	Keep string `help:"Keep the book at this path; default: it is thrown away." placeholder:"FILE"`
}

// Run makes the demo book in a folder of its own and serves it until it is told to stop.
func (c *demoCommand) Run(a *app) error {
	path := c.Keep
	if path == "" {
		dir, err := os.MkdirTemp("", "lodebook-demo-")
		if err != nil {
			return err
		}
		path = filepath.Join(dir, "demo.book")
		// A throwaway folder that cannot be removed is the system's to clear.
		defer func() { _ = os.RemoveAll(dir) }()
	}
	a.say("Making a book of eighteen months …")
	b, err := book.Create(a.ctx, path, a.options())
	if err != nil {
		return err
	}
	signIns, err := makeDemo(a, b)
	if err == nil {
		err = c.serve(a, b, func(url string) error { return tellDemo(a, url, signIns) })
	}
	return errors.Join(err, b.Close())
}

// signIn is an account of the demo with its password.
type signIn struct{ name, password, role string }

func tellDemo(a *app, url string, signIns []signIn) error {
	w := tabwriter.NewWriter(a.stdout, 0, 4, 3, ' ', 0)
	lines := []string{"", "Lodebook is at " + url, "", "Sign in as:"}
	for _, s := range signIns {
		lines = append(lines, fmt.Sprintf("  %s\t%s\t%s", s.name, s.password, s.role))
	}
	lines = append(lines, "", "Everybody and everything in this book is invented. Ctrl-C ends it.")
	for _, l := range lines {
		if _, err := fmt.Fprintln(w, l); err != nil {
			return err
		}
	}
	return w.Flush()
}

// makeDemo fills a book by what a user has: open, import, the sheets' form, plans and accounts.
func makeDemo(a *app, b *book.Book) ([]signIn, error) {
	operator, err := a.actor(b, asFlag{})
	if err != nil {
		return nil, err
	}
	s := scenario.Make(demoToday(b.Now()))
	if _, err := b.OpenProgram(a.ctx, operator, s.Program, ""); err != nil {
		return nil, err
	}
	if err := importDemo(a, b, operator, s); err != nil {
		return nil, err
	}
	signIns, err := demoAccounts(a, b, operator, s)
	if err != nil {
		return nil, err
	}
	if err := demoOffice(a, b, s); err != nil {
		return nil, err
	}
	for _, j := range jobs.All {
		if _, err := j.RunNow(a.ctx, b, s.Code, b.Now()); err != nil {
			return nil, err
		}
	}
	return signIns, nil
}

// demoToday is today where the demo's site is.
func demoToday(now time.Time) civil.Day {
	loc, err := time.LoadLocation(scenario.Make(civil.DayOf(now, time.UTC)).TimeZone)
	if err != nil {
		return civil.DayOf(now, time.UTC)
	}
	return civil.DayOf(now, loc)
}

func importDemo(a *app, b *book.Book, actor book.Actor, s scenario.Site) error {
	for _, f := range s.Files {
		r, err := b.Import(a.ctx, actor, book.ImportOptions{Table: f.Table, Site: s.Code, File: bytes.NewReader(f.CSV), Size: int64(len(f.CSV)), FileName: f.Name})
		if err != nil {
			return fmt.Errorf("the demo's %s: %w", f.Name, err)
		}
		if len(r.Faults) > 0 {
			return fmt.Errorf("the demo's %s: %s", f.Name, r.Faults[0].Error())
		}
	}
	return nil
}

// demoAccounts makes an account for each role with a password of this run's own.
func demoAccounts(a *app, b *book.Book, actor book.Actor, s scenario.Site) ([]signIn, error) {
	var out []signIn
	for _, acc := range s.Accounts {
		form := book.AccountForm{Name: acc.Name, Role: book.Role(acc.Role), Person: acc.Person}
		if form.Role != book.Administrator {
			form.Sites = []string{s.Code}
		}
		if _, err := b.AddAccount(a.ctx, actor, form); err != nil {
			return nil, err
		}
		password := newPassword()
		if err := b.SetPassword(a.ctx, actor, acc.Name, password); err != nil {
			return nil, err
		}
		out = append(out, signIn{acc.Name, password, form.Role.Words()})
	}
	return out, nil
}

// newPassword is random and easy to type: twelve letters and digits in three groups.
func newPassword() string {
	raw := make([]byte, 8)
	rand.Read(raw)
	s := strings.ToLower(base32.StdEncoding.EncodeToString(raw))[:12]
	return s[:4] + "-" + s[4:8] + "-" + s[8:]
}

// demoOffice does what people do in the app: sheets filled in, drills planned.
func demoOffice(a *app, b *book.Book, s scenario.Site) error {
	by := map[book.Role]book.Actor{}
	for _, acc := range s.Accounts {
		actor, err := b.ActorNamed(a.ctx, acc.Name)
		if err != nil {
			return err
		}
		by[book.Role(acc.Role)] = actor
	}
	for _, x := range s.Sheets {
		form := book.SheetForm{Record: x.Record, Fixture: x.Fixture, On: x.On.String(), Values: x.Values, Note: x.Note}
		if _, _, err := b.FillSheet(a.ctx, by[book.Facilities], s.Code, form, book.Correction{}); err != nil {
			return fmt.Errorf("the demo's sheet for %s on %s: %w", x.Fixture, x.On, err)
		}
	}
	for _, p := range s.Plans {
		form := book.PlanForm{Record: p.Record, Crew: p.Crew, Day: p.Day.String(), At: p.At, Note: p.Note}
		if _, err := b.PlanDrill(a.ctx, by[book.SafetyOfficer], s.Code, form, book.Correction{}); err != nil {
			return fmt.Errorf("the demo's plan for %s: %w", p.Day, err)
		}
	}
	if err := demoVisits(a, b, s.Code, by[book.SafetyOfficer]); err != nil {
		return err
	}
	return demoIncidents(a, b, s.Code, by)
}
