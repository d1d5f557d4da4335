package store

import (
	"errors"
	"reflect"
	"testing"
	"time"

	"lodebook/models/civil"
)

func at(minutes int) time.Time { return began.Add(time.Duration(minutes) * time.Minute) }

func ptr[T any](v T) *T { return &v }

// equal fails unless a method gave this row and said that there is one.
func equal[T any](t *testing.T, what string, want T, got T, ok bool, err error) {
	t.Helper()
	if err != nil || !ok || !reflect.DeepEqual(got, want) {
		t.Errorf("%s: %+v, %v (%v), want %+v", what, got, ok, err, want)
	}
}

// none fails unless a method said that there is no row.
func none[T any](t *testing.T, what string, got T, ok bool, err error) {
	t.Helper()
	var zero T
	if err != nil || ok || !reflect.DeepEqual(got, zero) {
		t.Errorf("%s: %+v, %v (%v), want none", what, got, ok, err)
	}
}

func TestCredentials(t *testing.T) {
	write(t, newBook(t), func(tx *Tx) error {
		first, second := CredentialRow{"a-1", "hash 1", at(0)}, CredentialRow{"a-1", "hash 2", at(1)}
		other := CredentialRow{"a-2", "hash 3", at(0)}
		must(t, errors.Join(tx.PutCredential(first), tx.PutCredential(other), tx.PutCredential(second)))
		got, ok, err := tx.Credential("a-1")
		equal(t, "put twice", second, got, ok, err)
		must(t, errors.Join(tx.DeleteCredential("a-1"), tx.DeleteCredential("a-1")))
		got, ok, err = tx.Credential("a-1")
		none(t, "deleted", got, ok, err)
		got, ok, err = tx.Credential("a-2")
		equal(t, "another's", other, got, ok, err)
		return nil
	})
}

func TestALinkIsTakenOnce(t *testing.T) {
	s := newBook(t)
	write(t, s, func(tx *Tx) error {
		link := LinkRow{Hash: "h", Account: "a-1", Expires: at(10)}
		must(t, tx.PutLink(link))
		got, ok, err := tx.TakeLink("other", at(1))
		none(t, "unknown", got, ok, err)
		got, ok, err = tx.TakeLink("h", at(10))
		none(t, "expired", got, ok, err)
		link.Used = ptr(at(9))
		got, ok, err = tx.TakeLink("h", at(9))
		equal(t, "in time", link, got, ok, err)
		got, ok, err = tx.TakeLink("h", at(9))
		none(t, "a second time", got, ok, err)
		must(t, errors.Join(tx.PutLink(LinkRow{Hash: "i", Account: "a-1", Expires: at(10)}),
			tx.PutLink(LinkRow{Hash: "j", Account: "a-2", Expires: at(10)}), tx.DeleteLinksOf("a-1")))
		got, ok, err = tx.TakeLink("i", at(1))
		none(t, "taken back", got, ok, err)
		_, ok, err = tx.TakeLink("j", at(1))
		if !ok || err != nil {
			t.Errorf("another's link went with it (%v)", err)
		}
		return nil
	})
	if err := s.Write(background, func(tx *Tx) error { return tx.PutLink(LinkRow{Hash: "j"}) }); err == nil {
		t.Error("two links have one token")
	}
}

func TestSessions(t *testing.T) {
	write(t, newBook(t), func(tx *Tx) error {
		rows := map[string]SessionRow{}
		for _, r := range []SessionRow{
			{"s1", "a-1", at(0), at(60), at(0)}, {"s2", "a-1", at(0), at(30), at(0)}, {"s3", "a-2", at(0), at(60), at(0)},
		} {
			rows[r.Hash] = r
			must(t, tx.PutSession(r))
		}
		must(t, tx.TouchSession("s1", at(5)))
		want := rows["s1"]
		want.LastSeen = at(5)
		got, ok, err := tx.Session("s1")
		equal(t, "seen", want, got, ok, err)
		if err := tx.TouchSession("s9", at(5)); !errors.Is(err, ErrMissing) {
			t.Errorf("a session that is not there was seen (%v)", err)
		}
		must(t, errors.Join(tx.PutLink(LinkRow{Hash: "old", Expires: at(30)}), tx.PutLink(LinkRow{Hash: "new", Expires: at(31)})))
		must(t, tx.ExpireSessions(at(30)))
		got, ok, err = tx.Session("s2")
		none(t, "expired", got, ok, err)
		got, ok, err = tx.Session("s3")
		equal(t, "not expired", rows["s3"], got, ok, err)
		var links []string
		must(t, tx.db.Raw("SELECT hash FROM links").Scan(&links).Error)
		if !reflect.DeepEqual(links, []string{"new"}) {
			t.Errorf("links left: %v", links)
		}
		must(t, errors.Join(tx.DeleteSession("s3"), tx.DeleteSessionsOf("a-1")))
		for _, h := range []string{"s1", "s3"} {
			got, ok, err = tx.Session(h)
			none(t, "ended", got, ok, err)
		}
		return nil
	})
}

