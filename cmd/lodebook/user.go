package main

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"strings"
	"text/tabwriter"

	"lodebook/models/book"
	"lodebook/models/civil"
)

type userCommand struct {
	Add     userAddCommand     `cmd:"" help:"Add an account."`
	List    userListCommand    `cmd:"" help:"List the accounts."`
	Disable userDisableCommand `cmd:"" help:"Keep an account from signing in."`
	Role    userRoleCommand    `cmd:"" help:"Give an account another role, other sites, another person or an end."`
	Link    userLinkCommand    `cmd:"" help:"Print a one-time sign-in link."`
}

type userAddCommand struct {
	Name string `arg:"" help:"Name of the account."`
	bookFlag
	asFlag
	Role      string   `required:"" enum:"administrator,safety-officer,facilities,member,reader" help:"administrator, safety-officer, facilities, member or reader."`
	Site      []string `help:"Code of a site that it belongs to; may be repeated." placeholder:"CODE"`
	Person    string   `help:"Code of the person whose account it is." placeholder:"CODE"`
	Until     string   `help:"Last day on which it may sign in." placeholder:"DAY"`
	PublicURL string   `default:"http://127.0.0.1:8470" help:"Address under which the book is served, for the printed link."`
}

// Run adds an account. Its password is the first line of standard input; without one, a one-time
// sign-in link is printed.
func (c *userAddCommand) Run(a *app) error {
	return a.open(c.bookFlag, func(b *book.Book) error {
		actor, err := a.actor(b, c.asFlag)
		if err != nil {
			return err
		}
		form := book.AccountForm{Name: c.Name, Role: book.Role(c.Role), Sites: c.Site, Person: c.Person}
		if form.Until, err = optionalDay("--until", c.Until); err != nil {
			return err
		}
		if len(form.Sites) == 0 && form.Role != book.Administrator {
			form.Sites, err = onlySite(a, b, actor)
			if err != nil {
				return err
			}
		}
		password, err := a.password()
		if err != nil {
			return err
		}
		if err := book.CheckPassword(c.Name, password); password != "" && err != nil {
			return err
		}
		if _, err := b.AddAccount(a.ctx, actor, form); err != nil {
			return err
		}
		a.say("Added %s, %s.", c.Name, book.Role(c.Role).Words())
		if password == "" {
			return a.printLink(b, actor, c.Name, c.PublicURL)
		}
		return b.SetPassword(a.ctx, actor, c.Name, password)
	})
}

// onlySite is the book's site where it has just one.
func onlySite(a *app, b *book.Book, actor book.Actor) ([]string, error) {
	sites, err := b.Sites(a.ctx, actor)
	if err != nil {
		return nil, err
	}
	if len(sites) != 1 {
		return nil, errors.New("--site: name at least one site; only an administrator belongs to every site")
	}
	return []string{sites[0].Code}, nil
}

// password reads the first line of standard input; empty where there is none or it is a terminal.
func (a *app) password() (string, error) {
	if a.stdin == nil || isTerminal(a.stdin) {
		return "", nil
	}
	line, err := bufio.NewReader(a.stdin).ReadString('\n')
	if err != nil && !errors.Is(err, io.EOF) {
		return "", err
	}
	return strings.TrimRight(line, "\r\n"), nil
}

func (a *app) printLink(b *book.Book, actor book.Actor, name, publicURL string) error {
	secret, err := b.NewLink(a.ctx, actor, name)
	if err != nil {
		return err
	}
	a.say("Sign in as %q once, within two days, at:", name)
	_, err = fmt.Fprintf(a.stdout, "%s/link/%s\n", publicURL, secret)
	return err
}

func optionalDay(flag, text string) (*civil.Day, error) {
	if text == "" {
		return nil, nil
	}
	d, err := civil.ParseDay(text)
	if err != nil {
		return nil, fmt.Errorf("%s: %w", flag, err)
	}
	return &d, nil
}

