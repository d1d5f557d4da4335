package standing_test

import (
	"fmt"
	"testing"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// largeSite is a site of so many people, a fortieth as many fixtures and 40 items, with five years
// of records; it is made without chance.
func largeSite(people int) *standing.Engine {
	e := standing.New()
	p := &program.Program{Site: program.Site{Code: "S", Location: mustLoad("Atlantic/Azores")}, Calendar: civil.EveryDay()}
	p.Levels = []program.Level{{Code: "L1", Rank: 1}, {Code: "L2", Rank: 2}}
	for i := range 40 {
		it := program.Item{Code: fmt.Sprintf("I%02d", i), Title: "An item", Asks: program.AsksPerson, Records: []string{fmt.Sprintf("training/t%02d", i)}, Notice: program.Notice{Days: 30}}
		it.Cadence = program.Cadence{Rule: program.Every, Every: civil.Duration{Years: 1}, MonthEnd: true}
		switch {
		case i < 2:
			it.Confers, it.When = fmt.Sprintf("L%d", i+1), isL2
		case i < 8:
			it.Asks, it.When = program.AsksFixture, isDoor
			it.Cadence = program.Cadence{Rule: program.Each, Each: civil.ByDay, Operating: true}
		case i < 20:
			it.When = need("subject.level == 'L2'", "level", func(s program.Subject) any { return s.Level }, "L2")
		case i < 22:
			it.When = has("has(subject.held)", []string{"held"}, func(s program.Subject) bool { return s.Held != "" })
		case i < 25:
			it.Cadence = program.Cadence{Rule: program.Once}
		case i < 28:
			it.Cadence = program.Cadence{Rule: program.Within, Within: civil.Duration{Years: 1}, Count: 2}
		}
		p.Items = append(p.Items, it)
	}
	first := civil.Of(2021, time.January, 1)
	seq := int64(0)
	line := func() standing.Line {
		seq++
		return standing.Line{Seq: seq, ID: "entry"}
	}
	e.PutVersion("S", standing.Version{Line: line(), Number: 1, InForceFrom: first, Program: p})
	for i := range people {
		sub := standing.Subject{Asks: program.AsksPerson, Code: fmt.Sprintf("P%05d", i)}
		e.PutStint("S", standing.Stint{Line: line(), Subject: sub, First: ptr(first + civil.Day(i%700))})
		e.PutFact("S", standing.Fact{Line: line(), Subject: sub, Code: "level", From: first, Value: []any{"L1", "L2"}[i%2]})
		for _, it := range p.Items {
			for y := 0; it.Asks == program.AsksPerson && y < 5; y++ {
				r := standing.Record{Line: line(), Site: "S", Subject: sub, What: it.Records[0], Passed: true}
				r.Day = first + civil.Day(y*360+i%90)
				e.PutRecord(r)
			}
		}
	}
	for i := range people / 40 {
		sub := standing.Subject{Asks: program.AsksFixture, Code: fmt.Sprintf("F%04d", i)}
		e.PutStint("S", standing.Stint{Line: line(), Subject: sub, First: &first})
		e.PutFact("S", standing.Fact{Line: line(), Subject: sub, Code: "kind", From: first, Value: "door"})
		for d := range 1800 {
			at := (first + civil.Day(d)).Midnight(time.UTC).Add(8 * time.Hour)
			r := standing.Record{Line: line(), Site: "S", Subject: sub, What: p.Items[2].Records[0], Day: first + civil.Day(d), Time: &at, Passed: true}
			e.PutRecord(r)
		}
	}
	return e
}

func BenchmarkEvaluate(b *testing.B) {
	e := largeSite(5000)
	on := civil.Of(2025, time.December, 1)
	for b.Loop() {
		got, err := e.Evaluate("S", standing.Query{On: on, KnownAt: standing.Always})
		if err != nil || len(got) < 100000 {
			b.Fatal(len(got), err)
		}
	}
}

func BenchmarkEvaluateOnePerson(b *testing.B) {
	e := largeSite(1000)
	q := standing.Query{On: civil.Of(2025, time.December, 1), KnownAt: standing.Always, Subject: &standing.Subject{Asks: program.AsksPerson, Code: "P00500"}}
	for b.Loop() {
		got, err := e.Evaluate("S", q)
		if err != nil || len(got) == 0 {
			b.Fatal(len(got), err)
		}
	}
}

func BenchmarkLoad(b *testing.B) {
	for b.Loop() {
		largeSite(1000) // about 200,000 records
	}
}

// Beside BenchmarkEvaluate: the same with the courses at hand, and only what falls short.
func BenchmarkEvaluateByCourses(b *testing.B) {
	e := largeSite(5000)
	e.Build()
	q := standing.Query{On: civil.Of(2025, time.December, 1), KnownAt: standing.Always}
	b.Run("All", func(b *testing.B) {
		for b.Loop() {
			if got, err := e.Evaluate("S", q); err != nil || len(got) < 100000 {
				b.Fatal(len(got), err)
			}
		}
	})
	q.Words = []standing.Word{standing.Lapsed, standing.Missing, standing.Failed}
	b.Run("Gaps", func(b *testing.B) {
		for b.Loop() {
			if got, err := e.Evaluate("S", q); err != nil || len(got) == 0 {
				b.Fatal(len(got), err)
			}
		}
	})
}
