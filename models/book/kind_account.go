package book

import (
	"slices"
	"strings"

	"lodebook/models/civil"
	"lodebook/models/store"
)

const kindAccount = "account"

// accountBody is what an account is from now on: its role, its sites and the person behind it. Its
// secret is no part of the book.
type accountBody struct {
	common
	Account  string     `json:"account"` // the account's own identifier, a UUID
	Name     Veiled     `json:"name,omitzero"`
	Role     Role       `json:"role"`
	Sites    []string   `json:"sites,omitempty"`
	Person   string     `json:"person,omitempty"`
	Until    *civil.Day `json:"until,omitempty"`
	Disabled bool       `json:"disabled,omitempty"`
}

func (b *accountBody) kind() string { return kindAccount }
func (b *accountBody) version() int { return 1 }

func (b *accountBody) validate(c *check) []Fault {
	var faults []Fault
	if b.Name.Value == "" || strings.TrimSpace(b.Name.Value) != b.Name.Value || len(b.Name.Value) > 60 {
		faults = append(faults, Fault{"name", b.Name.Value, "is no account name", "1 to 60 characters, without blanks at its ends"})
	}
	if a, ok := c.m.accountNamed(b.Name.Value); ok && a.ID != b.Account {
		faults = append(faults, Fault{"name", b.Name.Value, "is taken by another account", "use another name"})
	}
	if !slices.Contains(Roles, b.Role) {
		faults = append(faults, Fault{"role", string(b.Role), "is no role", "administrator, safety-officer, facilities, member or reader"})
	}
	for _, s := range b.Sites {
		if c.m.site(s) == nil {
			faults = append(faults, Fault{"site", s, "is no site of this book", "one of " + strings.Join(c.m.siteCodes(), ", ")})
		}
	}
	if b.Person != "" {
		if _, ok := c.m.person(b.Person); !ok {
			faults = append(faults, Fault{"person", b.Person, "is not on record", "the code of a person"})
		}
	}
	if len(b.Sites) == 0 && b.Role != Administrator {
		faults = append(faults, Fault{"site", "", "is empty; only an administrator belongs to every site", "name at least one site"})
	}
	return faults
}

func (b *accountBody) apply(at applied) []any {
	return []any{store.AccountRow{
		Line: at.line, ID: b.Account, Name: b.Name.Value, Role: string(b.Role), Sites: b.Sites, Person: b.Person,
		Until: b.Until, Disabled: b.Disabled,
	}}
}
