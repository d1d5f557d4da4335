package reach

import (
	"slices"
	"time"

	"lodebook/models/civil"
	"lodebook/models/standing"
)

// The reasons that are about no item.
const (
	NoRight    = "no-right"
	RightEnded = "right-ended"
	NotOnStaff = "not-on-staff"
	Paused     = "paused"
	NoGuard    = "no-guard"
)

// Limited is the standing of an item that is open but for the limit of its latest accepted record.
const Limited = "limited"

// Reason is one thing that stands against an entitlement. An empty Item has one of the reasons above; any other its
// own standing, or limited. Due is the item's last good day, where it has one.
type Reason struct {
	Item     string
	Standing string
	Due      *civil.Day
}

// Span is a time in which the answer stays the same: From is included, To is not. The first From and the last To are
// zero: open ends.
type Span struct {
	From, To time.Time
	Entitled bool
	Reasons  []Reason // empty where entitled
}

// Answer is what holds at an instant. Until is the first instant after it at which the entitlement ends; nil: nothing
// known ends it, or there is none.
type Answer struct {
	Person, Zone string
	Entitled     bool
	Until        *time.Time
	Reasons      []Reason
}

// Reader answers about one site as known at one moment. It is for one caller at a time.
type Reader struct {
	g *standing.Guard
}

// New makes ready to answer about a site as known at sequence number k. The error tells that the site is not known.
func New(e *standing.Engine, site string, k int64) (*Reader, error) {
	g, err := e.Guard(site, k)
	return &Reader{g}, err
}

// whereabouts is when a person may be let in at all, the items apart: spans of time, in no order.
type whereabouts struct {
	present, paused, granted []interval
	rights                   []time.Time // from when each was granted, in force or not
}

// interval is a span of time: from is included, to is not; a zero end is open.
type interval struct{ from, to time.Time }

func (i interval) holds(t time.Time) bool {
	return !i.from.After(t) && (i.to.IsZero() || i.to.After(t))
}

func anyHolds(list []interval, t time.Time) bool {
	return slices.ContainsFunc(list, func(i interval) bool { return i.holds(t) })
}

func (r *Reader) whereabouts(person, zone string) whereabouts {
	w := whereabouts{present: r.intervals(r.g.Present(person)), paused: r.intervals(r.g.Paused(person)), rights: r.g.Granted(person, zone)}
	for _, g := range r.g.Grants(person) {
		if g.Zone == zone {
			w.granted = append(w.granted, interval{g.From, g.To})
		}
	}
	return w
}

// intervals are runs of days as time: from the first instant of the first day to that of the day after the last.
func (r *Reader) intervals(runs []standing.Days) []interval {
	var out []interval
	for _, d := range runs {
		if d.Last < d.First {
			continue
		}
		var i interval
		if d.First > civil.FirstDay {
			i.from = r.g.Dawn(d.First)
		}
		if d.Last < civil.LastDay {
			i.to = r.g.Dawn(d.Last + 1)
		}
		if !i.from.IsZero() && i.from.Equal(i.to) {
			continue // days that the zone never had
		}
		out = append(out, i)
	}
	return out
}

// turns are the instants at which the whereabouts may change.
func (w *whereabouts) turns() []time.Time {
	out := slices.Clone(w.rights)
	for _, list := range [][]interval{w.present, w.paused, w.granted} {
		for _, i := range list {
			if !i.from.IsZero() {
				out = append(out, i.from)
			}
			if !i.to.IsZero() {
				out = append(out, i.to)
			}
		}
	}
	return out
}

// judge says whether the person is entitled at an instant, by what each item says then.
func (r *Reader) judge(w *whereabouts, zone string, t time.Time, says func(item string) standing.Stretch) (bool, []Reason) {
	var reasons []Reason
	here := anyHolds(w.present, t)
	if !here {
		reasons = append(reasons, Reason{Standing: NotOnStaff})
	}
	switch {
	case anyHolds(w.granted, t):
	case slices.ContainsFunc(w.rights, func(from time.Time) bool { return !from.After(t) }):
		reasons = append(reasons, Reason{Standing: RightEnded})
	default:
		reasons = append(reasons, Reason{Standing: NoRight})
	}
	if !here {
		return false, reasons // nothing is asked of whoever is not there
	}
	paused := anyHolds(w.paused, t)
	if paused {
		reasons = append(reasons, Reason{Standing: Paused})
	}
	var shut []Reason
	asked := false
	for _, item := range r.g.ItemsAt(zone, t) {
		s := says(item)
		if !s.Asked {
			continue
		}
		asked = true
		switch {
		case s.Open || paused && s.Word == standing.Excused && !s.Limited: // the pause is named already
		case s.Limited:
			shut = append(shut, Reason{item, Limited, s.Due})
		default:
			shut = append(shut, Reason{item, string(s.Word), s.Due})
		}
	}
	if !asked {
		reasons = append(reasons, Reason{Standing: NoGuard})
	}
	reasons = append(reasons, shut...)
	return len(reasons) == 0, reasons
}

