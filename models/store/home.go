package store

import (
	"context"
	"errors"
	"io/fs"
	"os"

	"gorm.io/gorm"
)

// IsThere tells whether there is anything at an address where a book could be: a file, or a table in a
// database. A database that cannot be reached is a *Refusal.
func IsThere(ctx context.Context, address string) (bool, error) {
	if !OnServer(address) {
		_, err := os.Stat(address)
		if errors.Is(err, fs.ErrNotExist) {
			return false, nil
		}
		return err == nil, err
	}
	there := false
	err := onServer(ctx, address, func(g *gorm.DB) error {
		tables, err := serverTables(ctx, g)
		there = len(tables) > 0
		return err
	})
	return there, err
}

// Discard removes a book that was just made and that nobody has open: the file with what lies beside it,
// or every table of the database.
func Discard(ctx context.Context, address string) error {
	ctx = context.WithoutCancel(ctx)
	if !OnServer(address) {
		return removeBook(address)
	}
	return onServer(ctx, address, func(g *gorm.DB) error { return emptyServer(ctx, g) })
}

// onServer connects to a database for fn.
func onServer(ctx context.Context, address string, fn func(*gorm.DB) error) error {
	g, err := server{address, waits, 1, nil}.connect(ctx)
	if err != nil {
		return err
	}
	return errors.Join(explain(Place(address), fn(g)), disconnect(g))
}
