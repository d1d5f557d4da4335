package book_test

import (
	"bytes"
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
)

// opened opens the desk's book once more, and gives what is told of the snapshot.
func (d *desk) opened() (*desk, *string) {
	d.Helper()
	told := new(string)
	o := d.options()
	o.Tell = func(s string) { *told += s }
	b, err := book.Open(d.Context(), d.path, o)
	d.ok(err)
	d.Cleanup(func() { d.ok(b.Close()) })
	return &desk{T: d.T, Book: b, path: d.path, now: d.now, officer: d.officer, op: d.op}, told
}

func (d *desk) snapshot() string { return d.path + ".snapshot" }

func (d *desk) keep() {
	d.Helper()
	size, err := d.Size(d.Context())
	d.ok(err)
	got, err := d.KeepSnapshot(d.Context(), 1)
	d.ok(err)
	if got != size {
		d.Fatalf("the snapshot has %d entries of %d", got, size)
	}
}

// tells is everything that the book answers about its site, as text.
func (d *desk) tells() string {
	d.Helper()
	ctx := d.Context()
	var b strings.Builder
	show := func(v any) {
		d.Helper()
		text, err := json.Marshal(v)
		d.ok(err)
		b.Write(append(text, '\n'))
	}
	for _, on := range []civil.Day{civil.Of(2025, 7, 1), civil.Of(2026, 2, 20), civil.Of(2026, 3, 2), civil.Of(2027, 1, 1)} {
		for _, known := range []*time.Time{nil, new(time.Date(2026, 3, 3, 0, 0, 0, 0, time.UTC))} {
			st, err := d.Standings(ctx, d.op, book.StandingQuery{Site: site, On: &on, KnownAt: known})
			d.ok(err)
			for _, r := range st.Rows {
				show(r)
			}
		}
	}
	_, people, err := d.People(ctx, d.officer, site, nil)
	d.ok(err)
	for _, p := range people {
		v, err := d.Person(ctx, d.officer, site, p.Code, nil)
		d.ok(err)
		show(p)
		show(v)
	}
	list, err := d.Checklist(ctx, d.officer, site, nil)
	d.ok(err)
	show(list)
	drills, err := d.Drills(ctx, d.officer, site, nil)
	d.ok(err)
	show(drills)
	accounts, err := d.Accounts(ctx, d.op)
	d.ok(err)
	show(accounts)
	incidents, err := d.Incidents(ctx, d.officer, site)
	d.ok(err)
	show(incidents)
	remedies, err := d.Remedies(ctx, d.officer, site, false)
	d.ok(err)
	for _, r := range remedies {
		v, err := d.Remedy(ctx, d.officer, site, r.Number)
		d.ok(err)
		show(v)
	}
	out, err := d.OutOfService(ctx, d.officer, site)
	d.ok(err)
	show(out)
	page, err := d.Entries(ctx, d.officer, book.EntryQuery{Site: site, Limit: 1000})
	d.ok(err)
	for _, e := range page {
		show(e)
	}
	return b.String()
}

func (d *desk) same(want *desk) {
	d.Helper()
	a, b := strings.Split(d.tells(), "\n"), strings.Split(want.tells(), "\n")
	for i := range max(len(a), len(b)) {
		if i >= len(a) || i >= len(b) || a[i] != b[i] {
			d.Fatalf("line %d of %d and %d: from the snapshot\n%s\nfrom the rows\n%s", i, len(a), len(b), a[min(i, len(a)-1)], b[min(i, len(b)-1)])
		}
	}
}

func TestStartFromASnapshotIsStartFromRows(t *testing.T) {
	d := newFileDesk(t)
	d.fill()
	rows, _ := d.opened()
	d.keep()
	info, err := os.Stat(d.snapshot())
	d.ok(err)
	if info.Mode().Perm() != 0o600 {
		t.Errorf("the snapshot's mode is %v", info.Mode())
	}
	again, told := d.opened()
	if *told != "" {
		t.Fatal(*told)
	}
	again.same(rows)
	if n, err := again.KeepSnapshot(t.Context(), 1); err != nil || n != 0 {
		t.Errorf("a snapshot of %d entries was written though nothing had changed (%v)", n, err)
	}
}

