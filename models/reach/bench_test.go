package reach_test

import (
	"fmt"
	"slices"
	"testing"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/reach"
	"lodebook/models/standing"
)

// crowd is a site of so many people with five years behind them: a training and a screening every year, an induction once,
// some lapses, and rights in two zones.
func crowd(people int) *standing.Engine {
	loc, err := time.LoadLocation("Europe/Lisbon")
	if err != nil {
		panic(err)
	}
	item := func(code, record string, c program.Cadence) program.Item {
		return program.Item{Code: code, Asks: program.AsksPerson, Records: []string{record}, Cadence: c, Guards: []string{"III", "IV"}, Notice: program.Notice{Days: 30}}
	}
	p := &program.Program{Site: program.Site{Code: "S", Location: loc}, Calendar: civil.EveryDay(), Zones: []program.Zone{{Code: "III", Restricted: true}, {Code: "IV", Restricted: true}}}
	p.Items = []program.Item{
		item("TRAIN", "training/level-2", yearly), item("SCREEN", "screening/staff", yearly), item("INDUCTION", "training/induction", program.Cadence{Rule: program.Once}),
		item("CHANGE", "screening/staff", program.Cadence{Rule: program.After, After: []string{"change"}, Within: civil.Duration{Days: 2}}),
	}
	e := standing.New()
	seq := int64(0)
	line := func() standing.Line { seq++; return standing.Line{Seq: seq, ID: fmt.Sprint("e", seq)} }
	e.PutVersion("S", standing.Version{Line: line(), Number: 1, InForceFrom: civil.Of(2020, 1, 1), Program: p})
	for i := range people {
		sub := standing.Subject{Asks: program.AsksPerson, Code: fmt.Sprintf("P%05d", i)}
		joined := civil.Of(2020, 1, 1) + civil.Day(i%300)
		e.PutStint("S", standing.Stint{Line: line(), Subject: sub, First: &joined})
		for _, zone := range []string{"III", "IV"} {
			e.PutRight("S", standing.Right{Line: line(), Person: sub.Code, Zone: zone, From: joined.Midnight(loc)})
		}
		put := func(what string, day civil.Day) {
			r := standing.Record{Line: line(), Site: "S", Subject: sub, What: what, Day: day, Passed: true}
			if i%2 == 0 {
				at := day.Midnight(loc).Add(9 * time.Hour)
				r.Time = &at
			}
			e.PutRecord(r)
		}
		put("training/induction", joined)
		for year := range 5 {
			put("training/level-2", joined+civil.Day(360*year+i%40))
			put("screening/staff", joined+civil.Day(350*year+i%50))
		}
	}
	e.Build()
	return e
}

var asked = time.Date(2024, 6, 3, 10, 0, 0, 0, time.UTC)

// BenchmarkAt is everybody of 5,000 people at one instant, and until when; beside it, for a tenth of them, what asking
// the evaluator day after day takes to tell that up to a year on.
func BenchmarkAt(b *testing.B) {
	at := func(b *testing.B, e *standing.Engine, people int) {
		for b.Loop() {
			r, err := reach.New(e, "S", standing.Always)
			if err != nil {
				b.Fatal(err)
			}
			if got := len(r.At("IV", asked)); got != people {
				b.Fatal(got)
			}
		}
	}
	all, tenth := crowd(5000), crowd(500)
	b.Run("5000", func(b *testing.B) { at(b, all, 5000) })
	b.Run("500", func(b *testing.B) { at(b, tenth, 500) })
	b.Run("500 day after day", func(b *testing.B) {
		for b.Loop() {
			for i := range 500 {
				s := standing.Subject{Asks: program.AsksPerson, Code: fmt.Sprintf("P%05d", i)}
				for on := civil.DayOf(asked, time.UTC); on < civil.DayOf(asked, time.UTC)+366; on++ {
					rows, err := tenth.Evaluate("S", standing.Query{On: on, Subject: &s, KnownAt: standing.Always})
					if err != nil || len(rows) == 0 {
						b.Fatal(rows, err)
					}
					if slices.ContainsFunc(rows, func(row standing.Standing) bool { return row.Word.IsGap() }) {
						break
					}
				}
			}
		}
	})
}

// BenchmarkRibbon is one person over five years, by spans and, beside it, by asking day after day.
func BenchmarkRibbon(b *testing.B) {
	e := crowd(300)
	r, err := reach.New(e, "S", standing.Always)
	if err != nil {
		b.Fatal(err)
	}
	b.Run("spans", func(b *testing.B) {
		for b.Loop() {
			if len(r.Ribbon("P00007", "IV")) < 5 {
				b.Fatal("hardly a ribbon")
			}
		}
	})
	b.Run("days", func(b *testing.B) {
		for b.Loop() {
			for d := range civil.Day(5 * 365) {
				r.One("P00007", "IV", (civil.Of(2020, 1, 1) + d).Midnight(time.UTC))
			}
		}
	})
}

// BenchmarkThen is a thousand instants of one person, each as known then, remembered and not.
func BenchmarkThen(b *testing.B) {
	e := crowd(300)
	b.Run("remembered", func(b *testing.B) {
		for b.Loop() {
			then := reach.NewThen(e, "S")
			for i := range 1000 {
				if _, _, err := then.At("P00007", "IV", asked.Add(time.Duration(i)*time.Hour), 100+int64(i/100)); err != nil {
					b.Fatal(err)
				}
			}
		}
	})
	b.Run("each by itself", func(b *testing.B) {
		for b.Loop() {
			for i := range 1000 {
				r, err := reach.New(e, "S", 100+int64(i/100))
				if err != nil {
					b.Fatal(err)
				}
				r.One("P00007", "IV", asked.Add(time.Duration(i)*time.Hour))
			}
		}
	})
}
