package standing

import (
	"slices"
	"sync"
	"sync/atomic"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// compiled is the board of a site, made when it is first asked for. It is made anew when a version is
// recorded.
type compiled struct {
	making sync.Mutex
	made   atomic.Pointer[board]
}

// fork shares a board that is made; whoever writes copies of it what changes.
func (c *compiled) fork() *compiled {
	f := &compiled{}
	f.made.Store(c.made.Load())
	return f
}

// board holds the courses of all obligations of a site: for each item a track
// of rows, one for each subject that it is ever asked of.
type board struct {
	own     *owner
	plan    *plan
	tracks  []*track  // by number, in order of item code
	rowOf   [][]int32 // by number of the subject and track: the row from 1, 0 for none; nil for no row at all
	rowsOwn *owner    // whose rowOf is
	present civil.Day // the day of the tallies; noDay before the first turn
	tallies []counter // of the present day, by track
	memo    *memo
}

// counter counts rows by their state.
type counter [wordMask + 1]int32

// memo is what only the writers of a line of forks share, one after the other.
type memo struct {
	calendar *calendar
	answers  map[*program.Selector]*answers
	course   []point
	segments []segment
	tracks   []int32
}

// ref names a row of a track.
type ref struct{ track, row int32 }

// track holds the courses of one item.
type track struct {
	own    *owner
	item   string
	judged []*program.Item // by reign
	rows   []row
	asked  []asking
	points []point // of all rows; a course that changes is written anew at the end
	waste  int     // points of courses that were written anew
}

// row is where a course lies in the points, and its state on the present day.
type row struct {
	at   uint32
	size uint32 // number of points, with the state in the low bits
}

func (r row) length() int { return int(r.size >> wordBits) }
func (r row) now() uint8  { return uint8(r.size & wordMask) }

// asking says of whom the row is asked and, by its last segment, since when.
type asking struct {
	local              int32
	first, last, start civil.Day
	reign              int16     // -1 where the last segment is faulty
	before             bool      // there are segments before the last
	due                civil.Day // of an item with every: what all its deeds made; noDay where they have to be asked
}

func (t *track) course(i int32) []point {
	r := t.rows[i]
	return t.points[r.at : int(r.at)+r.length()]
}

// board gives the site's board, which it makes if need be.
func (e *Engine) board(s *site) *board {
	if b := s.made.Load(); b != nil {
		return b
	}
	s.making.Lock()
	defer s.making.Unlock()
	if b := s.made.Load(); b != nil {
		return b
	}
	b := e.newBoard(s)
	s.made.Store(b)
	return b
}

func (e *Engine) newBoard(s *site) *board {
	v := e.viewOf(s, e.known)
	// It is nobody's: readers of several forks may share it, so whoever writes on it copies first.
	own := &owner{}
	b := &board{own: own, rowsOwn: own, plan: newPlan(v.reigns, e.kinds.number), present: noDay, rowOf: make([][]int32, len(s.locals))}
	b.tracks = make([]*track, len(b.plan.items))
	for i, code := range b.plan.items {
		b.tracks[i] = &track{own: own, item: code}
		for _, r := range v.reigns {
			b.tracks[i].judged = append(b.tracks[i].judged, r.byCode[code])
		}
	}
	var segments []segment
	var course []point
	// What confers levels comes first, since the rest may hang on the levels held; then by subject, since what
	// is on record about one lies together.
	for _, confers := range [2]bool{true, false} {
		for no, l := range s.locals {
			for _, i := range b.plan.ofKind[l.subject.Asks] {
				code := b.plan.items[i]
				if b.plan.confers[i] != confers {
					continue
				}
				segments = v.segments(code, l, segments[:0])
				if course = v.course(code, l, segments, course[:0]); len(course) > 0 {
					b.addRow(own, i, v.askingOf(int32(no), segments), course)
				}
			}
		}
		v.board = b
	}
	for _, t := range b.tracks {
		t.rows, t.asked, t.points = slices.Clip(t.rows), slices.Clip(t.asked), slices.Clip(t.points)
	}
	return b
}

// askingOf says what is known of a row by its segments.
func (v *view) askingOf(local int32, segments []segment) asking {
	a := asking{local: local, reign: -1, due: v.due}
	if n := len(segments); n > 0 && !segments[n-1].faulty {
		s := segments[n-1]
		a.first, a.last, a.start, a.reign, a.before = s.first, s.last, s.start, s.reign, n > 1
	}
	return a
}

// addRow adds a row to a track that may be written.
func (b *board) addRow(own *owner, track int32, a asking, course []point) int32 {
	if b.rowsOwn != own {
		b.rowOf, b.rowsOwn = slices.Clone(b.rowOf), own
	}
	for int(a.local) >= len(b.rowOf) {
		b.rowOf = append(b.rowOf, nil)
	}
	rows := make([]int32, len(b.tracks))
	copy(rows, b.rowOf[a.local])
	t := b.tracks[track]
	no := int32(len(t.rows))
	rows[track] = no + 1
	b.rowOf[a.local] = rows
	t.rows = append(t.rows, row{uint32(len(t.points)), uint32(len(course)<<wordBits | none)})
	t.asked = append(t.asked, a)
	t.points = append(t.points, course...)
	if b.tallies != nil {
		b.tallies[track][none]++
	}
	return no
}

// row gives the row of a subject in a track, -1 where it has none.
func (b *board) row(track, local int32) int32 {
	if int(local) >= len(b.rowOf) || b.rowOf[local] == nil {
		return -1
	}
	return b.rowOf[local][track] - 1
}

// rewrite writes a course anew.
func (t *track) rewrite(i int32, course []point) {
	r := &t.rows[i]
	t.waste += r.length()
	*r = row{uint32(len(t.points)), uint32(len(course)<<wordBits) | r.size&wordMask}
	t.points = append(t.points, course...)
	if t.waste > 256 && t.waste > len(t.points)/2 {
		t.pack()
	}
}

// pack leaves the points of old courses behind.
func (t *track) pack() {
	points := make([]point, 0, len(t.points)-t.waste+64)
	for i := range t.rows {
		r := &t.rows[i]
		old := t.points[r.at : int(r.at)+r.length()]
		r.at = uint32(len(points))
		points = append(points, old...)
	}
	t.points, t.waste = points, 0
}
