package book

import (
	"context"
	"encoding/json"
	"fmt"
	"strconv"

	"lodebook/models/store"
)

// Backup writes a consistent copy of the live book to a new file and verifies it.
func (b *Book) Backup(ctx context.Context, out string) error { return b.st.Backup(ctx, out) }

// Restore verifies a backup and puts it in the place of a book that does not exist yet.
func Restore(ctx context.Context, from, to string) error { return store.Restore(ctx, from, to) }

// Verify recomputes every hash of the book and checks what can be checked without a seal.
func (b *Book) Verify(ctx context.Context, progress func(done, total int64)) (store.Report, error) {
	return b.st.Verify(ctx, progress, sameAsColumns)
}

// sameAsColumns checks what the store looks entries up by against what their hashed bytes say.
func sameAsColumns(e store.Entry, _ []store.Veil) error {
	var env envelope
	if err := json.Unmarshal(e.Bytes, &env); err != nil {
		return fmt.Errorf("entry %d is not readable", e.Seq)
	}
	for _, x := range []struct{ what, column, bytes string }{
		{"identifier", e.ID, env.ID},
		{"kind", e.Kind, env.Kind},
		{"version", strconv.Itoa(e.V), strconv.Itoa(env.V)},
		{"site", e.Site, env.Site},
		{"import", e.Batch, env.Batch},
		{"superseded entry", e.Supersedes, env.Supersedes},
		{"writer", e.Actor, env.Actor},
		{"time of recording", e.RecordedAt.UTC().Format(instantLayout), env.At},
	} {
		if x.column != x.bytes {
			return fmt.Errorf("entry %d: its %s is %q in the table and %q in its bytes", e.Seq, x.what, x.column, x.bytes)
		}
	}
	return nil
}

// Dump gives every projected row as text, for comparing two states.
func (b *Book) Dump(ctx context.Context) (map[string][]string, error) { return b.st.Dump(ctx) }

// Size is the number of entries.
func (b *Book) Size(ctx context.Context) (int64, error) { return b.st.Size(ctx) }
