package book_test

import (
	"context"
	"errors"
	"flag"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"lodebook/migrations/scratch"
	"lodebook/models/book"
	"lodebook/models/ledger"
	"lodebook/models/store"
)

var update = flag.Bool("update", false, "write the golden bytes of kinds that have none yet")

// counting is a source of bytes that are the same in every run.
type counting struct{ n byte }

func (c *counting) Read(p []byte) (int, error) {
	for i := range p {
		p[i] = c.n
		c.n++
	}
	return len(p), nil
}

// TestGoldenBytes holds the stored form of every kind and version: entries last for decades, so what
// stands in testdata/entries is never changed, only added to.
func TestGoldenBytes(t *testing.T) {
	d := &desk{T: t, path: scratch.Book(t), now: time.Date(2026, 3, 2, 8, 0, 0, 0, time.UTC), op: book.SystemOperator("ops")}
	b, err := book.Create(t.Context(), d.path, book.Options{Clock: func() time.Time { return d.now }, Random: &counting{}})
	d.ok(err)
	defer func() { d.ok(b.Close()) }()
	d.Book = b
	source, err := os.ReadFile("testdata/site.yaml")
	d.ok(err)
	_, err = d.OpenProgram(t.Context(), d.op, source, "")
	d.ok(err)
	d.officer = d.account("olga", book.SafetyOfficer, "")
	d.fill()
	_, err = d.KeepPerson(t.Context(), d.officer, site, book.PersonForm{Code: "P3", Left: "2026-02-28"}, book.Correction{})
	d.ok(err)
	_, err = d.ErasePerson(t.Context(), d.officer, "P3")
	d.ok(err)
	d.fillMore()

	entries, err := d.Entries(t.Context(), d.op, book.EntryQuery{Limit: 500})
	d.ok(err)
	first := map[string]string{}
	for _, e := range entries { // newest first: the first of each kind stays
		v, err := d.Entry(t.Context(), d.op, e.ID)
		d.ok(err)
		if v.Hidden {
			v, err = d.Entry(t.Context(), d.officer, e.ID)
			d.ok(err)
		}
		first[e.Kind] = v.Canonical
	}
	if len(first) != len(book.Kinds) {
		t.Errorf("the test writes %d of %d kinds", len(first), len(book.Kinds))
	}
	for kind, got := range first {
		path := filepath.Join("testdata", "entries", kind+"-v1.json")
		want, err := os.ReadFile(path)
		if errors.Is(err, os.ErrNotExist) && *update {
			d.ok(os.MkdirAll(filepath.Dir(path), 0o755))
			d.ok(os.WriteFile(path, []byte(got+"\n"), 0o644))
			continue
		}
		d.ok(err)
		if strings.TrimRight(string(want), "\n") != got {
			t.Errorf("kind %s is stored otherwise than before\nbefore: %s\nnow:    %s", kind, want, got)
		}
	}
}

// TestUnknownKindIsRefused writes what a newer program would and opens the book.
func TestUnknownKindIsRefused(t *testing.T) {
	d := newDesk(t)
	bytes, err := ledger.Canonical(map[string]any{"kind": "moonshot", "v": 1, "body": map[string]any{}})
	d.ok(err)
	st, err := store.Open(t.Context(), d.path)
	d.ok(err)
	err = st.Write(context.WithoutCancel(t.Context()), func(tx *store.Tx) error {
		_, err := tx.Append([]store.Entry{{ID: "01890a5d-ac96-774b-bcce-b302099a8057", Kind: "moonshot", V: 1, Actor: "job", RecordedAt: d.now, Bytes: bytes}}, nil)
		return err
	})
	d.ok(err)
	d.ok(st.Close())
	var newer *book.TooNew
	if _, err := book.Open(t.Context(), d.path, d.options()); !errors.As(err, &newer) || newer.Kind != "moonshot" {
		t.Errorf("opened: %v", err)
	}
	if _, err := d.Today(t.Context(), site); !errors.As(err, &newer) {
		t.Errorf("a running program went on: %v", err)
	}
}

// TestTamperedColumnsAreFound changes what the store looks entries up by.
func TestTamperedColumnsAreFound(t *testing.T) {
	d := newDesk(t)
	d.fill()
	r, err := d.Verify(t.Context(), nil)
	d.ok(err)
	if r.FirstFault != "" {
		t.Fatal(r.FirstFault)
	}
	d.rawSQL("UPDATE entries SET kind = 'pause' WHERE seq = 3")
	r, err = d.Verify(t.Context(), nil)
	d.ok(err)
	if !strings.Contains(r.FirstFault, "entry 3") || !strings.Contains(r.FirstFault, "kind") {
		t.Errorf("a changed kind: %q", r.FirstFault)
	}
}
