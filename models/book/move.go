package book

import (
	"context"

	"lodebook/models/store"
)

// Move copies a book to another home, a file or a PostgreSQL database, and verifies it there. Progress, if
// not nil, is told now and then how many rows of a table have been copied.
func Move(ctx context.Context, from, to string, progress func(table string, rows int64)) (store.Report, error) {
	return store.Move(ctx, from, to, progress)
}

// Place is how the address of a book is shown: without a password.
func Place(address string) string { return store.Place(address) }

// IsThere tells whether there is anything at an address: a file, or a table in a database.
func IsThere(ctx context.Context, address string) (bool, error) { return store.IsThere(ctx, address) }

// Discard removes a book that was just made and that nobody has open.
func Discard(ctx context.Context, address string) error { return store.Discard(ctx, address) }
