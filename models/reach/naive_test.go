package reach_test

import (
	"cmp"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/reach"
	"lodebook/models/standing"
)

// plain is section 3 of the design said once more, for one instant and without the evaluator: days are counted one by
// one, nothing is kept, and nothing is left out because it cannot matter.
type plain struct {
	*lines // what is known
	t      time.Time
	on     civil.Day
	v      *standing.Version
}

func newPlain(l *lines, t time.Time) *plain {
	n := &plain{lines: l, t: t, on: l.day(t)}
	n.v = l.version(n.on)
	return n
}

// done is a record or an event on the day that the site gives it.
type done struct {
	on     civil.Day
	time   *time.Time
	seq    int64
	passed bool
	until  *civil.Day
	limit  []string
}

func (n *plain) dated(day civil.Day, at *time.Time) civil.Day {
	if at == nil {
		return day
	}
	y, m, d := at.In(n.v.Program.Site.Location).Date()
	return civil.Of(y, m, d)
}

func compareDone(a, b done) int {
	switch {
	case a.on != b.on:
		return cmp.Compare(a.on, b.on)
	case a.time == nil && b.time == nil:
		return cmp.Compare(a.seq, b.seq)
	case a.time == nil:
		return -1
	case b.time == nil:
		return 1
	}
	return cmp.Or(a.time.Compare(*b.time), cmp.Compare(a.seq, b.seq))
}

// records are those that answer the item and count at the instant, in order.
func (n *plain) answers(it *program.Item) []done {
	var out []done
	for _, r := range n.lines.records {
		d := done{n.dated(r.Day, r.Time), r.Time, r.Seq, r.Passed, r.Until, r.Limit}
		if !slices.Contains(it.Records, r.What) || d.on > n.on {
			continue
		}
		if d.on == n.on { // of the day itself
			if r.Time != nil && r.Time.After(n.t) || r.Time == nil && r.Passed {
				continue
			}
		}
		out = append(out, d)
	}
	slices.SortStableFunc(out, compareDone)
	return out
}

func (n *plain) happened(it *program.Item) []done {
	var out []done
	for _, e := range n.lines.events {
		d := done{on: n.dated(e.Day, e.Time), time: e.Time, seq: e.Seq}
		if slices.Contains(it.Cadence.After, e.Code) && (d.on < n.on || d.on == n.on && (e.Time == nil || !e.Time.After(n.t))) {
			out = append(out, d)
		}
	}
	slices.SortStableFunc(out, compareDone)
	return out
}

// matches reads the facts of a day: fault where one is needed that is not on record.
func (n *plain) matches(it *program.Item, on civil.Day) (yes, fault bool) {
	switch it.When {
	case isL2:
		var best *standing.Fact
		for i := range n.lines.facts {
			if f := &n.lines.facts[i]; f.From <= on && (best == nil || f.From > best.From || f.From == best.From && f.Seq > best.Seq) {
				best = f
			}
		}
		return best != nil && best.Value == "L2", best == nil
	case inIV:
		loc := n.zone(on)
		for t := on.Midnight(loc); t.Before((on + 1).Midnight(n.zone(on + 1))); t = t.Add(15 * time.Minute) {
			if n.granted("IV", t) {
				return true, false
			}
		}
		return false, false
	}
	return true, false
}

// granted tells whether a right is in force: not ended, and the stint in which it was granted goes on.
func (n *plain) granted(zone string, t time.Time) bool {
	for _, r := range n.lines.rights {
		same := func(o standing.Right) bool { return o.Zone == r.Zone && o.From.Equal(r.From) && o.Seq > r.Seq }
		if r.Zone != zone || slices.ContainsFunc(n.lines.rights, same) || r.From.After(t) || r.To != nil && !r.To.After(t) {
			continue
		}
		if s := n.stint(n.day(r.From)); s != nil && (s.Last == nil || n.day(t) <= *s.Last) {
			return true
		}
	}
	return false
}

// start is the latest of the first day on staff, the first day of the unbroken run of versions that have the item, and the
// latest day on which the person began to match it.
func (n *plain) start(it *program.Item) civil.Day {
	begin := n.on
	for d := n.on; ; d-- {
		v, s := n.version(d), n.stint(n.on)
		if v == nil || d < *s.First || !slices.ContainsFunc(v.Program.Items, func(o program.Item) bool { return o.Code == it.Code }) {
			return begin
		}
		if yes, fault := n.matches(it, d); !yes || fault {
			return begin
		}
		begin = d
	}
}

