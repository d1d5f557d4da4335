package main

import (
	"bytes"
	"encoding/json"
	"slices"
	"strings"
	"testing"
	"time"

	"lodebook/cmd/lodeload/network"
	"lodebook/models/civil"
	"lodebook/models/standing"
)

// tinyScale is large enough for every answer and quick enough for every test run.
var tinyScale = scale{
	network: network.Size{Seed: 5, Sites: 4, People: 120, Fixtures: 60, Days: 800},
	book:    network.Size{Seed: 5, Sites: 1, People: 30, Fixtures: 12, Days: 400},
	page:    40, loads: 20, mix: 200, rounds: 1,
}

func testBench(t testing.TB) *bench {
	t.Helper()
	b := &bench{app: &app{ctx: t.Context(), stdout: &bytes.Buffer{}, stderr: &bytes.Buffer{}, clock: time.Now}, scale: tinyScale, dir: t.TempDir()}
	t.Cleanup(func() {
		if err := b.close(); err != nil {
			t.Error(err)
		}
	})
	return b
}

// TestBench runs every row at a tiny size. The rows themselves assert that both sides give the same answer.
func TestBench(t *testing.T) {
	b := testBench(t)
	r, err := b.run(contests)
	if err != nil {
		t.Fatal(err)
	}
	for _, x := range r.Rows {
		measured := x.OursNS != nil && x.TheirsNS != nil && x.Ratio != nil && x.Holds != nil
		switch {
		case x.Work == "" || x.Against == "" || x.Asked <= 0:
			t.Errorf("%+v lacks its words", x)
		case !measured && !strings.Contains(x.Against, "not found"):
			t.Errorf("%s, against %s: nothing was measured, and the row does not say why", x.Work, x.Against)
		case measured && (*x.OursNS <= 0 || *x.TheirsNS <= 0 || *x.Holds != (*x.TheirsNS / *x.OursNS >= x.Asked) && differs(*x.Ratio, x.Asked)):
			t.Errorf("%s, against %s: %v to %v, asked %v, holds %v", x.Work, x.Against, *x.OursNS, *x.TheirsNS, x.Asked, *x.Holds)
		}
	}
	if r.Sizes.Obligations < 800 || r.Sizes.Records < 3000 || r.Sizes.Changes < r.Sizes.Obligations {
		t.Errorf("sizes: %+v", r.Sizes)
	}
}

// differs tells whether two numbers are further apart than rounding takes them.
func differs(a, b float64) bool { return a < b*0.999 || a > b*1.001 }

// TestWrongAnswersStopTheBench holds that a form that counts wrongly does not get into the rounds.
func TestWrongAnswersStopTheBench(t *testing.T) {
	b := testBench(t)
	d, err := b.sqlite()
	if err != nil {
		t.Fatal(err)
	}
	w := b.world
	right := w.answerOf(w.engine.AllCounts(w.past()))
	if _, err := b.best(d, sqliteAsOf, lastPoint(w.past()), right); err != nil {
		t.Error(err)
	}
	if _, err := b.best(d, sqliteAsOf, lastPoint(w.past()+40), right); err == nil || !strings.Contains(err.Error(), "differ") {
		t.Errorf("the answer of another day: %v", err)
	}
	wrong := []form{{"wrong", strings.Replace(sqliteAsOf[0].query, "max(", "min(", 1), sqliteAsOf[0].parameters}}
	if _, err := b.best(d, wrong, lastPoint(w.past()), right); err == nil || !strings.Contains(err.Error(), "differ") {
		t.Errorf("a wrong form: %v", err)
	}
	if err := agree("nothing", answer{}, answer{}); err == nil {
		t.Error("two empty answers agree")
	}
}

