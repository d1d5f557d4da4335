package standing

import (
	"cmp"
	"fmt"
	"math/bits"
	"runtime"
	"slices"
	"sync"
	"sync/atomic"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// Words are the standings in the order in which a Tally counts them.
var Words = [...]Word{Met, Closing, Lapsed, Missing, Failed, Excused, Awaited, DataFault}

// Tally counts obligations by standing, in the order of Words.
type Tally [len(Words)]int32

// Of is the count of a standing.
func (t Tally) Of(w Word) int { return int(t[codeOf(w)]) }

// Gaps is how many are lapsed, missing or failed.
func (t Tally) Gaps() int { return t.Of(Lapsed) + t.Of(Missing) + t.Of(Failed) }

// ItemCount counts the obligations of one item of a site.
type ItemCount struct {
	Item string
	Tally
}

// SiteCount counts the obligations of a site, by item in order of code; only items with an
// obligation or a data fault are listed.
type SiteCount struct {
	Site  string
	Items []ItemCount
}

// Counts counts the standings of a site on a day, by all that is recorded (but see AsKnownAt). On the present day of the
// site (see Turn) they are at hand; on any other they are looked up in the courses.
func (e *Engine) Counts(site string, on civil.Day) (SiteCount, error) {
	s := e.site(site)
	if s == nil || len(s.editions) == 0 {
		return SiteCount{}, fmt.Errorf("site %q is not in the book", site)
	}
	return e.board(s).counts(site, on), nil
}

// AllCounts counts the standings of every site that has a version, in order of code, over all cores.
func (e *Engine) AllCounts(on civil.Day) []SiteCount {
	return overSites(e, func(s *site, _ *worker) SiteCount { return e.board(s).counts(s.code, on) })
}

// Build makes ready what counts and histories of all sites are taken from, over all cores. Without it, each
// site's is made when it is first asked for.
func (e *Engine) Build() {
	overSites(e, func(s *site, _ *worker) *board { return e.board(s) })
}

// worker is what one core remembers from site to site: what selectors said, which sites of like programs
// share.
type worker struct {
	answers   map[*program.Selector]*answers
	selectors map[string]*selectors
}

// overSites calls fn for every site that has a version, over all cores, and gives what it gave in
// order of the sites' codes.
func overSites[T any](e *Engine, fn func(*site, *worker) T) []T {
	var sites []*site
	for _, s := range e.sites {
		if len(s.editions) > 0 {
			sites = append(sites, s)
		}
	}
	slices.SortFunc(sites, func(a, b *site) int { return cmp.Compare(a.code, b.code) })
	out := make([]T, len(sites))
	var next atomic.Int64
	var all sync.WaitGroup
	for range min(runtime.GOMAXPROCS(0), len(sites)) {
		all.Go(func() {
			w := &worker{answers: map[*program.Selector]*answers{}, selectors: map[string]*selectors{}}
			for i := next.Add(1) - 1; int(i) < len(sites); i = next.Add(1) - 1 {
				out[i] = fn(sites[i], w)
			}
		})
	}
	all.Wait()
	return out
}

func (b *board) counts(site string, on civil.Day) SiteCount {
	c := SiteCount{Site: site, Items: make([]ItemCount, 0, len(b.tracks))}
	for i, item := range b.plan.items {
		if on == b.present {
			c.add(item, &b.tallies[i])
		} else {
			n := b.tracks[i].asOf(on)
			c.add(item, &n)
		}
	}
	return c
}

func (c *SiteCount) add(item string, n *counter) {
	of := Tally(n[:len(Words)])
	of[codeOf(Closing)] += n[closingOpen]
	of[codeOf(Excused)] += n[excusedOpen]
	if of != (Tally{}) {
		c.Items = append(c.Items, ItemCount{item, of})
	}
}

// Recount counts the standings of the present day of every site by looking at each obligation: what
// AllCounts has at hand is then the same. Sites without a present day are left out.
func (e *Engine) Recount() []SiteCount {
	all := overSites(e, func(s *site, _ *worker) SiteCount {
		c, b := SiteCount{Site: s.code}, e.board(s)
		if b.present == noDay {
			return c
		}
		c.Items = make([]ItemCount, 0, len(b.tracks))
		for _, t := range b.tracks {
			n := t.now()
			c.add(t.item, &n)
		}
		return c
	})
	return slices.DeleteFunc(all, func(c SiteCount) bool { return c.Items == nil })
}

// now counts the states of the present day. Two counters take turns, so that none waits for itself.
func (t *track) now() counter {
	var even, odd counter
	rows := t.rows
	for len(rows) > 1 {
		even[rows[0].now()&wordMask]++
		odd[rows[1].now()&wordMask]++
		rows = rows[2:]
	}
	for _, r := range rows {
		even[r.now()]++
	}
	for i, n := range odd {
		even[i] += n
	}
	return even
}

// asOf counts the states of a day.
func (t *track) asOf(on civil.Day) counter {
	var n counter
	key := pointOf(on, wordMask)
	points := t.points
	for i := range t.rows {
		r := &t.rows[i]
		course := points[r.at : int(r.at)+r.length()]
		if len(course) > 8 {
			n[stateIn(course, key)&wordMask]++
			continue
		}
		state := uint8(none)
		for j := len(course) - 1; j >= 0; j-- {
			if course[j] <= key {
				state = course[j].state()
				break
			}
		}
		n[state&wordMask]++
	}
	return n
}

// stateIn is the state of the last point that is not above the key.
func stateIn(course []point, key point) uint8 {
	lo, hi := 0, len(course)
	for lo < hi {
		if mid := int(uint(lo+hi) >> 1); course[mid] <= key {
			lo = mid + 1
		} else {
			hi = mid
		}
	}
	if lo == 0 {
		return uint8(none)
	}
	return course[lo-1].state()
}

// ItemCourse is how the counts of an item went over a period: First counts its first day; Days are
// those days after it, in order, on which a count changed, and Tallies the counts from each of them on.
type ItemCourse struct {
	Item    string
	First   Tally
	Days    []civil.Day
	Tallies []Tally
}

// On is the counts of a day of the period.
func (c *ItemCourse) On(d civil.Day) Tally {
	i, found := slices.BinarySearch(c.Days, d)
	switch {
	case found:
		return c.Tallies[i]
	case i == 0:
		return c.First
	}
	return c.Tallies[i-1]
}

// SiteCourse is how the counts of a site went from one day to another, both included, by item in order
// of code.
type SiteCourse struct {
	Site     string
	From, To civil.Day
	Items    []ItemCourse
}

// CountsOver counts the standings of a site on every day of a period by one sweep over the days on which a
// standing turns.
func (e *Engine) CountsOver(site string, from, to civil.Day) (SiteCourse, error) {
	s := e.site(site)
	if s == nil || len(s.editions) == 0 {
		return SiteCourse{}, fmt.Errorf("site %q is not in the book", site)
	}
	if to < from {
		return SiteCourse{}, fmt.Errorf("the period ends on %v, before it begins on %v", to, from)
	}
	return newSweep(from, to).site(s.code, e.board(s)), nil
}

// AllCountsOver calls fn with what CountsOver gives of every site that has a version, over all cores: in
// no order and several at once. What fn is given is good until it returns.
func (e *Engine) AllCountsOver(from, to civil.Day, fn func(SiteCourse)) error {
	if to < from {
		return fmt.Errorf("the period ends on %v, before it begins on %v", to, from)
	}
	var sweeps sync.Pool
	overSites(e, func(s *site, _ *worker) bool {
		w, ok := sweeps.Get().(*sweep)
		if !ok {
			w = newSweep(from, to)
		}
		w.days, w.tallies, w.items = w.days[:0], w.tallies[:0], w.items[:0]
		fn(w.site(s.code, e.board(s)))
		sweeps.Put(w)
		return true
	})
	return nil
}

// sweep adds up, for each day of a period, by how much the count of each word changes.
type sweep struct {
	from, to civil.Day
	deltas   []delta
	turned   []uint64 // a bit for each day on which something changes
	days     []civil.Day
	tallies  []Tally
	items    []ItemCourse
}

// delta is the change of a day, with a place for what has no obligation.
type delta struct {
	Tally
	none int32
}

func (d *delta) at(word uint8) *int32 {
	if int(word) < len(d.Tally) {
		return &d.Tally[word]
	}
	return &d.none
}

func newSweep(from, to civil.Day) *sweep {
	n := int(to-from) + 1
	return &sweep{from: from, to: to, deltas: make([]delta, n), turned: make([]uint64, (n+63)/64)}
}

func (w *sweep) site(code string, b *board) SiteCourse {
	for _, t := range b.tracks {
		w.items = append(w.items, w.track(t))
	}
	return SiteCourse{Site: code, From: w.from, To: w.to, Items: w.items}
}

func (w *sweep) track(t *track) ItemCourse {
	var now delta
	begin, end := pointOf(w.from, wordMask), pointOf(w.to, wordMask)
	for i := range t.rows {
		word := uint8(none)
		for _, p := range t.course(int32(i)) {
			if p > end {
				break
			}
			next := p.word()
			if p > begin {
				d := p.day() - w.from
				*w.deltas[d].at(word)--
				*w.deltas[d].at(next)++
				w.turned[d/64] |= 1 << (d % 64)
			} else {
				*now.at(word)--
				*now.at(next)++
			}
			word = next
		}
	}
	return w.collect(t.item, now.Tally)
}

// collect adds the changes up, and leaves none behind.
func (w *sweep) collect(item string, now Tally) ItemCourse {
	c := ItemCourse{Item: item, First: now}
	from := len(w.days)
	for i, some := range w.turned {
		for ; some != 0; some &= some - 1 {
			d := i*64 + bits.TrailingZeros64(some)
			for word, n := range w.deltas[d].Tally {
				now[word] += n
			}
			w.deltas[d] = delta{}
			w.days = append(w.days, w.from+civil.Day(d))
			w.tallies = append(w.tallies, now)
		}
		w.turned[i] = 0
	}
	c.Days, c.Tallies = w.days[from:len(w.days):len(w.days)], w.tallies[from:len(w.tallies):len(w.tallies)]
	return c
}