type userListCommand struct {
	bookFlag
	asFlag
	formatFlag
}

// Run lists the accounts.
func (c *userListCommand) Run(a *app) error {
	return a.open(c.bookFlag, func(b *book.Book) error {
		actor, err := a.actor(b, c.asFlag)
		if err != nil {
			return err
		}
		list, err := b.Accounts(a.ctx, actor)
		if err != nil {
			return err
		}
		if c.Format == "json" {
			return writeJSON(a.stdout, append([]book.AccountView{}, list...))
		}
		return accountTable(a, list, c.Format == "csv")
	})
}

func accountTable(a *app, list []book.AccountView, csv bool) error {
	w := tabwriter.NewWriter(a.stdout, 0, 4, 2, ' ', 0)
	var out io.Writer = w
	sep := "\t"
	if csv {
		out, sep = a.stdout, ","
	}
	rows := [][]string{{"name", "role", "sites", "person", "until", "disabled"}}
	for _, v := range list {
		rows = append(rows, []string{v.Name, string(v.Role), strings.Join(v.Sites, "; "), v.Person, day(v.Until), fmt.Sprint(v.Disabled)})
	}
	for _, r := range rows {
		if _, err := fmt.Fprintln(out, strings.Join(r, sep)); err != nil {
			return err
		}
	}
	return w.Flush()
}

type userDisableCommand struct {
	Name string `arg:"" help:"Name of the account."`
	bookFlag
	asFlag
}

// Run disables an account.
func (c *userDisableCommand) Run(a *app) error {
	return a.changeAccount(c.bookFlag, c.asFlag, c.Name, func(v *book.AccountView) error { v.Disabled = true; return nil })
}

type userRoleCommand struct {
	Name string `arg:"" help:"Name of the account."`
	bookFlag
	asFlag
	Role   string   `enum:",administrator,safety-officer,facilities,member,reader" default:"" help:"The new role."`
	Site   []string `help:"Codes of the sites that it belongs to from now on." placeholder:"CODE"`
	Person string   `help:"Code of the person whose account it is." placeholder:"CODE"`
	Until  string   `help:"Last day on which it may sign in." placeholder:"DAY"`
}

// Run changes what an account is.
func (c *userRoleCommand) Run(a *app) error {
	return a.changeAccount(c.bookFlag, c.asFlag, c.Name, func(v *book.AccountView) error {
		if c.Role != "" {
			v.Role = book.Role(c.Role)
		}
		if len(c.Site) > 0 {
			v.Sites = c.Site
		}
		if c.Person != "" {
			v.Person = c.Person
		}
		until, err := optionalDay("--until", c.Until)
		if until != nil {
			v.Until = until
		}
		v.Disabled = false
		return err
	})
}

func (a *app) changeAccount(f bookFlag, as asFlag, name string, change func(*book.AccountView) error) error {
	return a.open(f, func(b *book.Book) error {
		actor, err := a.actor(b, as)
		if err != nil {
			return err
		}
		var bad error
		v, err := b.ChangeAccount(a.ctx, actor, name, func(v *book.AccountView) { bad = change(v) })
		if err := errors.Join(bad, err); err != nil {
			return err
		}
		a.say("%s is %s now%s.", v.Name, v.Role.Words(), map[bool]string{true: ", and disabled"}[v.Disabled])
		return nil
	})
}

type userLinkCommand struct {
	Name string `arg:"" help:"Name of the account."`
	bookFlag
	asFlag
	PublicURL string `default:"http://127.0.0.1:8470" help:"Address under which the book is served."`
}

// Run prints a one-time sign-in link.
func (c *userLinkCommand) Run(a *app) error {
	return a.open(c.bookFlag, func(b *book.Book) error {
		actor, err := a.actor(b, c.asFlag)
		if err != nil {
			return err
		}
		return a.printLink(b, actor, c.Name, c.PublicURL)
	})
}
