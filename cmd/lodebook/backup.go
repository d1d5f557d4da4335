package main

import "lodebook/models/book"

type backupCommand struct {
	bookFlag
	Out string `required:"" help:"Path of the copy; it must not exist." placeholder:"FILE"`
}

// Run copies a book that may be in use.
func (c *backupCommand) Run(a *app) error {
	return a.open(c.bookFlag, func(b *book.Book) error {
		if err := b.Backup(a.ctx, c.Out); err != nil {
			return err
		}
		a.say("Copied to %s and verified.", c.Out)
		return nil
	})
}
