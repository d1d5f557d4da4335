package web

import (
	"container/list"
	"context"
	"sync"
)

// memo holds what was made of the book and is dear to make again. What it holds under a key is given
// only while the book's stamp is the one from before it was made, so that it is what would be made now.
// One making at a time goes on under one key. What was not asked for longest goes when the room is full.
type memo[T any] struct {
	room int // bytes

	mu     sync.Mutex
	turn   int64 // counts the makings
	size   int
	held   map[string]*list.Element // of *kept[T]
	order  list.List                // asked for last at the front
	making map[string]chan struct{} // closed when the making is over
}

// kept is one thing in a memo.
type kept[T any] struct {
	key, stamp string // an empty stamp: the book changed while it was made
	turn       int64
	size       int
	value      T
}

// made is what a making gives. Size is in bytes; 0 leaves it out of the memo.
type made[T any] struct {
	value T
	size  int
}

// newMemo makes a memo with room for so many bytes.
func newMemo[T any](room int) *memo[T] {
	return &memo[T]{room: room, held: map[string]*list.Element{}, making: map[string]chan struct{}{}}
}

// most is how often something is made again because the book changed while it was made, so that all that
// it shows is of one moment. A book that is written without a pause is not waited for longer.
const most = 3

// get gives what is held under the key, or has it made. Stamp reads the book's stamp.
func (m *memo[T]) get(ctx context.Context, key string, stamp func(context.Context) (string, error), make func() (made[T], error)) (T, error) {
	var none T
	m.mu.Lock()
	arrived := m.turn
	m.mu.Unlock()
	for {
		now, err := stamp(ctx)
		if err != nil {
			return none, err
		}
		value, ok, wait := m.look(key, now, arrived)
		if ok {
			return value, nil
		}
		if wait == nil {
			return m.make(ctx, key, now, stamp, make)
		}
		select {
		case <-wait:
		case <-ctx.Done():
			return none, ctx.Err()
		}
	}
}

// look gives what is held, if it is good, else the channel of a making to wait for, else nothing: then the
// caller is the one who makes it.
func (m *memo[T]) look(key, stamp string, arrived int64) (value T, ok bool, wait chan struct{}) {
	m.mu.Lock()
	defer m.mu.Unlock()
	if at := m.held[key]; at != nil {
		// What was begun after this caller came is as new as the caller can ask for, whatever was written
		// since: so those who wait for one making do not each begin another.
		if k := at.Value.(*kept[T]); k.stamp == stamp || k.turn > arrived {
			m.order.MoveToFront(at)
			return k.value, true, nil
		}
	}
	if wait = m.making[key]; wait == nil {
		m.making[key] = make(chan struct{})
	}
	return value, false, wait
}

// make makes it and keeps it.
func (m *memo[T]) make(ctx context.Context, key, before string, stamp func(context.Context) (string, error), make func() (made[T], error)) (T, error) {
	defer func() {
		m.mu.Lock()
		defer m.mu.Unlock()
		close(m.making[key])
		delete(m.making, key)
	}()
	for tries := 1; ; tries++ {
		m.mu.Lock()
		m.turn++
		turn := m.turn
		m.mu.Unlock()
		x, err := make()
		if err != nil || x.size == 0 {
			return x.value, err
		}
		after, err := stamp(ctx)
		if err != nil {
			return x.value, err
		}
		if after == before || tries == most {
			if after != before {
				before = ""
			}
			m.keep(&kept[T]{key, before, turn, x.size + len(key), x.value})
			return x.value, nil
		}
		before = after
	}
}

// keep puts something in the place of what was held under its key, and throws out what has no more room.
func (m *memo[T]) keep(k *kept[T]) {
	m.mu.Lock()
	defer m.mu.Unlock()
	if at := m.held[k.key]; at != nil {
		m.drop(at)
	}
	if k.size > m.room {
		return
	}
	m.held[k.key] = m.order.PushFront(k)
	m.size += k.size
	for m.size > m.room {
		m.drop(m.order.Back())
	}
}

// drop throws something out. The caller holds mu.
func (m *memo[T]) drop(at *list.Element) {
	k := m.order.Remove(at).(*kept[T])
	delete(m.held, k.key)
	m.size -= k.size
}
