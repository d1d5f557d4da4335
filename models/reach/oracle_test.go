package reach_test

import (
	"fmt"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
	"time"
	_ "time/tzdata"

	"pgregory.net/rapid"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/reach"
	"lodebook/models/standing"
)

// lines are what is on record about one person at site S, in a form that can be put into any engine in part.
type lines struct {
	versions []standing.Version
	stints   []standing.Stint
	facts    []standing.Fact
	records  []standing.Record
	events   []standing.Event
	excusals []standing.Excusal
	rights   []standing.Right
}

var ann = standing.Subject{Asks: program.AsksPerson, Code: "ann"}

func (l *lines) engine() *standing.Engine {
	e := standing.New()
	for _, v := range l.versions {
		e.PutVersion("S", v)
	}
	for _, s := range l.stints {
		e.PutStint("S", s)
	}
	for _, f := range l.facts {
		e.PutFact("S", f)
	}
	for _, r := range l.records {
		e.PutRecord(r)
	}
	for _, ev := range l.events {
		e.PutEvent("S", ev)
	}
	for _, x := range l.excusals {
		e.PutExcusal("S", x)
	}
	for _, r := range l.rights {
		e.PutRight("S", r)
	}
	return e
}

// The oracle is a second statement of the rule, instant by instant: it leaves out of the book what does not count yet
// at the instant, and asks the evaluator of whole days, which a naive statement of its own is held against, what
// then stands.

// known leaves out what was not recorded by k or had been taken back by then; the rest stands.
func (l *lines) known(k int64) *lines {
	return &lines{
		versions: standingAt(l.versions, k, func(v *standing.Version) *standing.Line { return &v.Line }),
		stints:   standingAt(l.stints, k, func(s *standing.Stint) *standing.Line { return &s.Line }),
		facts:    standingAt(l.facts, k, func(f *standing.Fact) *standing.Line { return &f.Line }),
		records:  standingAt(l.records, k, func(r *standing.Record) *standing.Line { return &r.Line }),
		events:   standingAt(l.events, k, func(e *standing.Event) *standing.Line { return &e.Line }),
		excusals: standingAt(l.excusals, k, func(x *standing.Excusal) *standing.Line { return &x.Line }),
		rights:   standingAt(l.rights, k, func(r *standing.Right) *standing.Line { return &r.Line }),
	}
}

func standingAt[T any](list []T, k int64, line func(*T) *standing.Line) []T {
	var out []T
	for _, x := range list {
		if l := line(&x); l.Seq <= k && (l.Ended == 0 || l.Ended > k) {
			l.Ended = 0
			out = append(out, x)
		}
	}
	return out
}

func only[T any](list []T, keep func(T) bool) []T {
	var out []T
	for _, x := range list {
		if keep(x) {
			out = append(out, x)
		}
	}
	return out
}

// version is the one of the day: of those in force, the last recorded.
func (l *lines) version(on civil.Day) *standing.Version {
	var best *standing.Version
	for i := range l.versions {
		if v := &l.versions[i]; v.InForceFrom <= on && (best == nil || v.Seq > best.Seq) {
			best = v
		}
	}
	return best
}

// zone is that of the day's version; before all of them that of the first in force.
func (l *lines) zone(on civil.Day) *time.Location {
	if v := l.version(on); v != nil {
		return v.Program.Site.Location
	}
	first := l.versions[0]
	for _, v := range l.versions {
		if v.InForceFrom < first.InForceFrom || v.InForceFrom == first.InForceFrom && v.Seq > first.Seq {
			first = v
		}
	}
	return first.Program.Site.Location
}

func (l *lines) day(t time.Time) civil.Day {
	for d := civil.DayOf(t, time.UTC) + 2; ; d-- {
		if !d.Midnight(l.zone(d)).After(t) {
			return d
		}
	}
}

// stint is the one that holds the day.
func (l *lines) stint(on civil.Day) *standing.Stint {
	var best *standing.Stint
	for i := range l.stints {
		s := &l.stints[i]
		if *s.First > on || s.Last != nil && *s.Last < on || slices.ContainsFunc(l.stints[i+1:], func(o standing.Stint) bool { return *o.First == *s.First }) {
			continue
		}
		if best == nil || *s.First > *best.First {
			best = s
		}
	}
	return best
}

