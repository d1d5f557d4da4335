package book

import (
	"hash/maphash"
	"iter"
	"maps"
)

// shelf is a map that can be forked: its parts are copied when they are first written after that, so
// that a few changes of much cost little and whoever reads the old one is not disturbed.
type shelf[K comparable, V any] struct {
	own   *owner
	parts []shelfPart[K, V]
}

type shelfPart[K comparable, V any] struct {
	own *owner
	of  map[K]V
}

// owner marks what may be changed in place.
type owner struct{ _ byte }

const shelfParts = 1024

var shelfSeed = maphash.MakeSeed()

func newShelf[K comparable, V any](own *owner) shelf[K, V] { return shelf[K, V]{own: own} }

// fork gives a shelf with the same content; from then on s is only read.
func (s shelf[K, V]) fork(own *owner) shelf[K, V] {
	return shelf[K, V]{own, append([]shelfPart[K, V](nil), s.parts...)}
}

func (s shelf[K, V]) get(k K) V {
	if s.parts == nil {
		var none V
		return none
	}
	return s.parts[maphash.Comparable(shelfSeed, k)%shelfParts].of[k]
}

func (s *shelf[K, V]) set(k K, v V) {
	if s.parts == nil {
		s.parts = make([]shelfPart[K, V], shelfParts)
	}
	p := &s.parts[maphash.Comparable(shelfSeed, k)%shelfParts]
	if p.own != s.own {
		*p = shelfPart[K, V]{s.own, maps.Clone(p.of)}
		if p.of == nil {
			p.of = map[K]V{}
		}
	}
	p.of[k] = v
}

// all yields everything on the shelf, in no order.
func (s shelf[K, V]) all() iter.Seq2[K, V] {
	return func(yield func(K, V) bool) {
		for i := range s.parts {
			for k, v := range s.parts[i].of {
				if !yield(k, v) {
					return
				}
			}
		}
	}
}
