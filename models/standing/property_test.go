package standing_test

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
	"lodebook/models/standing"
)

var (
	testPosts    = []string{"MRSE", "MRSO"}
	testPeople   = []string{"ann", "bob"}
	testSubjects = []standing.Subject{
		{Asks: program.AsksPerson, Code: "ann"}, {Asks: program.AsksPerson, Code: "bob"}, {Asks: program.AsksFixture, Code: "door-1"},
	}
	testZones = []*time.Location{time.UTC, mustLoad("Pacific/Auckland"), mustLoad("America/Anchorage")}
	// declaredSubjects are those that a version may declare.
	declaredSubjects = []standing.Subject{
		{Asks: program.AsksSite, Code: "S"}, {Asks: program.AsksCrew, Code: "early"}, {Asks: program.AsksPost, Code: "MRSO"},
		{Asks: program.AsksZone, Code: "IV"}, {Asks: program.AsksDocument, Code: "POL"},
	}
	base = civil.Of(2024, time.January, 15) // 29 February lies ahead
)

func mustLoad(name string) *time.Location {
	loc, err := time.LoadLocation(name)
	if err != nil {
		panic(err)
	}
	return loc
}

// world makes all that is on record from draws.
type world struct {
	pick   func(n int) int       // from 0, below n
	spread int                   // on so many days it all happens
	cast   []standing.Subject    // to these it all happens
	rules  []program.CadenceRule // of the items
	fails  int                   // so many records of a hundred fail
	timed  int                   // so many records and events of a hundred have a time
	levels bool                  // the items are about held levels
	n      naive
	seq    int64
}

func (w *world) day() civil.Day { return base + civil.Day(w.pick(w.spread)) }

func (w *world) chance(percent int) bool { return w.pick(100) < percent }

func (w *world) span() (civil.Day, civil.Day) {
	from := w.day()
	return from, from + civil.Day(w.pick(1+w.spread/5))
}

func oneOf[T any](w *world, from ...T) T { return from[w.pick(len(from))] }

func (w *world) line() standing.Line {
	w.seq++
	return standing.Line{Seq: w.seq, ID: fmt.Sprintf("e%d", w.seq)}
}

// duration is of the order of the days that the world has.
func (w *world) duration() civil.Duration {
	few := []civil.Duration{{Days: 1}, {Days: 2}, {Days: 3}}
	some := []civil.Duration{{Days: 3}, {Days: 5}, {Weeks: 1}, {Weeks: 1, Days: 3}}
	many := []civil.Duration{{Weeks: 1}, {Days: 20}, {Months: 1}, {Months: 1, Days: 5}, {Months: 3}, {Years: 1}}
	switch {
	case w.spread <= 6:
		return oneOf(w, few...)
	case w.spread <= 20:
		return oneOf(w, some...)
	}
	return oneOf(w, many...)
}

// short is shorter than duration, and often nothing.
func (w *world) short() civil.Duration {
	switch {
	case w.chance(40):
		return civil.Duration{}
	case w.spread > 40 && w.chance(20):
		return civil.Duration{Months: 1}
	}
	return civil.Duration{Days: w.pick(2 + w.spread/8)}
}

// need makes a selector that misses the value where it is not on record.
func need(source, field string, read func(program.Subject) any, want any) *program.Selector {
	return program.NewSelector(source, []string{field}, func(s program.Subject) (bool, error) {
		got := read(s)
		if got == nil || got == "" {
			return false, &program.MissingFact{Facts: []string{field}}
		}
		return got == want, nil
	})
}

func has(source string, reads []string, yes func(program.Subject) bool) *program.Selector {
	return program.NewSelector(source, reads, func(s program.Subject) (bool, error) { return yes(s), nil })
}