// at judges all by the design's text; l is what is known.
func (l *lines) at(zone string, t time.Time) (bool, string) {
	on := l.day(t)
	var reasons []string
	here := l.stint(on) != nil
	if !here {
		reasons = append(reasons, "not-on-staff")
	}
	granted, ever := false, false
	for i, r := range l.rights {
		if r.Zone != zone || r.From.After(t) {
			continue
		}
		ever = true
		later := slices.ContainsFunc(l.rights[i+1:], func(o standing.Right) bool { return o.Zone == r.Zone && o.From.Equal(r.From) })
		s := l.stint(l.day(r.From))
		ended := r.To != nil && !r.To.After(t) || s == nil || s.Last != nil && *s.Last < on
		granted = granted || !later && !ended
	}
	switch {
	case granted:
	case ever:
		reasons = append(reasons, "right-ended")
	default:
		reasons = append(reasons, "no-right")
	}
	if !here {
		return false, strings.Join(reasons, ", ")
	}
	paused := slices.ContainsFunc(l.excusals, func(x standing.Excusal) bool {
		return x.Item == "" && x.From <= on && (x.To == nil || on <= *x.To)
	})
	if paused {
		reasons = append(reasons, "paused")
	}
	asked, shut := l.items(zone, t, on, paused)
	if !asked {
		reasons = append(reasons, "no-guard")
	}
	reasons = append(reasons, shut...)
	return len(reasons) == 0, strings.Join(reasons, ", ")
}

// items asks what each guarding item says at the instant.
func (l *lines) items(zone string, t time.Time, on civil.Day, paused bool) (asked bool, shut []string) {
	v := l.version(on)
	if v == nil {
		return false, nil
	}
	loc := v.Program.Site.Location
	then := *l
	then.records = only(l.records, func(r standing.Record) bool {
		day := r.Day
		if r.Time != nil {
			day = civil.DayOf(*r.Time, loc)
		}
		switch {
		case day != on:
			return day < on
		case r.Time != nil:
			return !r.Time.After(t)
		default:
			return !r.Passed
		}
	})
	then.events = only(l.events, func(e standing.Event) bool {
		if e.Time == nil {
			return e.Day <= on
		}
		day := civil.DayOf(*e.Time, loc)
		return day < on || day == on && !e.Time.After(t)
	})
	rows, err := then.engine().Evaluate("S", standing.Query{On: on, KnownAt: standing.Always, Subject: &ann})
	if err != nil {
		panic(err)
	}
	for _, it := range v.Program.Items {
		for _, row := range rows {
			if row.Item != it.Code || !slices.Contains(it.Guards, zone) {
				continue
			}
			asked = true
			word := string(row.Word)
			open := then.opens(it, row, on)
			last, limited := then.lastAccepted(it, loc)
			if open && limited && !slices.Contains(last.Limit, zone) {
				open, word = false, "limited"
			}
			if !open && !(paused && word == string(standing.Excused)) {
				shut = append(shut, it.Code+" "+word)
			}
		}
	}
	return asked, shut
}

// opens is section 3's list of what opens an item.
func (l *lines) opens(it program.Item, row standing.Standing, on civil.Day) bool {
	switch row.Word {
	case standing.Met:
		return true
	case standing.Closing:
		last, _ := l.lastAccepted(it, l.zone(on))
		return last != nil && (it.Cadence.Rule == program.Every || it.Cadence.Rule == program.Once)
	case standing.Excused:
		answers := l.answering(it, l.zone(on))
		failed := len(answers) > 0 && !answers[len(answers)-1].Passed
		return !failed && slices.ContainsFunc(l.excusals, func(x standing.Excusal) bool {
			return x.Item == it.Code && x.Opens && x.From <= on && on <= *x.To
		})
	}
	return false
}

