package network

import (
	"math/rand/v2"
	"slices"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// history writes what is done at a site, and when.
type history struct {
	*Site
	away   map[Subject][]Pause
	handed []civil.Day // of each record, the day on which it was handed in
	byWhom []string    // people who are named as having done it
}

// people writes what people do.
func (h *history) people(all []*worker) {
	for _, w := range all {
		if !w.guest && len(h.byWhom) < 20 {
			h.byWhom = append(h.byWhom, w.code)
		}
		r := h.n.chance(h.no, "deeds", w.code)
		for i := range personHabits {
			x := &personHabits[i]
			if w.guest && !x.guests {
				continue
			}
			for _, s := range w.spans {
				h.do(r, x, w.subject(), s, func(d civil.Day) bool { return x.asked == nil || x.asked(w, d) })
			}
		}
		if !w.guest {
			h.health(r, w)
		}
		h.excuse(r, w)
	}
}

// fixtures writes what is done about fixtures, and what happens to them.
func (h *history) fixtures(all []*thing) {
	for _, t := range all {
		r := h.n.chance(h.no, "deeds", t.code)
		for i := range fixtureHabits {
			x := &fixtureHabits[i]
			if x.kind == t.kind && (x.thing == nil || x.thing(t)) {
				h.do(r, x, t.subject(), t.in, always)
			}
		}
		h.weather(r, t)
	}
}

func always(civil.Day) bool { return true }

// house writes what is done about the site and its declared subjects.
func (h *history) house(people []*worker) {
	r := h.n.chance(h.no, "house")
	whole := span{First, NoDay}
	do := func(asks program.Asks, code string, x habit) { h.do(r, &x, Subject{asks, code}, whole, always) }
	for _, zone := range []string{"III", "IV"} {
		do(program.AsksZone, zone, habit{what: []string{"inspection/signs"}, cycle: true, each: civil.ByQuarter, miss: 50, fail: 20})
	}
	for _, crew := range crews {
		do(program.AsksCrew, crew, habit{what: []string{"drill/crew"}, every: 182, slack: 20, begin: 150, miss: 60, fail: 20})
		do(program.AsksCrew, crew, habit{what: []string{"review/briefing"}, cycle: true, each: civil.ByMonth, miss: 50})
	}
	for _, post := range posts {
		do(program.AsksPost, post, habit{what: []string{"review/duties"}, every: 365, slack: 20, begin: 70, miss: 50})
	}
	for _, doc := range []string{"POL-ACCESS", "POL-QUENCH"} {
		do(program.AsksDocument, doc, habit{what: []string{"review/document"}, every: 730, slack: 40, begin: 100, miss: 50})
	}
	do(program.AsksSite, h.Code, habit{what: []string{"review/audit"}, every: 365, slack: 20, begin: 100, miss: 50, fail: 30})
	if h.walks() {
		do(program.AsksSite, h.Code, habit{what: []string{"inspection/walk"}, cycle: true, each: civil.ByDay, miss: 30, fail: 5})
	}
	if from, ok := h.second(); ok {
		h.do(r, &habit{what: []string{"review/incidents"}, cycle: true, each: civil.ByMonth, miss: 80}, Subject{program.AsksSite, h.Code}, span{from, NoDay}, always)
	}
	h.appoint(r, people)
}

// appoint fills the posts; one in ten of them stands empty for a while.
func (h *history) appoint(r *rand.Rand, people []*worker) {
	for _, w := range people {
		if w.post == "" || w.guest {
			continue
		}
		first := First + between(r, 0, 3)
		until := NoDay
		if in(r, 100) {
			until = first + between(r, 100, 1200)
		}
		what := "appointment/" + w.post
		h.put(r, Record{What: what, Subject: w.subject(), Day: first, Until: until})
		if again := until + between(r, 3, 90); until != NoDay {
			h.put(r, Record{What: what, Subject: w.subject(), Day: again, Until: NoDay})
		}
	}
}

// do writes what a habit leaves on record about a subject in a span.
func (h *history) do(r *rand.Rand, x *habit, sub Subject, over span, asked func(civil.Day) bool) {
	first, last := max(over.first, First), h.n.Last()
	if over.last != NoDay {
		last = min(last, over.last)
	}
	switch {
	case x.cycle:
		h.eachPeriod(r, x, sub, span{first, last}, asked)
	case x.every == 0:
		d := first + between(r, 0, x.begin)
		for d <= last && !asked(d) { // the level or crew may come later
			d += between(r, 20, 40)
		}
		if d <= last && !in(r, x.miss) {
			h.deed(r, x, sub, d, last)
		}
	default:
		h.renew(r, x, sub, span{first, last}, asked)
	}
}

// renew writes what is done again and again: mostly in good time, now and then late, and sometimes not at all
// for a long while.
func (h *history) renew(r *rand.Rand, x *habit, sub Subject, over span, asked func(civil.Day) bool) {
	d := over.first + between(r, 0, x.begin)
	for d <= over.last {
		if !asked(d) {
			d += between(r, 20, 40)
			continue
		}
		d = h.deed(r, x, sub, d, over.last)
		switch at := r.IntN(1000); {
		case at < x.miss/5:
			return // never again
		case at < x.miss:
			d += civil.Day(x.every) + between(r, 90, 300)
		case at < x.miss+60:
			d += civil.Day(x.every) + between(r, 1, 60)
		default:
			d += civil.Day(x.every) - between(r, 0, x.slack)
		}
	}
}

// eachPeriod writes what is done once in each period.
func (h *history) eachPeriod(r *rand.Rand, x *habit, sub Subject, over span, asked func(civil.Day) bool) {
	for p := civil.PeriodOf(x.each, over.first); p.First <= over.last; p = p.Next(x.each) {
		d := p.First + civil.Day(r.IntN(int(p.Last-p.First)+1))
		if d < over.first || d > over.last || !asked(d) || in(r, x.miss) {
			continue
		}
		h.deed(r, x, sub, d, over.last)
	}
}

// deed writes one thing done, and after a failure the one that passes. It gives the day of the last.
func (h *history) deed(r *rand.Rand, x *habit, sub Subject, d, last civil.Day) civil.Day {
	rec := Record{What: pick(r, x.what), Subject: sub, Day: h.present(r, sub, d), Until: NoDay}
	if rec.Day > last {
		return rec.Day
	}
	if x.clock {
		rec.Time = rec.Day.Midnight(h.Location).Add(time.Duration(between(r, 6*60, 11*60)) * time.Minute)
	}
	if in(r, x.fail) {
		rec.Failed, rec.Note = true, "to be done again"
		h.put(r, rec)
		rec.Failed, rec.Note, rec.Time = false, "", time.Time{}
		rec.Day += between(r, 1, 25)
	}
	if x.until > 0 {
		rec.Until = rec.Day + civil.Day(x.until) - between(r, 0, 30)
	}
	if rec.What == "screening/staff" && in(r, 4) {
		rec.Limit = "III"
	}
	if sub.Asks == program.AsksFixture && len(h.byWhom) > 0 && in(r, 30) {
		rec.By = pick(r, h.byWhom)
	}
	if rec.Day <= last {
		h.put(r, rec)
	}
	return rec.Day
}

// present moves a day behind the pause that it lies in.
func (h *history) present(r *rand.Rand, sub Subject, d civil.Day) civil.Day {
	for _, p := range h.away[sub] {
		if p.From <= d && (p.To == NoDay || d <= p.To) {
			if p.To == NoDay {
				return civil.LastDay
			}
			return p.To + between(r, 1, 20)
		}
	}
	return d
}

// put adds a record. A few are handed in late.
func (h *history) put(r *rand.Rand, rec Record) {
	if rec.Day > h.n.Last() || rec.Day < First {
		return
	}
	handed := rec.Day
	if in(r, 30) {
		handed += between(r, 3, 60)
	}
	h.Records, h.handed = append(h.Records, rec), append(h.handed, handed)
}

// finish puts the records in the order in which they were handed in.
func (h *history) finish() {
	order := make([]int32, len(h.Records))
	for i := range order {
		order[i] = int32(i)
	}
	slices.SortStableFunc(order, func(a, b int32) int { return int(h.handed[a] - h.handed[b]) })
	sorted := make([]Record, len(order))
	for i, from := range order {
		sorted[i] = h.Records[from]
	}
	h.Records = sorted
	slices.SortStableFunc(h.Events, func(a, b Event) int { return int(a.Day - b.Day) })
	slices.SortStableFunc(h.Excusals, func(a, b Excusal) int {
		return strings.Compare(a.From.String(), b.From.String())
	})
}
