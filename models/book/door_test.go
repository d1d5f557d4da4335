package book_test

import (
	"database/sql"
	"errors"
	"fmt"
	"sync"
	"testing"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
)

// elsewhere opens the book once more, as another program would.
func (d *desk) elsewhere() *book.Book {
	d.Helper()
	b, err := book.Open(d.Context(), d.path, d.options())
	d.ok(err)
	d.Cleanup(func() { d.ok(b.Close()) })
	return b
}

// signIn gives the secret of a new session of an account.
func (d *desk) signIn(name string) string {
	d.Helper()
	link, err := d.NewLink(d.Context(), d.op, name)
	d.ok(err)
	in, err := d.SignInByLink(d.Context(), link)
	d.ok(err)
	return in.Secret
}

// lastSeen gives what is written of sessions: when each was last seen, in order.
func (d *desk) lastSeen() []string {
	d.Helper()
	db, err := sql.Open(driverOf(d.path), d.path)
	d.ok(err)
	defer func() {
		if err := db.Close(); err != nil {
			d.Error(err)
		}
	}()
	rows, err := db.Query("SELECT last_seen FROM sessions ORDER BY last_seen")
	d.ok(err)
	defer func() {
		if err := rows.Close(); err != nil {
			d.Error(err)
		}
	}()
	var out []string
	for rows.Next() {
		var at string
		d.ok(rows.Scan(&at))
		out = append(out, at[11:19])
	}
	d.ok(rows.Err())
	return out
}

// TestWhatEndsASession is seen by the very next request, whichever process did it.
func TestWhatEndsASession(t *testing.T) {
	var bad *book.BadSignIn
	var denied *book.Denied
	change := func(how func(*book.AccountView)) func(*desk, *book.Book, string) error {
		return func(d *desk, b *book.Book, _ string) error {
			_, err := b.ChangeAccount(d.Context(), d.op, "rolf", how)
			return err
		}
	}
	for _, c := range []struct {
		name string
		do   func(d *desk, b *book.Book, secret string) error
		want any
	}{
		{"signed out", func(d *desk, b *book.Book, secret string) error { return b.SignOut(d.Context(), secret) }, &bad},
		{"disabled", change(func(a *book.AccountView) { a.Disabled = true }), &bad},
		{"another role", change(func(a *book.AccountView) { a.Role = book.Reader }), &bad},
		{"twelve hours", func(d *desk, b *book.Book, secret string) error {
			for range 5 {
				d.now = d.now.Add(90 * time.Minute)
				if _, err := b.BySession(d.Context(), secret); err != nil {
					return err
				}
			}
			d.now = d.now.Add(time.Second)
			return nil
		}, &bad},
		{"idle", func(d *desk, b *book.Book, _ string) error { d.now = d.now.Add(2*time.Hour + time.Second); return nil }, &bad},
		{"the account's last day", func(d *desk, b *book.Book, _ string) error { d.now = d.now.Add(90 * time.Minute); return nil }, &denied},
	} {
		for _, where := range []string{"here", "elsewhere"} {
			t.Run(c.name+" "+where, func(t *testing.T) {
				d := newDesk(t)
				d.now = time.Date(2026, 3, 2, 18, 0, 0, 0, time.UTC)
				d.account("rolf", book.Facilities, "")
				if c.want == any(&denied) {
					last := civil.Of(2026, time.March, 2)
					_, err := d.ChangeAccount(d.Context(), d.op, "rolf", func(a *book.AccountView) { a.Until = &last })
					d.ok(err)
				}
				secret := d.signIn("rolf")
				b := d.Book
				if where == "elsewhere" {
					b = d.elsewhere()
				}
				for range 3 { // used for hours, by both
					d.now = d.now.Add(90 * time.Minute)
					for _, x := range []*book.Book{d.Book, b} {
						actor, err := x.BySession(d.Context(), secret)
						d.ok(err)
						if actor.Name != "rolf" || actor.Role != book.Facilities {
							t.Fatalf("signed in as %+v", actor)
						}
					}
				}
				d.ok(c.do(d, b, secret))
				for range 2 {
					if _, err := d.BySession(d.Context(), secret); !errors.As(err, c.want) {
						t.Errorf("the session goes on: %v", err)
					}
				}
			})
		}
	}
}

// TestLastSeenIsWrittenOnceAMinute: for all sessions together, and nothing of it is forgotten while the
// program runs.
func TestLastSeenIsWrittenOnceAMinute(t *testing.T) {
	d := newDesk(t)
	secrets := map[string]string{"a": d.signIn("olga"), "b": d.signIn("olga")}
	for _, step := range []struct{ at, who, want string }{
		{"08:00:10", "a", "[08:00:00 08:00:10]"},
		{"08:00:30", "b", "[08:00:00 08:00:10]"},
		{"08:00:50", "a", "[08:00:00 08:00:10]"},
		{"08:01:05", "b", "[08:00:50 08:01:05]"},
		{"08:01:59", "a", "[08:00:50 08:01:05]"},
		{"08:04:00", "a", "[08:01:05 08:04:00]"},
		{"09:59:00", "a", "[08:01:05 09:59:00]"},
		{"10:01:06", "b", ""}, // two hours and a second after its last use
		{"11:58:59", "a", "[08:01:05 11:58:59]"},
		{"11:59:30", "a", "[08:01:05 11:59:30]"},
		{"11:59:55", "a", "[08:01:05 11:59:30]"},
		{"13:59:40", "a", "[08:01:05 13:59:40]"}, // not two hours after its last use, but after what is written
	} {
		now, err := time.Parse(time.DateTime, "2026-03-02 "+step.at)
		d.ok(err)
		d.now = now
		_, err = d.BySession(t.Context(), secrets[step.who])
		if (err != nil) != (step.want == "") {
			t.Errorf("%s: %s: %v", step.at, step.who, err)
		}
		if got := fmt.Sprint(d.lastSeen()); step.want != "" && got != step.want {
			t.Errorf("%s: %s is written as last seen, want %s", step.at, got, step.want)
		}
	}
}

