package jobs

import (
	"context"
	"fmt"
	"time"

	"lodebook/models/book"
)

// snapshotBehind is how many entries a snapshot may be behind before it is written again. Taking in so many
// at a start costs less than a second.
const snapshotBehind = 1000

// snapshot writes the book as it is in memory beside it, so that the next start need not read all of it. There
// is one of the whole book: what it does for the first site is done for all.
var snapshot = Job{
	Name:     "snapshot",
	About:    "Keeps the snapshot recent that the program starts from",
	Schedule: "10 3 * * *",
	Run: func(ctx context.Context, b *book.Book, _ string, _ time.Time) (string, error) {
		size, err := b.KeepSnapshot(ctx, snapshotBehind)
		if err != nil {
			return "", err
		}
		if size == 0 {
			return fmt.Sprintf("left as it is: fewer than %d entries have come since the last", snapshotBehind), nil
		}
		return fmt.Sprintf("written, of %d entries", size), nil
	},
}
