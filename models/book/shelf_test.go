package book

import (
	"fmt"
	"maps"
	"testing"

	"pgregory.net/rapid"
)

// A shelf is a map; so is each of its forks, whatever is done to those after it.
func TestAShelfIsAMap(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		type pair struct {
			s shelf[int, []int]
			m map[int][]int
		}
		at := pair{newShelf[int, []int](&owner{}), map[int][]int{}}
		var before []pair
		for i, do := range rapid.SliceOfN(rapid.IntRange(0, 40), 1, 200).Draw(t, "do") {
			if do == 0 { // fork, and perhaps throw what came since the last fork away
				if n := len(before); n > 0 && i%2 == 0 {
					at = before[n-1]
				} else {
					before = append(before, at)
				}
				at = pair{at.s.fork(&owner{}), maps.Clone(at.m)}
				continue
			}
			k := do % 7
			at.s.set(k, append(at.s.get(k), i))
			at.m[k] = append(at.m[k][:len(at.m[k]):len(at.m[k])], i)
		}
		for n, p := range append(before, at) {
			if a, b := fmt.Sprint(maps.Collect(p.s.all())), fmt.Sprint(p.m); a != b {
				t.Fatalf("fork %d is %s, want %s", n, a, b)
			}
			for k := range 8 {
				if a, b := fmt.Sprint(p.s.get(k)), fmt.Sprint(p.m[k]); a != b {
					t.Fatalf("fork %d has %s at %d, want %s", n, a, k, b)
				}
			}
		}
	})
}

// BenchmarkShelf is of 200,000 people: looking one up, and forking the shelf and changing one.
func BenchmarkShelf(b *testing.B) {
	s := newShelf[string, []int64](&owner{})
	codes := make([]string, 200_000)
	for i := range codes {
		codes[i] = fmt.Sprintf("P%06d", i)
		s.set(codes[i], []int64{int64(i)})
	}
	b.Run("Get", func(b *testing.B) {
		for i := range b.N {
			if code := i * 7919 % len(codes); s.get(codes[code])[0] != int64(code) {
				b.Fatal(code)
			}
		}
	})
	b.Run("ForkAndSet", func(b *testing.B) {
		at := s
		for i := range b.N {
			at = at.fork(&owner{})
			at.set(codes[i*7919%len(codes)], nil)
		}
	})
}
