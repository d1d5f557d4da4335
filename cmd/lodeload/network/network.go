// Package network invents a health network of any size from a seed: its sites with their programs, its
// people and fixtures, and a history with lapses, failures, late records, excusals, pauses and events in
// it. It is pure: the same size gives the same rows. Nobody and nothing in it is real.
package network

import (
	"fmt"
	"hash/fnv"
	"iter"
	"math/rand/v2"
	"strings"
	"time"

	"lodebook/models/civil"
)

// First is the first day of every network's history.
var First = civil.Of(2021, time.January, 1)

// Size says how much there is. People and Fixtures are those of the whole network, which are spread evenly
// over its sites; the history goes on for Days days from First.
type Size struct {
	Seed                          uint64
	Sites, People, Fixtures, Days int
}

// Full is the size at which the comparison is made: about 1.7 million obligations and ten million records.
var Full = Size{Seed: 1, Sites: 500, People: 200_000, Fixtures: 20_000, Days: 1826}

// Last is the last day of the history.
func (s Size) Last() civil.Day { return First + civil.Day(s.Days) - 1 }

// check says what a size can be.
func (s Size) check() error {
	for _, x := range []struct {
		name           string
		n, least, most int
	}{
		{"sites", s.Sites, 1, 9999}, {"people", s.People, 0, 9_000_000}, {"fixtures", s.Fixtures, 0, 9_000_000}, {"days", s.Days, 1, 36_500},
	} {
		if x.n < x.least || x.n > x.most {
			return fmt.Errorf("%s: found %d; write a number from %d to %d", x.name, x.n, x.least, x.most)
		}
	}
	return nil
}

// Network is a network that can be made, site by site.
type Network struct{ Size }

// New is a network of a size. The error names the field that is out of range.
func New(s Size) (*Network, error) { return &Network{s}, s.check() }

// Each makes the sites, one after the other. A site is forgotten when the next one is made.
func (n *Network) Each() iter.Seq[*Site] {
	return func(yield func(*Site) bool) {
		for i := range n.Sites {
			if !yield(n.Site(i)) {
				return
			}
		}
	}
}

// share is how many of a number of things fall to a site.
func (n *Network) share(all, site int) int { return all*(site+1)/n.Sites - all*site/n.Sites }

// chance gives choices that are the same each time for the same names, whatever else is asked for.
func (n *Network) chance(site int, what ...string) *rand.Rand {
	h := fnv.New64a()
	_, _ = fmt.Fprintf(h, "%d\x1f%s", site, strings.Join(what, "\x1f")) // a hash takes every byte
	return rand.New(rand.NewPCG(n.Seed, h.Sum64()))
}

func pick[T any](r *rand.Rand, from []T) T { return from[r.IntN(len(from))] }

// in tells whether something happens that does so many times in a thousand.
func in(r *rand.Rand, perMille int) bool { return r.IntN(1000) < perMille }

// between is a number from lo to hi, both included.
func between(r *rand.Rand, lo, hi int) civil.Day { return civil.Day(lo + r.IntN(hi-lo+1)) }
