package main

import (
	"lodebook/jobs"
	"lodebook/models/book"
)

type jobCommand struct {
	Name string `arg:"" help:"Name of the job."`
	bookFlag
	asFlag
	Site string `help:"Only this site; default: all of them." placeholder:"CODE"`
	At   string `help:"As if it were this moment (RFC 3339, or local time at the site)." placeholder:"MOMENT"`
}

// Run runs a job now.
func (c *jobCommand) Run(a *app) error {
	job, err := jobs.Named(c.Name)
	if err != nil {
		return err
	}
	return a.open(c.bookFlag, func(b *book.Book) error {
		actor, err := a.actor(b, c.asFlag)
		if err != nil {
			return err
		}
		if !book.Allows(book.RunJobs, actor.Role) {
			return &book.Denied{Action: book.RunJobs, Role: actor.Role}
		}
		sites, err := b.Sites(a.ctx, actor)
		if err != nil {
			return err
		}
		ran := false
		for _, s := range sites {
			if c.Site != "" && c.Site != s.Code {
				continue
			}
			ran = true
			if err := c.runAt(a, b, job, s.Code); err != nil {
				return err
			}
		}
		if !ran {
			return &book.NotFound{What: "site", Code: c.Site}
		}
		return nil
	})
}

func (c *jobCommand) runAt(a *app, b *book.Book, job jobs.Job, site string) error {
	at := b.Now()
	if c.At != "" {
		var err error
		if at, err = b.Moment(a.ctx, site, "--at", c.At); err != nil {
			return err
		}
	}
	message, err := job.RunNow(a.ctx, b, site, at)
	if err != nil {
		return err
	}
	a.say("%s at %s: %s.", job.Name, site, message)
	return nil
}
