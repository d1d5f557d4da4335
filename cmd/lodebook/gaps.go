package main

import (
	"lodebook/models/book"
)

type gapsCommand struct {
	bookFlag
	siteFlag
	asFlag
	formatFlag
	On     string `help:"The day (YYYY-MM-DD); default: today at the site." placeholder:"DAY"`
	Strict bool   `help:"Leave with status 3 if there is a gap."`
}

// Run lists the gaps.
func (c *gapsCommand) Run(a *app) error {
	return a.openSite(c.bookFlag, c.Site, func(b *book.Book) error {
		st, err := a.standings(b, c.asFlag, book.StandingQuery{Site: c.Site}, c.On, "")
		if err != nil {
			return err
		}
		gaps := st.Gaps()
		if err := a.list(gaps, listing{format: c.Format, owner: true}); err != nil {
			return err
		}
		for _, r := range st.Faults() {
			a.say("Cannot be told: %s of %s %s. %s", r.Item, r.Subject.Asks, r.Subject.Code, first(r.Why))
		}
		if c.Strict && len(gaps) > 0 {
			return &exit{status: exitGaps}
		}
		return nil
	})
}

func first(list []string) string {
	if len(list) == 0 {
		return ""
	}
	return list[0]
}
