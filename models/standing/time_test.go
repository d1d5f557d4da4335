package standing_test

import (
	"strings"
	"testing"
	"time"
	_ "time/tzdata"

	"lodebook/models/program"
	"lodebook/models/standing"
)

func once() program.Cadence { return program.Cadence{Rule: program.Once} }

// ofLevel matches people of a level and lacks an answer where none is on record.
func ofLevel(level string) *program.Selector {
	return program.NewSelector("subject.level == '"+level+"'", []string{"level"}, func(s program.Subject) (bool, error) {
		if s.Level == "" {
			return false, &program.MissingFact{Facts: []string{"level"}}
		}
		return s.Level == level, nil
	})
}

func TestWhenBeginsToMatch(t *testing.T) {
	b := newBook(t, itemT(yearly(t), when(ofLevel("L2")), first(t, "P10D")))
	b.want("2025-01-05", "data-fault") // no level on record at all
	b.fact(ann, "level", "2025-02-01", "L1")
	b.fact(ann, "level", "2025-03-01", "L2")
	b.want("2025-01-31", "data-fault")
	b.want("2025-02-01", "none")
	b.want("2025-02-28", "none")
	// It began to match on 2025-03-01: due a first time on 2025-03-11.
	b.wantStart("2025-03-01", "2025-03-01")
	b.want("2025-03-12", "missing due 2025-03-11 since 2025-03-12")
	// Away from it and back: it began to match anew.
	b.fact(ann, "level", "2025-05-01", "L1")
	b.fact(ann, "level", "2025-06-01", "L2")
	b.want("2025-05-15", "none")
	b.wantStart("2025-06-05", "2025-06-01")
	// A value that does not change the answer begins nothing.
	b.fact(ann, "level", "2025-08-01", "L2")
	b.wantStart("2025-08-05", "2025-06-01")
	// Taken off the record it cannot be told.
	b.fact(ann, "level", "2025-09-01", nil)
	b.want("2025-09-01", "data-fault")
}

func TestStints(t *testing.T) {
	b := emptyBook(t)
	b.version("2020-01-01", itemT(yearly(t), first(t, "P10D")))
	b.stint(ann, "2025-01-01", "2025-03-31")
	b.stint(ann, "2025-06-01", "")
	b.want("2024-12-31", "none")
	b.wantStart("2025-01-01", "2025-01-01")
	b.want("2025-03-31", "missing due 2025-01-11 since 2025-01-12")
	b.want("2025-04-01", "none") // left on 2025-03-31, included
	b.want("2025-05-31", "none")
	b.wantStart("2025-06-01", "2025-06-01") // came back
	b.want("2025-06-11", "closing due 2025-06-11")
	b.record("2025-02-01") // records from before the start count: due 2026-02-01
	b.want("2025-06-15", "met due 2026-02-01")
	// Of those that begin on one day the last recorded counts.
	b.stint(ann, "2025-06-01", "2025-06-30")
	b.want("2025-06-30", "met due 2026-02-01")
	b.want("2025-07-01", "none")
}

func TestOpenStintHasNoFirstDay(t *testing.T) {
	b := emptyBook(t)
	b.version("2025-01-01", itemT(yearly(t)))
	b.stint(ann, "", "")
	b.wantStart("2025-02-01", "2025-01-01") // the item's own first day bounds it
	b.want("2024-12-31", "none")
}

func TestVersions(t *testing.T) {
	two := func() program.Item { return itemT(program.Cadence{Rule: program.Every, Every: dur(t, "P2Y")}) }
	b := emptyBook(t)
	b.stint(ann, "2020-01-01", "")
	b.version("2024-01-01", itemT(yearly(t)))
	b.record("2024-03-01")
	b.want("2025-03-02", "lapsed due 2025-03-01 since 2025-03-02")
	second := b.version("2025-06-01", two())
	// Each day is judged by the version of its time.
	b.want("2025-05-31", "lapsed due 2025-03-01 since 2025-03-02")
	b.want("2025-06-01", "met due 2026-03-01")
	// A version recorded later that reaches back overrules those before it from its first day on.
	third := b.version("2025-04-01", itemT(yearly(t), grace(t, "P1Y")))
	b.want("2025-03-31", "lapsed due 2025-03-01 since 2025-03-02")
	b.want("2025-04-01", "closing due 2025-03-01 in grace")
	b.want("2025-07-01", "closing due 2025-03-01 in grace")
	// As known before it, the second still counts; before that, the first.
	b.wantAt("2025-07-01", third-1, "met due 2026-03-01")
	b.wantAt("2025-07-01", second-1, "lapsed due 2025-03-01 since 2025-03-02")
}

func TestItemDroppedAndBack(t *testing.T) {
	b := emptyBook(t)
	b.stint(ann, "2020-01-01", "")
	b.version("2024-01-01", itemT(yearly(t), first(t, "P10D")))
	b.version("2024-06-01")
	b.version("2025-01-01", itemT(yearly(t), first(t, "P10D")))
	b.wantStart("2024-05-31", "2024-01-01")
	b.want("2024-06-01", "none")
	// The present unbroken run of versions began on 2025-01-01.
	b.wantStart("2025-01-02", "2025-01-01")
	b.want("2025-01-12", "missing due 2025-01-11 since 2025-01-12")
}

func TestSince(t *testing.T) {
	b := newBook(t, itemT(yearly(t), since(t, "2025-03-01"), first(t, "P10D")))
	b.want("2025-02-28", "none")
	b.wantStart("2025-03-01", "2025-03-01")
	b.want("2025-03-12", "missing due 2025-03-11 since 2025-03-12")
}

