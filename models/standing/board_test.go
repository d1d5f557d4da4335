package standing_test

import (
	"fmt"
	"math/rand/v2"
	"slices"
	"sync"
	"testing"

	"pgregory.net/rapid"

	"lodebook/models/civil"
	"lodebook/models/standing"
)

// countsOf counts the standings that an evaluation from the lines themselves gives.
func countsOf(t fataler, e *standing.Engine, on civil.Day, k int64) standing.SiteCount {
	t.Helper()
	rows, err := e.Evaluate("S", standing.Query{On: on, KnownAt: k})
	if err != nil {
		t.Fatalf("%v", err)
	}
	c := standing.SiteCount{Site: "S"}
	for _, r := range rows {
		n := len(c.Items)
		if n == 0 || c.Items[n-1].Item != r.Item {
			c.Items = append(c.Items, standing.ItemCount{Item: r.Item})
			n++
		}
		c.Items[n-1].Tally[slices.Index(standing.Words[:], r.Word)]++
	}
	return c
}

// sameRows holds an evaluation that may use the board against one of an engine that has none.
func (w *world) sameRows(t fataler, e *standing.Engine, on civil.Day) {
	t.Helper()
	q := standing.Query{On: on, KnownAt: standing.Always}
	if w.chance(30) {
		q.Words = []standing.Word{standing.Lapsed, standing.Failed, standing.DataFault}
	}
	got, err := e.Evaluate("S", q)
	if err != nil {
		t.Fatalf("%v", err)
	}
	fresh := e.Fork()
	fresh.PutVersion("S", w.n.versions[0]) // which leaves the board behind
	want, err := fresh.Evaluate("S", q)
	if err != nil {
		t.Fatalf("%v", err)
	}
	for i := range max(len(got), len(want)) {
		if i >= len(got) || i >= len(want) || written(got[i]) != written(want[i]) {
			t.Fatalf("on %v row %d of %d and %d differs\n%s", on, i, len(got), len(want), w.tell())
		}
	}
}

// sameCounts holds what the board counts on a day against an evaluation of the same engine.
func (w *world) sameCounts(t fataler, e *standing.Engine, on civil.Day) {
	t.Helper()
	got, err := e.Counts("S", on)
	if err != nil {
		t.Fatalf("%v", err)
	}
	if want := countsOf(t, e, on, standing.Always); fmt.Sprint(got) != fmt.Sprint(want) {
		t.Fatalf("on %v:\n  got %+v\n want %+v\n%s", on, got, want, w.tell())
	}
}

// The board is kept through puts in any order, turns of the day and forks, of which some are thrown
// away; at any time it counts what an evaluation of the lines counts, and a fork that readers have is
// never changed.
func (w *world) checkKept(t fataler) {
	w.make()
	e := standing.New()
	e.PutVersion("S", w.n.versions[0])
	type seen struct {
		e     *standing.Engine
		on    civil.Day
		count string
	}
	var readers []seen
	for _, put := range w.steps() {
		if w.chance(25) {
			on := w.day() + civil.Day(w.pick(w.spread))
			count, _ := e.Counts("S", on)
			readers = append(readers, seen{e, on, fmt.Sprint(count)})
			if w.chance(30) { // a writer that fails
				lost := e.Fork()
				put(lost)
				lost.Turn("S", w.day())
			}
			e = e.Fork()
		}
		if w.chance(15) {
			e.Turn("S", w.day()+civil.Day(w.pick(w.spread)))
		}
		put(e)
		if w.chance(10) {
			w.sameCounts(t, e, w.day())
		}
	}
	for _, r := range readers {
		if got, _ := r.e.Counts("S", r.on); fmt.Sprint(got) != r.count {
			t.Fatalf("a reader counted %s on %v and now %v", r.count, r.on, got)
		}
	}
	first := base - 10
	for d := first; d < base+civil.Day(2*w.spread+20); d += 1 + civil.Day(w.pick(w.spread/3+1)) {
		w.sameCounts(t, e, d)
		w.sameRows(t, e, d)
		if w.chance(50) {
			e.Turn("S", d)
			w.sameCounts(t, e, d)
			if got, want := fmt.Sprint(e.Recount()), fmt.Sprint(e.AllCounts(d)); got != want && len(e.Recount()) > 0 {
				t.Fatalf("on %v the rows say %s and the counts %s", d, got, want)
			}
		}
	}
	w.checkOver(t, e, first)
	w.checkHistory(t, e)
	w.checkKnown(t, e)
}