// TestColumnsAreTheHistories holds the columns that SQL is filled from against evaluations.
func TestColumnsAreTheHistories(t *testing.T) {
	b := testBench(t)
	w, err := b.load()
	if err != nil {
		t.Fatal(err)
	}
	for _, after := range []civil.Day{5, 300, 799} {
		day := network.First + after
		got := answer{}
		for i, o := range w.obligations {
			word := nothing
			for _, p := range w.course(i) {
				if p <= pointOf(day, 15) {
					word = int(p & 15)
				}
			}
			if word != nothing {
				got[cell{int(o.site), int(o.item), word}]++
			}
		}
		want := answer{}
		site, item := index(w.sites), index(w.items)
		for _, code := range w.sites {
			rows, err := w.engine.Evaluate(code, standing.Query{On: day, KnownAt: standing.Always})
			if err != nil {
				t.Fatal(err)
			}
			for _, r := range rows {
				want[cell{site[code], item[r.Item], slices.Index(standing.Words[:], r.Word)}]++
			}
		}
		if err := agree(day.String(), want, got); err != nil {
			t.Error(err)
		}
	}
}

func TestResultIsWrittenAsTheFormatsSay(t *testing.T) {
	r := &result{Machine: "a machine", Rows: []row{{Work: "some work", Against: "something", Asked: 40}, {Work: "other work", Against: "PostgreSQL (not found)", Asked: 0.25}}}
	r.Rows[0].take(100, 5000)
	var out bytes.Buffer
	if err := r.write(&out, "json"); err != nil {
		t.Fatal(err)
	}
	var got map[string]any
	if err := json.Unmarshal(out.Bytes(), &got); err != nil {
		t.Fatal(err)
	}
	rows := got["rows"].([]any)
	first, second := rows[0].(map[string]any), rows[1].(map[string]any)
	for _, key := range []string{"work", "ours_ns", "against", "theirs_ns", "ratio", "asked", "holds"} {
		if _, ok := first[key]; !ok || len(first) != 7 {
			t.Errorf("a row is %v", first)
		}
	}
	if first["ratio"] != 50.0 || first["holds"] != true || second["ratio"] != nil || second["holds"] != nil || len(got) != 3 || got["machine"] == nil || got["sizes"] == nil {
		t.Errorf("found %s", out.String())
	}
	out.Reset()
	if err := r.write(&out, "table"); err != nil || !strings.Contains(out.String(), "at most 4 times") || !strings.Contains(out.String(), "at least 40 times") {
		t.Errorf("%v: %s", err, out.String())
	}
}

func TestMedian(t *testing.T) {
	for want, all := range map[float64][]float64{0: nil, 3: {3}, 2: {3, 1, 2}, 2.5: {1, 2, 3, 9}} {
		if got := median(all); got != want {
			t.Errorf("of %v: %v", all, got)
		}
	}
}

// benchRow runs the rows of a file at the tiny size as go test -bench does: our side is the loop, and theirs
// and the ratio are reported beside it.
func benchRow(b *testing.B, m rowMaker) {
	run := testBench(b)
	all, err := m(run)
	if err != nil {
		b.Fatal(err)
	}
	for _, c := range all {
		if c.absent != "" {
			continue
		}
		b.Run(strings.ReplaceAll(c.work+" against "+c.against, " ", "-"), func(b *testing.B) {
			for b.Loop() {
				r, err := run.row(c)
				if err != nil {
					b.Fatal(err)
				}
				b.ReportMetric(*r.OursNS, "ours-ns")
				b.ReportMetric(*r.TheirsNS, "theirs-ns")
			}
		})
	}
}

func BenchmarkAsOf(b *testing.B)   { benchRow(b, asOfRows) }
func BenchmarkToday(b *testing.B)  { benchRow(b, todayRows) }
func BenchmarkOver(b *testing.B)   { benchRow(b, overRows) }
func BenchmarkRecord(b *testing.B) { benchRow(b, recordRows) }
func BenchmarkScan(b *testing.B)   { benchRow(b, scanRows) }
func BenchmarkSelect(b *testing.B) { benchRow(b, selectRows) }
func BenchmarkMemory(b *testing.B) { benchRow(b, memoryRows) }
func BenchmarkBook(b *testing.B)   { benchRow(b, bookRows) }
func BenchmarkPages(b *testing.B)  { benchRow(b, pageRows) }
