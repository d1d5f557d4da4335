package standing

import (
	"bufio"
	"bytes"
	"encoding/binary"
	"errors"
	"io"
	"math"
	"slices"
	"unsafe"

	"lodebook/models/program"
)

// A snapshot of an engine is its records and its boards as they lie in memory: a head that says of whom
// and how many they are, then the columns themselves. Everything else is put as usual before it is
// read. It is for the same program on the same kind of machine, beside a database that has it all.

// snapshotForm changes whenever the layout of a column does.
const snapshotForm = 4

var snapshotMagic = []byte("LODEBOOK")

// ErrSnapshot tells that a snapshot does not fit.
var ErrSnapshot = errors.New("the snapshot does not fit this program or this book")

// WriteSnapshot writes the records and the boards that are made.
func (e *Engine) WriteSnapshot(w io.Writer) error {
	var h head
	h.raw(snapshotMagic)
	h.numbers(snapshotForm, 1, uint32(unsafe.Sizeof(record{})), uint32(unsafe.Sizeof(row{})), uint32(unsafe.Sizeof(asking{})))
	h.texts(e.kinds.what)
	h.numbers(uint32(len(e.limits.zones)))
	for _, zones := range e.limits.zones {
		h.texts(zones)
	}
	pages := h.marks(e.marks)
	for _, of := range e.sites {
		h.site(e, of)
	}
	h.numbers(endOfList)
	var lists [][]record
	for no := range e.people.n {
		p := e.people.at(no)
		h.text(p.code)
		lists = h.past(p, lists)
	}
	h.numbers(endOfList)
	for _, s := range e.sites {
		for _, l := range s.locals {
			if l.past != nil {
				lists = h.past(l.past, lists)
			}
		}
	}
	h.pad()
	out := bufio.NewWriterSize(w, 1<<20)
	var size [8]byte
	binary.LittleEndian.PutUint64(size[:], uint64(h.Len()))
	_, err := out.Write(size[:])
	if err == nil {
		_, err = out.Write(h.Bytes())
	}
	for _, page := range pages {
		if err == nil {
			_, err = out.Write(bytesOf(page))
		}
	}
	for _, list := range lists {
		if err == nil {
			_, err = out.Write(bytesOf(list))
		}
	}
	for _, s := range e.sites {
		if b := s.made.Load(); b != nil && err == nil {
			err = b.write(out)
		}
	}
	return errors.Join(err, out.Flush())
}

func (b *board) write(w io.Writer) error {
	for _, t := range b.tracks {
		for _, column := range [][]byte{bytesOf(t.rows), bytesOf(t.asked), bytesOf(t.points)} {
			if _, err := w.Write(column); err != nil {
				return err
			}
		}
	}
	return nil
}

func bytesOf[T any](column []T) []byte {
	if len(column) == 0 {
		return nil
	}
	return unsafe.Slice((*byte)(unsafe.Pointer(&column[0])), len(column)*int(unsafe.Sizeof(column[0])))
}

// endOfList is where a text's length or a count would stand.
const endOfList = 1<<32 - 1

// head is written in numbers of four bytes and texts.
type head struct{ bytes.Buffer }

func (h *head) raw(b []byte) { h.Write(b) }

func (h *head) numbers(all ...uint32) {
	for _, n := range all {
		h.Write(binary.LittleEndian.AppendUint32(nil, n))
	}
}

func (h *head) text(s string) {
	h.numbers(uint32(len(s)))
	h.WriteString(s)
}

func (h *head) texts(list []string) {
	h.numbers(uint32(len(list)))
	for _, s := range list {
		h.text(s)
	}
}

func (h *head) pad() {
	for h.Len()%8 != 0 {
		h.WriteByte(0)
	}
}

func (h *head) past(p *past, lists [][]record) [][]record {
	h.numbers(uint32(len(p.deeds)))
	for _, d := range p.deeds {
		h.numbers(uint32(d.kind), uint32(len(d.list)))
		lists = append(lists, d.list)
	}
	return lists
}

// marks writes which pages of identifiers there are, and gives them.
func (h *head) marks(m marks) [][]mark {
	var pages [][]mark
	var numbers []uint32
	for no, p := range m.list {
		if p.of != nil {
			pages, numbers = append(pages, p.of[:]), append(numbers, uint32(no))
		}
	}
	h.numbers(uint32(len(numbers)))
	h.numbers(numbers...)
	return pages
}