// checkOver holds the sweep against the counts of each day.
func (w *world) checkOver(t fataler, e *standing.Engine, from civil.Day) {
	to := from + civil.Day(w.pick(3*w.spread))
	over, err := e.CountsOver("S", from, to)
	if err != nil {
		t.Fatalf("%v", err)
	}
	for d := from; d <= to; d++ {
		want, _ := e.Counts("S", d)
		got := standing.SiteCount{Site: over.Site}
		for i := range over.Items {
			if on := over.Items[i].On(d); on != (standing.Tally{}) {
				got.Items = append(got.Items, standing.ItemCount{Item: over.Items[i].Item, Tally: on})
			}
		}
		if fmt.Sprint(got) != fmt.Sprint(want) {
			t.Fatalf("on %v the sweep from %v has %v and the day %v\n%s", d, from, got, want, w.tell())
		}
	}
}

// checkKnown holds counts as of an earlier moment against an evaluation.
func (w *world) checkKnown(t fataler, e *standing.Engine) {
	k := int64(w.pick(int(w.seq) + 1))
	known := e.AsKnownAt(k)
	for range 3 {
		on := w.day() + civil.Day(w.pick(w.spread))
		got, err := known.Counts("S", on)
		if err != nil {
			t.Fatalf("%v", err)
		}
		if want := countsOf(t, e, on, k); fmt.Sprint(got) != fmt.Sprint(want) {
			t.Fatalf("on %v as of %d:\n  got %v\n want %v\n%s", on, k, got, want, w.tell())
		}
	}
	w.checkOver(t, known, base)
}

// checkHistory holds the histories against the standings of single days, also as known earlier.
func (w *world) checkHistory(t fataler, e *standing.Engine) {
	k := standing.Always
	if w.chance(50) {
		k = int64(w.pick(int(w.seq) + 1))
	}
	for range 4 {
		on := w.day() + civil.Day(w.pick(w.spread))
		rows, err := e.Evaluate("S", standing.Query{On: on, KnownAt: k})
		if err != nil {
			t.Fatalf("%v", err)
		}
		for _, item := range []string{"A", "B", "C", "D", "E"} {
			for _, sub := range slices.Concat(testSubjects, declaredSubjects) {
				want := standing.Word("")
				for _, r := range rows {
					if r.Item == item && r.Subject == sub {
						want = r.Word
					}
				}
				if got := wordOn(e, item, sub, k, on); got != want {
					t.Fatalf("on %v as of %d the history of %s of %v has %q, want %q\n%s", on, k, item, sub, got, want, w.tell())
				}
			}
		}
	}
}

func wordOn(e *standing.Engine, item string, sub standing.Subject, k int64, on civil.Day) standing.Word {
	spans, _ := e.History("S", item, sub, k)
	for _, s := range spans {
		if s.First <= on && on <= s.Last {
			return s.Word
		}
	}
	return ""
}

func TestBoardIsKept(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		w := &world{pick: func(n int) int { return rapid.IntRange(0, n-1).Draw(t, "") }}
		w.checkKept(t)
	})
}

func TestBoardIsKeptEvenly(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		seed := rapid.Uint64().Draw(t, "seed")
		for i := range uint64(5) {
			w := &world{pick: rand.New(rand.NewPCG(seed, i)).IntN}
			w.checkKept(t)
		}
	})
}

// A board that readers make of an engine after it was forked is not that of the fork, and what the fork
// makes is not theirs: neither has what the other has not, and neither is written on by the other.
func TestBoardOfAForkIsItsOwn(t *testing.T) {
	for seed := range uint64(40) {
		w := &world{pick: rand.New(rand.NewPCG(seed, 9)).IntN}
		w.make()
		e, before := w.puts(), w.puts() // no board is made
		f := e.Fork()
		if seed%2 == 0 { // else the fork only turns the day
			w.record()
			f.PutRecord(w.n.records[len(w.n.records)-1])
		}
		var readers sync.WaitGroup
		days := make([]civil.Day, 20)
		for i := range days {
			days[i] = base + civil.Day(i*40)
		}
		readers.Go(func() {
			for _, on := range days {
				got, _ := e.Counts("S", on)
				if want, _ := before.Counts("S", on); fmt.Sprint(got) != fmt.Sprint(want) {
					t.Errorf("seed %d on %v: the engine counts %v, and %v before it was forked", seed, on, got, want)
				}
			}
		})
		f.Build()
		f.Turn("S", base)
		fresh := w.puts() // with the record, if any
		for _, on := range days {
			f.Turn("S", on)
			got, _ := f.Counts("S", on)
			if want, _ := fresh.Counts("S", on); fmt.Sprint(got) != fmt.Sprint(want) {
				t.Errorf("seed %d on %v: the fork counts %v, want %v", seed, on, got, want)
			}
		}
		readers.Wait()
	}
}