var (
	isL2     = need("subject.level == 'L2'", "level", func(s program.Subject) any { return s.Level }, "L2")
	isDoor   = need("subject.kind == 'door'", "kind", func(s program.Subject) any { return s.Kind }, "door")
	swingsIn = need("subject.facts.swing == 'in'", "facts.swing", func(s program.Subject) any { return s.Facts["swing"] }, "in")
	early    = has("has(subject.crew) && subject.crew == 'early'", []string{"crew"}, func(s program.Subject) bool { return s.Crew == "early" })
	heldAny  = has("has(subject.held)", []string{"held"}, func(s program.Subject) bool { return s.Held != "" })
	heldNone = has("!has(subject.held)", []string{"held"}, func(s program.Subject) bool { return s.Held == "" })
	heldL1   = need("subject.held == 'L1'", "held", func(s program.Subject) any { return s.Held }, "L1")
	officer  = has("'MRSO' in subject.posts", []string{"posts"}, func(s program.Subject) bool { return slices.Contains(s.Posts, "MRSO") })
	filled   = has("size(subject.holders) > 0", []string{"holders"}, func(s program.Subject) bool { return len(s.Holders) > 0 })
	// anyFact reads the facts as a whole, which no field names, and the held level.
	anyFact = has("facts as a whole", []string{"facts", "held"}, func(s program.Subject) bool { return len(s.Facts) > 1 || s.Held == "L2" })
	notAnn  = has("subject.code != 'ann' && subject.crew != 'late'", []string{"code", "crew"}, func(s program.Subject) bool { return s.Code != "ann" && s.Crew != "late" })
)

func (w *world) selector(asks program.Asks, mayReadHeld bool) *program.Selector {
	switch {
	case asks == program.AsksPerson && mayReadHeld && w.chance(30):
		return oneOf(w, heldAny, heldAny, heldNone, heldNone, heldL1, anyFact)
	case asks == program.AsksPerson:
		return oneOf(w, isL2, swingsIn, early, officer, notAnn, inIV)
	case asks == program.AsksFixture:
		return oneOf(w, isDoor, swingsIn)
	case asks == program.AsksPost:
		return oneOf(w, filled, swingsIn)
	}
	return oneOf(w, swingsIn, notAnn)
}

func (w *world) item(code string) program.Item {
	it := program.Item{
		Code: code, Title: "Item " + code, Asks: w.subject().Asks, Local: w.chance(20),
		Records: oneOf(w, []string{"training/a"}, []string{"training/b"}, []string{"training/a", "training/b"}),
		First:   w.short(), Grace: w.short(), Notice: program.Notice{Days: w.pick(2 + w.spread/10)},
	}
	it.Cadence.Rule = oneOf(w, w.rules...)
	if w.chance(20) {
		it.Notice = program.Notice{Given: ptr(w.short())}
	}
	if w.chance(15) {
		it.Since = ptr(w.day())
	}
	// Only items that neither guard nor confer may read held.
	plain := w.chance(50)
	if w.levels {
		plain = code > "C"
	}
	if !plain && it.Asks == program.AsksPerson {
		it.Confers = oneOf(w, "L1", "L2")
	}
	if !plain && w.chance(50) {
		it.Guards = []string{"IV"}
	}
	switch {
	case w.levels && plain:
		it.When = oneOf(w, heldAny, heldAny, heldNone, heldNone, heldL1, anyFact)
	case w.chance(60):
		it.When = w.selector(it.Asks, plain)
	}
	w.cadence(&it, plain)
	return it
}

func (w *world) cadence(it *program.Item, plain bool) {
	c := &it.Cadence
	switch c.Rule {
	case program.Every:
		c.Every, c.MonthEnd = w.duration(), w.chance(30)
		if w.chance(60) {
			c.Early = ptr(civil.Duration{Days: w.pick(max(1, c.Every.NominalDays()))})
		}
	case program.Within:
		c.Within, c.Count = w.duration(), 1+w.pick(3)
	case program.Each:
		c.Each = oneOf(w, civil.ByDay, civil.ByDay, civil.ByWeek, civil.ByWeek, civil.ByMonth, civil.ByQuarter, civil.ByYear)
		c.Operating = w.chance(60)
	case program.After:
		c.Within = w.short()
		c.After = oneOf(w, []string{"quench"}, []string{"storm"}, []string{"quench", "storm"})
	case program.Holds:
		c.Holds = w.selector(it.Asks, plain)
	}
}

func (w *world) version(number int) standing.Version {
	p := &program.Program{Site: program.Site{Code: "S", Location: oneOf(w, testZones...)}, Calendar: civil.EveryDay()}
	if w.chance(60) {
		for d := range p.Calendar.Open {
			p.Calendar.Open[d] = w.chance(70) || d == 3
		}
	}
	p.Calendar.Closed = map[civil.Day]bool{}
	for range w.pick(4) {
		from, to := w.span()
		for d := from; d <= min(to+1, from+12); d++ {
			p.Calendar.Closed[d] = true
		}
	}
	p.Levels = []program.Level{{Code: "L1", Rank: 1}, {Code: "L2", Rank: 2}}
	for _, post := range testPosts {
		if w.chance(80) {
			p.Posts = append(p.Posts, program.Post{Code: post})
		}
	}
	if w.chance(80) {
		p.Crews, p.Zones = []program.Crew{{Code: "early"}}, []program.Zone{{Code: "IV"}}
	}
	if w.chance(80) {
		p.Documents = []program.Document{{Code: "POL"}}
	}
	for _, code := range []string{"A", "B", "C", "D", "E"} {
		if w.chance(75) {
			p.Items = append(p.Items, w.item(code))
		}
	}
	return standing.Version{Line: w.line(), Number: number, InForceFrom: w.day() - civil.Day(w.pick(w.spread)), Program: p}
}

