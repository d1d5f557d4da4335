package book

import (
	"context"
	"errors"
	"sync"
	"sync/atomic"

	"lodebook/models/store"
)

// request is a write that waits for its turn.
type request struct {
	ctx   context.Context
	actor Actor
	fn    func(*session) error
	alone bool // in a transaction of its own
	bulk  bool // of very many rows, which are read back when they are asked for

	state    atomic.Int32
	done     chan struct{}
	receipt  Receipt
	bears    map[string]bool // sites whose stock may be another one after it
	err      error
	panicked *store.Panic
}

// A request waits until it is taken up or given up, whichever comes first.
const (
	waiting int32 = iota
	takenUp
	givenUp
)

// queue holds requests in the order in which they came.
type queue struct {
	mu   sync.Mutex
	list []*request
}

func (q *queue) add(r *request) {
	q.mu.Lock()
	defer q.mu.Unlock()
	q.list = append(q.list, r)
}

// groupSize is how many writes may share a transaction.
const groupSize = 256

// next takes out the requests that are done together next: those that came first and may share, or a
// single one that may not. Those that were given up are passed over.
func (q *queue) next() []*request {
	q.mu.Lock()
	defer q.mu.Unlock()
	var group []*request
	for len(q.list) > 0 && len(group) < groupSize {
		r := q.list[0]
		if r.alone && len(group) > 0 {
			break
		}
		q.list = q.list[1:]
		if r.state.CompareAndSwap(waiting, takenUp) {
			group = append(group, r)
			if r.alone {
				break
			}
		}
	}
	return group
}

// submit has a request done. Of all that wait, one leads: it does the writes of the others with its own,
// in one transaction, and so all of them wait for the disk once.
func (b *Book) submit(r *request) (Receipt, error) {
	if b.site != "" {
		return Receipt{}, errReadOnly
	}
	r.done = make(chan struct{})
	b.queue.add(r)
	cancelled := r.ctx.Done()
	for {
		select {
		case <-r.done:
			return r.answer()
		case b.leading <- struct{}{}:
			b.lead()
		case <-cancelled:
			if r.state.CompareAndSwap(waiting, givenUp) {
				return Receipt{}, r.ctx.Err()
			}
			cancelled = nil // it is under way
		}
	}
}

// lead does the writes that are next.
func (b *Book) lead() {
	defer func() { <-b.leading }()
	if group := b.queue.next(); len(group) > 0 {
		b.commit(group)
	}
}

func (r *request) answer() (Receipt, error) {
	if r.panicked != nil {
		panic(r.panicked.Value)
	}
	return r.receipt, r.err
}

// errReadOnly tells of a mistake of the program: a book of which one site was read is not written to.
var errReadOnly = errors.New("the book was opened to read one site")

// errNothingWritten ends a transaction in which every write was refused.
var errNothingWritten = errors.New("nothing was written")

// commit does a group of writes in one transaction and publishes what they made of the book.
func (b *Book) commit(group []*request) {
	defer func() {
		for _, r := range group {
			close(r.done)
		}
	}()
	// A panic that is no write's own is everybody's error: nothing of them is on the disk.
	err := guarded(func() error { return b.commitGroup(group) })
	if err == nil {
		return
	}
	for _, r := range group {
		switch {
		case r.panicked != nil:
		case r.alone && r.ctx.Err() != nil:
			r.receipt, r.err = Receipt{}, r.ctx.Err() // and not what the database says of a broken-off statement
		case r.err == nil:
			r.receipt, r.err = Receipt{}, err
		}
	}
}

// transact runs fn in a transaction that is fit for the group.
func (b *Book) transact(group []*request, fn func(*store.Tx) error) error {
	// Whoever leads may be called off; the others are not. A long write is called off in the middle.
	ctx := context.WithoutCancel(group[0].ctx)
	switch {
	case group[0].bulk:
		return b.st.WriteBulk(ctx, fn)
	case group[0].alone:
		return b.st.Write(group[0].ctx, fn)
	default:
		return b.st.Write(ctx, fn)
	}
}

// commitGroup is commit without the answers.
func (b *Book) commitGroup(group []*request) error {
	grows := false
	defer func() {
		if grows {
			<-b.growing
		}
	}()
	var next *model
	err := b.transact(group, func(tx *store.Tx) error {
		b.growing <- struct{}{}
		grows = true
		if err := b.catchUp(tx); err != nil {
			return err
		}
		next = b.m.Load().fork()
		written := 0
		for _, r := range group {
			if err := b.do(r, tx, next); err != nil {
				return err
			}
			if r.err == nil && r.panicked == nil {
				written++
			}
		}
		if written == 0 {
			return errNothingWritten
		}
		return nil
	})
	if err == nil && next.head != b.m.Load().head && !group[0].bulk {
		b.publish(next)
	}
	return err
}

// do does one write as a part of the transaction. Its own failure is the request's; the error given back is
// that of the transaction as a whole.
func (b *Book) do(r *request, tx *store.Tx, next *model) error {
	var s *session
	work := func() error {
		if err := r.ctx.Err(); err != nil {
			return err
		}
		now, err := b.recordedAt(tx)
		if err != nil {
			return err
		}
		s = &session{b: b, m: next, tx: tx, actor: r.actor, now: now, alone: r.alone}
		return r.fn(s)
	}
	var ended bool
	var err, broken error
	if r.alone {
		err = guarded(work)
	} else {
		ended, err, broken = tx.Part(work)
	}
	if errors.As(err, &r.panicked) || err != nil {
		r.err = err
		return broken
	}
	r.receipt, r.bears = s.receipt, s.bears
	if r.bulk {
		return nil
	}
	return errors.Join(broken, s.takeIn(ended))
}

// guarded gives a panic as the error that Part makes of it.
func guarded(fn func() error) (err error) {
	defer func() {
		if p := recover(); p != nil {
			err = &store.Panic{Value: p}
		}
	}()
	return fn()
}

// takeIn takes what the write did into the model of the writes after it.
func (s *session) takeIn(ended bool) error {
	size, err := s.tx.Size()
	if err != nil || size == s.m.head {
		return err
	}
	if ended || s.alone && s.tx.Ended() {
		return s.m.takeAfter(s.tx, size)
	}
	if !s.alone {
		if err := s.m.takeRows(s.rows); err != nil {
			return err
		}
	}
	s.m.head = size
	return nil
}