// said is what an item says at the instant.
type said struct {
	asked, open bool
	word        string
	due         *civil.Day
}

func (n *plain) says(it *program.Item) said {
	yes, fault := n.matches(it, n.on)
	switch {
	case fault:
		return said{asked: true, word: "data-fault"}
	case !yes:
		return said{}
	}
	done := n.answers(it)
	failed := len(done) > 0 && !done[len(done)-1].passed
	events := n.happened(it)
	if it.Cadence.Rule == program.After && len(events) == 0 && !(failed && done[len(done)-1].on >= n.start(it)) {
		return said{}
	}
	excused, opening := false, false
	for _, x := range n.lines.excusals {
		if (x.Item == it.Code || x.Item == "") && x.From <= n.on && n.on <= *x.To {
			excused = excused || !failed || x.From > done[len(done)-1].on
			opening = opening || x.Item != "" && x.Opens
		}
	}
	var accepted int
	for i, d := range done {
		if d.passed {
			accepted = i + 1
		}
	}
	var s said
	switch {
	case excused:
		s = said{true, opening && !failed, "excused", nil}
	case failed:
		return said{true, false, "failed", nil}
	case it.Cadence.Rule == program.After:
		s = n.after(it, done, events, accepted > 0)
	default:
		s = n.byDue(it, done, accepted)
	}
	return s
}

// limited leaves open only what the latest accepted record does.
func (n *plain) limited(it *program.Item, zone string, s said) said {
	var limit []string
	for _, d := range n.answers(it) {
		if d.passed {
			limit = d.limit
		}
	}
	if s.open && len(limit) > 0 && !slices.Contains(limit, zone) {
		s.open, s.word = false, "limited"
	}
	return s
}

func (n *plain) after(it *program.Item, records, events []done, any bool) said {
	for _, e := range events {
		answered := slices.ContainsFunc(records, func(r done) bool {
			both := r.time != nil && e.time != nil
			return r.passed && (r.on > e.on || r.on == e.on && both && r.time.After(*e.time))
		})
		if answered {
			continue
		}
		due := e.on.Add(it.Cadence.Within)
		switch {
		case n.on <= due.Add(it.Grace):
			return said{true, false, "closing", &due}
		case any:
			return said{true, false, "lapsed", &due}
		}
		return said{true, false, "missing", &due}
	}
	return said{true, true, "met", nil}
}

// byDue is for every and once; accepted counts the records up to the last accepted one.
func (n *plain) byDue(it *program.Item, records []done, accepted int) said {
	var due civil.Day
	switch {
	case accepted == 0:
		due = n.start(it).Add(it.First)
	case it.Cadence.Rule == program.Once:
		until := records[accepted-1].until
		if until == nil {
			return said{true, true, "met", nil}
		}
		due = *until
	default:
		due = renewed(&it.Cadence, records)
	}
	s := said{asked: true, due: &due}
	switch {
	case n.on > due.Add(it.Grace) && accepted == 0:
		s.word = "missing"
	case n.on > due.Add(it.Grace):
		s.word = "lapsed"
	case n.on >= due-civil.Day(it.Notice.Days):
		s.word, s.open = "closing", accepted > 0
	case accepted == 0:
		s.word = "awaited"
	default:
		s.word, s.open = "met", true
	}
	return s
}

// renewed folds over the records of every.
func renewed(c *program.Cadence, records []done) civil.Day {
	var due *civil.Day
	for _, r := range records {
		if !r.passed {
			due = nil
			continue
		}
		from := r.on
		if due != nil && c.Early != nil && due.Sub(*c.Early) <= r.on && r.on <= *due {
			from = *due
		}
		next := from.Add(c.Every)
		if c.MonthEnd {
			next = next.MonthEnd()
		}
		switch {
		case r.until != nil:
			next = min(next, *r.until)
		case due != nil:
			next = max(next, *due)
		}
		due = &next
	}
	return *due
}

// reasons are all that stands against it, items in the order of the day's program.
func (n *plain) reasons(zone string) []string {
	var out []string
	here := n.stint(n.on) != nil
	if !here {
		out = append(out, "not-on-staff")
	}
	if !n.granted(zone, n.t) {
		word := "no-right"
		for _, r := range n.lines.rights {
			if r.Zone == zone && !r.From.After(n.t) {
				word = "right-ended"
			}
		}
		out = append(out, word)
	}
	if !here {
		return out
	}
	paused := false
	for _, x := range n.lines.excusals {
		paused = paused || x.Item == "" && x.From <= n.on && n.on <= *x.To
	}
	if paused {
		out = append(out, "paused")
	}
	asked, shut := n.guardsOf(zone, paused)
	if !asked {
		out = append(out, "no-guard")
	}
	return append(out, shut...)
}

