// Package jobs is the schedule, and each job in a file of its own. A job is a plain function of a
// site and a moment; a run is claimed in the book's database, so that several programs on one book run
// it once, and every run is recorded with its outcome.
package jobs

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"time"

	"github.com/robfig/cron/v3"

	"lodebook/models/book"
)

// Job is one scheduled job. Schedule is a cron expression by the clocks of the site.
type Job struct {
	Name     string
	About    string
	Schedule string
	Run      func(ctx context.Context, b *book.Book, site string, at time.Time) (string, error)
}

// All are the jobs.
var All = []Job{morning, snapshot}

// Named finds a job.
func Named(name string) (Job, error) {
	for _, j := range All {
		if j.Name == name {
			return j, nil
		}
	}
	return Job{}, fmt.Errorf("no job is named %q; there is %s", name, names())
}

func names() string {
	s := ""
	for i, j := range All {
		if i > 0 {
			s += ", "
		}
		s += j.Name
	}
	return s
}

// schedule is the job's schedule by the clocks of a zone.
func (j Job) schedule(zone *time.Location) (cron.Schedule, error) {
	return cron.ParseStandard("CRON_TZ=" + zone.String() + " " + j.Schedule)
}

// lookBack is how far back a missed run is looked for; only the last one is caught up.
const lookBack = 72 * time.Hour

// lastDue is the last moment up to now at which the schedule names a run.
func lastDue(s cron.Schedule, now time.Time) (time.Time, bool) {
	var last time.Time
	for t := s.Next(now.Add(-lookBack)); !t.IsZero() && !t.After(now); t = s.Next(t) {
		last = t
	}
	return last.UTC(), !last.IsZero()
}

// Next is the next moment at which the job runs for a site.
func (j Job) Next(zone *time.Location, now time.Time) (time.Time, error) {
	s, err := j.schedule(zone)
	if err != nil {
		return time.Time{}, err
	}
	return s.Next(now), nil
}

// RunNow runs the job for one site at a moment, whatever the schedule says, and records the run.
func (j Job) RunNow(ctx context.Context, b *book.Book, site string, at time.Time) (string, error) {
	var message string
	ran, err := b.Claimed(ctx, j.Name, site, at.UTC(), func() (string, error) {
		var err error
		message, err = j.Run(ctx, b, site, at)
		return message, err
	})
	if err == nil && !ran {
		return "", errors.New("this run was made already")
	}
	return message, err
}

// Runner runs what is due, once a minute.
type Runner struct {
	b   *book.Book
	log *slog.Logger
}

// NewRunner makes a runner; it does nothing until Start or Turn.
func NewRunner(b *book.Book, log *slog.Logger) *Runner { return &Runner{b, log} }

// Turn runs every job at every site whose last due run has not been made. It is what a start and
// every minute do: a run that was missed while the program was down is caught up, once.
func (r *Runner) Turn(ctx context.Context) error {
	sites, err := r.b.Sites(ctx, book.JobActor())
	if err != nil {
		return err
	}
	var all []error
	for _, s := range sites {
		for _, j := range All {
			if err := r.turn(ctx, j, s); err != nil {
				all = append(all, fmt.Errorf("job %s at site %s: %w", j.Name, s.Code, err))
			}
		}
	}
	return errors.Join(all...)
}

func (r *Runner) turn(ctx context.Context, j Job, site book.SiteView) error {
	s, err := j.schedule(site.Location)
	if err != nil {
		return err
	}
	due, ok := lastDue(s, r.b.Now())
	if !ok {
		return nil
	}
	last, ran, err := r.b.LastRun(ctx, j.Name, site.Code)
	if err != nil || ran && !last.Due.Before(due) && !last.Stuck(r.b.Now()) {
		return err
	}
	_, err = r.b.Claimed(ctx, j.Name, site.Code, due, func() (string, error) {
		return j.Run(ctx, r.b, site.Code, r.b.Now())
	})
	return err
}

// Start turns once, then every minute, until the context ends; it returns when the last turn is over.
func (r *Runner) Start(ctx context.Context) {
	turn := func() {
		err := r.b.Turn(ctx) // before the jobs ask, what stands today is made ready
		if err == nil {
			err = r.Turn(ctx)
		}
		if err != nil && ctx.Err() == nil {
			r.log.Error("a job failed", "error", err)
		}
	}
	turn()
	c := cron.New(cron.WithLocation(time.UTC), cron.WithChain(cron.SkipIfStillRunning(cron.DiscardLogger)))
	if _, err := c.AddFunc("* * * * *", turn); err != nil {
		r.log.Error("the schedule could not be set", "error", err)
		return
	}
	c.Start()
	<-ctx.Done()
	<-c.Stop().Done()
}
