package store

import (
	"time"

	"gorm.io/gorm/clause"

	"lodebook/models/civil"
)

// What the program needs to run, beside the book: secrets, sessions, flags and runs. None of it is
// an entry. Moments are passed in.

type credentialLine struct {
	Account string `gorm:"primaryKey"`
	Hash    string
	Changed instant
}

// PutCredential sets an account's secret in place of the one that it had.
func (t *Tx) PutCredential(r CredentialRow) error {
	return upsert(t, "credentials", credentialLine{r.Account, r.Hash, instant(r.Changed)}, "account")
}

// Credential gives an account's secret, and whether it has one.
func (t *Tx) Credential(account string) (CredentialRow, bool, error) {
	rows, err := find[credentialLine](t.db.Table("credentials").Where("account = ?", account))
	if err != nil || len(rows) == 0 {
		return CredentialRow{}, false, err
	}
	return CredentialRow{rows[0].Account, rows[0].Hash, time.Time(rows[0].Changed)}, true, nil
}

// DeleteCredential takes an account's secret away; that there was none is no error.
func (t *Tx) DeleteCredential(account string) error {
	return t.db.Exec("DELETE FROM credentials WHERE account = ?", account).Error
}

type linkLine struct {
	Hash    string `gorm:"primaryKey"`
	Account string
	Expires instant
	Used    *instant
}

// PutLink adds a one-time link.
func (t *Tx) PutLink(r LinkRow) error {
	row := linkLine{r.Hash, r.Account, instant(r.Expires), (*instant)(r.Used)}
	return t.db.Table("links").Create(&row).Error
}

// TakeLink uses a one-time link up: of several who try, one is told true. A link that is unknown,
// used or expired at now is not taken.
func (t *Tx) TakeLink(hash string, now time.Time) (LinkRow, bool, error) {
	r := t.db.Exec("UPDATE links SET used = ? WHERE hash = ? AND used IS NULL AND expires > ?", instant(now), hash, instant(now))
	if r.Error != nil || r.RowsAffected == 0 {
		return LinkRow{}, false, r.Error
	}
	rows, err := find[linkLine](t.db.Table("links").Where("hash = ?", hash))
	if err != nil || len(rows) == 0 {
		return LinkRow{}, false, err
	}
	l := rows[0]
	return LinkRow{l.Hash, l.Account, time.Time(l.Expires), (*time.Time)(l.Used)}, true, nil
}

// DeleteLinksOf takes back every link of an account.
func (t *Tx) DeleteLinksOf(account string) error {
	return t.db.Exec("DELETE FROM links WHERE account = ?", account).Error
}

type sessionLine struct {
	Hash     string `gorm:"primaryKey"`
	Account  string
	Began    instant
	Expires  instant
	LastSeen instant
}

// PutSession adds a session.
func (t *Tx) PutSession(r SessionRow) error {
	row := sessionLine{r.Hash, r.Account, instant(r.Began), instant(r.Expires), instant(r.LastSeen)}
	return t.db.Table("sessions").Create(&row).Error
}

// Session gives a session, and whether there is one. Whether it has expired is for the caller to
// see.
func (t *Tx) Session(hash string) (SessionRow, bool, error) {
	rows, err := find[sessionLine](t.db.Table("sessions").Where("hash = ?", hash))
	if err != nil || len(rows) == 0 {
		return SessionRow{}, false, err
	}
	l := rows[0]
	return SessionRow{
		Hash: l.Hash, Account: l.Account, Began: time.Time(l.Began),
		Expires: time.Time(l.Expires), LastSeen: time.Time(l.LastSeen),
	}, true, nil
}

// TouchSession notes when a session was last seen; ErrMissing if it has ended.
func (t *Tx) TouchSession(hash string, seen time.Time) error {
	r := t.db.Exec("UPDATE sessions SET last_seen = ? WHERE hash = ?", instant(seen), hash)
	return one(r.RowsAffected, r.Error, "the session has ended")
}

// DeleteSession ends a session; that there was none is no error.
func (t *Tx) DeleteSession(hash string) error {
	return t.db.Exec("DELETE FROM sessions WHERE hash = ?", hash).Error
}

// DeleteSessionsOf ends every session of an account.
func (t *Tx) DeleteSessionsOf(account string) error {
	return t.db.Exec("DELETE FROM sessions WHERE account = ?", account).Error
}

// ExpireSessions deletes the sessions that have expired at now and the links that can no longer be
// taken.
func (t *Tx) ExpireSessions(now time.Time) error {
	err := t.db.Exec("DELETE FROM sessions WHERE expires <= ?", instant(now)).Error
	if err != nil {
		return err
	}
	return t.db.Exec("DELETE FROM links WHERE used IS NOT NULL OR expires <= ?", instant(now)).Error
}

type attemptLine struct {
	Who     string `gorm:"primaryKey"`
	Tries   int
	LastTry instant
}

// Attempt gives the failed sign-ins of a name or address, and whether there were any.
func (t *Tx) Attempt(key string) (AttemptRow, bool, error) {
	rows, err := find[attemptLine](t.db.Table("attempts").Where("who = ?", key))
	if err != nil || len(rows) == 0 {
		return AttemptRow{}, false, err
	}
	return AttemptRow{rows[0].Who, rows[0].Tries, time.Time(rows[0].LastTry)}, true, nil
}

