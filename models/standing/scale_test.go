package standing_test

import (
	"bytes"
	"flag"
	"fmt"
	"math/rand/v2"
	"runtime"
	"testing"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// The number of sites of the network of the benchmarks; 500 are a health network of 200,000 people.
var networkSites = flag.Int("sites", 5, "sites in the network of the benchmarks")

const (
	networkPeople   = 400
	networkFixtures = 40
	networkDays     = 1826
)

var networkFirst = civil.Of(2021, time.January, 1)

// network is many sites with every cadence, made from a seed: about 3,300 obligations and 20,000
// records a site.
type network struct {
	records bool
	rng     *rand.Rand
	e       *standing.Engine
	seq     int64
}

func newNetwork(sites int) *network {
	n := &network{rng: rand.New(rand.NewPCG(7, 7)), e: standing.New(), records: true}
	p := networkProgram()
	for s := range sites {
		n.site(fmt.Sprintf("S%03d", s), p, s)
	}
	return n
}

// lines is the same network without its records.
func (n *network) lines(sites int) (*standing.Engine, *network) {
	m := &network{rng: rand.New(rand.NewPCG(7, 7)), e: standing.New()}
	p := networkProgram()
	for s := range sites {
		m.site(fmt.Sprintf("S%03d", s), p, s)
	}
	return m.e, m
}

func networkProgram() *program.Program {
	p := &program.Program{Site: program.Site{Code: "S", Location: mustLoad("Atlantic/Azores")}, Calendar: civil.EveryDay()}
	p.Levels = []program.Level{{Code: "L1", Rank: 1}, {Code: "L2", Rank: 2}}
	for i := range 40 {
		it := program.Item{Code: fmt.Sprintf("I%02d", i), Asks: program.AsksPerson, Records: []string{fmt.Sprintf("training/t%02d", i)}, Notice: program.Notice{Days: 30}}
		it.Cadence = program.Cadence{Rule: program.Every, Every: civil.Duration{Years: 1}, MonthEnd: i%3 == 0, Early: ptr(civil.Duration{Days: 60})}
		it.When = need("level", "level", func(s program.Subject) any { return s.Level }, []string{"L1", "L2", "L3", "L4"}[i%4])
		switch {
		case i < 2:
			it.Confers = fmt.Sprintf("L%d", i+1)
		case i < 4:
			it.Asks, it.When = program.AsksFixture, isDoor
			it.Cadence = program.Cadence{Rule: program.Each, Each: []civil.Unit{civil.ByDay, civil.ByMonth}[i-2]}
			it.Notice = program.Notice{Days: i % 2}
		case i < 8:
			it.Asks, it.When = program.AsksFixture, isDoor
		case i < 12:
			it.Cadence = program.Cadence{Rule: program.Once}
		case i < 16:
			it.Cadence = program.Cadence{Rule: program.Within, Within: civil.Duration{Years: 1}, Count: 2}
		}
		p.Items = append(p.Items, it)
	}
	return p
}

func (n *network) line() standing.Line {
	n.seq++
	return standing.Line{Seq: n.seq, ID: fmt.Sprintf("0190b2c4-0000-7000-8000-%012x", n.seq)}
}

func (n *network) site(code string, p *program.Program, s int) {
	n.e.PutVersion(code, standing.Version{Line: n.line(), Number: 1, InForceFrom: networkFirst, Program: p})
	for i := range networkPeople {
		sub := standing.Subject{Asks: program.AsksPerson, Code: fmt.Sprintf("P%06d", s*networkPeople+i)}
		first := networkFirst + civil.Day(n.rng.IntN(1200)) - 600
		n.e.PutStint(code, standing.Stint{Line: n.line(), Subject: sub, First: &first})
		n.e.PutFact(code, standing.Fact{Line: n.line(), Subject: sub, Code: "level", From: first, Value: fmt.Sprintf("L%d", 1+i%4)})
		for j := range p.Items {
			if p.Items[j].Asks == program.AsksPerson && j%4 == i%4 {
				n.yearly(code, sub, p.Items[j].Records[0], first)
			}
		}
	}
	for i := range networkFixtures {
		sub := standing.Subject{Asks: program.AsksFixture, Code: fmt.Sprintf("D%02d", i)}
		n.e.PutStint(code, standing.Stint{Line: n.line(), Subject: sub, First: &networkFirst})
		n.e.PutFact(code, standing.Fact{Line: n.line(), Subject: sub, Code: "kind", From: networkFirst, Value: "door"})
		for j := 3; j < 8; j++ {
			n.yearly(code, sub, p.Items[j].Records[0], networkFirst)
		}
		if i < 2 {
			n.daily(code, sub, p.Items[2].Records[0])
		}
	}
}

func (n *network) yearly(code string, sub standing.Subject, what string, first civil.Day) {
	for d := max(first, networkFirst) + civil.Day(n.rng.IntN(60)); d < networkFirst+networkDays; d += civil.Day(320 + n.rng.IntN(60)) {
		n.put(code, sub, what, d)
	}
}

func (n *network) daily(code string, sub standing.Subject, what string) {
	for d := networkFirst; d < networkFirst+networkDays; d++ {
		if n.rng.IntN(40) > 0 {
			n.put(code, sub, what, d)
		}
	}
}

func (n *network) put(code string, sub standing.Subject, what string, d civil.Day) {
	l := n.line()
	passed := n.rng.IntN(50) > 0
	if !n.records {
		return
	}
	n.e.PutRecord(standing.Record{Line: l, Site: code, Subject: sub, What: what, Day: d, Passed: passed})
}

func heap() uint64 {
	runtime.GC()
	var m runtime.MemStats
	runtime.ReadMemStats(&m)
	return m.HeapAlloc
}

func BenchmarkNetwork(b *testing.B) {
	before := heap()
	began := time.Now()
	n := newNetwork(*networkSites)
	last := networkFirst + networkDays
	loaded := time.Since(began)
	lines := heap() - before
	began = time.Now()
	n.e.Build()
	built := time.Since(began)
	all := heap() - before
	obligations := 0
	for _, c := range n.e.AllCounts(last) {
		for _, it := range c.Items {
			for _, k := range it.Tally {
				obligations += int(k)
			}
		}
	}
	b.Run("AsOf", func(b *testing.B) {
		for b.Loop() {
			n.e.AllCounts(last - 100)
		}
	})
	for s := range *networkSites {
		n.e.Turn(fmt.Sprintf("S%03d", s), last)
	}
	b.Run("Today", func(b *testing.B) {
		for b.Loop() {
			n.e.AllCounts(last)
		}
	})
	b.Run("Recount", func(b *testing.B) {
		for b.Loop() {
			n.e.Recount()
		}
	})
	b.Run("ScanAsOf", func(b *testing.B) {
		for b.Loop() {
			n.e.ScanAsOf()
		}
	})
	b.Run("ScanNow", func(b *testing.B) {
		for b.Loop() {
			n.e.ScanNow()
		}
	})
	b.Run("Asked", func(b *testing.B) {
		for b.Loop() {
			n.e.Asked(last)
		}
	})
	b.Run("Over", func(b *testing.B) {
		for b.Loop() {
			if err := n.e.AllCountsOver(networkFirst, last, func(standing.SiteCourse) {}); err != nil {
				b.Fatal(err)
			}
		}
	})
	b.Run("Snapshot", func(b *testing.B) {
		var out bytes.Buffer
		if err := n.e.WriteSnapshot(&out); err != nil {
			b.Fatal(err)
		}
		b.ReportMetric(float64(out.Len()>>20), "MB")
		for b.Loop() {
			b.StopTimer()
			e, _ := n.lines(*networkSites)
			file := bytes.Clone(out.Bytes())
			b.StartTimer()
			if err := e.ReadSnapshot(file); err != nil {
				b.Fatal(err)
			}
		}
	})
	b.Run("Record/site after site", func(b *testing.B) { n.record(b, last, false) })
	b.Run("Record/in any order", func(b *testing.B) { n.record(b, last, true) })
	b.Logf("%d lines, %d obligations in force; %d MB of lines, %d MB in all; loaded in %v, built in %v", n.seq, obligations, lines>>20, all>>20, loaded, built)
}

// record puts one more record of an item and a person at a time, each once.
func (n *network) record(b *testing.B, last civil.Day, shuffled bool) {
	p := networkProgram()
	type draw struct {
		site string
		sub  standing.Subject
		what string
	}
	var draws []draw
	for s := range *networkSites {
		for i := range networkPeople {
			for j := 16 + i%4; j < 40; j += 4 {
				draws = append(draws, draw{fmt.Sprintf("S%03d", s), standing.Subject{Asks: program.AsksPerson, Code: fmt.Sprintf("P%06d", s*networkPeople+i)}, p.Items[j].Records[0]})
			}
		}
	}
	if shuffled {
		n.rng.Shuffle(len(draws), func(i, j int) { draws[i], draws[j] = draws[j], draws[i] })
	}
	var l standing.Line
	b.ResetTimer()
	for i := range b.N {
		if i%len(draws) == 0 {
			b.StopTimer()
			*n = *newNetwork(*networkSites)
			for s := range *networkSites {
				n.e.Turn(fmt.Sprintf("S%03d", s), last)
			}
			l = n.line()
			b.StartTimer()
		}
		d := &draws[i%len(draws)]
		l.Seq++
		n.e.PutRecord(standing.Record{Line: l, Site: d.site, Subject: d.sub, What: d.what, Day: last, Passed: true})
	}
}