func (w *world) subject() standing.Subject { return oneOf(w, w.cast...) }

func (w *world) site() string {
	if w.chance(80) {
		return "S"
	}
	return "other"
}

// instant is now and then a time near the day's edges or at noon.
func (w *world) instant(d civil.Day) *time.Time {
	if !w.chance(w.timed) {
		return nil
	}
	return ptr(d.Midnight(time.UTC).Add(time.Duration(oneOf(w, 0, 5, 11, 12, 12, 13, 23)) * time.Hour))
}

func (w *world) stint(sub standing.Subject) {
	s := standing.Stint{Line: w.line(), Subject: sub}
	from, to := w.span()
	if w.chance(80) {
		s.First = ptr(from - civil.Day(w.pick(w.spread)))
	}
	if w.chance(40) {
		s.Last = ptr(to + civil.Day(w.pick(w.spread)))
	}
	if s.First != nil && w.chance(20) { // the same stint, recorded anew
		again := standing.Stint{Line: w.line(), Subject: sub, First: s.First, Last: ptr(*s.First + civil.Day(w.pick(2*w.spread)))}
		w.n.stints = append(w.n.stints, at[standing.Stint]{"S", again})
	}
	w.n.stints = append(w.n.stints, at[standing.Stint]{w.site(), s})
}

func (w *world) fact() {
	sub := w.subject()
	f := standing.Fact{Line: w.line(), Subject: sub, From: w.day() - civil.Day(w.pick(w.spread))}
	switch f.Code = oneOf(w, "level", "level", "crew", "kind", "zone", "swing", "lit"); f.Code {
	case "level":
		f.Value = oneOf[any](w, "L1", "L2", "L2", nil)
	case "crew":
		f.Value = oneOf[any](w, "early", "late", nil)
	case "kind":
		f.Value = oneOf[any](w, "door", "vent")
	default:
		f.Value = oneOf[any](w, "in", "in", "out", 1.5, true, nil)
	}
	w.n.facts = append(w.n.facts, at[standing.Fact]{w.site(), f})
}

func (w *world) record() {
	r := standing.Record{Line: w.line(), Site: w.site(), Subject: w.subject(), Day: w.day(), Passed: !w.chance(w.fails)}
	r.What = oneOf(w, "training/a", "training/a", "training/a", "training/b", "training/c")
	if r.Subject.Asks == program.AsksPerson && w.chance(25) {
		r.What = "appointment/" + oneOf(w, testPosts...)
	}
	r.Time = w.instant(r.Day)
	if w.chance(15) {
		r.Limit = oneOf(w, []string{"III"}, []string{"IV"}, []string{"IV", "III"})
	}
	if w.chance(25) {
		r.Until = ptr(r.Day + civil.Day(w.pick(1+w.spread/3)))
	}
	w.n.records = append(w.n.records, r)
}

func (w *world) event() {
	e := standing.Event{Line: w.line(), Subject: w.subject(), Code: oneOf(w, "quench", "storm"), Day: w.day()}
	e.Time = w.instant(e.Day)
	w.n.events = append(w.n.events, at[standing.Event]{w.site(), e})
}

func (w *world) excusal() {
	x := standing.Excusal{Line: w.line(), Subject: w.subject(), Opens: w.chance(50)}
	from, to := w.span()
	x.From, x.To = from, &to
	if w.chance(60) {
		x.Item = oneOf(w, "A", "B", "C", "D", "E")
	} else if w.chance(20) {
		x.To = nil
	}
	w.n.excusals = append(w.n.excusals, at[standing.Excusal]{w.site(), x})
}

