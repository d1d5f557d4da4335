package jobs

import (
	"context"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
)

// morning evaluates a site, raises a flag on every gap and coming lapse, and clears the flags of what
// has been mended.
var morning = Job{
	Name:     "morning",
	About:    "Evaluates the site and its doors, raises and clears flags",
	Schedule: "30 5 * * *",
	Run: func(ctx context.Context, b *book.Book, site string, at time.Time) (string, error) {
		zone, err := b.Zone(ctx, site)
		if err != nil {
			return "", err
		}
		// Where the site is short of people, and what its doors' list says, is reckoned first.
		if err := b.TakeStock(ctx); err != nil {
			return "", err
		}
		counts, err := b.RaiseFlags(ctx, book.JobActor(), site, civil.DayOf(at, zone))
		return counts.String(), err
	},
}
