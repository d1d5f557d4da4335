package book

import (
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"testing"
)

// Another program may be about to put a file in place that it wrote before somebody was erased: at whatever moment
// it does so, nothing is left once the removal is over.
func TestNoSnapshotSlipsPastItsRemoval(t *testing.T) {
	b := &Book{}
	b.snapshots.path = filepath.Join(t.TempDir(), "site.book.snapshot")
	beside := b.snapshots.path + ".0123456789abcdef"
	for i := range 200 {
		if err := os.WriteFile(beside, []byte("a name"), 0o600); err != nil {
			t.Fatal(err)
		}
		start, put := make(chan struct{}), make(chan error)
		go func() {
			<-start
			for range i {
				runtime.Gosched() // a little later each time
			}
			put <- os.Rename(beside, b.snapshots.path)
		}()
		close(start)
		if err := b.removeSnapshots(); err != nil {
			t.Fatal(err)
		}
		if err := <-put; err != nil && !errors.Is(err, fs.ErrNotExist) {
			t.Fatal(err)
		}
		if left, err := filepath.Glob(b.snapshots.path + "*"); err != nil || len(left) > 0 {
			t.Fatalf("round %d left %v (%v)", i, left, err)
		}
	}
}