// answering are the records that answer the item, in order of day; within a day those without a time first.
func (l *lines) answering(it program.Item, loc *time.Location) []standing.Record {
	out := only(l.records, func(r standing.Record) bool { return slices.Contains(it.Records, r.What) })
	day := func(r standing.Record) civil.Day {
		if r.Time != nil {
			return civil.DayOf(*r.Time, loc)
		}
		return r.Day
	}
	slices.SortStableFunc(out, func(a, b standing.Record) int {
		if d := day(a) - day(b); d != 0 {
			return int(d)
		}
		switch {
		case a.Time == nil && b.Time == nil:
			return int(a.Seq - b.Seq)
		case a.Time == nil:
			return -1
		case b.Time == nil:
			return 1
		case a.Time.Equal(*b.Time):
			return int(a.Seq - b.Seq)
		}
		return a.Time.Compare(*b.Time)
	})
	return out
}

func (l *lines) lastAccepted(it program.Item, loc *time.Location) (last *standing.Record, limited bool) {
	for _, r := range l.answering(it, loc) {
		if r.Passed {
			last = &r
		}
	}
	return last, last != nil && len(last.Limit) > 0
}

// draws make a small book about one person. They come evenly from one seed: drawn one by one they would mostly be small,
// and hardly anybody would ever be entitled.
type draws struct {
	*rapid.T
	*rand.Rand
	seq int64
	l   lines
	// Of the other test: the first of the days, and whether one of them never was.
	base  civil.Day
	skips bool
}

func newDraws(t *rapid.T) *draws {
	return &draws{T: t, Rand: rand.New(rand.NewPCG(rapid.Uint64().Draw(t, "seed"), 1))}
}

// first is four days before the clocks of Europe go forward and eleven before those of New Zealand go back.
var first = civil.Of(2024, time.March, 27)

const spread = 12

var zones = []string{"UTC", "Europe/Lisbon", "Atlantic/Azores", "Asia/Beirut", "Asia/Kathmandu", "Pacific/Auckland"}

func (d *draws) n(below int) int   { return d.IntN(below) }
func (d *draws) chance(p int) bool { return d.n(100) < p }
func (d *draws) day() civil.Day    { return first + civil.Day(d.n(spread)) }
func (d *draws) quarters() time.Time {
	return first.Midnight(time.UTC).Add(time.Duration(d.n(spread*96)) * 15 * time.Minute)
}

func (d *draws) line() standing.Line {
	d.seq++
	l := standing.Line{Seq: d.seq, ID: fmt.Sprintf("e%d", d.seq)}
	if d.chance(7) {
		l.Ended = d.seq + int64(d.n(20)) + 1
	}
	return l
}

func (d *draws) moment() (civil.Day, *time.Time) {
	if d.chance(50) {
		return d.day(), nil
	}
	t := d.quarters()
	return civil.DayOf(t, time.UTC), &t
}

func ptr[T any](x T) *T { return &x }

func (d *draws) span() (civil.Day, civil.Day) {
	from := d.day()
	return from, from + civil.Day(d.n(5))
}

var isL2 = program.NewSelector("subject.level == 'L2'", []string{"level"}, func(s program.Subject) (bool, error) {
	if s.Level == "" {
		return false, &program.MissingFact{Facts: []string{"level"}}
	}
	return s.Level == "L2", nil
})

var inIV = program.NewSelector("'IV' in subject.zones", []string{"zones"}, func(s program.Subject) (bool, error) { return slices.Contains(s.Zones, "IV"), nil })

func (d *draws) item(code string) program.Item {
	it := program.Item{
		Code: code, Title: code, Asks: program.AsksPerson, Records: [][]string{{"training/a"}, {"training/b"}, {"training/a", "training/b"}}[d.n(3)],
		Guards: [][]string{{"IV"}, {"III", "IV"}, {"III"}}[d.n(3)], Grace: civil.Duration{Days: d.n(3)}, Notice: program.Notice{Days: d.n(3)},
	}
	switch d.n(3) {
	case 0:
		it.Cadence = program.Cadence{Rule: program.Every, Every: civil.Duration{Days: 3 + d.n(12)}}
	case 1:
		it.Cadence = program.Cadence{Rule: program.Once}
	default:
		it.Cadence = program.Cadence{Rule: program.After, After: []string{"change"}, Within: civil.Duration{Days: d.n(3)}}
	}
	switch d.n(5) {
	case 0:
		it.When = isL2
	case 1:
		it.When = inIV
	}
	return it
}