// PutAttempt sets the count of failed sign-ins of a name or address.
func (t *Tx) PutAttempt(r AttemptRow) error {
	return upsert(t, "attempts", attemptLine{r.Key, r.Count, instant(r.Last)}, "who")
}

// ClearAttempt forgets the failed sign-ins of a name or address.
func (t *Tx) ClearAttempt(key string) error {
	return t.db.Exec("DELETE FROM attempts WHERE who = ?", key).Error
}

// ExpireAttempts forgets the counts whose last failed sign-in was before a moment.
func (t *Tx) ExpireAttempts(before time.Time) error {
	return t.db.Exec("DELETE FROM attempts WHERE last_try < ?", instant(before)).Error
}

type flagLine struct {
	Site     string `gorm:"primaryKey"`
	Item     string `gorm:"primaryKey"`
	Kind     string `gorm:"primaryKey"`
	Code     string `gorm:"primaryKey"`
	Standing string
	Owner    string
	Due      *day
	Opened   day
	Cleared  *day
	Reopened int
}

// Flags gives every flag of a site, cleared ones included, in order of item, kind and code.
func (t *Tx) Flags(site string) ([]FlagRow, error) {
	rows, err := find[flagLine](t.db.Table("flags").Where("site = ?", site).Order("item, kind, code"))
	out := make([]FlagRow, len(rows))
	for i, r := range rows {
		out[i] = FlagRow{
			Site: r.Site, Item: r.Item, Kind: r.Kind, Code: r.Code, Standing: r.Standing, Owner: r.Owner,
			Due: (*civil.Day)(r.Due), Opened: civil.Day(r.Opened), Cleared: (*civil.Day)(r.Cleared), Reopened: r.Reopened,
		}
	}
	return out, err
}

// PutFlag adds a flag or sets it anew; site, item and subject say which it is.
func (t *Tx) PutFlag(r FlagRow) error {
	return upsert(t, "flags", flagLine{
		Site: r.Site, Item: r.Item, Kind: r.Kind, Code: r.Code, Standing: r.Standing, Owner: r.Owner,
		Due: (*day)(r.Due), Opened: day(r.Opened), Cleared: (*day)(r.Cleared), Reopened: r.Reopened,
	}, "site", "item", "kind", "code")
}

type runLine struct {
	Job      string  `gorm:"primaryKey"`
	Site     string  `gorm:"primaryKey"`
	Due      instant `gorm:"primaryKey"`
	Started  instant
	Finished *instant
	Outcome  string
	Message  string
}

func (r runLine) row() RunRow {
	return RunRow{
		Job: r.Job, Site: r.Site, Due: time.Time(r.Due), Started: time.Time(r.Started),
		Ended: (*time.Time)(r.Finished), Outcome: r.Outcome, Message: r.Message,
	}
}

// The outcomes of a run.
const (
	RunRunning = "running"
	RunDone    = "done"
	RunFailed  = "failed"
)

// ClaimRun takes the run of a job for a site that was due at a moment. Of several nodes that try,
// one is told true and runs it; that it failed or was broken off does not give it back (see
// RetakeRun).
func (t *Tx) ClaimRun(job, site string, due, started time.Time) (bool, error) {
	row := runLine{Job: job, Site: site, Due: instant(due), Started: instant(started), Outcome: RunRunning}
	r := t.db.Table("runs").Clauses(clause.OnConflict{DoNothing: true}).Create(&row)
	return r.RowsAffected == 1, r.Error
}

// RetakeRun takes over a run that failed, or that was claimed before a moment and has not ended:
// its node is gone. Of several nodes that try, one is told true.
func (t *Tx) RetakeRun(job, site string, due, claimedBefore, started time.Time) (bool, error) {
	r := t.db.Exec(`UPDATE runs SET outcome = ?, started = ?, finished = NULL, message = ''
		WHERE job = ? AND site = ? AND due = ? AND (outcome = ? OR (outcome = ? AND started < ?))`,
		RunRunning, instant(started), job, site, instant(due), RunFailed, RunRunning, instant(claimedBefore))
	return r.RowsAffected == 1, r.Error
}

// FinishRun notes how a claimed run ended, with RunDone or RunFailed; ErrMissing if nobody claimed
// it.
func (t *Tx) FinishRun(job, site string, due, ended time.Time, outcome, message string) error {
	r := t.db.Exec("UPDATE runs SET outcome = ?, message = ?, finished = ? WHERE job = ? AND site = ? AND due = ?",
		outcome, message, instant(ended), job, site, instant(due))
	return one(r.RowsAffected, r.Error, "no run of %s for %q was due at %s", job, site, moment(due))
}

// Runs gives the runs that began last, latest first.
func (t *Tx) Runs(limit int) ([]RunRow, error) {
	rows, err := find[runLine](t.db.Table("runs").Order("started DESC, job, site, due").Limit(limit))
	out := make([]RunRow, len(rows))
	for i, r := range rows {
		out[i] = r.row()
	}
	return out, err
}

// LastRun gives the run of a job for a site that was due last, and whether there is one.
func (t *Tx) LastRun(job, site string) (RunRow, bool, error) {
	rows, err := find[runLine](t.db.Table("runs").Where("job = ? AND site = ?", job, site).Order("due DESC").Limit(1))
	if err != nil || len(rows) == 0 {
		return RunRow{}, false, err
	}
	return rows[0].row(), true, nil
}