// make draws a world. Later ends are drawn last, so that they are later than the lines.
func (w *world) make() {
	w.spread = oneOf(w, 5, 15, 15, 60, 300)
	w.fails, w.timed, w.levels = oneOf(w, 0, 10, 40), oneOf(w, 0, 50, 100), w.chance(30)
	all := slices.Concat(testSubjects, testSubjects, declaredSubjects)
	w.cast = []standing.Subject{testSubjects[0]}
	for range w.pick(4) {
		if !w.levels {
			w.cast = append(w.cast, oneOf(w, all...))
		}
	}
	w.rules = nil
	for range 1 + w.pick(2) {
		w.rules = append(w.rules, oneOf(w, program.Every, program.Within, program.Once, program.Each, program.After, program.Holds))
	}
	w.n = naive{site: "S", first: base - 700, last: base + 1200}
	kinds := []func(){w.fact, w.record, w.record, w.record, w.event, w.excusal, w.right, func() { w.stint(oneOf(w, testSubjects...)) }}
	for i := range 1 + w.pick(3) {
		w.n.versions = append(w.n.versions, w.version(i+1))
		for range w.pick(30) {
			kinds[w.pick(len(kinds))]()
		}
	}
	for _, sub := range testSubjects {
		if w.chance(85) {
			w.stint(sub)
		}
	}
	if w.levels {
		w.n.facts = append(w.n.facts, at[standing.Fact]{"S", standing.Fact{Line: w.line(), Subject: testSubjects[0], Code: "level", From: base, Value: "L2"}})
	}
	w.endSome()
}

func (w *world) endSome() {
	end := func(l *standing.Line) {
		if w.chance(15) {
			l.Ended = l.Seq + 1 + int64(w.pick(int(w.seq)))
		}
	}
	for i := range w.n.versions[1:] {
		end(&w.n.versions[1+i].Line)
	}
	for i := range w.n.stints {
		end(&w.n.stints[i].line.Line)
	}
	for i := range w.n.facts {
		end(&w.n.facts[i].line.Line)
	}
	for i := range w.n.records {
		end(&w.n.records[i].Line)
	}
	for i := range w.n.events {
		end(&w.n.events[i].line.Line)
	}
	for i := range w.n.excusals {
		end(&w.n.excusals[i].line.Line)
	}
	for i := range w.n.rights {
		end(&w.n.rights[i].line.Line)
	}
}

// puts is every line put into an engine, those that end at first without their end, in an order of
// its own.
func (w *world) puts() *standing.Engine {
	e := standing.New()
	for _, put := range w.steps() {
		put(e)
	}
	return e
}

// steps are the puts of puts.
func (w *world) steps() []func(*standing.Engine) {
	type line func(e *standing.Engine, ended bool)
	var all []line
	keep := func(l standing.Line, ended bool) standing.Line {
		if !ended {
			l.Ended = 0
		}
		return l
	}
	for _, v := range w.n.versions {
		all = append(all, func(e *standing.Engine, ended bool) { x := v; x.Line = keep(x.Line, ended); e.PutVersion("S", x) })
	}
	for _, s := range w.n.stints {
		all = append(all, func(e *standing.Engine, ended bool) {
			x := s.line
			x.Line = keep(x.Line, ended)
			e.PutStint(s.site, x)
		})
	}
	for _, f := range w.n.facts {
		all = append(all, func(e *standing.Engine, ended bool) { x := f.line; x.Line = keep(x.Line, ended); e.PutFact(f.site, x) })
	}
	for _, r := range w.n.records {
		all = append(all, func(e *standing.Engine, ended bool) { x := r; x.Line = keep(x.Line, ended); e.PutRecord(x) })
	}
	for _, ev := range w.n.events {
		all = append(all, func(e *standing.Engine, ended bool) {
			x := ev.line
			x.Line = keep(x.Line, ended)
			e.PutEvent(ev.site, x)
		})
	}
	for _, x := range w.n.excusals {
		all = append(all, func(e *standing.Engine, ended bool) {
			y := x.line
			y.Line = keep(y.Line, ended)
			e.PutExcusal(x.site, y)
		})
	}
	for _, r := range w.n.rights {
		all = append(all, func(e *standing.Engine, ended bool) {
			x := r.line
			x.Line = keep(x.Line, ended)
			e.PutRight(r.site, x)
		})
	}
	for i := range all {
		j := i + w.pick(len(all)-i)
		all[i], all[j] = all[j], all[i]
	}
	var steps []func(*standing.Engine)
	for _, put := range all {
		if w.chance(50) {
			steps = append(steps, func(e *standing.Engine) { put(e, false) })
		}
		steps = append(steps, func(e *standing.Engine) { put(e, true) })
	}
	return steps
}

type fataler interface {
	Helper()
	Fatalf(string, ...any)
}

