package main

import (
	"fmt"
	"strconv"
	"time"

	"lodebook/cmd/lodeload/network"
	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// feeder puts sites straight into an evaluator, as the book would after an import of their tables.
type feeder struct {
	engine  *standing.Engine
	seq     int64
	records int64
	sample  []sampled
}

// sampled is one of the records, for making others like it.
type sampled struct {
	site   string
	record network.Record
}

// sampleEvery is how many records there are to one that is kept as a sample.
const sampleEvery = 50

// line is the line of the next entry.
func (f *feeder) line() standing.Line {
	f.seq++
	return standing.Line{Seq: f.seq, ID: "e" + strconv.FormatInt(f.seq, 10)}
}

// feed makes an evaluator of the whole network.
func feed(n *network.Network) (*feeder, error) {
	f := &feeder{engine: standing.New()}
	for s := range n.Each() {
		if err := f.site(s); err != nil {
			return nil, err
		}
	}
	return f, nil
}

func (f *feeder) site(s *network.Site) error {
	for i, v := range s.Versions {
		p, err := program.Parse(v.Source)
		if err != nil {
			return fmt.Errorf("the program of site %s: %w", s.Code, err)
		}
		f.engine.PutVersion(s.Code, standing.Version{Line: f.line(), Number: i + 1, InForceFrom: v.From, Program: p})
	}
	for i := range s.People {
		f.person(s.Code, &s.People[i])
	}
	for i := range s.Fixtures {
		if err := f.fixture(s.Code, &s.Fixtures[i]); err != nil {
			return err
		}
	}
	for i := range s.Records {
		f.engine.PutRecord(f.record(s.Code, &s.Records[i]))
		if i%sampleEvery == 0 {
			f.sample = append(f.sample, sampled{s.Code, s.Records[i]})
		}
	}
	f.records += int64(len(s.Records))
	f.happenings(s)
	return nil
}

func (f *feeder) person(site string, p *network.Person) {
	line, sub := f.line(), standing.Subject{Asks: program.AsksPerson, Code: p.Code}
	if p.Joined != network.NoDay {
		f.engine.PutStint(site, standing.Stint{Line: line, Subject: sub, First: &p.Joined, Last: dayOrNil(p.Left)})
	}
	from := p.From
	if from == network.NoDay {
		from = p.Joined
	}
	put := func(code string, value any) {
		f.engine.PutFact(site, standing.Fact{Line: line, Subject: sub, Code: code, From: from, Value: value})
	}
	for _, x := range []struct{ code, value string }{{"level", p.Level}, {"crew", p.Crew}, {"employer", p.Employer}} {
		if x.value != "" {
			put(x.code, x.value)
		}
	}
	if p.Cryogen != "" {
		put("cryogen_work", p.Cryogen == "yes")
	}
}

func (f *feeder) fixture(site string, x *network.Fixture) error {
	line, sub := f.line(), standing.Subject{Asks: program.AsksFixture, Code: x.Code}
	f.engine.PutFact(site, standing.Fact{Line: line, Subject: sub, Code: "kind", From: civil.FirstDay, Value: x.Kind})
	f.engine.PutStint(site, standing.Stint{Line: line, Subject: sub, First: &x.Since, Last: dayOrNil(x.Until)})
	put := func(code string, value any) {
		f.engine.PutFact(site, standing.Fact{Line: line, Subject: sub, Code: code, From: x.Since, Value: value})
	}
	put("zone", x.Zone)
	for code, text := range x.Facts {
		switch code {
		case "outlet_height_m":
			n, err := strconv.ParseFloat(text, 64)
			if err != nil {
				return fmt.Errorf("%s of fixture %s: %w", code, x.Code, err)
			}
			put(code, n)
		case "over_public_path":
			put(code, text == "yes")
		default:
			put(code, text)
		}
	}
	return nil
}

// record is a record as the evaluator takes it, on the next line.
func (f *feeder) record(site string, r *network.Record) standing.Record {
	line := f.line()
	out := standing.Record{Line: line, Site: site, Subject: subjectOf(r.Subject), What: r.What, Day: r.Day, Passed: !r.Failed, Until: dayOrNil(r.Until)}
	if r.Limit != "" {
		out.Limit = []string{r.Limit}
	}
	if !r.Time.IsZero() {
		at := r.Time.UTC()
		out.Time = &at
	}
	return out
}

// happenings puts events, excusals and pauses. A safety officer brought them in, so that excusals open what
// they say.
func (f *feeder) happenings(s *network.Site) {
	for _, e := range s.Events {
		f.engine.PutEvent(s.Code, standing.Event{Line: f.line(), Subject: subjectOf(e.Subject), Code: e.Code, Day: e.Day})
	}
	for _, x := range s.Excusals {
		f.engine.PutExcusal(s.Code, standing.Excusal{Line: f.line(), Subject: subjectOf(x.Subject), Item: x.Item, From: x.From, To: &x.To, Opens: x.Opens})
	}
	for _, p := range s.Pauses {
		f.engine.PutExcusal(s.Code, standing.Excusal{Line: f.line(), Subject: subjectOf(p.Subject), From: p.From, To: dayOrNil(p.To)})
	}
}

func subjectOf(s network.Subject) standing.Subject {
	return standing.Subject{Asks: s.Asks, Code: s.Code}
}

func dayOrNil(d civil.Day) *civil.Day {
	if d == network.NoDay {
		return nil
	}
	return &d
}

// dayAfter is the moment at which the network's last day is over everywhere: the clock of a book that is
// made from it.
func dayAfter(s network.Size) time.Time { return (s.Last() + 2).Midnight(time.UTC) }
