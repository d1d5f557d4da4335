package standing_test

import (
	"fmt"
	"slices"
	"sort"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// This file states the rules of design section 3 a second time, as naively as can be: everything
// lies in flat lists, every question is answered by going through all of them, and spans are found
// by walking from day to day. Nothing of the evaluator is used but its contract types.

// naive is all that is on record, and the moment as of which it is read.
type naive struct {
	site     string
	k        int64
	versions []standing.Version
	stints   []at[standing.Stint]
	facts    []at[standing.Fact]
	records  []standing.Record
	events   []at[standing.Event]
	excusals []at[standing.Excusal]
	rights   []at[standing.Right]
	// The days on which anything at all lies, and room to spare.
	first, last civil.Day
	profiles    map[string]program.Subject // what was worked out before
	helds       map[string]string
}

// at is a line put at a site.
type at[T any] struct {
	site string
	line T
}

func (n *naive) knows(l standing.Line) bool {
	recorded := l.Seq <= n.k
	gone := l.Ended != 0 && l.Ended <= n.k
	return recorded && !gone
}

func (n *naive) version(d civil.Day) *standing.Version {
	var best *standing.Version
	for i, v := range n.versions {
		if n.knows(v.Line) && v.InForceFrom <= d && (best == nil || v.Seq > best.Seq) {
			best = &n.versions[i]
		}
	}
	return best
}

func (n *naive) item(d civil.Day, code string) *program.Item {
	v := n.version(d)
	if v == nil {
		return nil
	}
	for i := range v.Program.Items {
		if v.Program.Items[i].Code == code {
			return &v.Program.Items[i]
		}
	}
	return nil
}

// exists tells whether the subject is there on the day, and from when if a stint says so.
func (n *naive) exists(sub standing.Subject, d civil.Day) (joined civil.Day, ok bool) {
	if sub.Asks != program.AsksPerson && sub.Asks != program.AsksFixture {
		return n.first, n.version(d) != nil && slices.Contains(declared(n.site, n.version(d).Program), sub)
	}
	decides := map[string]standing.Stint{} // by first day
	for _, s := range n.stints {
		if s.site == n.site && s.line.Subject == sub && n.knows(s.line.Line) {
			begin := "open"
			if s.line.First != nil {
				begin = s.line.First.String()
			}
			if s.line.Seq > decides[begin].Seq {
				decides[begin] = s.line
			}
		}
	}
	joined = n.first
	for _, s := range decides {
		from, to := n.first, n.last
		if s.First != nil {
			from = *s.First
		}
		if s.Last != nil {
			to = *s.Last
		}
		if from <= d && d <= to {
			ok, joined = true, max(joined, from)
		}
	}
	return joined, ok
}

func declared(site string, p *program.Program) []standing.Subject {
	out := []standing.Subject{{Asks: program.AsksSite, Code: site}}
	for _, x := range p.Zones {
		out = append(out, standing.Subject{Asks: program.AsksZone, Code: x.Code})
	}
	for _, x := range p.Crews {
		out = append(out, standing.Subject{Asks: program.AsksCrew, Code: x.Code})
	}
	for _, x := range p.Posts {
		out = append(out, standing.Subject{Asks: program.AsksPost, Code: x.Code})
	}
	for _, x := range p.Documents {
		out = append(out, standing.Subject{Asks: program.AsksDocument, Code: x.Code})
	}
	return out
}

func (n *naive) profile(sub standing.Subject, d civil.Day, withHeld bool) program.Subject {
	key := fmt.Sprint(sub, d, withHeld)
	if _, done := n.profiles[key]; !done {
		n.profiles[key] = n.workOutProfile(sub, d, withHeld)
	}
	return n.profiles[key]
}

func (n *naive) workOutProfile(sub standing.Subject, d civil.Day, withHeld bool) program.Subject {
	p := program.Subject{Asks: sub.Asks, Code: sub.Code, Facts: map[string]any{}}
	type dated struct {
		from civil.Day
		seq  int64
	}
	when := map[string]dated{}
	for _, f := range n.facts {
		if f.site != n.site || f.line.Subject != sub || !n.knows(f.line.Line) || f.line.From > d {
			continue
		}
		if got, ok := when[f.line.Code]; ok && (got.from > f.line.From || got.from == f.line.From && got.seq > f.line.Seq) {
			continue
		}
		when[f.line.Code] = dated{f.line.From, f.line.Seq}
		p.Facts[f.line.Code] = f.line.Value
	}
	take := func(code string) string {
		s, _ := p.Facts[code].(string)
		delete(p.Facts, code)
		return s
	}
	switch sub.Asks {
	case program.AsksPerson:
		p.Name, p.Level, p.Crew = take("name"), take("level"), take("crew")
		for _, post := range testPosts {
			if slices.Contains(n.holders(post, d), sub.Code) {
				p.Posts = append(p.Posts, post)
			}
		}
		p.Zones = n.zones(sub.Code, d)
		if withHeld {
			p.Held = n.held(sub, d)
		}
	case program.AsksFixture:
		p.Kind, p.Zone = take("kind"), take("zone")
	case program.AsksPost:
		p.Holders = n.holders(sub.Code, d)
	}
	for code, value := range p.Facts {
		if value == nil {
			delete(p.Facts, code)
		}
	}
	return p
}

func (n *naive) holders(post string, d civil.Day) []string {
	var out []string
	for _, person := range testPeople {
		sub := standing.Subject{Asks: program.AsksPerson, Code: person}
		if _, here := n.exists(sub, d); !here || n.version(d) == nil {
			continue
		}
		own := n.answering(sub, []string{"appointment/" + post}, true, n.version(d), d)
		if len(own) == 0 {
			continue
		}
		if r := own[len(own)-1]; r.Passed && (r.Until == nil || d <= *r.Until) {
			out = append(out, person)
		}
	}
	return out
}

// dayed is a record on the day that the site's zone gives it.
type dayed struct {
	day civil.Day
	standing.Record
}

// answering lists the subject's records of the kinds up to the day, in order.
func (n *naive) answering(sub standing.Subject, kinds []string, local bool, v *standing.Version, upTo civil.Day) []dayed {
	var out []dayed
	for _, r := range n.records {
		here := r.Site == n.site
		if !n.knows(r.Line) || r.Subject != sub || !slices.Contains(kinds, r.What) || !here && (local || sub.Asks != program.AsksPerson) {
			continue
		}
		if d := inZone(r.Day, r.Time, v); d <= upTo {
			out = append(out, dayed{d, r})
		}
	}
	key := func(r dayed) string {
		if r.Time == nil {
			return fmt.Sprintf("%010d|0|%020d", r.day, r.Seq)
		}
		return fmt.Sprintf("%010d|1|%020d|%020d", r.day, r.Time.UnixNano(), r.Seq)
	}
	sort.Slice(out, func(i, j int) bool { return key(out[i]) < key(out[j]) })
	return out
}

func inZone(d civil.Day, t *time.Time, v *standing.Version) civil.Day {
	if t == nil {
		return d
	}
	y, m, dom := t.In(v.Program.Site.Location).Date()
	return civil.Of(y, m, dom)
}

// matches tells whether the item asks the subject on the day; lacks is a data fault.
func (n *naive) matches(it *program.Item, sub standing.Subject, d civil.Day, withHeld bool) (yes bool, lacks error) {
	if _, ok := n.exists(sub, d); !ok {
		return false, nil
	}
	if it.When == nil {
		return true, nil
	}
	return it.When.Match(n.profile(sub, d, withHeld))
}

// start walks back from the day.
func (n *naive) start(it *program.Item, sub standing.Subject, on civil.Day, withHeld bool) civil.Day {
	run := on
	for n.item(run-1, it.Code) != nil {
		run--
	}
	if it.Since != nil {
		run = max(run, *it.Since)
	}
	joined, _ := n.exists(sub, on)
	floor := max(run, joined)
	began := on
	for began > floor {
		if yes, lacks := n.matches(it, sub, began-1, withHeld); !yes || lacks != nil {
			break
		}
		began--
	}
	return max(began, floor)
}

// verdict is a standing by the naive statement.
type verdict struct {
	word         standing.Word
	due          *civil.Day
	start        *civil.Day
	record       string
	excusedUntil *civil.Day
	since        *civil.Day
	open         bool
}

// judge is nil where there is no obligation.
func (n *naive) judge(it *program.Item, sub standing.Subject, on civil.Day, withHeld bool) *verdict {
	v := n.version(on)
	if _, here := n.exists(sub, on); !here {
		return nil
	}
	if it.Since != nil && on < *it.Since {
		return nil
	}
	yes, lacks := n.matches(it, sub, on, withHeld)
	if lacks != nil {
		return &verdict{word: standing.DataFault}
	}
	if !yes {
		return nil
	}
	start := n.start(it, sub, on, withHeld)
	records := n.answering(sub, it.Records, it.Local, v, on)
	events := n.happened(it, sub, v, on)
	var failure *dayed
	if len(records) > 0 && !records[len(records)-1].Passed {
		failure = &records[len(records)-1]
	}
	if it.Cadence.Rule == program.After && len(events) == 0 && (failure == nil || failure.day < start) {
		return nil
	}
	out := n.excusedOrFailed(it, sub, failure, on)
	if out == nil {
		out = n.cadence(it, sub, start, records, events, on, withHeld)
	}
	if out.word == standing.DataFault {
		return out
	}
	out.start = &start
	if out.since != nil {
		out.since = ptr(max(*out.since, start))
	}
	if out.word == standing.Met {
		out.open = true
	}
	if out.word == standing.Closing && (it.Cadence.Rule == program.Every || it.Cadence.Rule == program.Once) {
		out.open = slices.ContainsFunc(records, func(r dayed) bool { return r.Passed })
	}
	return out
}

func ptr[T any](v T) *T { return &v }

// excuses lists the excusals of the item and the pauses of the subject that cover the day.
func (n *naive) excuses(it *program.Item, sub standing.Subject, d civil.Day) []standing.Excusal {
	var out []standing.Excusal
	for _, x := range n.excusals {
		pause := x.line.Item == ""
		counts := x.site == n.site || pause && sub.Asks == program.AsksPerson
		if !counts || x.line.Subject != sub || !n.knows(x.line.Line) || !pause && x.line.Item != it.Code {
			continue
		}
		if d >= x.line.From && (x.line.To == nil || d <= *x.line.To) {
			out = append(out, x.line)
		}
	}
	return out
}

func (n *naive) excusedOrFailed(it *program.Item, sub standing.Subject, failure *dayed, on civil.Day) *verdict {
	var until *civil.Day
	excused, forEver, opens := false, false, false
	for _, x := range n.excuses(it, sub, on) {
		if failure != nil && x.From <= failure.day {
			continue
		}
		excused = true
		opens = opens || x.Opens && x.Item != "" && failure == nil
		if x.To == nil {
			forEver = true
		} else if until == nil || *x.To > *until {
			until = x.To
		}
	}
	switch {
	case excused && forEver:
		return &verdict{word: standing.Excused, open: opens}
	case excused:
		return &verdict{word: standing.Excused, excusedUntil: until, open: opens}
	case failure != nil:
		return &verdict{word: standing.Failed, record: failure.ID, since: &failure.day}
	}
	return nil
}

func (n *naive) cadence(it *program.Item, sub standing.Subject, start civil.Day, records []dayed, events []dayedEvent, on civil.Day, withHeld bool) *verdict {
	switch it.Cadence.Rule {
	case program.Every:
		return byDue(it, start, records, everyDue(it, records), on)
	case program.Within:
		return byDue(it, start, records, withinDue(it, records, on, n.first), on)
	case program.Once:
		return onceDue(it, start, records, on)
	case program.Each:
		return n.each(it, sub, start, records, on)
	case program.After:
		return after(it, records, events, on)
	}
	return n.holds(it, sub, start, on, withHeld)
}

// settled is a due day and the record that made it.
type settled struct {
	due    civil.Day
	record string
}

// everyDue is the due day after all of the records, by what it was after all but the last.
func everyDue(it *program.Item, records []dayed) *settled {
	if len(records) == 0 || !records[len(records)-1].Passed {
		return nil
	}
	r := records[len(records)-1]
	old := everyDue(it, records[:len(records)-1])
	computed := r.day.Add(it.Cadence.Every)
	if old != nil && it.Cadence.Early != nil && r.day >= old.due.Sub(*it.Cadence.Early) && r.day <= old.due {
		computed = old.due.Add(it.Cadence.Every)
	}
	if it.Cadence.MonthEnd {
		for computed.Format("01") == (computed + 1).Format("01") {
			computed++
		}
	}
	switch {
	case r.Until != nil && *r.Until < computed:
		return &settled{*r.Until, r.ID}
	case r.Until == nil && old != nil && old.due > computed:
		return old
	}
	return &settled{computed, r.ID}
}

// withinDue walks back from the day and counts the days that have an accepted record.
func withinDue(it *program.Item, records []dayed, on, first civil.Day) *settled {
	count := 0
	for d := on; d >= first; d-- {
		id, any := "", false
		for _, r := range records {
			if r.day == d && r.Passed {
				id, any = r.ID, true
			}
		}
		if any {
			count++
		}
		if any && count == it.Cadence.Count {
			return &settled{d.Add(it.Cadence.Within), id}
		}
	}
	return nil
}

func onceDue(it *program.Item, start civil.Day, records []dayed, on civil.Day) *verdict {
	var latest *dayed
	for i := range records {
		if records[i].Passed {
			latest = &records[i]
		}
	}
	switch {
	case latest == nil:
		return byDue(it, start, records, nil, on)
	case latest.Until == nil:
		return &verdict{word: standing.Met, record: latest.ID}
	}
	return byDue(it, start, records, &settled{*latest.Until, latest.ID}, on)
}

// byDue words every, within and once; enough is nil without enough accepted records.
func byDue(it *program.Item, start civil.Day, records []dayed, enough *settled, on civil.Day) *verdict {
	before, out := standing.Met, &verdict{}
	if enough != nil {
		out.due, out.record = &enough.due, enough.record
	} else {
		before = standing.Awaited
		out.due = ptr(start.Add(it.First))
	}
	switch {
	case on < noticed(it, *out.due):
		out.word = before
	case on <= out.due.Add(it.Grace):
		out.word = standing.Closing
	default:
		out.word = gapWord(records)
		out.since = ptr(out.due.Add(it.Grace) + 1)
	}
	return out
}

func noticed(it *program.Item, due civil.Day) civil.Day {
	if it.Notice.Given != nil {
		return due.Sub(*it.Notice.Given)
	}
	return due - civil.Day(it.Notice.Days)
}

func gapWord(records []dayed) standing.Word {
	for _, r := range records {
		if r.Passed {
			return standing.Lapsed
		}
	}
	return standing.Missing
}

// span is a calendar period as the days in it.
type span struct {
	days    []civil.Day
	counted []civil.Day
	asks    bool
}

func (s span) end() civil.Day { return s.counted[len(s.counted)-1] }

// spans lays all days out in periods.
func (n *naive) spans(it *program.Item, sub standing.Subject, start civil.Day, v *standing.Version) []span {
	name := func(d civil.Day) string {
		switch it.Cadence.Each {
		case civil.ByWeek:
			y, w := d.ISOWeek()
			return fmt.Sprint(y, w)
		case civil.ByMonth:
			return d.Format("2006-01")
		case civil.ByQuarter:
			return d.Format("2006-") + map[string]string{"01": "1", "02": "1", "03": "1", "04": "2", "05": "2", "06": "2", "07": "3", "08": "3", "09": "3", "10": "4", "11": "4", "12": "4"}[d.Format("01")]
		case civil.ByYear:
			return d.Format("2006")
		}
		return d.String()
	}
	var all []span
	last := ""
	for d := n.first; d <= n.last; d++ {
		if p := name(d); p != last {
			all, last = append(all, span{}), p
		}
		s := &all[len(all)-1]
		s.days = append(s.days, d)
		if cal := v.Program.Calendar; !it.Cadence.Operating || cal.Open[d.Weekday()] && !cal.Closed[d] {
			s.counted = append(s.counted, d)
		}
	}
	for i := range all {
		s := &all[i]
		free := slices.ContainsFunc(s.counted, func(d civil.Day) bool { return len(n.excuses(it, sub, d)) == 0 })
		s.asks = len(s.counted) > 0 && free && s.end() >= start.Add(it.First)
	}
	return all
}

func (n *naive) each(it *program.Item, sub standing.Subject, start civil.Day, records []dayed, on civil.Day) *verdict {
	acceptedFrom := func(d civil.Day) (id string, any bool) {
		for _, r := range records {
			if r.Passed && r.day >= d {
				id, any = r.ID, true
			}
		}
		return id, any
	}
	all := n.spans(it, sub, start, n.version(on))
	p := -1
	for i, s := range all {
		if len(s.counted) > 0 && s.counted[0] <= on {
			p = i
		}
	}
	if id, any := acceptedFrom(all[p].days[0]); any { // (i)
		out := &verdict{word: standing.Met, record: id}
		for _, s := range all[p+1:] {
			if s.asks {
				out.due = ptr(s.end())
				break
			}
		}
		return out
	}
	var q, r, next *span
	for i := range all {
		s := &all[i]
		switch {
		case !s.asks:
			continue
		case s.end() < on:
			r = s
		case next == nil:
			next = s
		}
		if s.end().Add(it.Grace) < on {
			q = s
		}
	}
	without := func(s *span) bool {
		if s == nil {
			return false
		}
		_, any := acceptedFrom(s.days[0])
		return !any
	}
	switch {
	case without(q): // (ii)
		return &verdict{word: gapWord(records), due: ptr(q.end()), since: ptr(q.end().Add(it.Grace) + 1)}
	case without(r): // (iii)
		return &verdict{word: standing.Closing, due: ptr(r.end())}
	case next == nil:
		return &verdict{word: standing.Awaited}
	case on >= noticed(it, next.end()): // (iv)
		return &verdict{word: standing.Closing, due: ptr(next.end())}
	}
	return &verdict{word: standing.Awaited, due: ptr(next.end())}
}

// dayedEvent is an event on the day that the site's zone gives it.
type dayedEvent struct {
	day civil.Day
	standing.Event
}

func (n *naive) happened(it *program.Item, sub standing.Subject, v *standing.Version, upTo civil.Day) []dayedEvent {
	var out []dayedEvent
	for _, e := range n.events {
		here := e.site == n.site || sub.Asks == program.AsksPerson
		if !here || !n.knows(e.line.Line) || e.line.Subject != sub || !slices.Contains(it.Cadence.After, e.line.Code) {
			continue
		}
		if d := inZone(e.line.Day, e.line.Time, v); d <= upTo {
			out = append(out, dayedEvent{d, e.line})
		}
	}
	return out
}

func eventOrder(a, b dayedEvent) int {
	key := func(e dayedEvent) string {
		if e.Time == nil {
			return fmt.Sprintf("%010d|0|%020d|%020d", e.day, 0, e.Seq)
		}
		return fmt.Sprintf("%010d|1|%020d|%020d", e.day, e.Time.UnixNano(), e.Seq)
	}
	return strings.Compare(key(a), key(b))
}

func after(it *program.Item, records []dayed, events []dayedEvent, on civil.Day) *verdict {
	answers := func(r dayed, e dayedEvent) bool {
		if !r.Passed {
			return false
		}
		if r.day > e.day {
			return true
		}
		if r.day < e.day {
			return false
		}
		if r.Time != nil && e.Time != nil {
			return r.Time.After(*e.Time)
		}
		return len(it.Guards) == 0
	}
	var open *dayedEvent
	for i, e := range events {
		if !slices.ContainsFunc(records, func(r dayed) bool { return answers(r, e) }) && (open == nil || e.day < open.day) {
			open = &events[i]
		}
	}
	if open == nil {
		out, latest := &verdict{word: standing.Met}, slices.MaxFunc(events, eventOrder)
		for _, r := range records {
			if answers(r, latest) {
				out.record = r.ID
			}
		}
		return out
	}
	due := open.day.Add(it.Cadence.Within)
	if on <= due.Add(it.Grace) {
		return &verdict{word: standing.Closing, due: &due}
	}
	return &verdict{word: gapWord(records), due: &due, since: ptr(due.Add(it.Grace) + 1)}
}

func (n *naive) holds(it *program.Item, sub standing.Subject, start, on civil.Day, withHeld bool) *verdict {
	yes, lacks := it.Cadence.Holds.Match(n.profile(sub, on, withHeld))
	switch {
	case lacks != nil:
		return &verdict{word: standing.DataFault}
	case yes:
		return &verdict{word: standing.Met}
	}
	since := on
	for since > start {
		if yes, lacks := it.Cadence.Holds.Match(n.profile(sub, since-1, withHeld)); yes || lacks != nil {
			break
		}
		since--
	}
	return &verdict{word: standing.Failed, since: &since}
}

func (n *naive) held(sub standing.Subject, d civil.Day) string {
	key := fmt.Sprint(sub, d)
	if _, done := n.helds[key]; !done {
		n.helds[key] = n.workOutHeld(sub, d)
	}
	return n.helds[key]
}

// workOutHeld takes the highest of the levels, not above the assigned one, that are conferred.
func (n *naive) workOutHeld(sub standing.Subject, d civil.Day) string {
	v := n.version(d)
	if _, here := n.exists(sub, d); v == nil || !here {
		return ""
	}
	assigned := n.profile(sub, d, false).Level
	best, rank := "", 0
	for _, l := range v.Program.Levels {
		if l.Code == assigned {
			rank = l.Rank
		}
	}
	top := 0
	for _, l := range v.Program.Levels {
		if l.Rank <= rank && l.Rank > top && n.conferred(l.Code, sub, d, v) {
			best, top = l.Code, l.Rank
		}
	}
	return best
}

func (n *naive) conferred(level string, sub standing.Subject, d civil.Day, v *standing.Version) bool {
	asked, open := 0, 0
	for i := range v.Program.Items {
		if it := &v.Program.Items[i]; it.Confers == level {
			if got := n.judge(it, sub, d, false); got != nil {
				asked++
				if got.open {
					open++
				}
			}
		}
	}
	return asked > 0 && asked == open
}

// evaluate writes every standing of the day, a line each.
func (n *naive) evaluate(on civil.Day) []string {
	v := n.version(on)
	if v == nil {
		return nil
	}
	subjects := append(declared(n.site, v.Program), testSubjects...)
	slices.SortFunc(subjects, func(a, b standing.Subject) int { return strings.Compare(a.Code, b.Code) })
	codes := []string{}
	for _, it := range v.Program.Items {
		codes = append(codes, it.Code)
	}
	slices.Sort(codes)
	var out []string
	for _, code := range codes {
		it := n.item(on, code)
		for _, sub := range subjects {
			if sub.Asks != it.Asks {
				continue
			}
			if got := n.judge(it, sub, on, true); got != nil {
				out = append(out, got.line(it, sub, v, on))
			}
		}
	}
	return out
}

func (got *verdict) line(it *program.Item, sub standing.Subject, v *standing.Version, on civil.Day) string {
	return written(standing.Standing{
		Item: it.Code, Version: v.Number, Subject: sub, Word: got.word, Due: got.due, Start: got.start, Rule: it.Cadence.Rule, Record: got.record,
		InGrace: got.word == standing.Closing && got.due != nil && on > *got.due, ExcusedUntil: got.excusedUntil, Since: got.since,
	})
}

// written is a standing as a line, what is not in the rules (Left, Why) left out.
func written(s standing.Standing) string {
	day := func(d *civil.Day) string {
		if d == nil {
			return "-"
		}
		return d.String()
	}
	return fmt.Sprintf("%s v%d %s:%s %s due %s start %s rule %s record %q grace %v until %s since %s", s.Item, s.Version, s.Subject.Asks, s.Subject.Code,
		s.Word, day(s.Due), day(s.Start), s.Rule, s.Record, s.InGrace, day(s.ExcusedUntil), day(s.Since))
}
