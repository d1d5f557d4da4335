package book

import (
	"context"
	"crypto/sha256"
	"encoding/base64"
	"encoding/hex"
	"io"
	"slices"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/store"
)

// AccountForm is what an account shall be from now on.
type AccountForm struct {
	Name     string
	Role     Role
	Sites    []string
	Person   string
	Until    *civil.Day
	Disabled bool
}

// AccountView is an account as pages and commands show it.
type AccountView struct {
	ID       string     `json:"id"`
	Name     string     `json:"name"`
	Role     Role       `json:"role"`
	Sites    []string   `json:"sites"`
	Person   string     `json:"person"`
	Until    *civil.Day `json:"until"`
	Disabled bool       `json:"disabled"`
}

// Accounts lists the accounts by name.
func (b *Book) Accounts(ctx context.Context, actor Actor) ([]AccountView, error) {
	if err := actor.may(KeepAccounts, ""); err != nil {
		return nil, err
	}
	var out []AccountView
	err := b.read(ctx, func(m *model) error {
		for _, id := range m.accountIDs() {
			if a, ok := m.account(id); ok {
				out = append(out, accountView(a))
			}
		}
		return nil
	})
	slices.SortFunc(out, func(x, y AccountView) int { return strings.Compare(x.Name, y.Name) })
	return out, err
}

func accountView(a store.AccountRow) AccountView {
	return AccountView{a.ID, a.Name, Role(a.Role), a.Sites, a.Person, a.Until, a.Disabled}
}

// AddAccount makes a new account. It has no secret yet: set one with SetPassword, or hand out a link.
func (b *Book) AddAccount(ctx context.Context, actor Actor, f AccountForm) (AccountView, error) {
	if err := actor.may(KeepAccounts, ""); err != nil {
		return AccountView{}, err
	}
	var view AccountView
	_, err := b.write(ctx, actor, func(s *session) error {
		if _, ok := s.m.accountNamed(f.Name); ok {
			return invalid("name", f.Name, "is taken by another account", "use another name")
		}
		id, err := b.newID(s.now)
		if err != nil {
			return err
		}
		view = AccountView{id, f.Name, f.Role, f.Sites, f.Person, f.Until, f.Disabled}
		return s.add(draft{body: accountBodyOf(view)})
	})
	return view, err
}

// ChangeAccount sets what an account is from now on: role, sites, person, end, or that it is
// disabled. Nobody changes their own role.
func (b *Book) ChangeAccount(ctx context.Context, actor Actor, name string, change func(*AccountView)) (AccountView, error) {
	if err := actor.may(KeepAccounts, ""); err != nil {
		return AccountView{}, err
	}
	var view AccountView
	_, err := b.write(ctx, actor, func(s *session) error {
		old, ok := s.m.accountNamed(name)
		if !ok {
			return &NotFound{"account", name}
		}
		if old.ID == actor.Account {
			return &Denied{Action: KeepAccounts, Role: actor.Role, Why: "nobody changes their own account; ask another administrator"}
		}
		view = accountView(old)
		change(&view)
		if err := s.add(draft{body: accountBodyOf(view)}); err != nil {
			return err
		}
		return s.tx.DeleteSessionsOf(old.ID)
	})
	return view, err
}

func accountBodyOf(v AccountView) *accountBody {
	return &accountBody{
		Account: v.ID, Name: veiled(strings.TrimSpace(v.Name), v.Person), Role: v.Role, Sites: v.Sites, Person: v.Person,
		Until: v.Until, Disabled: v.Disabled,
	}
}

// ActorNamed gives the actor of a command that names an account with --as.
func (b *Book) ActorNamed(ctx context.Context, name string) (Actor, error) {
	var actor Actor
	err := b.read(ctx, func(m *model) error {
		a, ok := m.accountNamed(name)
		if !ok {
			return &NotFound{"account", name}
		}
		var err error
		actor, err = m.actorOf(a, b.Now())
		return err
	})
	return actor, err
}

// actorOf makes an actor of an account that may act at the moment.
func (m *model) actorOf(a store.AccountRow, now time.Time) (Actor, error) {
	actor := Actor{Account: a.ID, Name: a.Name, Role: Role(a.Role), Sites: a.Sites, Person: a.Person, Until: a.Until}
	if a.Disabled {
		return actor, &Denied{Role: actor.Role, Why: "the account " + a.Name + " is disabled"}
	}
	zone := time.UTC
	if len(a.Sites) > 0 {
		zone = m.zone(a.Sites[0])
	}
	if a.Until != nil && civil.DayOf(now, zone) > *a.Until {
		return actor, &Denied{Role: actor.Role, Why: "the account " + a.Name + " ended on " + a.Until.String()}
	}
	return actor, nil
}

// token makes a random secret and the hash that is stored of it.
func (b *Book) token() (secret, hash string, err error) {
	raw := make([]byte, 32)
	if _, err := io.ReadFull(b.random, raw); err != nil {
		return "", "", err
	}
	secret = base64.RawURLEncoding.EncodeToString(raw)
	return secret, hashToken(secret), nil
}

func hashToken(secret string) string {
	sum := sha256.Sum256([]byte(secret))
	return hex.EncodeToString(sum[:])
}

const linkLife = 48 * time.Hour

// NewLink makes a one-time sign-in link for an account and gives its secret; it is good for two days.
func (b *Book) NewLink(ctx context.Context, actor Actor, account string) (string, error) {
	if err := actor.may(KeepAccounts, ""); err != nil {
		return "", err
	}
	secret, hash, err := b.token()
	if err != nil {
		return "", err
	}
	err = b.operate(ctx, func(tx *store.Tx, m *model) error {
		a, ok := m.accountNamed(account)
		if !ok {
			return &NotFound{"account", account}
		}
		return tx.PutLink(store.LinkRow{Hash: hash, Account: a.ID, Expires: b.Now().Add(linkLife)})
	})
	return secret, err
}