// One answers about one person at an instant.
func (r *Reader) One(person, zone string, t time.Time) Answer {
	w := r.whereabouts(person, zone)
	return r.one(&w, person, zone, t)
}

func (r *Reader) one(w *whereabouts, person, zone string, t time.Time) Answer {
	a := Answer{Person: person, Zone: zone}
	a.Entitled, a.Reasons = r.judge(w, zone, t, func(item string) standing.Stretch { return r.g.At(item, zone, person, t) })
	if a.Entitled {
		a.Until = r.until(w, person, zone, t)
	}
	return a
}

// until is the first instant after t at which the entitlement ends, nil where nothing known ends it.
func (r *Reader) until(w *whereabouts, person, zone string, t time.Time) *time.Time {
	var end time.Time
	sooner := func(o time.Time) {
		if !o.IsZero() && (end.IsZero() || o.Before(end)) {
			end = o
		}
	}
	sooner(covered(w.present, t))
	sooner(covered(w.granted, t))
	for _, p := range w.paused {
		if p.from.After(t) {
			sooner(p.from)
		}
	}
	guarded := false // through to the end, by one item at least
	for _, item := range r.g.Items(zone) {
		asked := r.g.At(item, zone, person, t).Asked
		shuts, rests := r.g.Ends(item, zone, person, t)
		sooner(shuts)
		guarded = guarded || asked && rests.IsZero()
	}
	if !guarded {
		// What is asked changes on the way: the whole course tells.
		return r.untilByRibbon(person, zone, t)
	}
	if end.IsZero() {
		return nil
	}
	return &end
}

func (r *Reader) untilByRibbon(person, zone string, t time.Time) *time.Time {
	for _, s := range r.Ribbon(person, zone) {
		if !s.Entitled && s.From.After(t) {
			return &s.From
		}
	}
	return nil
}

// covered is the end of the time around t that the intervals cover without a hole; zero where it is open.
func covered(list []interval, t time.Time) time.Time {
	for grown := true; grown; {
		grown = false
		for _, i := range list {
			if !i.holds(t) {
				continue
			}
			if i.to.IsZero() {
				return time.Time{}
			}
			t, grown = i.to, true
		}
	}
	return t
}

// Ribbon is the person's entitlement to the zone over all time: in order, without holes, neighbours differ.
func (r *Reader) Ribbon(person, zone string) []Span {
	w := r.whereabouts(person, zone)
	items := r.g.Items(zone)
	stretches := make(map[string][]standing.Stretch, len(items))
	turns := append(w.turns(), r.g.Versions()...) // which may put the items in another order
	for _, item := range items {
		list := r.g.Stretches(item, zone, person)
		stretches[item] = list
		for _, s := range list[1:] {
			turns = append(turns, s.From)
		}
	}
	slices.SortFunc(turns, time.Time.Compare)
	turns = slices.CompactFunc(turns, time.Time.Equal)
	says := func(item string) standing.Stretch { return stretches[item][0] }
	var first Span
	first.Entitled, first.Reasons = r.judge(&w, zone, time.Time{}, says)
	out := []Span{first}
	for _, t := range turns {
		for _, item := range items {
			list := stretches[item]
			for len(list) > 1 && !list[1].From.After(t) {
				list = list[1:]
			}
			stretches[item] = list
		}
		s := Span{From: t}
		s.Entitled, s.Reasons = r.judge(&w, zone, t, says)
		if last := &out[len(out)-1]; last.Entitled != s.Entitled || !slices.EqualFunc(last.Reasons, s.Reasons, sameReason) {
			last.To = t
			out = append(out, s)
		}
	}
	return out
}

func sameReason(a, b Reason) bool {
	return a.Item == b.Item && a.Standing == b.Standing && (a.Due == nil) == (b.Due == nil) && (a.Due == nil || *a.Due == *b.Due)
}

// At answers about everybody who is on staff on the day of the instant, or holds a right in the zone then, by code.
func (r *Reader) At(zone string, t time.Time) []Answer {
	var out []Answer
	for _, person := range r.g.People() {
		w := r.whereabouts(person, zone)
		if anyHolds(w.present, t) || r.g.Holds(person, zone, t) {
			out = append(out, r.one(&w, person, zone, t))
		}
	}
	return out
}
