package network

import (
	"iter"
	"math/rand/v2"
	"time"

	"lodebook/models/civil"
)

var reasons = []string{"Parental leave", "Long illness", "Study leave", "Posted abroad"}

// pauses writes who is away and what is out of service; the rest of the history keeps to it.
func (h *history) pauses(people []*worker, fixtures []*thing) {
	r := h.n.chance(h.no, "pauses")
	for _, w := range people {
		if w.post == "" && !w.guest && in(r, 40) {
			h.pause(r, w.subject(), pick(r, reasons), between(r, 30, 300))
		}
	}
	for _, t := range fixtures {
		if in(r, 25) {
			h.pause(r, t.subject(), "Out of service", between(r, 5, 90))
		}
	}
}

func (h *history) pause(r *rand.Rand, sub Subject, reason string, days civil.Day) {
	p := Pause{Subject: sub, From: First + between(r, 10, max(h.n.Days, 11)), Reason: reason}
	p.To = p.From + days
	if in(r, 50) {
		p.To = NoDay
	}
	if p.From <= h.n.Last() {
		h.Pauses = append(h.Pauses, p)
		h.away[sub] = append(h.away[sub], p)
	}
}

// excuse writes an exception for a few.
func (h *history) excuse(r *rand.Rand, w *worker) {
	if !in(r, 20) {
		return
	}
	x := Excusal{Item: pick(r, []string{"SCREEN", "TRAIN-L1", "FIRE", "POLICY"}), Subject: w.subject(), From: First + between(r, 30, max(h.n.Days, 31)), Reason: "No course before then", ApprovedBy: "Safety board", Opens: in(r, 50)}
	x.To = x.From + between(r, 10, 90)
	if x.From <= h.n.Last() {
		h.Excusals = append(h.Excusals, x)
	}
}

// health writes that somebody's health changed, and mostly a screening soon after.
func (h *history) health(r *rand.Rand, w *worker) {
	d := First + between(r, 30, max(h.n.Days, 31))
	if !in(r, 30) || d > h.n.Last() || !w.here(d) {
		return
	}
	h.happen("health-change", w.subject(), d)
	if in(r, 850) {
		h.put(r, Record{What: "screening/staff", Subject: w.subject(), Day: d + between(r, 1, 20), Until: NoDay})
	}
}

// weather writes storms and work on the roof over vents, and quenches of magnets, and who looks after them.
func (h *history) weather(r *rand.Rand, t *thing) {
	events, what, odds := []string{"storm", "roof-work"}, "inspection/vent", 500
	switch t.kind {
	case "vent":
	case "magnet":
		events, what, odds = []string{"quench"}, "inspection/magnet", 60
	default:
		return
	}
	for d := First; d <= h.n.Last(); d += 182 {
		on := d + between(r, 0, 181)
		if !in(r, odds) || on > h.n.Last() || !t.in.holds(on) {
			continue
		}
		h.happen(pick(r, events), t.subject(), on)
		if in(r, 900) {
			h.put(r, Record{What: what, Subject: t.subject(), Day: on + between(r, 1, 4), Until: NoDay})
		}
	}
}

func (h *history) happen(code string, sub Subject, d civil.Day) {
	h.Events = append(h.Events, Event{Code: code, Subject: sub, Day: d})
}

// passageDays is for how many days, up to the last, passages are made: there are many.
const passageDays = 92

// Passages are the door events of the site's last days, in order of time: about one for ten people and day,
// now and then with a badge that nobody bears.
func (s *Site) Passages() iter.Seq[Passage] {
	return func(yield func(Passage) bool) {
		r := s.n.chance(s.no, "passages")
		staff := s.n.share(s.n.People, s.no)
		var doors []string
		for _, f := range s.Fixtures {
			if f.Kind == "door" {
				doors = append(doors, f.Code)
			}
		}
		if staff == 0 || len(doors) == 0 {
			return
		}
		for d := max(First, s.n.Last()-passageDays+1); d <= s.n.Last(); d++ {
			if !s.passagesOf(r, d, staff, doors, yield) {
				return
			}
		}
	}
}

func (s *Site) passagesOf(r *rand.Rand, d civil.Day, staff int, doors []string, yield func(Passage) bool) bool {
	n := staff/10 + 1
	step := 16 * time.Hour / time.Duration(n)
	at := d.Midnight(s.Location).Add(6 * time.Hour)
	for range n {
		at = at.Add(time.Duration(r.Int64N(int64(step))))
		no := s.n.People*s.no/s.n.Sites + r.IntN(staff) + 1
		p := Passage{At: at.Truncate(time.Second), Door: pick(r, doors), Badge: badgeOf(no), Direction: pick(r, []string{"in", "out", ""})}
		if in(r, 5) {
			p.Badge = "X" + p.Badge[1:]
		}
		if !yield(p) {
			return false
		}
	}
	return true
}