func TestKnownAt(t *testing.T) {
	b := newBook(t, itemT(yearly(t)))
	r := b.record("2025-02-01")
	b.wantAt("2025-02-10", r.Seq-1, "missing due 2025-01-01 since 2025-01-02")
	b.wantAt("2025-02-10", r.Seq, "met due 2026-02-01")
	// Withdrawn by the next entry: known until then.
	end := b.line().Seq
	r.Ended = end
	b.PutRecord(r)
	b.wantAt("2025-02-10", end-1, "met due 2026-02-01")
	b.wantAt("2025-02-10", end, "missing due 2025-01-01 since 2025-01-02")
	x := b.excusal("T", "2025-02-05", "2025-02-20", false)
	b.wantAt("2025-02-10", x-1, "missing due 2025-01-01 since 2025-01-02")
	b.wantAt("2025-02-10", x, "excused until 2025-02-20")
}

func TestLocal(t *testing.T) {
	everywhere := itemT(once(), code("E", "training/a"))
	b := newBook(t, everywhere, itemT(once(), local))
	b.record("2025-02-01", "at ELSEWHERE")
	b.wantOf("E", ann, "2025-02-02", "met")
	b.want("2025-02-02", "missing due 2025-01-01 since 2025-01-02")
	b.record("2025-02-03")
	b.want("2025-02-03", "met")
}

// TestDayOfTheSite: 2025-06-30T22:30Z is still 30 June in UTC and already 1 July at 00:30 in
// Europe/Copenhagen (UTC+2 in summer, IANA time zone database).
func TestDayOfTheSite(t *testing.T) {
	zone, err := time.LoadLocation("Europe/Copenhagen")
	if err != nil {
		t.Fatal(err)
	}
	b := emptyBook(t)
	p := siteProgram(itemT(yearly(t)))
	p.Site.Location = zone
	b.versionOf("2020-01-01", p)
	b.stint(ann, "2025-01-01", "")
	b.record("2025-06-30T22:30Z")
	b.want("2025-06-30", "missing due 2025-01-01 since 2025-01-02")
	b.want("2025-07-01", "met due 2026-07-01")
}

func TestHolds(t *testing.T) {
	filled := program.NewSelector("size(subject.holders) > 0", []string{"holders"}, func(s program.Subject) (bool, error) { return len(s.Holders) > 0, nil })
	post := standing.Subject{Asks: program.AsksPost, Code: "MRSO"}
	it := itemT(program.Cadence{Rule: program.Holds, Holds: filled}, asks(program.AsksPost))
	it.Records = nil
	b := newBook(t, it)
	b.wantOf("T", post, "2025-03-01", "failed since 2020-01-01") // ever since the item came into force
	b.about(ann, "appointment/MRSO", "2025-04-01", true)
	b.wantOf("T", post, "2025-04-01", "met")
	b.about(ann, "appointment/MRSO", "2025-05-01", false) // ended: held up to the day before
	b.wantOf("T", post, "2025-04-30", "met")
	if got := brief(b.of("T", post, "2025-05-01", standing.Always)); !strings.HasPrefix(got, "failed") {
		t.Errorf("after the appointment ended: %s", got)
	}
}

func TestHeldLevel(t *testing.T) {
	basic := itemT(yearly(t), code("B", "training/b"), confers("L1"))
	more := itemT(yearly(t), code("M", "training/m"), confers("L2"))
	screen := itemT(yearly(t), code("C", "screening/c"), confers("L2"))
	b := newBook(t, basic, more, screen)
	held := func(day string) string {
		t.Helper()
		level, why := b.Held("S", "ann", on(t, day), standing.Always)
		if len(why) == 0 {
			t.Errorf("on %s nothing is said of why", day)
		}
		return level
	}
	b.fact(ann, "level", "2025-01-01", "L2")
	if l := held("2025-02-01"); l != "" {
		t.Errorf("without a record: %q", l)
	}
	b.record("2025-02-01", "of training/b")
	if l := held("2025-02-01"); l != "L1" {
		t.Errorf("with the basic training: %q", l)
	}
	b.record("2025-03-01", "of training/m")
	if l := held("2025-03-01"); l != "L1" {
		t.Errorf("one of the two that confer L2 is not open: %q", l)
	}
	b.record("2025-03-05", "of screening/c")
	if l := held("2025-03-05"); l != "L2" {
		t.Errorf("all that confer L2 are open: %q", l)
	}
	b.fact(ann, "level", "2025-04-01", "L1") // never above the assigned level
	if l := held("2025-04-01"); l != "L1" {
		t.Errorf("assigned L1: %q", l)
	}
	b.fact(ann, "level", "2025-05-01", "L2")
	if l := held("2026-02-02"); l != "L2" { // L1's training ran out on 2026-02-01, L2's has not
		t.Errorf("L2 alone: %q", l)
	}
	if l := held("2026-03-06"); l != "" {
		t.Errorf("all lapsed: %q", l)
	}
}

func TestWhyNamesTheArithmetic(t *testing.T) {
	c := yearly(t)
	c.MonthEnd = true
	b := newBook(t, itemT(c))
	r := b.record("2025-11-12")
	why := strings.Join(b.get("2026-06-01", standing.Always).Why, " ")
	for _, part := range []string{"2025-11-12", "2026-11-12", "2026-11-30", r.ID} {
		if !strings.Contains(why, part) {
			t.Errorf("why says nothing of %s: %s", part, why)
		}
	}
}

func TestUnknownSite(t *testing.T) {
	b := newBook(t, itemT(yearly(t)))
	if _, err := b.Evaluate("NOWHERE", standing.Query{On: on(t, "2025-02-01"), KnownAt: standing.Always}); err == nil {
		t.Error("a site that is not there was judged")
	}
}
