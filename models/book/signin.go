package book

import (
	"context"
	"crypto/subtle"
	"encoding/base64"
	"fmt"
	"io"
	"strings"
	"time"

	"golang.org/x/crypto/argon2"

	"lodebook/models/store"
)

// Argon2id by the second recommended option of RFC 9106 §4: 64 MiB, three passes, four lanes.
const (
	argonPasses  = 3
	argonMemory  = 64 * 1024 // KiB
	argonLanes   = 4
	argonKey     = 32
	argonSalt    = 16
	passwordLow  = 12
	passwordHigh = 200
)

// SetPassword sets an account's password. An actor may set their own; an administrator anybody's.
func (b *Book) SetPassword(ctx context.Context, actor Actor, name, password string) error {
	if err := CheckPassword(name, password); err != nil {
		return err
	}
	hash, err := b.hashPassword(password)
	if err != nil {
		return err
	}
	return b.operate(ctx, func(tx *store.Tx, m *model) error {
		a, ok := m.accountNamed(name)
		if !ok {
			return &NotFound{"account", name}
		}
		if a.ID != actor.Account {
			if err := actor.may(KeepAccounts, ""); err != nil {
				return err
			}
		}
		return tx.PutCredential(store.CredentialRow{Account: a.ID, Hash: hash, Changed: b.Now()})
	})
}

// CheckPassword tells whether a password will do for an account of that name.
func CheckPassword(name, password string) error {
	if n := len([]rune(password)); n < passwordLow || n > passwordHigh {
		return invalid("password", "", fmt.Sprintf("has %d characters", n), fmt.Sprintf("%d to %d characters", passwordLow, passwordHigh))
	}
	if strings.EqualFold(password, name) {
		return invalid("password", "", "is the account's name", "something that nobody guesses")
	}
	return nil
}

func (b *Book) hashPassword(password string) (string, error) {
	salt := make([]byte, argonSalt)
	if _, err := io.ReadFull(b.random, salt); err != nil {
		return "", err
	}
	return encodeArgon(password, salt), nil
}

func encodeArgon(password string, salt []byte) string {
	key := argon2.IDKey([]byte(password), salt, argonPasses, argonMemory, argonLanes, argonKey)
	e := base64.RawStdEncoding
	return fmt.Sprintf("$argon2id$v=%d$m=%d,t=%d,p=%d$%s$%s", argon2.Version, argonMemory, argonPasses, argonLanes, e.EncodeToString(salt), e.EncodeToString(key))
}

// matches tells whether the password makes the encoded hash. An unreadable hash matches nothing.
func matches(encoded, password string) bool {
	parts := strings.Split(encoded, "$")
	if len(parts) != 6 {
		return false
	}
	salt, err := base64.RawStdEncoding.DecodeString(parts[4])
	if err != nil {
		return false
	}
	return subtle.ConstantTimeCompare([]byte(encodeArgon(password, salt)), []byte(encoded)) == 1
}

const (
	sessionLife = 12 * time.Hour
	sessionIdle = 2 * time.Hour
	freeTries   = 5
	slowest     = 15 * time.Minute
)

// SignedIn is a session: Secret goes into the cookie and is stored nowhere.
type SignedIn struct {
	Actor   Actor
	Secret  string
	Expires time.Time
}

// BadSignIn says that a name and password do not fit; it never says which.
type BadSignIn struct{}

func (*BadSignIn) Error() string { return "this name and password do not fit together" }

// TooMany says that sign-in is held back after too many failures.
type TooMany struct{ Until time.Time }

func (e *TooMany) Error() string { return "too many failed sign-ins; wait a little and try again" }

// SignIn checks a name and password; from is the address that asks. After five failures of a name
// or an address each further one doubles the wait, up to a quarter of an hour.
func (b *Book) SignIn(ctx context.Context, name, password, from string) (SignedIn, error) {
	keys := []string{hashToken("name:" + strings.ToLower(strings.TrimSpace(name))), hashToken("from:" + from)}
	if err := b.heldBack(ctx, keys); err != nil {
		return SignedIn{}, err
	}
	account, hash, err := b.credential(ctx, name)
	if err != nil {
		return SignedIn{}, err
	}
	// An unknown name costs as much as a known one, so that the time taken tells nothing.
	if !matches(orDummy(hash), password) || hash == "" {
		return SignedIn{}, b.failed(ctx, keys)
	}
	actor, err := b.actor(ctx, account)
	if err != nil {
		return SignedIn{}, err
	}
	return b.begin(ctx, actor, keys)
}

var dummyHash = encodeArgon("nobody's password", make([]byte, argonSalt))

func orDummy(hash string) string {
	if hash == "" {
		return dummyHash
	}
	return hash
}

