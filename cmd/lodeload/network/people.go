package network

import (
	"fmt"
	"math/rand/v2"
	"strings"

	"lodebook/models/civil"
)

var (
	givenHeads  = []string{"Al", "Bri", "Ca", "Dor", "El", "Fen", "Gar", "Hil", "Is", "Jo", "Kel", "Lin", "Mar", "Nor", "Os", "Pel"}
	givenTails  = []string{"a", "en", "ina", "is", "o", "ra", "van", "ys"}
	familyHeads = []string{"Arn", "Bec", "Cal", "Drum", "Elder", "Farn", "Gor", "Hather", "Inver", "Kest", "Lang", "Mort", "Nether", "Oak", "Pad", "Quil"}
	familyTails = []string{"bury", "dale", "field", "gate", "ham", "ley", "more", "ston", "wick", "worth"}
	firms       = []string{"Brindle Works", "Sallow and Reed"}
	crews       = []string{"early", "late", "night", "day"}
	posts       = []string{"MRMD", "MRSO", "MRSE"}
)

// staff are the people of the site: those whose home it is, and guests from the site in front who are
// posted here too.
func (s *Site) staff() []*worker {
	var all []*worker
	for i := range s.n.share(s.n.People, s.no) {
		w, _ := s.n.worker(s.no, i)
		if i < len(posts) {
			w.post = posts[i]
		}
		all = append(all, w)
	}
	if s.n.Sites > 1 {
		home := (s.no + s.n.Sites - 1) % s.n.Sites
		for i := range s.n.share(s.n.People, home) {
			if w, posting := s.n.worker(home, i); posting != nil {
				w.guest, w.spans = true, []span{*posting}
				all = append(all, w)
			}
		}
	}
	for _, w := range all {
		s.personRows(w)
	}
	return all
}

// worker makes person number i of a site, and the span for which they are posted to the next site too.
func (n *Network) worker(site, i int) (*worker, *span) {
	r := n.chance(site, "person", fmt.Sprint(i))
	no := n.People*site/n.Sites + i + 1
	w := &worker{
		code: fmt.Sprintf("P%07d", no), badge: badgeOf(no),
		name: pick(r, givenHeads) + pick(r, givenTails) + " " + pick(r, familyHeads) + pick(r, familyTails),
	}
	w.spans = n.stints(r, i)
	joined := w.spans[0].first
	level := "L1"
	switch x := r.IntN(1000); {
	case x < 45:
		level = "L3"
	case x < 400:
		level = "L2"
	case x >= 997:
		level = "" // what is asked of such a person cannot be told
	}
	w.levels = n.changes(r, joined, level, []string{"L1", "L2", "L3"}, 90)
	w.crews = n.changes(r, joined, pick(r, crews), crews, 60)
	if in(r, 3) {
		w.crews = nil
	}
	w.cryogen = in(r, 100)
	if in(r, 60) {
		w.employer = pick(r, firms)
	} else {
		w.employer = "Meridian Imaging Network"
	}
	if i < len(posts) {
		w.spans = []span{{First - 100, NoDay}} // whoever begins with a post stays
		w.levels, w.crews = []change{{First - 100, "L3"}}, []change{{First - 100, "day"}}
	}
	return w, n.posting(r, w)
}

// stints are the spans in which somebody is on staff: most are there from the beginning, some join, some leave,
// and a few come back.
func (n *Network) stints(r *rand.Rand, i int) []span {
	last := n.Last()
	s := span{First - between(r, 0, 3000), NoDay}
	if i%10 >= 7 {
		s.first = First + between(r, 0, max(n.Days-1, 0))
	}
	if !in(r, 200) {
		return []span{s}
	}
	s.last = max(s.first, First) + between(r, 30, 900)
	if s.last > last+200 {
		s.last = NoDay // it is not known yet
		return []span{s}
	}
	back := s.last + between(r, 60, 500)
	if in(r, 150) && back <= last {
		return []span{s, {back, NoDay}}
	}
	return []span{s}
}

// changes are the values of a fact: the first from the day of joining, and for some a change later.
func (n *Network) changes(r *rand.Rand, joined civil.Day, first string, to []string, perMille int) []change {
	var list []change
	if first != "" {
		list = append(list, change{joined, first})
	}
	from := max(joined, First) + between(r, 60, 1000)
	next := pick(r, to)
	if in(r, perMille) && from <= n.Last() && first != "" && next != first {
		list = append(list, change{from, next})
	}
	return list
}

// posting is the span for which a few are posted to a second site.
func (n *Network) posting(r *rand.Rand, w *worker) *span {
	s := span{max(w.spans[0].first, First) + between(r, 20, 700), NoDay}
	if in(r, 500) {
		s.last = s.first + between(r, 90, 700)
	}
	if !in(r, 20) || s.first > n.Last() || len(w.spans) > 1 || w.spans[0].last != NoDay {
		return nil
	}
	return &s
}

// personRows are the rows of the table about somebody: one for each stint, and one for each change.
func (s *Site) personRows(w *worker) {
	for i, stint := range w.spans {
		p := Person{Code: w.code, Joined: stint.first, Left: stint.last, From: NoDay}
		if i == 0 {
			p.Name, p.Badge, p.Employer = w.name, w.badge, w.employer
			p.Email = strings.ToLower(w.code) + "@meridian.example"
			p.Level, p.Crew = valueOn(w.levels, s.since(w)), valueOn(w.crews, s.since(w))
			p.Cryogen = YesNo(w.cryogen)
		}
		s.People = append(s.People, p)
	}
	for _, c := range w.levels {
		if c.from > s.since(w) {
			s.People = append(s.People, Person{Code: w.code, Level: c.value, Joined: NoDay, Left: NoDay, From: c.from})
		}
	}
	for _, c := range w.crews {
		if c.from > s.since(w) {
			s.People = append(s.People, Person{Code: w.code, Crew: c.value, Joined: NoDay, Left: NoDay, From: c.from})
		}
	}
}

// since is the first day of the first stint, from which the facts of a person's first row hold.
func (s *Site) since(w *worker) civil.Day { return w.spans[0].first }

// badgeOf is the badge of the person of a number.
func badgeOf(no int) string { return fmt.Sprintf("B%08d", no*7+13) }