// Whichever bit of the file is another, the book is read from its rows, and says so.
func TestDamagedSnapshotIsNotUsed(t *testing.T) {
	d := newFileDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	d.record("training/level-2", "P1", "2026-01-15", "pass")
	rows, _ := d.opened()
	d.keep()
	whole, err := os.ReadFile(d.snapshot())
	d.ok(err)
	refused := func(what string, b []byte) {
		t.Helper()
		d.ok(os.WriteFile(d.snapshot(), b, 0o600))
		again, told := d.opened()
		if !strings.HasPrefix(*told, "The book is read from its rows: the snapshot ") {
			t.Errorf("%s: it was told %q", what, *told)
		}
		again.same(rows)
	}
	for i := 0; i < len(whole); i += 1 + len(whole)/40 {
		damaged := slices.Clone(whole)
		damaged[i] ^= 1 << (i % 8)
		refused(fmt.Sprint("byte ", i), damaged)
	}
	refused("cut", whole[:len(whole)/2])
	refused("empty", nil)
	refused("longer", append(slices.Clone(whole), 0))
	d.ok(os.WriteFile(d.snapshot(), whole, 0o600))
	again, told := d.opened()
	if *told != "" {
		t.Errorf("the whole file is refused: %s", *told)
	}
	again.same(rows)
}

func TestForeignSnapshotIsNotUsed(t *testing.T) {
	d, other := newFileDesk(t), newFileDesk(t)
	d.fill()
	d.person("P9", "Somebody", "L1")
	other.fill()
	other.keep()
	b, err := os.ReadFile(other.snapshot())
	d.ok(err)
	d.ok(os.WriteFile(d.snapshot(), b, 0o600))
	if _, told := d.opened(); !strings.Contains(*told, "is of another book") {
		t.Errorf("it was told %q", *told)
	}
	// A copy of the book that went on otherwise.
	back := filepath.Join(t.TempDir(), "back.book")
	d.ok(d.Backup(t.Context(), back))
	d.person("P10", "Somebody else", "L1")
	d.keep()
	b, err = os.ReadFile(d.snapshot())
	d.ok(err)
	d.ok(os.WriteFile(back+".snapshot", b, 0o600))
	copied := &desk{T: t, path: back, now: d.now, officer: d.officer, op: d.op}
	behind, told := copied.opened()
	if !strings.Contains(*told, "entries and the book has") {
		t.Errorf("a snapshot of more than there is: it was told %q", *told)
	}
	for i := range 5 {
		behind.person(fmt.Sprint("P2", i), "Quite another", "L1")
	}
	_, told = copied.opened()
	if !strings.Contains(*told, "is of other entries") {
		t.Errorf("a snapshot of other entries: it was told %q", *told)
	}
}

func TestErasureRemovesTheSnapshot(t *testing.T) {
	d := newFileDesk(t)
	d.fill()
	d.keep()
	old, err := os.ReadFile(d.snapshot())
	d.ok(err)
	if !bytes.Contains(old, []byte("Runa Sandoy")) {
		t.Fatal("the name is not in the snapshot: the test looks in the wrong place")
	}
	d.ok(os.WriteFile(d.snapshot()+".0123", old, 0o600)) // left behind, or being written
	_, err = d.KeepPerson(t.Context(), d.officer, site, book.PersonForm{Code: "P1", Left: "2026-03-01"}, book.Correction{})
	d.ok(err)
	_, err = d.ErasePerson(t.Context(), d.officer, "P1")
	d.ok(err)
	d.nowhere("Runa Sandoy")
	d.keep()
	d.nowhere("Runa Sandoy")
	rows, _ := d.opened()

	// One from before the erasure turns up again.
	d.ok(os.WriteFile(d.snapshot(), old, 0o600))
	again, _ := d.opened()
	again.same(rows)
	view, err := again.Person(t.Context(), d.officer, site, "P1", nil)
	d.ok(err)
	if !view.Erased || !strings.Contains(view.Name, "(erased)") {
		t.Errorf("the erased person reads %q", view.Name)
	}
	d.nowhere("Runa Sandoy")
	again.keep()
	d.nowhere("Runa Sandoy")
}

// nowhere searches every file of the book's folder.
func (d *desk) nowhere(text string) {
	d.Helper()
	files, err := os.ReadDir(filepath.Dir(d.path))
	d.ok(err)
	for _, f := range files {
		b, err := os.ReadFile(filepath.Join(filepath.Dir(d.path), f.Name()))
		d.ok(err)
		if bytes.Contains(b, []byte(text)) {
			d.Errorf("%q is in %s", text, f.Name())
		}
	}
}