func (b *Book) credential(ctx context.Context, name string) (account, hash string, err error) {
	err = b.read(ctx, func(m *model) error {
		if a, ok := m.accountNamed(strings.TrimSpace(name)); ok {
			account = a.ID
		}
		return nil
	})
	if err != nil || account == "" {
		return "", "", err
	}
	err = b.st.Read(ctx, func(tx *store.Tx) error {
		c, ok, err := tx.Credential(account)
		if ok {
			hash = c.Hash
		}
		return err
	})
	return account, hash, err
}

func (b *Book) actor(ctx context.Context, account string) (Actor, error) {
	var actor Actor
	err := b.read(ctx, func(m *model) error {
		a, ok := m.account(account)
		if !ok {
			return &BadSignIn{}
		}
		var err error
		actor, err = m.actorOf(a, b.Now())
		return err
	})
	return actor, err
}

func (b *Book) heldBack(ctx context.Context, keys []string) error {
	return b.st.Read(ctx, func(tx *store.Tx) error {
		for _, k := range keys {
			a, ok, err := tx.Attempt(k)
			if err != nil {
				return err
			}
			if until := a.Last.Add(wait(a.Count)); ok && b.Now().Before(until) {
				return &TooMany{until}
			}
		}
		return nil
	})
}

func wait(failures int) time.Duration {
	if failures < freeTries {
		return 0
	}
	return min(slowest, time.Second<<min(failures-freeTries, 20))
}

func (b *Book) failed(ctx context.Context, keys []string) error {
	err := b.operate(ctx, func(tx *store.Tx, _ *model) error {
		for _, k := range keys {
			a, _, err := tx.Attempt(k)
			if err != nil {
				return err
			}
			if err := tx.PutAttempt(store.AttemptRow{Key: k, Count: a.Count + 1, Last: b.Now()}); err != nil {
				return err
			}
		}
		return nil
	})
	if err != nil {
		return err
	}
	return &BadSignIn{}
}

func (b *Book) begin(ctx context.Context, actor Actor, keys []string) (SignedIn, error) {
	secret, hash, err := b.token()
	if err != nil {
		return SignedIn{}, err
	}
	now := b.Now()
	err = b.operate(ctx, func(tx *store.Tx, _ *model) error {
		for _, k := range keys {
			if err := tx.ClearAttempt(k); err != nil {
				return err
			}
		}
		if err := tx.ExpireSessions(now); err != nil {
			return err
		}
		return tx.PutSession(store.SessionRow{Hash: hash, Account: actor.Account, Began: now, Expires: now.Add(sessionLife), LastSeen: now})
	})
	return SignedIn{actor, secret, now.Add(sessionLife)}, err
}

// SignInByLink takes a one-time link's secret; it works once.
func (b *Book) SignInByLink(ctx context.Context, secret string) (SignedIn, error) {
	var account string
	err := b.operate(ctx, func(tx *store.Tx, _ *model) error {
		row, ok, err := tx.TakeLink(hashToken(secret), b.Now())
		if err != nil {
			return err
		}
		if !ok {
			return &Denied{Why: "this sign-in link was used already or has run out; ask an administrator for a new one"}
		}
		account = row.Account
		return nil
	})
	if err != nil {
		return SignedIn{}, err
	}
	actor, err := b.actor(ctx, account)
	if err != nil {
		return SignedIn{}, err
	}
	return b.begin(ctx, actor, nil)
}

// BySession gives the actor of a session's secret; a session ends after twelve hours, or two without use.
func (b *Book) BySession(ctx context.Context, secret string) (Actor, error) {
	stamp, err := b.Stamp(ctx)
	if err != nil {
		return Actor{}, err
	}
	g, known := b.door.guest(hashToken(secret), stamp)
	if !known {
		if g, err = b.guest(ctx, hashToken(secret), stamp); err != nil {
			return Actor{}, err
		}
	}
	now := b.Now()
	if now.After(g.row.Expires) || now.Sub(g.row.LastSeen) > sessionIdle {
		return Actor{}, &BadSignIn{}
	}
	if !known {
		if g.actor, err = b.actor(ctx, g.row.Account); err != nil {
			return Actor{}, err
		}
		b.door.remember(g)
	}
	if due := b.door.pass(g.row.Hash, now); len(due) > 0 {
		err = b.writeSeen(ctx, due)
	}
	return g.actor, err
}

// guest reads a session; stamp is from before. A secret of no session is a *BadSignIn.
func (b *Book) guest(ctx context.Context, hash, stamp string) (guest, error) {
	g := guest{stamp: stamp}
	err := b.st.Read(ctx, func(tx *store.Tx) error {
		row, ok, err := tx.Session(hash)
		if err == nil && !ok {
			err = &BadSignIn{}
		}
		g.row = row
		return err
	})
	return b.door.current(g), err
}

// SignOut ends a session.
func (b *Book) SignOut(ctx context.Context, secret string) error {
	return b.operate(ctx, func(tx *store.Tx, _ *model) error { return tx.DeleteSession(hashToken(secret)) })
}