func (n *plain) guardsOf(zone string, paused bool) (asked bool, shut []string) {
	if n.v == nil {
		return false, nil
	}
	for i := range n.v.Program.Items {
		it := &n.v.Program.Items[i]
		rule := it.Cadence.Rule
		if !slices.Contains(it.Guards, zone) || it.Asks != program.AsksPerson || rule != program.Every && rule != program.Once && rule != program.After {
			continue
		}
		s := n.limited(it, zone, n.says(it))
		asked = asked || s.asked
		if s.asked && !s.open && !(paused && s.word == "excused") {
			shut = append(shut, it.Code+" "+s.word+dueText(s.due))
		}
	}
	return asked, shut
}

func dueText(d *civil.Day) string {
	if d == nil {
		return ""
	}
	return " due " + d.String()
}

// full are reasons with their due days, as plain writes them.
func full(list []reach.Reason) string {
	out := make([]string, len(list))
	for i, r := range list {
		out[i] = strings.TrimSpace(r.Item+" "+r.Standing) + dueText(r.Due)
	}
	return strings.Join(out, ", ")
}

// transitions are where the clocks of a zone change, at midnight in some, in the spread of days after the first.
var transitions = []struct {
	zone  string
	first civil.Day
}{
	{"Europe/Lisbon", civil.Of(2024, time.March, 26)}, {"Europe/Lisbon", civil.Of(2024, time.October, 22)},
	{"Atlantic/Azores", civil.Of(2024, time.March, 26)}, {"Atlantic/Azores", civil.Of(2024, time.October, 22)},
	{"America/Santiago", civil.Of(2024, time.April, 2)}, {"America/Santiago", civil.Of(2024, time.September, 3)},
	{"Asia/Beirut", civil.Of(2024, time.March, 26)}, {"Australia/Lord_Howe", civil.Of(2024, time.April, 2)},
	{"Pacific/Apia", civil.Of(2011, time.December, 25)}, // without 30 December
	{"Asia/Kathmandu", civil.Of(2024, time.February, 24)}, {"UTC", civil.Of(2023, time.December, 27)},
}

// moved draws a book like that of the other test, laid around a change of clocks and with all that cadences can say.
func (d *draws) moved() *lines {
	l := d.book()
	at := transitions[d.n(len(transitions))]
	loc, err := time.LoadLocation(at.zone)
	if err != nil {
		d.Fatal(err)
	}
	by := at.first - first
	d.skips = at.zone == "Pacific/Apia"
	shift := func(t *time.Time) {
		if t != nil {
			*t = t.AddDate(0, 0, int(by))
		}
	}
	days := func(list ...*civil.Day) {
		for _, x := range list {
			if x != nil {
				*x += by
			}
		}
	}
	for i := range l.versions {
		v := &l.versions[i]
		v.InForceFrom += by
		v.Program.Site.Location = loc
		if i > 0 && d.chance(30) { // the site turns out to be elsewhere
			v.Program.Site.Location = time.FixedZone("elsewhere", 900*(d.n(40)-16))
		}
		for j := range v.Program.Items {
			d.vary(&v.Program.Items[j])
		}
	}
	for i := range l.stints {
		days(l.stints[i].First, l.stints[i].Last)
	}
	for i := range l.facts {
		days(&l.facts[i].From)
	}
	for i := range l.records {
		days(&l.records[i].Day, l.records[i].Until)
		shift(l.records[i].Time)
	}
	for i := range l.events {
		days(&l.events[i].Day)
		shift(l.events[i].Time)
	}
	for i := range l.excusals {
		days(&l.excusals[i].From, l.excusals[i].To)
	}
	for i := range l.rights {
		shift(&l.rights[i].From)
		shift(l.rights[i].To)
	}
	d.base = at.first
	if d.chance(75) {
		d.train()
	}
	return l
}

// train puts before everything what lets somebody in, for all else to take away: otherwise hardly anybody would be
// entitled ever.
func (d *draws) train() {
	l, before := &d.l, d.base-1
	l.stints[0].First, l.stints[0].Ended = ptr(before-1), 0
	l.facts = append(l.facts, standing.Fact{Line: d.line(), Subject: ann, Code: "level", From: before, Value: "L2"})
	for _, what := range []string{"training/a", "training/b"} {
		l.records = append(l.records, standing.Record{Line: d.line(), Site: "S", Subject: ann, What: what, Day: before, Passed: true})
	}
	for _, zone := range []string{"III", "IV"} {
		l.rights = append(l.rights, standing.Right{Line: d.line(), Person: "ann", Zone: zone, From: before.Midnight(time.UTC)})
	}
}

