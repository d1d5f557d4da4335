package book

import (
	"context"
	"fmt"
	"time"

	"lodebook/models/civil"
	"lodebook/models/standing"
	"lodebook/models/store"
)

// FlagView is a flag with what a page needs.
type FlagView struct {
	Item, Kind, Code string
	Standing         string
	Owner            string
	Due              *civil.Day
	Opened           civil.Day
	Cleared          *civil.Day
	Reopened         int
}

// FlagCounts says what a run of the morning job did.
type FlagCounts struct{ Raised, Reopened, Cleared, Standing, DataFaults int }

func (c FlagCounts) String() string {
	s := fmt.Sprintf("%d raised, %d reopened, %d cleared, %d stand", c.Raised, c.Reopened, c.Cleared, c.Standing)
	if c.DataFaults > 0 {
		s += fmt.Sprintf("; %d subjects cannot be judged for want of a fact", c.DataFaults)
	}
	return s
}

// RaiseFlags evaluates a site on a day, raises a flag on every gap and coming lapse and clears the
// flags of what has been mended. A flag's identity is its item and subject: a gap that lasts is one
// flag, and one that comes back is the same flag, reopened.
func (b *Book) RaiseFlags(ctx context.Context, actor Actor, site string, day civil.Day) (FlagCounts, error) {
	var counts FlagCounts
	if err := actor.may(RunJobs, site); err != nil {
		return counts, err
	}
	st, err := b.Standings(ctx, JobActor(), StandingQuery{Site: site, On: &day})
	if err != nil {
		return counts, err
	}
	alarms, err := b.alarms(ctx, site, day)
	if err != nil {
		return counts, err
	}
	err = b.operate(ctx, func(tx *store.Tx, _ *model) error {
		old, err := tx.Flags(site)
		if err != nil {
			return err
		}
		for _, f := range turnFlags(old, append(flagged(st, &counts), alarms...), day, &counts) {
			if err := tx.PutFlag(f); err != nil {
				return err
			}
		}
		return nil
	})
	return counts, err
}

// flagged are the gaps and what closes, as flags to raise.
func flagged(st Standings, n *FlagCounts) []store.FlagRow {
	var out []store.FlagRow
	for _, r := range st.Rows {
		if r.Word == standing.DataFault {
			n.DataFaults++
		}
		if r.Word.IsGap() || r.Word == standing.Closing {
			out = append(out, store.FlagRow{Site: st.Site.Code, Item: r.Item, Kind: string(r.Subject.Asks), Code: r.Subject.Code, Standing: string(r.Word), Owner: r.Owner, Due: r.Due})
		}
	}
	return out
}

// turnFlags gives the flags that change: those to raise, and those that stand no more.
func turnFlags(old, raise []store.FlagRow, day civil.Day, n *FlagCounts) []store.FlagRow {
	type key struct{ item, kind, code string }
	was := map[key]store.FlagRow{}
	for _, f := range old {
		was[key{f.Item, f.Kind, f.Code}] = f
	}
	var out []store.FlagRow
	for _, r := range raise {
		n.Standing++
		k := key{r.Item, r.Kind, r.Code}
		f, ok := was[k]
		delete(was, k)
		switch {
		case !ok:
			n.Raised++
			f = store.FlagRow{Site: r.Site, Item: r.Item, Kind: r.Kind, Code: r.Code, Opened: day}
		case f.Cleared != nil:
			n.Reopened++
			f.Cleared, f.Opened, f.Reopened = nil, day, f.Reopened+1
		}
		f.Standing, f.Owner, f.Due = r.Standing, r.Owner, r.Due
		out = append(out, f)
	}
	for _, f := range was {
		if f.Cleared == nil {
			n.Cleared++
			f.Cleared = dayPtr(day)
			out = append(out, f)
		}
	}
	return out
}

// Flags gives the flags of a site, those that stand first.
func (b *Book) Flags(ctx context.Context, actor Actor, site string) ([]FlagView, error) {
	if err := actor.may(SeeSite, site); err != nil {
		return nil, err
	}
	var out []FlagView
	err := b.st.Read(ctx, func(tx *store.Tx) error {
		rows, err := tx.Flags(site)
		for _, f := range rows {
			out = append(out, FlagView{f.Item, f.Kind, f.Code, f.Standing, f.Owner, f.Due, f.Opened, f.Cleared, f.Reopened})
		}
		return err
	})
	return out, err
}

// RunView is one run of a scheduled job.
type RunView struct {
	Job, Site string
	Due       time.Time // the moment that the schedule named
	Started   time.Time
	Ended     *time.Time
	Outcome   string // running, done or failed
	Message   string
}

// Runs gives the last runs of jobs, newest first.
func (b *Book) Runs(ctx context.Context, actor Actor, limit int) ([]RunView, error) {
	if err := actor.may(SeeBook, ""); err != nil {
		return nil, err
	}
	var out []RunView
	err := b.st.Read(ctx, func(tx *store.Tx) error {
		rows, err := tx.Runs(limit)
		for _, r := range rows {
			if r.Site == "" || actor.SeesSite(r.Site) {
				out = append(out, RunView(r))
			}
		}
		return err
	})
	return out, err
}

// LastRun gives the run of a job at a site with the latest due moment.
func (b *Book) LastRun(ctx context.Context, job, site string) (RunView, bool, error) {
	var out RunView
	var found bool
	err := b.st.Read(ctx, func(tx *store.Tx) error {
		r, ok, err := tx.LastRun(job, site)
		out, found = RunView(r), ok
		return err
	})
	return out, found, err
}

// stuckAfter is how long after its start a run that has no end is taken for one that was cut off.
const stuckAfter = 30 * time.Minute

// Stuck tells whether the run began long ago and never ended: the program that ran it is gone.
func (r RunView) Stuck(now time.Time) bool {
	return r.Outcome == store.RunRunning && now.Sub(r.Started) > stuckAfter
}

// Claimed runs fn as the run of a job at a site that was due at a moment, if nobody has claimed that
// run yet (or whoever did is gone); the outcome is recorded either way. It tells whether it ran.
func (b *Book) Claimed(ctx context.Context, job, site string, due time.Time, fn func() (string, error)) (bool, error) {
	var mine bool
	err := b.operate(ctx, func(tx *store.Tx, _ *model) error {
		var err error
		mine, err = tx.ClaimRun(job, site, due, b.Now())
		if err == nil && !mine {
			mine, err = tx.RetakeRun(job, site, due, b.Now().Add(-stuckAfter), b.Now())
		}
		return err
	})
	if err != nil || !mine {
		return false, err
	}
	message, failure := fn()
	outcome := store.RunDone
	if failure != nil {
		outcome, message = store.RunFailed, failure.Error()
	}
	err = b.operate(ctx, func(tx *store.Tx, _ *model) error {
		return tx.FinishRun(job, site, due, b.Now(), outcome, message)
	})
	if failure != nil {
		return true, failure
	}
	return true, err
}
