package main

import (
	"cmp"
	"fmt"
	"maps"
	"slices"

	"lodebook/cmd/lodeload/network"
	"lodebook/models/civil"
	"lodebook/models/standing"
)

// world is the network in an evaluator, and all its standings as plain columns, which the databases are
// filled from: of each obligation, in order of site and item, the days on which its standing turned and the
// word from then on.
type world struct {
	n *network.Network
	*feeder
	sites       []string
	items       []string
	obligations []obligation
	points      []point
	renewed     map[string]bool // what new records were drawn for
}

type obligation struct {
	site, item uint16
	first      uint32 // of its points
}

// point is a day, times 16, and the number of the word that begins on it. A greater point is later.
type point int32

// nothing is the number of no standing.
const nothing = len(standing.Words)

func pointOf(d civil.Day, word int) point { return point(d)<<4 | point(word) }

// today is the last day of the history.
func (w *world) today() civil.Day { return w.n.Last() }

// past is the day of the past that is asked for.
func (w *world) past() civil.Day { return network.First + civil.Day(w.n.Days*3/5) }

// load makes the world, once.
func (b *bench) load() (*world, error) {
	if b.world != nil {
		return b.world, nil
	}
	w, err := b.newWorld(b.network)
	if err != nil {
		return nil, err
	}
	b.world = w
	b.say("%d obligations, %d records, %d changes of standings.", len(w.obligations), w.records, len(w.points))
	return w, nil
}

func (b *bench) newWorld(s network.Size) (*world, error) {
	n, err := network.New(s)
	if err != nil {
		return nil, err
	}
	b.say("Making %d sites with %d people ...", n.Sites, n.People)
	f, err := feed(n)
	if err != nil {
		return nil, err
	}
	w := &world{n: n, feeder: f}
	for i := range n.Sites {
		w.sites = append(w.sites, network.SiteCode(i))
	}
	w.engine.Build()
	return w, w.unroll()
}

// unroll writes the histories out as columns.
func (w *world) unroll() error {
	numbers := map[string]uint16{}
	for no, site := range w.sites {
		err := w.engine.EachHistory(site, func(item string, _ standing.Subject, spans []standing.Span) {
			i, ok := numbers[item]
			if !ok {
				i = uint16(len(w.items))
				numbers[item], w.items = i, append(w.items, item)
			}
			w.obligations = append(w.obligations, obligation{uint16(no), i, uint32(len(w.points))})
			w.points = appendPoints(w.points, spans)
		})
		if err != nil {
			return err
		}
	}
	return nil
}

// appendPoints turns spans into points; where no span is, the point says so.
func appendPoints(to []point, spans []standing.Span) []point {
	for i, s := range spans {
		to = append(to, pointOf(s.First, slices.Index(standing.Words[:], s.Word)))
		if s.Last < civil.LastDay && (i+1 == len(spans) || spans[i+1].First > s.Last+1) {
			to = append(to, pointOf(s.Last+1, nothing))
		}
	}
	return to
}

// course is the points of an obligation.
func (w *world) course(i int) []point {
	end := uint32(len(w.points))
	if i+1 < len(w.obligations) {
		end = w.obligations[i+1].first
	}
	return w.points[w.obligations[i].first:end]
}

// sizes is how much there was, as far as a world was made.
func (b *bench) sizes() sizes {
	s := sizes{Sites: b.network.Sites, People: b.network.People, Fixtures: b.network.Fixtures, Days: b.network.Days, Rounds: b.rounds}
	if w := b.world; w != nil {
		s.Obligations, s.Records, s.Changes = len(w.obligations), w.records, len(w.points)
	}
	return s
}

// cell names a count: a site, an item and a word by their numbers.
type cell struct{ site, item, word int }

// answer is how many obligations stand at each word: what every side must give alike.
type answer map[cell]int

// differs tells the first cell in which another answer is not this one; empty where they agree.
func (a answer) differs(from answer) string {
	cells := slices.Collect(maps.Keys(a))
	for c := range from {
		if _, ok := a[c]; !ok {
			cells = append(cells, c)
		}
	}
	slices.SortFunc(cells, func(x, y cell) int {
		return cmp.Or(x.site-y.site, x.item-y.item, x.word-y.word)
	})
	for _, c := range cells {
		if a[c] != from[c] {
			return fmt.Sprintf("site %d, item %d, word %d: %d and %d", c.site, c.item, c.word, a[c], from[c])
		}
	}
	return ""
}

// agree asserts that two answers are the same and not empty.
func agree(what string, ours, theirs answer) error {
	if len(ours) == 0 {
		return fmt.Errorf("%s: there is nothing to compare", what)
	}
	if d := ours.differs(theirs); d != "" {
		return fmt.Errorf("%s: the answers differ at %s", what, d)
	}
	return nil
}

// answerOf turns the evaluator's counts into an answer.
func (w *world) answerOf(counts []standing.SiteCount) answer {
	site, item := index(w.sites), index(w.items)
	out := answer{}
	for _, s := range counts {
		for _, i := range s.Items {
			for word, n := range i.Tally {
				if n > 0 {
					out[cell{site[s.Site], item[i.Item], word}] = int(n)
				}
			}
		}
	}
	return out
}

func index(codes []string) map[string]int {
	out := make(map[string]int, len(codes))
	for i, c := range codes {
		out[c] = i
	}
	return out
}
