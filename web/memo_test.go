package web

import (
	"context"
	"errors"
	"fmt"
	"strconv"
	"sync"
	"sync/atomic"
	"testing"
)

// stamped is a book of one number: its stamp is that number, and so is what is made of it.
type stamped struct{ n atomic.Int64 }

func (s *stamped) stamp(context.Context) (string, error) {
	return strconv.FormatInt(s.n.Load(), 10), nil
}

func TestMemoGivesWhatWouldBeMadeNow(t *testing.T) {
	var s stamped
	m := newMemo[int64](100)
	makings := 0
	ask := func() int64 {
		t.Helper()
		x, err := m.get(t.Context(), "k", s.stamp, func() (made[int64], error) { makings++; return made[int64]{s.n.Load(), 10}, nil })
		if err != nil {
			t.Fatal(err)
		}
		return x
	}
	for _, step := range []struct{ n, makings int64 }{{0, 1}, {0, 1}, {1, 2}, {1, 2}, {2, 3}} {
		s.n.Store(step.n)
		if got := ask(); got != step.n || int64(makings) != step.makings {
			t.Errorf("at %d it gave %d after %d makings, want %d", step.n, got, makings, step.makings)
		}
	}
}

// TestMemoMakesAgainWhatChangedMeanwhile: what was made while the book changed is made again, so that it is
// of one moment; a book that changes all the time is not waited for, and nothing of it is given later.
func TestMemoMakesAgainWhatChangedMeanwhile(t *testing.T) {
	for _, writes := range []int{0, 1, most - 1, most, most + 5} {
		var s stamped
		m := newMemo[int64](100)
		makings := 0
		get := func() (int64, error) {
			return m.get(t.Context(), "k", s.stamp, func() (made[int64], error) {
				x := s.n.Load()
				if makings++; makings <= writes {
					s.n.Add(1)
				}
				return made[int64]{x, 10}, nil
			})
		}
		got, err := get()
		if err != nil {
			t.Fatal(err)
		}
		if want := min(writes+1, most); makings != want {
			t.Errorf("with %d writes it was made %d times, want %d", writes, makings, want)
		}
		if steady := writes < most; steady != (got == s.n.Load()) {
			t.Errorf("with %d writes it gave %d of %d", writes, got, s.n.Load())
		}
		before := makings
		if _, err := get(); err != nil || (makings == before) != (writes < most) {
			t.Errorf("with %d writes the second answer took %d makings: %v", writes, makings-before, err)
		}
	}
}

func TestMemoKeepsToItsRoom(t *testing.T) {
	var s stamped
	m := newMemo[string](100)
	get := func(key string, size int) {
		t.Helper()
		_, err := m.get(t.Context(), key, s.stamp, func() (made[string], error) { return made[string]{key, size}, nil })
		if err != nil {
			t.Fatal(err)
		}
		if m.size > m.room || len(m.held) != m.order.Len() {
			t.Fatalf("%d bytes of %d, %d and %d", m.size, m.room, len(m.held), m.order.Len())
		}
	}
	has := func(want ...string) {
		t.Helper()
		for _, k := range want {
			if m.held[k] == nil {
				t.Errorf("%s is gone", k)
			}
		}
		if len(m.held) != len(want) {
			t.Errorf("%d are held, want %v", len(m.held), want)
		}
	}
	get("a", 40)
	get("b", 40)
	get("a", 40)
	get("c", 40) // b was not asked for longest
	has("a", "c")
	get("d", 1000) // has no room at all
	has("a", "c")
	get("e", 0)
	has("a", "c")
	get("f", 99)
	has("f")
	s.n.Add(1)
	get("f", 10) // in the place of the old one
	if has("f"); m.size != 11 {
		t.Errorf("%d bytes, want 11", m.size)
	}
}

// TestMemoKeepsNoError: who comes next makes it anew, also who waited.
func TestMemoKeepsNoError(t *testing.T) {
	var s stamped
	m := newMemo[int](100)
	broken := errors.New("broken")
	for i := range 3 {
		_, err := m.get(t.Context(), "k", s.stamp, func() (made[int], error) {
			if i < 2 {
				return made[int]{1, 1}, broken
			}
			return made[int]{1, 1}, nil
		})
		if (err != nil) != (i < 2) {
			t.Errorf("ask %d: %v", i, err)
		}
	}
	func() {
		defer func() { _ = recover() }()
		_, _ = m.get(t.Context(), "p", s.stamp, func() (made[int], error) { panic("broken") })
	}()
	if x, err := m.get(t.Context(), "p", s.stamp, func() (made[int], error) { return made[int]{7, 1}, nil }); x != 7 || err != nil {
		t.Errorf("after a panic: %d, %v", x, err)
	}
}

// TestMemoMakesOnceForMany: those who come while it is made wait for it, and whoever goes away does not.
func TestMemoMakesOnceForMany(t *testing.T) {
	var s stamped
	m := newMemo[int64](100)
	begun, finish := make(chan struct{}), make(chan struct{})
	var makings atomic.Int64
	making := func() (made[int64], error) {
		if makings.Add(1) == 1 {
			close(begun)
			<-finish
		}
		return made[int64]{s.n.Load(), 10}, nil
	}
	var all sync.WaitGroup
	get := func() {
		if _, err := m.get(t.Context(), "k", s.stamp, making); err != nil {
			t.Error(err)
		}
	}
	all.Go(get)
	<-begun
	gone, leave := context.WithCancel(t.Context())
	leave()
	if _, err := m.get(gone, "k", s.stamp, making); !errors.Is(err, context.Canceled) {
		t.Errorf("who goes away is told %v", err)
	}
	for range 20 {
		all.Go(get)
	}
	close(finish)
	all.Wait()
	if n := makings.Load(); n != 1 {
		t.Errorf("it was made %d times", n)
	}
}

// TestMemoIsNeverBehind: with writers all the time, nobody is given what is older than their question.
func TestMemoIsNeverBehind(t *testing.T) {
	var s stamped
	m := newMemo[int64](1000)
	var all sync.WaitGroup
	for w := range 8 {
		all.Go(func() {
			for i := range 400 {
				if w < 2 {
					s.n.Add(1)
				}
				asked := s.n.Load()
				got, err := m.get(t.Context(), fmt.Sprint("k", i%3), s.stamp, func() (made[int64], error) { return made[int64]{s.n.Load(), 10}, nil })
				if err != nil || got < asked {
					t.Errorf("asked at %d, got %d: %v", asked, got, err)
					return
				}
			}
		})
	}
	all.Wait()
}
