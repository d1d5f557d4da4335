package store

import (
	"testing"

	"lodebook/migrations/scratch"
)

// somewhere is where no book is yet: on the server if one is set, else a file.
func somewhere(t testing.TB) string { return scratch.Book(t) }