func (d *draws) vary(it *program.Item) {
	it.First = civil.Duration{Days: d.n(4)}
	if d.skips && it.When == inIV {
		it.When = nil // in which zones a right is in force on a day without instants nobody can say
	}
	if it.Cadence.Rule != program.Every {
		return
	}
	if d.chance(40) {
		it.Cadence.Early = &civil.Duration{Days: 1 + d.n(2)}
	}
	it.Cadence.MonthEnd = d.chance(15)
}

// TestReachIsWhatTheDesignSays asks at each quarter of an hour that is drawn, at every instant that the book names, and
// a little before and after them.
func TestReachIsWhatTheDesignSays(t *testing.T) {
	in, out := 0, 0
	rapid.Check(t, func(t *rapid.T) {
		d := newNaiveDraws(t)
		all := d.moved()
		k := standing.Always
		if d.chance(60) {
			k = int64(1 + d.n(int(d.seq)))
		}
		l := all.known(k)
		if len(l.versions) == 0 {
			k, l = standing.Always, all.known(standing.Always)
		}
		r, err := reach.New(all.engine(), "S", k)
		if err != nil {
			t.Fatal(err)
		}
		zone := []string{"III", "IV"}[d.n(2)]
		ribbon := r.Ribbon("ann", zone)
		whole(t, ribbon)
		for _, at := range d.instants(l) {
			want := strings.Join(newPlain(l, at).reasons(zone), ", ")
			if want == "" {
				in++
			} else {
				out++
			}
			if got := full(spanAt(ribbon, at).Reasons); got != want {
				t.Fatalf("at %v (day %s) in %s, known at %d: the ribbon says %q, the design %q\n%s", at, l.day(at), zone, k, got, want, l)
			}
			one := r.One("ann", zone, at)
			if got := full(one.Reasons); got != want {
				t.Fatalf("at %v (day %s) in %s, known at %d: One says %q, the design %q\n%s", at, l.day(at), zone, k, got, want, l)
			}
			if end := endOf(ribbon, at); one.Entitled && !same(one.Until, end) {
				t.Fatalf("at %v in %s, known at %d: until %v, by the ribbon %v\n%s", at, zone, k, one.Until, end, l)
			}
		}
	})
	t.Logf("%d in, %d out", in, out)
	if in < 200 || out < 200 {
		t.Errorf("entitled at %d instants and not at %d: the test asks too little", in, out)
	}
}

// TestNobodyWithoutAGuardThatAsksThem is the promise of the whole, at the beginning, in the middle and at the end of every
// span: an item that guards the very zone asks the person, and a record of theirs that counts by then has passed for it, or
// an excusal of that item opens it; and no such item is shut.
func TestNobodyWithoutAGuardThatAsksThem(t *testing.T) {
	entitled := 0
	rapid.Check(t, func(t *rapid.T) {
		d := newNaiveDraws(t)
		l := d.moved().known(standing.Always)
		r, err := reach.New(l.engine(), "S", standing.Always)
		if err != nil {
			t.Fatal(err)
		}
		for _, zone := range []string{"III", "IV"} {
			for _, s := range r.Ribbon("ann", zone) {
				if !s.Entitled {
					continue
				}
				entitled++
				last := s.To.Add(-time.Microsecond)
				if s.To.IsZero() {
					last = s.From.AddDate(0, 1, 0)
				}
				for _, at := range []time.Time{s.From, s.From.Add(last.Sub(s.From) / 2), last} {
					if !newPlain(l, at).answered(zone) {
						t.Fatalf("entitled to %s at %v by no item that asks and is answered\n%s", zone, at, l)
					}
				}
			}
		}
	})
	if entitled < 20 {
		t.Errorf("only %d times anybody was entitled", entitled)
	}
}

// answered tells whether an item that guards the zone asks, and all that do have an answer.
func (n *plain) answered(zone string) bool {
	asked := false
	for i := range n.v.Program.Items {
		it := &n.v.Program.Items[i]
		if !slices.Contains(it.Guards, zone) || !n.says(it).asked {
			continue
		}
		asked = true
		passed := slices.ContainsFunc(n.answers(it), func(d done) bool { return d.passed })
		opened := slices.ContainsFunc(n.lines.excusals, func(x standing.Excusal) bool {
			return x.Item == it.Code && x.Opens && x.From <= n.on && n.on <= *x.To
		})
		if !passed && !opened {
			return false
		}
	}
	return asked
}