func (h *head) site(e *Engine, s *site) {
	h.text(s.code)
	h.numbers(uint32(len(s.locals)))
	for _, l := range s.locals {
		h.text(string(l.subject.Asks))
		h.text(l.subject.Code)
	}
	h.numbers(uint32(len(s.appointed)))
	for post, people := range s.appointed {
		h.text(post)
		h.numbers(uint32(len(people)))
		for _, no := range people {
			h.numbers(uint32(no))
		}
	}
	b := s.made.Load()
	if b == nil {
		h.numbers(endOfList)
		return
	}
	h.numbers(uint32(len(b.tracks)))
	for _, t := range b.tracks {
		h.text(t.item)
		h.numbers(uint32(len(t.rows)), uint32(len(t.points)))
	}
}

// ReadSnapshot takes in what WriteSnapshot wrote of an engine that had the same lines put, into one that
// has all of them but the records. It keeps b and writes into it. After an error the engine is of no use.
func (e *Engine) ReadSnapshot(b []byte) error {
	if len(b) < 8 || uintptr(unsafe.Pointer(&b[0]))%8 != 0 {
		return ErrSnapshot
	}
	size := binary.LittleEndian.Uint64(b)
	if size > uint64(len(b)-8) || size%8 != 0 {
		return ErrSnapshot
	}
	r := &reader{head: b[8 : 8+size], columns: b[8+size:]}
	r.expect(snapshotMagic)
	for _, want := range []uint32{snapshotForm, 1, uint32(unsafe.Sizeof(record{})), uint32(unsafe.Sizeof(row{})), uint32(unsafe.Sizeof(asking{}))} {
		r.must(r.number() == want)
	}
	r.kinds = make([]int32, r.count())
	for i := range r.kinds {
		r.kinds[i] = e.kind(r.text())
	}
	r.limits = make([]uint16, r.count())
	for i := range r.limits {
		zones := make([]string, r.count())
		for j := range zones {
			zones[j] = r.text()
		}
		r.must(len(zones) > 0)
		r.limits[i] = e.limits.put(zones)
	}
	r.marks(e)
	var sites []*siteSnapshot
	for r.ok() && !r.end() {
		sites = append(sites, r.site(e))
	}
	r.numberOfSites(e, sites)
	for r.ok() && !r.end() {
		no := e.person(r.text())
		r.past(e.ownedPast(no))
	}
	for _, s := range sites {
		for _, l := range s.locals {
			if l.past != nil && r.ok() {
				r.past(l.past)
			}
		}
	}
	for _, s := range sites {
		r.board(e, s)
	}
	r.must(len(r.columns) == 0)
	return r.err
}

// reader reads a head. After a fault it gives nothing but zeros.
type reader struct {
	head, columns []byte
	kinds         []int32  // numbers of the kinds of records, by those of the snapshot
	sites         []uint16 // likewise of the sites
	limits        []uint16 // and of the limits
	err           error
}

func (r *reader) ok() bool { return r.err == nil }

func (r *reader) must(holds bool) {
	if !holds && r.err == nil {
		r.err = ErrSnapshot
		r.head = nil
	}
}

func (r *reader) take(n int) []byte {
	r.must(n >= 0 && n <= len(r.head))
	if !r.ok() {
		return nil
	}
	b := r.head[:n]
	r.head = r.head[n:]
	return b
}

func (r *reader) expect(b []byte) { r.must(bytes.Equal(r.take(len(b)), b)) }

func (r *reader) number() uint32 {
	if b := r.take(4); b != nil {
		return binary.LittleEndian.Uint32(b)
	}
	return 0
}

// count is a number of things of which each takes four bytes at least.
func (r *reader) count() int {
	n := int(r.number())
	r.must(n <= len(r.head)/4)
	if !r.ok() {
		return 0
	}
	return n
}

func (r *reader) text() string { return string(r.take(int(r.number()))) }

// end tells whether a list has come to its end.
func (r *reader) end() bool {
	if len(r.head) >= 4 && binary.LittleEndian.Uint32(r.head) == endOfList {
		r.take(4)
		return true
	}
	r.must(len(r.head) >= 4)
	return !r.ok()
}

func columnOf[T any](r *reader, n int) []T {
	var one T
	size := int(unsafe.Sizeof(one))
	r.must(n >= 0 && n <= len(r.columns)/size)
	if !r.ok() || n == 0 {
		return nil
	}
	c := unsafe.Slice((*T)(unsafe.Pointer(&r.columns[0])), n)
	r.columns = r.columns[n*size:]
	return c[:n:n]
}