func (d *draws) book() *lines {
	loc, err := time.LoadLocation(zones[d.n(len(zones))])
	if err != nil {
		d.Fatal(err)
	}
	for i := range 1 + d.n(2) {
		p := &program.Program{Site: program.Site{Code: "S", Location: loc}, Calendar: civil.EveryDay(), Levels: []program.Level{{Code: "L1", Rank: 1}, {Code: "L2", Rank: 2}}, Zones: []program.Zone{{Code: "III", Restricted: true}, {Code: "IV", Restricted: true}}}
		for _, code := range []string{"B", "A", "C"}[:min(3, 1+d.n(3)*d.n(2))] {
			p.Items = append(p.Items, d.item(code))
		}
		v := standing.Version{Line: d.line(), Number: i + 1, InForceFrom: first - 3 + civil.Day(d.n(2)*d.n(9)), Program: p}
		if i == 0 {
			v.Ended = 0 // a site is never without a program
		}
		d.l.versions = append(d.l.versions, v)
	}
	for range 1 + d.n(2) {
		s := standing.Stint{Line: d.line(), Subject: ann, First: ptr(first - 2 + civil.Day(d.n(4)*d.n(4)))}
		if d.chance(40) {
			s.Last = ptr(*s.First + civil.Day(d.n(spread)))
		}
		d.l.stints = append(d.l.stints, s)
	}
	for range d.n(3) {
		f := standing.Fact{Line: d.line(), Subject: ann, Code: "level", From: d.day(), Value: []any{"L1", "L2", "L2"}[d.n(3)]}
		d.l.facts = append(d.l.facts, f)
	}
	d.happenings()
	return &d.l
}

func (d *draws) happenings() {
	for range 2 + d.n(8) {
		r := standing.Record{Line: d.line(), Site: "S", Subject: ann, What: []string{"training/a", "training/b"}[d.n(2)], Passed: d.chance(80)}
		r.Day, r.Time = d.moment()
		if d.chance(20) {
			r.Until = ptr(r.Day + civil.Day(d.n(6)))
		}
		if d.chance(25) {
			r.Limit = [][]string{{"III"}, {"IV"}, {"III", "IV"}}[d.n(3)]
		}
		d.l.records = append(d.l.records, r)
	}
	for range d.n(3) {
		e := standing.Event{Line: d.line(), Subject: ann, Code: "change"}
		e.Day, e.Time = d.moment()
		d.l.events = append(d.l.events, e)
	}
	for range d.n(3) {
		from, to := d.span()
		x := standing.Excusal{Line: d.line(), Subject: ann, Item: []string{"A", "B", "C", ""}[d.n(4)], From: from, To: &to}
		x.Opens = x.Item != "" && d.chance(70)
		d.l.excusals = append(d.l.excusals, x)
	}
	for range 2 + d.n(3) {
		r := standing.Right{Line: d.line(), Person: "ann", Zone: []string{"III", "IV"}[d.n(2)], From: first.Midnight(time.UTC).Add(-24 * time.Hour)}
		if d.chance(40) {
			r.From = d.quarters()
		}
		if d.chance(30) {
			to := r.From.Add(time.Duration(1+d.n(500)) * 15 * time.Minute)
			r.To = &to
		}
		d.l.rights = append(d.l.rights, r)
	}
}

// words are reasons as the oracle writes them.
func words(list []reach.Reason) string {
	out := make([]string, len(list))
	for i, r := range list {
		out[i] = strings.TrimSpace(r.Item + " " + r.Standing)
	}
	return strings.Join(out, ", ")
}

// sorted puts reasons in one order: that of items is the program's of the last version, which the oracle does not keep.
func sorted(s string) string {
	parts := strings.Split(s, ", ")
	slices.Sort(parts)
	return strings.Join(parts, ", ")
}