// TestLastSeenNeverGoesBack: of two processes that are asked in turn, the one that writes later what it saw
// earlier does not make a session older; and what a process that broke off had not written is a minute at most.
func TestLastSeenNeverGoesBack(t *testing.T) {
	d := newDesk(t)
	secret, other := d.signIn("olga"), d.elsewhere()
	use := func(b *book.Book, at string) error {
		now, err := time.Parse(time.DateTime, "2026-03-02 "+at)
		d.ok(err)
		d.now = now
		_, err = b.BySession(t.Context(), secret)
		return err
	}
	d.ok(use(d.Book, "08:00:10"))
	d.ok(use(d.Book, "08:00:20")) // not written yet
	d.ok(use(other, "08:00:55"))
	if got := fmt.Sprint(d.lastSeen()); got != "[08:00:55]" {
		t.Errorf("written: %s", got)
	}
	d.ok(use(d.Book, "08:01:10"))
	d.ok(use(d.Book, "08:01:50"))
	if got := fmt.Sprint(d.lastSeen()); got != "[08:01:10]" {
		t.Errorf("written: %s", got)
	}
	d.ok(use(other, "10:01:10")) // forty seconds of the session are lost to another process
	d.ok(use(other, "10:01:30"))
	d.ok(use(d.Book, "12:01:09"))
}

// TestManyAtTheDoor: sessions are used, ended and written by many at once.
func TestManyAtTheDoor(t *testing.T) {
	d := newDesk(t)
	var mu sync.Mutex
	now := d.now
	b, err := book.Open(t.Context(), d.path, book.Options{Random: d.options().Random, Clock: func() time.Time {
		mu.Lock()
		defer mu.Unlock()
		now = now.Add(time.Second)
		return now
	}})
	d.ok(err)
	defer func() {
		if err := b.Close(); err != nil {
			t.Error(err)
		}
	}()
	secrets := make([]string, 6)
	for i := range secrets {
		secrets[i] = d.signIn("olga")
	}
	var all sync.WaitGroup
	for i, secret := range secrets {
		all.Go(func() {
			for n := range 30 {
				_, err := b.BySession(t.Context(), secret)
				if ended := i == 0 && n > 20; ended != (err != nil) {
					t.Errorf("session %d, use %d: %v", i, n, err)
				}
				if i == 0 && n == 20 {
					if err := b.SignOut(t.Context(), secret); err != nil {
						t.Error(err)
					}
				}
			}
		})
	}
	all.Wait()
}

// TestStamp changes with everything that is written and with the minute, and with nothing else. A server counts the
// transactions of all its books together, and more than one book is tested on it: there a stamp may change for nothing.
func TestStamp(t *testing.T) {
	d := newDesk(t)
	other := d.elsewhere()
	secret := d.signIn("olga")
	last := ""
	for _, step := range []struct {
		name    string
		do      func() error
		changes bool
	}{
		{"first", func() error { return nil }, true},
		{"nothing", func() error { return nil }, false},
		{"a query", func() error {
			_, err := d.Standings(t.Context(), d.officer, book.StandingQuery{Site: site})
			return err
		}, false},
		{"a query elsewhere", func() error {
			_, err := other.Standings(t.Context(), d.officer, book.StandingQuery{Site: site})
			return err
		}, false},
		{"seconds", func() error { d.now = d.now.Add(59 * time.Second); return nil }, false},
		{"a minute", func() error { d.now = d.now.Add(time.Second); return nil }, true},
		{"an entry", func() error { d.person("P1", "Runa Sandoy", "L2"); return nil }, true},
		{"an entry elsewhere", func() error {
			_, err := other.Record(t.Context(), d.officer, site, book.RecordForm{Record: "training/level-2", Subject: "person:P1", On: "2026-02-01"}, book.Correction{})
			return err
		}, true},
		{"a refusal", func() error {
			_, err := d.Record(t.Context(), d.officer, site, book.RecordForm{Record: "training/level-2", Subject: "person:P9", On: "2026-02-01"}, book.Correction{})
			if err == nil {
				return errors.New("a record of nobody was kept")
			}
			return nil
		}, false},
		{"flags", func() error {
			_, err := other.RaiseFlags(t.Context(), book.JobActor(), site, civil.Of(2026, time.March, 2))
			return err
		}, true},
		{"a session ended", func() error { return other.SignOut(t.Context(), secret) }, true},
	} {
		d.ok(step.do())
		now, err := d.Stamp(t.Context())
		d.ok(err)
		if changed := now != last; changed != step.changes && (step.changes || driverOf(d.path) != "pgx") {
			t.Errorf("%s: the stamp was %q and is %q", step.name, last, now)
		}
		last = now
	}
}
