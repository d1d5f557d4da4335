package book

import (
	"context"

	"lodebook/models/store"
)

// Backup writes a consistent copy of the live book to a new file and verifies it.
func (b *Book) Backup(ctx context.Context, out string) error { return b.st.Backup(ctx, out) }

// Restore verifies a backup and puts it in the place of a book that does not exist yet.
func Restore(ctx context.Context, from, to string) error { return store.Restore(ctx, from, to) }

// Verify recomputes every hash of the book and checks what can be checked without a seal.
func (b *Book) Verify(ctx context.Context, progress func(done, total int64)) (store.Report, error) {
	return b.st.Verify(ctx, progress)
}

// Dump gives every projected row as text, for comparing two states.
func (b *Book) Dump(ctx context.Context) (map[string][]string, error) { return b.st.Dump(ctx) }

// Size is the number of entries.
func (b *Book) Size(ctx context.Context) (int64, error) { return b.st.Size(ctx) }