func TestAttempts(t *testing.T) {
	write(t, newBook(t), func(tx *Tx) error {
		must(t, errors.Join(tx.PutAttempt(AttemptRow{"ada", 1, at(0)}), tx.PutAttempt(AttemptRow{"ada", 2, at(1)}),
			tx.PutAttempt(AttemptRow{"bo", 7, at(5)}), tx.PutAttempt(AttemptRow{"cy", 1, at(9)})))
		got, ok, err := tx.Attempt("ada")
		equal(t, "counted", AttemptRow{"ada", 2, at(1)}, got, ok, err)
		must(t, errors.Join(tx.ClearAttempt("cy"), tx.ExpireAttempts(at(5))))
		for _, k := range []string{"ada", "cy", "nobody"} {
			got, ok, err = tx.Attempt(k)
			none(t, k, got, ok, err)
		}
		got, ok, err = tx.Attempt("bo")
		equal(t, "late enough", AttemptRow{"bo", 7, at(5)}, got, ok, err)
		return nil
	})
}

func TestAFlagIsOneHoweverOftenItIsPut(t *testing.T) {
	write(t, newBook(t), func(tx *Tx) error {
		day := civil.Of(2026, 3, 1)
		flag := FlagRow{Site: "TERN", Item: "I1", Kind: "person", Code: "P1", Standing: "lapsed", Owner: "P2", Due: &day, Opened: day}
		other := FlagRow{Site: "TERN", Item: "I1", Kind: "person", Code: "P0", Standing: "missing", Opened: day}
		must(t, errors.Join(tx.PutFlag(flag), tx.PutFlag(other)))
		flag.Standing, flag.Due, flag.Cleared, flag.Reopened = "failed", nil, ptr(day+1), 2
		elsewhere := flag
		elsewhere.Site = "GULL"
		must(t, errors.Join(tx.PutFlag(flag), tx.PutFlag(elsewhere)))
		flags, err := tx.Flags("TERN")
		if want := []FlagRow{other, flag}; !reflect.DeepEqual(flags, want) {
			t.Errorf("%+v, want %+v", flags, want)
		}
		return err
	})
}

func TestARunIsClaimedOnce(t *testing.T) {
	s := newBook(t)
	other := reopened(t, address(s))
	claimed := 0
	for _, st := range []*Store{s, other, s} {
		write(t, st, func(tx *Tx) error {
			ok, err := tx.ClaimRun("morning", "TERN", at(0), at(1))
			if ok {
				claimed++
			}
			return err
		})
	}
	if claimed != 1 {
		t.Errorf("claimed %d times", claimed)
	}
	write(t, s, func(tx *Tx) error {
		for _, c := range []struct {
			job, site string
			due       time.Time
		}{{"evening", "TERN", at(0)}, {"morning", "GULL", at(0)}, {"morning", "TERN", at(1440)}} {
			ok, err := tx.ClaimRun(c.job, c.site, c.due, c.due)
			if !ok || err != nil {
				t.Errorf("%+v was not to be had (%v)", c, err)
			}
		}
		must(t, tx.FinishRun("morning", "TERN", at(0), at(2), RunDone, "12 flags"))
		if err := tx.FinishRun("morning", "TERN", at(7), at(2), RunDone, ""); !errors.Is(err, ErrMissing) {
			t.Errorf("a run that nobody claimed has ended (%v)", err)
		}
		runs, err := tx.Runs(2)
		must(t, err)
		if len(runs) != 2 || !runs[0].Due.Equal(at(1440)) || runs[1].Job != "morning" || runs[1].Site != "TERN" {
			t.Errorf("the last runs are %+v", runs)
		}
		want := RunRow{Job: "morning", Site: "TERN", Due: at(0), Started: at(1), Ended: ptr(at(2)), Outcome: RunDone, Message: "12 flags"}
		equal(t, "ended", want, runs[1], true, nil)
		last, ok, err := tx.LastRun("morning", "TERN")
		equal(t, "last", runs[0], last, ok, err)
		last, ok, err = tx.LastRun("never", "TERN")
		none(t, "never", last, ok, err)
		return nil
	})
}

func TestARunThatWasBrokenOffIsTakenOver(t *testing.T) {
	write(t, newBook(t), func(tx *Tx) error {
		retake := func(before int) bool {
			ok, err := tx.RetakeRun("morning", "TERN", at(0), at(before), at(30))
			must(t, err)
			return ok
		}
		if retake(100) {
			t.Error("a run that nobody claimed was taken over")
		}
		_, err := tx.ClaimRun("morning", "TERN", at(0), at(1))
		must(t, err)
		if retake(1) {
			t.Error("a run that may be running was taken over")
		}
		if !retake(2) || retake(30) {
			t.Error("a run whose node is gone was not taken over once")
		}
		must(t, tx.FinishRun("morning", "TERN", at(0), at(31), RunFailed, "no room"))
		if !retake(0) {
			t.Error("a run that failed was not taken over")
		}
		run, ok, err := tx.LastRun("morning", "TERN")
		equal(t, "taken over", RunRow{Job: "morning", Site: "TERN", Due: at(0), Started: at(30), Outcome: RunRunning}, run, ok, err)
		must(t, tx.FinishRun("morning", "TERN", at(0), at(32), RunDone, ""))
		if retake(100) {
			t.Error("a run that is done was taken over")
		}
		return nil
	})
}
