package main

import "lodebook/models/book"

type restoreCommand struct {
	From string `arg:"" help:"The copy."`
	bookFlag
}

// Run verifies a copy and puts it where there is no book yet.
func (c *restoreCommand) Run(a *app) error {
	if err := named("--book", c.Book); err != nil {
		return err
	}
	if err := book.Restore(a.ctx, c.From, c.Book); err != nil {
		return err
	}
	a.say("Restored to %s and verified.", book.Place(c.Book))
	return nil
}
