package reach

import (
	"slices"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// Duty is one turn of the roster: the person is on it from an instant, which is included, up to one that is not.
// Word says which duty it is, as in on-call.
type Duty struct {
	Person   string
	From, To time.Time
	Word     string
}

// LongestDuty bounds a turn of the roster.
const LongestDuty = 48 * time.Hour

// Uncovered is a time in which fewer people are there than an item needs: From is included, To is not. There is how
// many are.
type Uncovered struct {
	From, To      time.Time
	There, Needed int
}

// demand is a time in which an item of one version needs somebody.
type demand struct {
	interval
	p *program.Program
	c *program.CoverDemand
}

// Uncovered are the times from one instant up to another in which an item with cover is short of people, in order;
// neighbours do not touch unless they differ. A person counts once, however many duties they are on, and only while
// they are on staff, not paused, and hold the level or the post; the held level turns at midnight.
func (r *Reader) Uncovered(item string, duties []Duty, from, to time.Time) []Uncovered {
	duties = slices.Clone(duties)
	slices.SortStableFunc(duties, func(a, b Duty) int { return a.From.Compare(b.From) })
	able := ability{r: r, of: map[*program.CoverDemand]map[string][]interval{}}
	var out []Uncovered
	for _, d := range r.demands(item, from, to) {
		for _, u := range able.short(d, onDuty(duties, d.interval)) {
			if n := len(out) - 1; n >= 0 && out[n].To.Equal(u.From) && out[n].There == u.There && out[n].Needed == u.Needed {
				out[n].To = u.To
			} else {
				out = append(out, u)
			}
		}
	}
	return out
}

// demands are the times in which the item needs somebody, in order and apart.
func (r *Reader) demands(item string, from, to time.Time) []demand {
	var out []demand
	if !from.Before(to) {
		return nil
	}
	last := r.g.Day(to)
	for on := max(r.g.Day(from)-1, civil.FirstDay); on <= last; on++ { // hours of the day before may reach in
		p, it := r.g.Program(item, on)
		if it == nil || it.Cadence.Cover == nil {
			continue
		}
		for _, hours := range r.hours(p, it.Cadence.Cover, on) {
			i := interval{latest(hours.from, from), earliest(hours.to, to)}
			if n := len(out) - 1; n >= 0 {
				i.from = latest(i.from, out[n].to) // what an earlier version asked for goes on to its end
			}
			if i.from.Before(i.to) {
				out = append(out, demand{i, p, it.Cadence.Cover})
			}
		}
	}
	return out
}

func (r *Reader) hours(p *program.Program, c *program.CoverDemand, on civil.Day) []interval {
	if c.AllDay {
		return []interval{{r.g.Dawn(on), r.g.Dawn(on + 1)}}
	}
	var out []interval
	for _, h := range p.Open(on, p.Site.Location) {
		out = append(out, interval{h[0].UTC(), h[1].UTC()})
	}
	return out
}

func latest(a, b time.Time) time.Time {
	if a.Before(b) {
		return b
	}
	return a
}

func earliest(a, b time.Time) time.Time {
	if b.Before(a) {
		return b
	}
	return a
}

// onDuty are the duties that reach into a time; they are given as they begin.
func onDuty(duties []Duty, in interval) []Duty {
	first, _ := slices.BinarySearchFunc(duties, in.from.Add(-LongestDuty), func(d Duty, t time.Time) int { return d.From.Compare(t) })
	var out []Duty
	for _, d := range duties[first:] {
		if !d.From.Before(in.to) {
			break
		}
		if d.To.After(in.from) {
			out = append(out, d)
		}
	}
	return out
}

// ability keeps when each person can count for a demand.
type ability struct {
	r  *Reader
	of map[*program.CoverDemand]map[string][]interval
}

func (a *ability) times(d demand, person string) []interval {
	known := a.of[d.c]
	if known == nil {
		known = map[string][]interval{}
		a.of[d.c] = known
	}
	list, ok := known[person]
	if !ok {
		list = a.r.able(d, person)
		known[person] = list
	}
	return list
}

// able are the times in which the person counts, duties apart.
func (r *Reader) able(d demand, person string) []interval {
	if d.c.Post != "" {
		return append(r.intervals(r.g.Holding(person, d.c.Post, false)), r.intervals(r.g.Holding(person, d.c.Post, true))...)
	}
	needed, ok := d.p.Level(d.c.Level)
	if !ok {
		return nil
	}
	var out []interval
	for _, h := range r.g.Held(person) {
		if l, ok := d.p.Level(h.Level); ok && l.Rank >= needed.Rank {
			out = append(out, r.intervals([]standing.Days{h.Days})...)
		}
	}
	return out
}

// step is a change of how many people are there.
type step struct {
	at time.Time
	by int
}

// short are the times of a demand in which too few are there.
func (a *ability) short(d demand, duties []Duty) []Uncovered {
	there := map[string][]interval{}
	for _, duty := range duties {
		if !d.c.Counts(duty.Word) {
			continue
		}
		for _, i := range a.times(d, duty.Person) {
			x := interval{latest(latest(i.from, duty.From), d.from), earliest(duty.To, d.to)}
			if !i.to.IsZero() {
				x.to = earliest(x.to, i.to)
			}
			if x.from.Before(x.to) {
				there[duty.Person] = append(there[duty.Person], x)
			}
		}
	}
	steps := []step{{d.from, 0}, {d.to, 0}}
	for _, list := range there {
		for _, i := range joined(list) {
			steps = append(steps, step{i.from, 1}, step{i.to, -1})
		}
	}
	slices.SortFunc(steps, func(a, b step) int { return a.at.Compare(b.at) })
	return d.sweep(steps)
}

// sweep walks over the steps, which are in order, from the beginning of the demand to its end.
func (d *demand) sweep(steps []step) []Uncovered {
	var out []Uncovered
	count := 0
	for i, s := range steps {
		count += s.by
		if i+1 == len(steps) || !s.at.Before(steps[i+1].at) || count >= d.c.AtLeast {
			continue
		}
		next := steps[i+1].at
		if n := len(out) - 1; n >= 0 && out[n].To.Equal(s.at) && out[n].There == count {
			out[n].To = next
		} else {
			out = append(out, Uncovered{s.at, next, count, d.c.AtLeast})
		}
	}
	return out
}

// joined are intervals without those that overlap or touch; none is open.
func joined(list []interval) []interval {
	slices.SortFunc(list, func(a, b interval) int { return a.from.Compare(b.from) })
	var out []interval
	for _, i := range list {
		if n := len(out) - 1; n >= 0 && !i.from.After(out[n].to) {
			out[n].to = latest(out[n].to, i.to)
		} else {
			out = append(out, i)
		}
	}
	return out
}

// CoverItems are the codes of all items of the site that ask for cover, in order.
func (r *Reader) CoverItems() []string { return r.g.CoverItems() }
