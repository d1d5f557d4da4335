package standing_test

import (
	"fmt"
	"strings"
	"testing"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// book is a small book for cases worked by hand: site S, which counts its days in UTC unless told
// otherwise, and the person ann, on staff since 2025-01-01.
type book struct {
	*standing.Engine
	t   *testing.T
	seq int64
}

var ann = standing.Subject{Asks: program.AsksPerson, Code: "ann"}

func newBook(t *testing.T, items ...program.Item) *book {
	t.Helper()
	b := emptyBook(t)
	b.version("2020-01-01", items...)
	b.stint(ann, "2025-01-01", "")
	return b
}

func emptyBook(t *testing.T) *book { return &book{Engine: standing.New(), t: t} }

func (b *book) line() standing.Line {
	b.seq++
	return standing.Line{Seq: b.seq, ID: fmt.Sprintf("e%d", b.seq)}
}

func siteProgram(items ...program.Item) *program.Program {
	return &program.Program{
		Site: program.Site{Code: "S", Location: time.UTC}, Calendar: civil.EveryDay(),
		Levels: []program.Level{{Code: "L1", Rank: 1}, {Code: "L2", Rank: 2}},
		Zones:  []program.Zone{{Code: "III"}, {Code: "IV"}}, Posts: []program.Post{{Code: "MRSO"}},
		Crews: []program.Crew{{Code: "early"}}, Documents: []program.Document{{Code: "POL"}}, Items: items,
	}
}

// version puts the next version and gives the line's sequence number, as do the others.
func (b *book) version(from string, items ...program.Item) int64 {
	return b.versionOf(from, siteProgram(items...))
}

func (b *book) versionOf(from string, p *program.Program) int64 {
	v := standing.Version{Line: b.line(), InForceFrom: on(b.t, from), Program: p}
	v.Number = int(v.Seq)
	b.PutVersion("S", v)
	return v.Seq
}

func (b *book) stint(sub standing.Subject, first, last string) int64 {
	s := standing.Stint{Line: b.line(), Subject: sub, First: maybe(b.t, first), Last: maybe(b.t, last)}
	b.PutStint("S", s)
	return s.Seq
}

func (b *book) fact(sub standing.Subject, code, from string, value any) int64 {
	f := standing.Fact{Line: b.line(), Subject: sub, Code: code, From: on(b.t, from), Value: value}
	b.PutFact("S", f)
	return f.Seq
}

// record puts a record of training/a about ann. When is a day, or an instant as in
// 2025-03-01T10:00Z; more words are: fail, until DAY, of KIND/CODE, at SITE.
func (b *book) record(when string, more ...string) standing.Record {
	b.t.Helper()
	r := standing.Record{Line: b.line(), Site: "S", Subject: ann, What: "training/a", Passed: true}
	r.Day, r.Time = moment(b.t, when)
	for _, m := range more {
		word, rest, _ := strings.Cut(m, " ")
		switch word {
		case "fail":
			r.Passed = false
		case "until":
			r.Until = maybe(b.t, rest)
		case "of":
			r.What = rest
		case "at":
			r.Site = rest
		default:
			b.t.Fatalf("a record knows no %q", m)
		}
	}
	b.PutRecord(r)
	return r
}

func (b *book) about(sub standing.Subject, what, when string, passed bool) {
	r := standing.Record{Line: b.line(), Site: "S", Subject: sub, What: what, Passed: passed}
	r.Day, r.Time = moment(b.t, when)
	b.PutRecord(r)
}

func (b *book) event(code, when string) {
	e := standing.Event{Line: b.line(), Subject: ann, Code: code}
	e.Day, e.Time = moment(b.t, when)
	b.PutEvent("S", e)
}

func (b *book) excusal(item, from, to string, opens bool) int64 {
	x := standing.Excusal{Line: b.line(), Subject: ann, Item: item, From: on(b.t, from), To: maybe(b.t, to), Opens: opens}
	b.PutExcusal("S", x)
	return x.Seq
}

func on(t *testing.T, s string) civil.Day {
	t.Helper()
	d, err := civil.ParseDay(s)
	if err != nil {
		t.Fatal(err)
	}
	return d
}

func maybe(t *testing.T, s string) *civil.Day {
	t.Helper()
	if s == "" {
		return nil
	}
	return ptr(on(t, s))
}

func moment(t *testing.T, s string) (civil.Day, *time.Time) {
	t.Helper()
	if !strings.Contains(s, "T") {
		return on(t, s), nil
	}
	at, err := time.Parse("2006-01-02T15:04Z07:00", s)
	if err != nil {
		t.Fatal(err)
	}
	return civil.DayOf(at, time.UTC), &at
}

func dur(t *testing.T, s string) civil.Duration {
	t.Helper()
	d, err := civil.ParseDuration(s)
	if err != nil {
		t.Fatal(err)
	}
	return d
}

// itemT is item T, asked of every person and answered by training/a, with a notice of 30 days.
func itemT(c program.Cadence, more ...func(*program.Item)) program.Item {
	it := program.Item{
		Code: "T", Title: "Training is renewed", Asks: program.AsksPerson, Records: []string{"training/a"},
		Cadence: c, Notice: program.Notice{Days: 30},
	}
	for _, m := range more {
		m(&it)
	}
	return it
}

func yearly(t *testing.T) program.Cadence {
	return program.Cadence{Rule: program.Every, Every: dur(t, "P1Y")}
}

func first(t *testing.T, s string) func(*program.Item) {
	return func(it *program.Item) { it.First = dur(t, s) }
}

func grace(t *testing.T, s string) func(*program.Item) {
	return func(it *program.Item) { it.Grace = dur(t, s) }
}

func notice(t *testing.T, s string) func(*program.Item) {
	return func(it *program.Item) { it.Notice = program.Notice{Given: ptr(dur(t, s))} }
}

func when(sel *program.Selector) func(*program.Item) {
	return func(it *program.Item) { it.When = sel }
}

func since(t *testing.T, s string) func(*program.Item) {
	return func(it *program.Item) { it.Since = maybe(t, s) }
}

func asks(kind program.Asks) func(*program.Item) {
	return func(it *program.Item) { it.Asks = kind }
}

func confers(level string) func(*program.Item) {
	return func(it *program.Item) { it.Confers = level }
}

func code(code, record string) func(*program.Item) {
	return func(it *program.Item) { it.Code, it.Records = code, []string{record} }
}

func local(it *program.Item)  { it.Local = true }
func guards(it *program.Item) { it.Guards = []string{"IV"} }

// get is the standing of item T for ann; nil where there is none.
func (b *book) get(day string, knownAt int64) *standing.Standing {
	return b.of("T", ann, day, knownAt)
}

func (b *book) of(item string, sub standing.Subject, day string, knownAt int64) *standing.Standing {
	b.t.Helper()
	got, err := b.Evaluate("S", standing.Query{On: on(b.t, day), KnownAt: knownAt, Item: item, Subject: &sub, Why: true})
	if err != nil {
		b.t.Fatal(err)
	}
	switch len(got) {
	case 0:
		return nil
	case 1:
		return &got[0]
	}
	b.t.Fatalf("%d standings of %s for %v", len(got), item, sub)
	return nil
}

// brief is a standing in few words: its word, its due day, and what else there is.
func brief(s *standing.Standing) string {
	if s == nil {
		return "none"
	}
	out := string(s.Word)
	for _, part := range []struct {
		name string
		day  *civil.Day
	}{{"due", s.Due}, {"since", s.Since}, {"until", s.ExcusedUntil}} {
		if part.day != nil {
			out += " " + part.name + " " + part.day.String()
		}
	}
	if s.InGrace {
		out += " in grace"
	}
	return out
}

// want checks T's standing for ann on a day: none, or as brief writes it.
func (b *book) want(day, want string) {
	b.t.Helper()
	b.wantAt(day, standing.Always, want)
}

func (b *book) wantAt(day string, knownAt int64, want string) {
	b.t.Helper()
	if got := brief(b.get(day, knownAt)); got != want {
		b.t.Errorf("on %s: %s, want %s", day, got, want)
	}
}

func (b *book) wantOf(item string, sub standing.Subject, day, want string) {
	b.t.Helper()
	if got := brief(b.of(item, sub, day, standing.Always)); got != want {
		b.t.Errorf("%s of %s on %s: %s, want %s", item, sub.Code, day, got, want)
	}
}

func (b *book) wantStart(day, want string) {
	b.t.Helper()
	s := b.get(day, standing.Always)
	if s == nil || s.Start == nil || s.Start.String() != want {
		b.t.Errorf("on %s the start is %v, want %s", day, s, want)
	}
}

func (b *book) wantRecord(day, want string) {
	b.t.Helper()
	if s := b.get(day, standing.Always); s == nil || s.Record != want {
		b.t.Errorf("on %s the deciding record is that of %+v, want %s", day, s, want)
	}
}

func (b *book) wantDue(day, want string) {
	b.t.Helper()
	if s := b.get(day, standing.Always); s == nil || s.Due == nil || s.Due.String() != want {
		b.t.Errorf("on %s due is that of %s, want %s", day, brief(s), want)
	}
}
