package jobs

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"lodebook/models/book"
)

func TestSnapshotIsWrittenOncePerThousandEntries(t *testing.T) {
	x := benchAt(t, time.Date(2026, 3, 2, 9, 0, 0, 0, time.UTC), filepath.Join(t.TempDir(), "site.book"))
	x.turn()
	file := x.path + ".snapshot"
	first, err := os.ReadFile(file)
	x.ok(err)
	x.now = x.now.AddDate(0, 0, 1)
	x.imp("people", "code,name,joined\nP9,Nobody,2026-01-01\n")
	x.turn()
	runs := x.runsOf("snapshot")
	if len(runs) != 2 || !strings.HasPrefix(runs[1].Message, "written") || !strings.HasPrefix(runs[0].Message, "left as it is") {
		t.Fatalf("two nights: %+v", runs)
	}
	if now, err := os.ReadFile(file); err != nil || string(now) != string(first) {
		t.Fatalf("the snapshot was written again (%v)", err)
	}
	if n, err := x.b.KeepSnapshot(t.Context(), 1); err != nil || n == 0 {
		t.Fatalf("at stop %d entries were written: %v", n, err)
	}
	told := ""
	b, err := book.Open(t.Context(), x.path, book.Options{Clock: func() time.Time { return x.now }, Random: strings.NewReader(""), Tell: func(s string) { told += s }})
	x.ok(err)
	x.ok(b.Close())
	if told != "" {
		t.Fatal(told)
	}
}