// marks finds the pages of identifiers at the beginning of the columns.
func (r *reader) marks(e *Engine) {
	last := -1
	for range r.count() {
		no := int(r.number())
		page := columnOf[mark](r, markPageSize)
		r.must(no > last && no <= math.MaxUint32/markPageSize)
		if !r.ok() {
			return
		}
		last = no
		if no >= len(e.marks.list) {
			e.marks.list = append(e.marks.list, make([]markPage, no+1-len(e.marks.list))...)
		}
		e.marks.list[no] = markPage{e.own, (*[markPageSize]mark)(page)}
	}
}

type siteSnapshot struct {
	code   string
	locals []*local
	board  []trackSnapshot // nil: it was not made
}

type trackSnapshot struct {
	item         string
	rows, points int
}

func (r *reader) site(e *Engine) *siteSnapshot {
	s := &siteSnapshot{code: r.text()}
	for range r.count() {
		sub := Subject{program.Asks(r.text()), r.text()}
		s.locals = append(s.locals, e.local(s.code, sub))
	}
	for range r.count() {
		post := r.text()
		for range r.count() {
			no := int(r.number())
			r.must(no < len(s.locals))
			if r.ok() {
				e.appoint(s.code, post, s.locals[no].no)
			}
		}
	}
	if r.end() {
		return s
	}
	s.board = make([]trackSnapshot, r.count())
	for i := range s.board {
		s.board[i] = trackSnapshot{r.text(), int(r.number()), int(r.number())}
	}
	return s
}

// numberOfSites makes out which site is which.
func (r *reader) numberOfSites(e *Engine, sites []*siteSnapshot) {
	r.sites = make([]uint16, len(sites))
	for i, s := range sites {
		r.sites[i] = uint16(e.siteNumber(s.code))
	}
}

func (r *reader) past(p *past) {
	r.must(len(p.deeds) == 0)
	n := r.count()
	p.deeds = make([]deedsOf, 0, n)
	for range n {
		kind, length := int(r.number()), int(r.number())
		r.must(kind < len(r.kinds))
		list := columnOf[record](r, length)
		if !r.ok() {
			return
		}
		for i := range list {
			r.must(int(list[i].site) < len(r.sites))
			if !r.ok() {
				return
			}
			list[i].site = r.sites[list[i].site]
			if no := int(list[i].limit); no > 0 {
				r.must(no <= len(r.limits))
				if !r.ok() {
					return
				}
				list[i].limit = r.limits[no-1]
			}
		}
		p.deeds = append(p.deeds, deedsOf{r.kinds[kind], list})
	}
}

// board takes a board in if it is of the items that the site has. What it does not have is made anew when it is
// asked for; the columns are passed over.
func (r *reader) board(e *Engine, s *siteSnapshot) {
	if s.board == nil || !r.ok() {
		return
	}
	at := e.owned(s.code)
	b := &board{own: e.own, rowsOwn: e.own, present: noDay, rowOf: make([][]int32, len(at.locals))}
	v := e.viewOf(at, Always)
	b.plan = newPlan(v.reigns, e.kinds.number)
	fits := slices.EqualFunc(b.plan.items, s.board, func(item string, t trackSnapshot) bool { return item == t.item })
	for i, of := range s.board {
		t := &track{own: e.own, item: of.item, rows: columnOf[row](r, of.rows), asked: columnOf[asking](r, of.rows), points: columnOf[point](r, of.points)}
		if !r.ok() {
			return
		}
		if !fits {
			continue
		}
		for _, reign := range v.reigns {
			t.judged = append(t.judged, reign.byCode[t.item])
		}
		b.tracks = append(b.tracks, t)
		r.rows(b, int32(i), s.locals, len(v.reigns))
	}
	if fits && r.ok() {
		at.made.Store(b)
	}
}

// rows finds the subjects of a track's rows.
func (r *reader) rows(b *board, track int32, locals []*local, reigns int) {
	t := b.tracks[track]
	for i := range t.rows {
		w, a := &t.rows[i], &t.asked[i]
		r.must(a.local >= 0 && int(a.local) < len(locals) && int(a.reign) < reigns && int(w.at)+w.length() <= len(t.points))
		if !r.ok() {
			return
		}
		w.size = w.size&^wordMask | uint32(none)
		a.local = locals[a.local].no
		if b.rowOf[a.local] == nil {
			b.rowOf[a.local] = make([]int32, len(b.plan.items))
		}
		b.rowOf[a.local][track] = int32(i) + 1
	}
}
