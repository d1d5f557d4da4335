package standing_test

import (
	"bytes"
	"fmt"
	"math/rand/v2"
	"slices"
	"testing"

	"pgregory.net/rapid"

	"lodebook/models/standing"
)

// withoutRecords puts every line but the records, in another order than the first engine got them.
func (w *world) withoutRecords() *standing.Engine {
	e := standing.New()
	for _, x := range w.n.excusals {
		e.PutExcusal(x.site, x.line)
	}
	for _, r := range w.n.rights {
		e.PutRight(r.site, r.line)
	}
	for _, ev := range slices.Backward(w.n.events) {
		e.PutEvent(ev.site, ev.line)
	}
	for _, f := range w.n.facts {
		e.PutFact(f.site, f.line)
	}
	for _, s := range slices.Backward(w.n.stints) {
		e.PutStint(s.site, s.line)
	}
	for _, v := range w.n.versions {
		e.PutVersion("S", v)
	}
	return e
}

// An engine read back counts and judges as the one that was written, and goes on as it would have.
func TestSnapshotIsTheEngine(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		w := &world{pick: rand.New(rand.NewPCG(rapid.Uint64().Draw(t, "seed"), 0)).IntN}
		w.make()
		e := w.puts()
		if w.chance(80) {
			e.Build()
		}
		var b bytes.Buffer
		if err := e.WriteSnapshot(&b); err != nil {
			t.Fatal(err)
		}
		got := w.withoutRecords()
		if err := got.ReadSnapshot(b.Bytes()); err != nil {
			t.Fatalf("%v\n%s", err, w.tell())
		}
		for range 3 {
			w.alike(t, got, e)
			w.record()
			r := w.n.records[len(w.n.records)-1]
			got.PutRecord(r)
			e.PutRecord(r)
			w.fact()
			f := w.n.facts[len(w.n.facts)-1]
			got.PutFact(f.site, f.line)
			e.PutFact(f.site, f.line)
		}
		w.alike(t, got, e)
	})
}

func (w *world) alike(t fataler, got, want *standing.Engine) {
	t.Helper()
	on := w.day()
	a, _ := got.Evaluate("S", standing.Query{On: on, KnownAt: standing.Always})
	b, _ := want.Evaluate("S", standing.Query{On: on, KnownAt: standing.Always})
	for i := range max(len(a), len(b)) {
		if i >= len(a) || i >= len(b) || written(a[i]) != written(b[i]) {
			t.Fatalf("on %v row %d of %d and %d differs\n%s", on, i, len(a), len(b), w.tell())
		}
	}
	got.Turn("S", on)
	x, _ := got.Counts("S", on)
	y, _ := want.Counts("S", on)
	if fmt.Sprint(x) != fmt.Sprint(y) {
		t.Fatalf("on %v:\n  got %v\n want %v\n%s", on, x, y, w.tell())
	}
}

// A damaged snapshot is refused and never more than that, wherever it is damaged; the checksum of the
// file around it is not looked at here.
func FuzzReadSnapshot(f *testing.F) {
	w := &world{pick: rand.New(rand.NewPCG(3, 4)).IntN}
	w.make()
	e := w.puts()
	e.Build()
	var b bytes.Buffer
	if err := e.WriteSnapshot(&b); err != nil {
		f.Fatal(err)
	}
	whole := b.Bytes()
	for i := range len(whole) {
		f.Add(i, byte(0xff), len(whole))
		f.Add(0, byte(0), i)
	}
	f.Fuzz(func(t *testing.T, at int, flip byte, length int) {
		damaged := slices.Clone(whole)
		if at >= 0 && at < len(damaged) {
			damaged[at] ^= flip
		}
		damaged = damaged[:min(max(length, 0), len(damaged))]
		got := w.withoutRecords()
		if err := got.ReadSnapshot(damaged); err != nil {
			return
		}
		if _, err := got.Counts("S", base); err != nil {
			t.Fatal(err)
		}
	})
}
