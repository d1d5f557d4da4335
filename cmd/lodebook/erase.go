package main

import "lodebook/models/book"

type eraseCommand struct {
	Person string `arg:"" help:"Code of the person."`
	bookFlag
	asFlag
}

// Run erases a person who has left.
func (c *eraseCommand) Run(a *app) error {
	return a.open(c.bookFlag, func(b *book.Book) error {
		actor, err := a.actor(b, c.asFlag)
		if err != nil {
			return err
		}
		if _, err := b.ErasePerson(a.ctx, actor, c.Person); err != nil {
			return err
		}
		a.say("The names of %s and the texts about them are gone. Copies made before keep them: destroy those too.", c.Person)
		return nil
	})
}