// check holds the engine against the naive statement on a few days and moments.
func (w *world) check(t fataler) {
	t.Helper()
	w.make()
	e := w.puts()
	for range 5 {
		w.n.k = standing.Always
		if w.chance(40) {
			w.n.k = int64(w.pick(int(w.seq) + 1))
		}
		w.n.profiles, w.n.helds = map[string]program.Subject{}, map[string]string{}
		on := w.day() + oneOf(w, civil.Day(0), 0, civil.Day(w.pick(w.spread)), civil.Day(w.pick(200)))
		got, err := e.Evaluate("S", standing.Query{On: on, KnownAt: w.n.k, Why: w.chance(20)})
		if err != nil {
			t.Fatalf("%v", err)
		}
		lines := []string{}
		for _, s := range got {
			lines = append(lines, written(s))
			if s.Left < 0 || s.Left > 1 {
				t.Fatalf("%v of the span is left: %s", s.Left, written(s))
			}
		}
		w.compare(t, on, lines, w.n.evaluate(on))
		for _, person := range testPeople {
			sub := standing.Subject{Asks: program.AsksPerson, Code: person}
			if level, _ := e.Held("S", person, on, w.n.k); level != w.n.held(sub, on) {
				t.Fatalf("on %v as of %d %s holds %q, want %q\n%s", on, w.n.k, person, level, w.n.held(sub, on), w.tell())
			}
		}
	}
}

func (w *world) compare(t fataler, on civil.Day, got, want []string) {
	t.Helper()
	for i := range max(len(got), len(want)) {
		g, n := "nothing", "nothing"
		if i < len(got) {
			g = got[i]
		}
		if i < len(want) {
			n = want[i]
		}
		if g != n {
			t.Fatalf("on %v as of %d:\n  got %s\n want %s\n%s", on, w.n.k, g, n, w.tell())
		}
	}
}

// tell writes the world down for whoever has to find the difference.
func (w *world) tell() string {
	var b strings.Builder
	for _, v := range w.n.versions {
		fmt.Fprintf(&b, "version %+v from %v zone %v open %v closed %v\n", v.Line, v.InForceFrom, v.Program.Site.Location, v.Program.Calendar.Open, v.Program.Calendar.Closed)
		for _, it := range v.Program.Items {
			when := ""
			if it.When != nil {
				when = it.When.Source()
			}
			fmt.Fprintf(&b, "  %s asks %s when %q records %v %+v first %v notice %+v grace %v since %v guards %v confers %q local %v\n", it.Code, it.Asks, when, it.Records, it.Cadence, it.First, it.Notice, it.Grace, it.Since, it.Guards, it.Confers, it.Local)
		}
	}
	for _, s := range w.n.stints {
		fmt.Fprintf(&b, "stint at %s %v %v %v to %v\n", s.site, s.line.Line, s.line.Subject, s.line.First, s.line.Last)
	}
	for _, f := range w.n.facts {
		fmt.Fprintf(&b, "fact at %s %+v\n", f.site, f.line)
	}
	for _, r := range w.n.records {
		fmt.Fprintf(&b, "record %v at %s %v %s %v %v passed %v until %v\n", r.Line, r.Site, r.Subject, r.What, r.Day, r.Time, r.Passed, r.Until)
	}
	for _, ev := range w.n.events {
		fmt.Fprintf(&b, "event at %s %+v\n", ev.site, ev.line)
	}
	for _, x := range w.n.excusals {
		fmt.Fprintf(&b, "excusal at %s %v %v %q %v to %v opens %v\n", x.site, x.line.Line, x.line.Subject, x.line.Item, x.line.From, x.line.To, x.line.Opens)
	}
	for _, r := range w.n.rights {
		fmt.Fprintf(&b, "right at %s %v %s in %s from %v to %v\n", r.site, r.line.Line, r.line.Person, r.line.Zone, r.line.From, r.line.To)
	}
	return b.String()
}

// Worlds that rapid draws shrink to small ones when the two statements differ.
func TestEngineAgainstTheNaiveStatement(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		w := &world{pick: func(n int) int { return rapid.IntRange(0, n-1).Draw(t, "") }}
		w.check(t)
	})
}

// Worlds drawn evenly reach what small ones do not.
func TestEngineAgainstTheNaiveStatementEvenly(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		seed := rapid.Uint64().Draw(t, "seed")
		for i := range uint64(5) {
			w := &world{pick: rand.New(rand.NewPCG(seed, i)).IntN}
			w.check(t)
		}
	})
}
