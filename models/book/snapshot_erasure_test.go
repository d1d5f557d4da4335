package book_test

import (
	"bytes"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"lodebook/models/book"
)

// What is told of somebody in a snapshot is forgotten with them, whichever value it is: it is in no file, and one
// from before the erasure that turns up again does not bring it back, neither here nor into the next snapshot.
func TestNothingOfAnErasedPersonComesBackFromASnapshot(t *testing.T) {
	d := newFileDesk(t)
	ctx := t.Context()
	secrets := []string{"Ragna Vestgard", "ragna@mail.example", "BADGE-7781", "Hidden Ferry Works", "ragna-signs-in"}
	_, err := d.KeepPerson(ctx, d.officer, site, book.PersonForm{
		Code: "P7", Name: secrets[0], Email: secrets[1], Badge: secrets[2], Level: "L2", Joined: "2025-02-01",
		Facts: map[string]string{"employer": secrets[3]},
	}, book.Correction{})
	d.ok(err)
	d.account(secrets[4], book.Member, "P7")
	d.keep()
	old, err := os.ReadFile(d.snapshot())
	d.ok(err)
	for _, secret := range secrets {
		if !bytes.Contains(old, []byte(secret)) {
			t.Fatalf("%q is not in the snapshot: the test looks for what is not there", secret)
		}
	}
	_, err = d.KeepPerson(ctx, d.officer, site, book.PersonForm{Code: "P7", Left: "2026-03-01"}, book.Correction{})
	d.ok(err)
	_, err = d.ErasePerson(ctx, d.officer, "P7")
	d.ok(err)
	nowhere := func() {
		t.Helper()
		for _, secret := range secrets {
			d.nowhere(secret)
		}
	}
	nowhere()
	d.keep()
	nowhere()

	d.ok(os.WriteFile(d.snapshot(), old, 0o600))
	again, told := d.opened()
	if *told != "" {
		t.Fatalf("the old snapshot is not read, so nothing is tried: %s", *told)
	}
	said := again.tells()
	for _, secret := range secrets {
		if strings.Contains(said, secret) {
			t.Errorf("%q is answered again", secret)
		}
	}
	if _, err := again.ActorNamed(ctx, secrets[4]); err == nil {
		t.Errorf("the account still goes by %q", secrets[4])
	}
	nowhere()
	again.keep()
	nowhere()
}

// Whoever erases somebody by another name of the book's file removes the same snapshot.
func TestErasureByAnotherNameOfTheFile(t *testing.T) {
	d := newFileDesk(t)
	d.fill()
	_, err := d.KeepPerson(t.Context(), d.officer, site, book.PersonForm{Code: "P1", Left: "2026-03-01"}, book.Correction{})
	d.ok(err)
	link := filepath.Join(t.TempDir(), "link.book")
	d.ok(os.Symlink(d.path, link))
	linked := &desk{T: t, path: link, now: d.now, officer: d.officer, op: d.op}
	b, err := book.Open(t.Context(), link, linked.options())
	d.ok(err)
	t.Cleanup(func() { d.ok(b.Close()) })
	linked.Book = b
	linked.keep()
	if _, err := os.Stat(d.snapshot()); err != nil {
		t.Fatalf("the snapshot is not beside the file itself: %v", err)
	}
	_, err = d.ErasePerson(t.Context(), d.officer, "P1")
	d.ok(err)
	d.nowhere("Runa Sandoy")
	linked.nowhere("Runa Sandoy")
}

// A folder for snapshots that is not there keeps nobody from being erased, and starts nothing.
func TestFolderOfSnapshotsThatIsNotThere(t *testing.T) {
	d := newFileDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	_, err := d.KeepPerson(t.Context(), d.officer, site, book.PersonForm{Code: "P1", Left: "2026-03-01"}, book.Correction{})
	d.ok(err)
	o := d.options()
	o.Snapshots = filepath.Join(t.TempDir(), "nowhere")
	b, err := book.Open(t.Context(), d.path, o)
	d.ok(err)
	t.Cleanup(func() { d.ok(b.Close()) })
	if _, err := b.ErasePerson(t.Context(), d.officer, "P1"); err != nil {
		t.Errorf("erased: %v", err)
	}
	if _, err := b.KeepSnapshot(t.Context(), 1); err == nil || !strings.Contains(err.Error(), o.Snapshots) {
		t.Errorf("a snapshot was kept in a folder that is not there, or it is not named: %v", err)
	}
	d.ok(os.Mkdir(o.Snapshots, 0o700))
	if n, err := b.KeepSnapshot(t.Context(), 1); err != nil || n == 0 {
		t.Errorf("once it is there: %d entries, %v", n, err)
	}
}

// A program that keeps its snapshots elsewhere removes its own once it sees that another has erased somebody.
func TestErasureByAnotherProgramReachesASnapshotElsewhere(t *testing.T) {
	d := newFileDesk(t)
	d.fill()
	_, err := d.KeepPerson(t.Context(), d.officer, site, book.PersonForm{Code: "P1", Left: "2026-03-01"}, book.Correction{})
	d.ok(err)
	o := d.options()
	o.Snapshots = t.TempDir()
	b, err := book.Open(t.Context(), d.path, o)
	d.ok(err)
	t.Cleanup(func() { d.ok(b.Close()) })
	elsewhere := &desk{T: t, Book: b, path: filepath.Join(o.Snapshots, "any"), now: d.now, officer: d.officer, op: d.op}
	elsewhere.keep()
	_, err = d.ErasePerson(t.Context(), d.officer, "P1")
	d.ok(err)
	view, err := elsewhere.Person(t.Context(), d.officer, site, "P1", nil)
	d.ok(err)
	if !view.Erased {
		t.Errorf("the other program still reads %q", view.Name)
	}
	elsewhere.nowhere("Runa Sandoy")
	elsewhere.keep()
	elsewhere.nowhere("Runa Sandoy")
}