// TestReachIsWhatTheOracleSays asks, for random books, at every quarter of an hour and around it.
func TestReachIsWhatTheOracleSays(t *testing.T) {
	seen := map[bool]int{}
	rapid.Check(t, func(t *rapid.T) {
		d := newDraws(t)
		all := d.book()
		e := all.engine()
		k := standing.Always
		if d.chance(60) {
			k = int64(1 + d.n(int(d.seq)))
		}
		l := all.known(k)
		if len(l.versions) == 0 {
			k, l = standing.Always, all.known(standing.Always)
		}
		zone := []string{"III", "IV"}[d.n(2)]
		r, err := reach.New(e, "S", k)
		if err != nil {
			t.Fatal(err)
		}
		ribbon := r.Ribbon("ann", zone)
		whole(t, ribbon)
		for range 60 {
			at := d.quarters().Add(time.Duration(d.n(3)-1) * time.Microsecond)
			yes, why := l.at(zone, at)
			seen[yes]++
			s := spanAt(ribbon, at)
			if s.Entitled != yes || sorted(words(s.Reasons)) != sorted(why) {
				t.Fatalf("at %v in %s, known at %d: the ribbon says %v (%s), the oracle %v (%s)\n%s", at, zone, k, s.Entitled, words(s.Reasons), yes, why, all)
			}
			one := r.One("ann", zone, at)
			if one.Entitled != yes || sorted(words(one.Reasons)) != sorted(why) {
				t.Fatalf("at %v in %s, known at %d: One says %v (%s), the oracle %v (%s)\n%s", at, zone, k, one.Entitled, words(one.Reasons), yes, why, all)
			}
			if end := endOf(ribbon, at); yes && !same(one.Until, end) {
				t.Fatalf("at %v in %s, known at %d: until %v, by the ribbon %v\n%s", at, zone, k, one.Until, end, all)
			}
		}
	})
	if seen[true] < 20 || seen[false] < 100 {
		t.Errorf("entitled at %d instants and not at %d: the test asks too little", seen[true], seen[false])
	}
}

// whole checks that a ribbon has no holes, and that neighbours differ.
func whole(t *rapid.T, ribbon []reach.Span) {
	for i, s := range ribbon {
		switch {
		case i == 0 && !s.From.IsZero(), i == len(ribbon)-1 && !s.To.IsZero(), i > 0 && !ribbon[i-1].To.Equal(s.From), i > 0 && i < len(ribbon)-1 && !s.From.Before(s.To):
			t.Fatalf("span %d of %v", i, ribbon)
		case s.Entitled != (len(s.Reasons) == 0):
			t.Fatalf("entitled %v with reasons %v", s.Entitled, s.Reasons)
		}
	}
}

func spanAt(ribbon []reach.Span, t time.Time) reach.Span {
	for _, s := range ribbon {
		if s.To.IsZero() || s.To.After(t) {
			return s
		}
	}
	panic("a ribbon without an end")
}

func endOf(ribbon []reach.Span, t time.Time) *time.Time {
	for _, s := range ribbon {
		if !s.Entitled && s.From.After(t) {
			return &s.From
		}
	}
	return nil
}

func same(a, b *time.Time) bool {
	if a == nil || b == nil {
		return a == b
	}
	return a.Equal(*b)
}

func (l *lines) String() string {
	var b strings.Builder
	for _, v := range l.versions {
		fmt.Fprintf(&b, "version %+v in force from %s, %s\n", v.Line, v.InForceFrom, v.Program.Site.Location)
		for _, it := range v.Program.Items {
			fmt.Fprintf(&b, "  %s %v guards %v when %v every %v within %v grace %v notice %v records %v\n", it.Code, it.Cadence.Rule, it.Guards, it.When != nil, it.Cadence.Every, it.Cadence.Within, it.Grace, it.Notice, it.Records)
		}
	}
	for _, s := range l.stints {
		fmt.Fprintf(&b, "stint %+v %v to %v\n", s.Line, *s.First, s.Last)
	}
	for _, f := range l.facts {
		fmt.Fprintf(&b, "fact %+v from %v: %v\n", f.Line, f.From, f.Value)
	}
	for _, r := range l.records {
		fmt.Fprintf(&b, "record %+v %s %v %v passed %v until %v limit %v\n", r.Line, r.What, r.Day, r.Time, r.Passed, r.Until, r.Limit)
	}
	for _, e := range l.events {
		fmt.Fprintf(&b, "event %+v %v %v\n", e.Line, e.Day, e.Time)
	}
	for _, x := range l.excusals {
		fmt.Fprintf(&b, "excusal %+v of %q %v to %v opens %v\n", x.Line, x.Item, x.From, *x.To, x.Opens)
	}
	for _, r := range l.rights {
		fmt.Fprintf(&b, "right %+v in %s %v to %v\n", r.Line, r.Zone, r.From, r.To)
	}
	return b.String()
}
