package web

import (
	"net/url"
	"strings"

	"lodebook/models/book"
	"lodebook/models/civil"
)

type accountLine struct{ Name, URL, Role, Sites, Person, State string }

type accountsLeaf struct {
	page
	Say    string
	Lines  []accountLine
	Form   *Form
	Fields []field
	Link   string // a one-time link, shown this once
	For    string
}

var accountsSheet = leafOf[accountsLeaf]("accounts")

func accountsPage(v *visit) error { return v.showAccounts(&Form{Values: url.Values{}}, "", "", 200) }

func (v *visit) showAccounts(f *Form, link, who string, status int) error {
	list, err := v.b.Accounts(v.ctx(), v.actor)
	if err != nil {
		return err
	}
	p := &accountsLeaf{page: page{Title: "Accounts", Section: secAccounts}, Form: f, Link: link, For: who}
	for _, a := range list {
		l := accountLine{Name: a.Name, URL: "/accounts/" + url.PathEscape(a.Name), Role: a.Role.Words(), Sites: strings.Join(a.Sites, ", "), Person: a.Person}
		if l.Sites == "" {
			l.Sites = "every site"
		}
		switch {
		case a.Disabled:
			l.State = "disabled"
		case a.Until != nil:
			l.State = "until " + a.Until.String()
		}
		p.Lines = append(p.Lines, l)
	}
	p.Say = upperFirst(count(len(list), "account signs in", "accounts sign in")) + " to this book. Every grant and change of a role is an entry."
	fields, err := v.accountFields(f)
	if err != nil {
		return err
	}
	p.Fields = append([]field{f.Text("name", "Name").Need()}, fields...)
	return accountsSheet.show(v, status, p)
}

func (v *visit) accountFields(f *Form) ([]field, error) {
	sites, err := v.b.Sites(v.ctx(), v.actor)
	if err != nil {
		return nil, err
	}
	if len(sites) == 1 && len(f.All("site")) == 0 {
		f.Set("site", sites[0].Code)
	}
	var where []tick
	for _, s := range sites {
		where = append(where, tick{Value: s.Code, Name: s.Name, Note: s.Code})
	}
	roles := []option{{Value: "", Words: "Choose"}}
	for _, r := range book.Roles {
		roles = append(roles, option{Value: string(r), Words: upperFirst(r.Words())})
	}
	return []field{
		f.Choice("role", "Role", roles).Need(),
		f.Ticks("site", "Sites", where),
		f.Text("person", "Person").Help("The code of the person whose account it is; a member sees what is theirs by it"),
		f.Date("until", "Last day on which it may sign in"),
	}, nil
}

// accountSites are the sites that were ticked; an administrator belongs to all of them.
func accountSites(f *Form) []string {
	if f.Get("role") == string(book.Administrator) {
		return nil
	}
	return f.All("site")
}

func readUntil(f *Form) *civil.Day {
	if f.Get("until") == "" {
		return nil
	}
	d, err := civil.ParseDay(f.Get("until"))
	if err != nil {
		f.Loose("until", "“"+f.Get("until")+"” is not a day; write it as YYYY-MM-DD")
		return nil
	}
	return &d
}

func addAccount(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	form := book.AccountForm{Name: f.Get("name"), Role: book.Role(f.Get("role")), Sites: accountSites(f), Person: f.Get("person"), Until: readUntil(f)}
	if len(f.Faults) == 0 {
		_, err = v.b.AddAccount(v.ctx(), v.actor, form)
	}
	if f.Take(err) || len(f.Faults) > 0 {
		return v.showAccounts(f, "", "", 422)
	}
	if err != nil {
		return err
	}
	return v.showLink(form.Name)
}

// showLink shows a fresh one-time link, this once.
func (v *visit) showLink(name string) error {
	secret, err := v.b.NewLink(v.ctx(), v.actor, name)
	if err != nil {
		return err
	}
	return v.showAccounts(&Form{Values: url.Values{}}, v.o.PublicURL+"/link/"+secret, name, 200)
}

func accountLink(v *visit) error { return v.showLink(v.param("name")) }

type accountLeaf struct {
	page
	Name, Say string
	Form      *Form
	Fields    []field
	Action    string
	LinkURL   string
	Own       bool
}

var accountSheet = leafOf[accountLeaf]("account")

func (v *visit) accountNamed(name string) (book.AccountView, error) {
	list, err := v.b.Accounts(v.ctx(), v.actor)
	if err != nil {
		return book.AccountView{}, err
	}
	for _, a := range list {
		if a.Name == name {
			return a, nil
		}
	}
	return book.AccountView{}, &book.NotFound{What: "account", Code: name}
}

func accountPage(v *visit) error {
	a, err := v.accountNamed(v.param("name"))
	if err != nil {
		return err
	}
	f := &Form{Values: url.Values{"site": a.Sites}}
	f.Set("role", string(a.Role)).Set("person", a.Person).Set("until", shortISO(a.Until)).Set("disabled", map[bool]string{true: "yes", false: "no"}[a.Disabled])
	return v.showAccount(a, f, 200)
}

func (v *visit) showAccount(a book.AccountView, f *Form, status int) error {
	p := &accountLeaf{page: page{Title: a.Name, Section: secAccounts}, Name: a.Name, Form: f, Own: a.ID == v.actor.Account}
	p.Say = upperFirst(a.Role.Words()) + ". A change signs the account out everywhere."
	if p.Own {
		p.Say = "This is your own account: another administrator changes it."
	}
	fields, err := v.accountFields(f)
	if err != nil {
		return err
	}
	p.Fields = append(fields, f.YesNo("disabled", "Kept from signing in", ""))
	p.Action = "/accounts/" + url.PathEscape(a.Name)
	p.LinkURL = p.Action + "/link"
	return accountSheet.show(v, status, p)
}

func changeAccount(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	a, err := v.accountNamed(v.param("name"))
	if err != nil {
		return err
	}
	until := readUntil(f)
	if len(f.Faults) == 0 {
		_, err = v.b.ChangeAccount(v.ctx(), v.actor, a.Name, func(x *book.AccountView) {
			x.Role, x.Sites, x.Person, x.Until, x.Disabled = book.Role(f.Get("role")), accountSites(f), f.Get("person"), until, f.Get("disabled") == "yes"
		})
	}
	if f.Take(err) || len(f.Faults) > 0 {
		return v.showAccount(a, f, 422)
	}
	if err != nil {
		return err
	}
	v.setNotice(notice{Text: "Kept: " + a.Name + "."})
	return v.seeOther("/accounts")
}
