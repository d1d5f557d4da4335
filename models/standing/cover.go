package standing

import (
	"slices"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// HeldSpan is a run of days on which a person is at the site and holds a level; both days are included.
type HeldSpan struct {
	Days
	Level string
}

// Held are the runs of days on which the person is on staff, not paused, and holds a level, in order.
func (g *Guard) Held(person string) []HeldSpan {
	v := g.v
	if len(v.reigns) == 0 {
		return nil
	}
	ladder := v.ladder(g.person(person), civil.LastDay)
	var out []HeldSpan
	for i, h := range ladder {
		d := Days{h.from, civil.LastDay}
		if i+1 < len(ladder) {
			d.Last = ladder[i+1].from - 1
		}
		if h.level == "" {
			continue
		}
		for _, here := range g.here(person) {
			if x := both(d, here); x.First <= x.Last {
				out = append(out, HeldSpan{x, h.level})
			}
		}
	}
	return out
}

// Tenure is a run of days on which somebody holds a post or is appointed as its deputy; both days are included. Entry
// is that of the appointment.
type Tenure struct {
	Days
	Person, Entry string
	Deputy        bool
}

// Tenures are the runs of days on which anybody held the post, or was its deputy, as people come by code and then in
// order of days.
func (g *Guard) Tenures(post string) []Tenure {
	var out []Tenure
	for _, asDeputy := range []bool{false, true} {
		var people []string
		for _, no := range g.v.site.appointed[postOf(post, asDeputy)] {
			people = append(people, g.v.site.locals[no].subject.Code)
		}
		slices.Sort(people)
		for _, person := range people {
			out = append(out, g.tenures(person, post, asDeputy)...)
		}
	}
	return out
}

func postOf(post string, asDeputy bool) string {
	if asDeputy {
		return post + deputy
	}
	return post
}

func (g *Guard) tenures(person, post string, asDeputy bool) []Tenure {
	v, l := g.v, g.person(person)
	t := turns{after: dayBefore, upTo: civil.LastDay}
	post = postOf(post, asDeputy)
	v.postTurns(&t, l, post)
	slices.Sort(t.days)
	days := slices.Compact(t.days)
	var out []Tenure
	for i, d := range days {
		if !v.holdsPost(l, post, d) {
			continue
		}
		run := Tenure{Days{d, civil.LastDay}, person, v.e.marks.at(v.appointment(l, post, d).seq).String(), asDeputy}
		if i+1 < len(days) {
			run.Last = days[i+1] - 1
		}
		if n := len(out) - 1; n >= 0 && out[n].Last+1 == run.First && out[n].Entry == run.Entry {
			out[n].Last = run.Last
		} else {
			out = append(out, run)
		}
	}
	return out
}

// Holding are the runs of days on which the person is on staff, not paused, and holds the post, or, as deputy, is
// appointed as its deputy; in order.
func (g *Guard) Holding(person, post string, asDeputy bool) []Days {
	var out []Days
	for _, run := range g.tenures(person, post, asDeputy) {
		for _, here := range g.here(person) {
			if x := both(run.Days, here); x.First <= x.Last {
				out = append(out, x)
			}
		}
	}
	return out
}

// here are the days on which the person is on staff and not paused, in order and apart.
func (g *Guard) here(person string) []Days {
	out := union(g.Present(person))
	for _, p := range g.Paused(person) {
		var left []Days
		for _, d := range out {
			if p.Last < d.First || p.First > d.Last {
				left = append(left, d)
				continue
			}
			if d.First < p.First {
				left = append(left, Days{d.First, p.First - 1})
			}
			if p.Last < d.Last {
				left = append(left, Days{p.Last + 1, d.Last})
			}
		}
		out = left
	}
	return out
}

// union joins runs of days that overlap or touch.
func union(list []Days) []Days {
	slices.SortFunc(list, func(a, b Days) int { return int(a.First) - int(b.First) })
	var out []Days
	for _, d := range list {
		switch n := len(out) - 1; {
		case d.Last < d.First:
		case n >= 0 && (out[n].Last == civil.LastDay || d.First <= out[n].Last+1):
			out[n].Last = max(out[n].Last, d.Last)
		default:
			out = append(out, d)
		}
	}
	return out
}

func both(a, b Days) Days { return Days{max(a.First, b.First), min(a.Last, b.Last)} }

// CoverItems are the codes of all items with cover of some version of the site, as known, in order.
func (g *Guard) CoverItems() []string {
	var out []string
	for _, r := range g.v.reigns {
		for _, item := range r.items {
			if item.Cadence.Rule == program.Cover {
				out = append(out, item.Code)
			}
		}
	}
	slices.Sort(out)
	return slices.Compact(out)
}

// Program is the version of the day, and its item of that code where it has one in force; nil before the first.
func (g *Guard) Program(item string, on civil.Day) (*program.Program, *program.Item) {
	ed := g.v.edition(on)
	if ed == nil {
		return nil, nil
	}
	it := ed.byCode[item]
	if it != nil && g.v.inForce(it, on) > on {
		it = nil
	}
	return ed.Version.Program, it
}