// instants are some of the quarters of an hour, and all that the book names with the midnights around them.
func (d *draws) instants(l *lines) []time.Time {
	var out []time.Time
	for range 25 {
		out = append(out, d.base.Midnight(time.UTC).Add(time.Duration(d.n((spread+6)*96))*15*time.Minute))
	}
	named := func(t *time.Time) {
		if t != nil {
			out = append(out, t.Add(-time.Microsecond), *t, t.Add(time.Microsecond))
		}
	}
	for i := range l.records {
		named(l.records[i].Time)
	}
	for i := range l.events {
		named(l.events[i].Time)
	}
	for i := range l.rights {
		named(&l.rights[i].From)
		named(l.rights[i].To)
	}
	for range 8 {
		on := d.base + civil.Day(d.n(spread+6))
		named(ptr(on.Midnight(l.zone(on))))
	}
	return out
}

func newNaiveDraws(t *rapid.T) *draws {
	return &draws{T: t, Rand: rand.New(rand.NewPCG(rapid.Uint64().Draw(t, "seed"), 2))}
}

// TestLengthsOfDays holds the first instants of days against the transitions of the IANA time zone database, of which Go
// embeds a copy: a day is as much shorter than 24 hours as the clocks went forward in it.
func TestLengthsOfDays(t *testing.T) {
	lengths := map[time.Duration]int{}
	for _, zone := range []string{"UTC", "Europe/Lisbon", "Atlantic/Azores", "America/Santiago", "America/Havana", "America/Asuncion", "Asia/Beirut", "Asia/Kathmandu", "Africa/Cairo", "Australia/Lord_Howe", "Pacific/Auckland", "Pacific/Apia"} {
		loc, err := time.LoadLocation(zone)
		if err != nil {
			t.Fatal(err)
		}
		e := standing.New()
		e.PutVersion("S", standing.Version{Line: standing.Line{Seq: 1, ID: "e1"}, Number: 1, InForceFrom: civil.Of(2000, 1, 1), Program: &program.Program{Site: program.Site{Code: "S", Location: loc}}})
		g, err := e.Guard("S", standing.Always)
		if err != nil {
			t.Fatal(err)
		}
		for on := civil.Of(2010, time.January, 1); on < civil.Of(2026, time.January, 1); on++ {
			begin, end := g.Dawn(on), g.Dawn(on+1)
			if want := 24*time.Hour - forward(begin, end, loc); end.Sub(begin) != want {
				t.Errorf("%s has %v in %s, want %v", on, end.Sub(begin), zone, want)
			}
			if g.Day(begin) != on && end.After(begin) || end.After(begin) && g.Day(end.Add(-1)) != on {
				t.Errorf("the ends of %s in %s are of %s and %s", on, zone, g.Day(begin), g.Day(end.Add(-1)))
			}
			lengths[end.Sub(begin)]++
		}
	}
	for _, hours := range []float64{0, 23, 23.5, 24, 24.5, 25} {
		if lengths[time.Duration(hours*float64(time.Hour))] == 0 {
			t.Errorf("no day of %v hours among %v", hours, lengths)
		}
	}
}

// forward is how far the clocks went forward from the last instant before a day through its last one: the sum of the
// database's transitions there.
func forward(begin, end time.Time, loc *time.Location) time.Duration {
	sum := 0
	if begin.Equal(end) { // a day that never was: the clocks went forward by it
		_, before := begin.Add(-1).In(loc).Zone()
		_, after := begin.In(loc).Zone()
		sum = after - before
	}
	for t := begin; t.Before(end); {
		at := t.In(loc)
		_, offset := at.Zone()
		start, next := at.ZoneBounds()
		if start.Equal(begin) && midnightless(at) {
			_, before := begin.Add(-1).In(loc).Zone()
			sum += offset - before
		}
		if next.IsZero() || !next.Before(end) {
			break
		}
		_, after := next.Zone()
		sum += after - offset
		t = next
	}
	return time.Duration(sum) * time.Second
}

// midnightless tells whether the clocks jump over the beginning of the day that the instant begins: they show no
// midnight then.
func midnightless(t time.Time) bool {
	h, m, s := t.Clock()
	return h != 0 || m != 0 || s != 0
}
