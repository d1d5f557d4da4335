package scenario

import (
	"hash/fnv"
	"math/rand/v2"
	"strings"
)

// seed makes the scenario this one and no other.
const seed = 0x10debc

// chance gives choices that are the same each time for the same name, whatever else is in the
// scenario: a change to one obligation leaves the others as they were.
func chance(name ...string) *rand.Rand {
	h := fnv.New64a()
	_, _ = h.Write([]byte(strings.Join(name, "\x1f"))) // a hash takes every byte
	return rand.New(rand.NewPCG(seed, h.Sum64()))
}

func pick[T any](r *rand.Rand, from []T) T { return from[r.IntN(len(from))] }
