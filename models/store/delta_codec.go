package store

import (
	"bufio"
	"encoding/binary"
	"errors"
	"io"
	"math"
	"time"

	"lodebook/models/civil"
)

// A delta is written as rows one after the other, table by table, in whole numbers of as many bytes as they
// need. A text that many rows share is written once and then named by its number.

// ErrDelta says that bytes are no delta that this program wrote.
var ErrDelta = errors.New("the rows are damaged, or were written by another version of this program")

// WriteDelta writes the rows of all tables but the records, of which whoever has so many has a better form.
func WriteDelta(w io.Writer, d *Delta) error {
	e := &deltaEncoder{w: bufio.NewWriterSize(w, 1<<20), known: make(map[string]uint64)}
	d.code(e)
	return e.w.Flush()
}

// ReadDelta reads what WriteDelta wrote, to the last byte. Texts of the rows are parts of b, which nobody may
// change any more. However b is damaged, ReadDelta takes no more memory than a few times its length.
func ReadDelta(b string) (Delta, error) {
	r := &deltaDecoder{rest: b}
	var d Delta
	d.code(r)
	if r.broken || len(r.rest) > 0 {
		return Delta{}, ErrDelta
	}
	return d, nil
}

// coder writes or reads the fields that it is pointed to, so that one description of a row does for both.
type coder interface {
	count(n int) int // of rows
	line(l *Line)
	shared(s *string) // a text that other rows have too
	own(s *string)    // a text that hardly another row has
	bytes(b *[]byte)
	list(l *[]string)
	number(n *int)
	flag(f *bool)
	day(d *civil.Day)
	maybeDay(d **civil.Day)
	moment(t *time.Time)
	maybeMoment(t **time.Time)
}

func (d *Delta) code(c coder) {
	codeRows(c, &d.Sites, codeSite)
	codeRows(c, &d.Versions, codeVersion)
	codeRows(c, &d.People, codePerson)
	codeRows(c, &d.Fixtures, codeFixture)
	codeRows(c, &d.Stints, codeStint)
	codeRows(c, &d.Facts, codeFact)
	codeRows(c, &d.Events, codeEvent)
	codeRows(c, &d.Excusals, codeExcusal)
	codeRows(c, &d.Rights, codeRight)
	codeRows(c, &d.Duties, codeDuty)
	codeRows(c, &d.Stocks, codeStock)
	d.codeRemedies(c)
	codeRows(c, &d.Marks, codeMark)
	codeRows(c, &d.Visits, codeVisit)
	codeRows(c, &d.VisitSteps, codeVisitStep)
	codeRows(c, &d.Plans, codePlan)
	codeRows(c, &d.Accounts, codeAccount)
	codeRows(c, &d.Batches, codeBatch)
}

func codeRows[T any](c coder, rows *[]T, row func(coder, *T)) {
	n := c.count(len(*rows))
	if n != len(*rows) {
		*rows = make([]T, n)
	}
	for i := range *rows {
		row(c, &(*rows)[i])
	}
}

func codeSite(c coder, r *SiteRow) {
	c.line(&r.Line)
	c.shared(&r.Code)
	c.own(&r.Name)
	c.shared(&r.TimeZone)
}

func codeVersion(c coder, r *VersionRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.number(&r.Number)
	c.day(&r.InForceFrom)
	c.flag(&r.Retroactive)
	c.bytes(&r.Source)
}

func codePerson(c coder, r *PersonRow) {
	c.line(&r.Line)
	c.shared(&r.Code)
	c.own(&r.Name)
	c.own(&r.Email)
	c.own(&r.Badge)
	c.maybeDay(&r.From)
	c.flag(&r.Erased)
}

func codeFixture(c coder, r *FixtureRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.shared(&r.Code)
	c.shared(&r.Kind)
	c.own(&r.Name)
}

func codeStint(c coder, r *StintRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.shared(&r.Kind)
	c.shared(&r.Code)
	c.maybeDay(&r.First)
	c.maybeDay(&r.Last)
}

func codeFact(c coder, r *FactRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.shared(&r.Kind)
	c.shared(&r.Code)
	c.shared(&r.Fact)
	c.day(&r.From)
	c.shared(&r.Value)
}

func codeSubject(c coder, k *SubjectKey) {
	c.shared(&k.Site)
	c.shared(&k.Kind)
	c.shared(&k.Code)
}

func codeEvent(c coder, r *EventRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	codeSubject(c, &r.Subject)
	c.shared(&r.Event)
	c.day(&r.Day)
	c.maybeMoment(&r.Time)
}

func codeExcusal(c coder, r *ExcusalRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	codeSubject(c, &r.Subject)
	c.shared(&r.Item)
	c.day(&r.From)
	c.maybeDay(&r.To)
	c.flag(&r.Opens)
	c.flag(&r.Waiting)
}

func codeRight(c coder, r *RightRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.shared(&r.Person)
	c.shared(&r.Zone)
	c.moment(&r.From)
	c.maybeMoment(&r.To)
}

func codeMark(c coder, r *MarkRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.moment(&r.At)
	c.shared(&r.Door)
	c.shared(&r.Badge)
}

func codeVisit(c coder, r *VisitRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.shared(&r.Visitor)
	c.shared(&r.Employer)
	c.shared(&r.Badge)
	c.shared(&r.Kind)
	c.list(&r.Zones)
	c.moment(&r.From)
	c.moment(&r.To)
	c.shared(&r.Escort)
	c.shared(&r.Person)
	c.list(&r.Tools)
	c.flag(&r.Late)
}

func codeVisitStep(c coder, r *VisitStepRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.shared(&r.Visit)
	c.shared(&r.Step)
	c.moment(&r.At)
	c.shared(&r.Screener)
	c.shared(&r.Outcome)
	c.shared(&r.Account)
}

func codeDuty(c coder, r *DutyRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.shared(&r.Person)
	c.moment(&r.From)
	c.moment(&r.To)
	c.shared(&r.Duty)
}

func codeStock(c coder, r *StockRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.shared(&r.Item)
	c.moment(&r.From)
	c.moment(&r.To)
	c.list(&r.Spans)
}

func codePlan(c coder, r *PlanRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.shared(&r.What)
	c.shared(&r.Crew)
	c.day(&r.Day)
	c.shared(&r.At)
}

func codeAccount(c coder, r *AccountRow) {
	c.line(&r.Line)
	c.shared(&r.ID)
	c.own(&r.Name)
	c.shared(&r.Role)
	c.list(&r.Sites)
	c.shared(&r.Person)
	c.maybeDay(&r.Until)
	c.flag(&r.Disabled)
}

func codeBatch(c coder, r *BatchRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.shared(&r.Table)
	c.own(&r.File)
	c.number(&r.Rows)
	c.shared(&r.Actor)
	c.moment(&r.At)
}

// deltaEncoder writes; an error of w comes out when it is flushed.
type deltaEncoder struct {
	w     *bufio.Writer
	known map[string]uint64 // shared texts written, by number from 1
	last  int64             // sequence number of the row before
	tmp   [binary.MaxVarintLen64]byte
}

func (e *deltaEncoder) unsigned(n uint64) { _, _ = e.w.Write(binary.AppendUvarint(e.tmp[:0], n)) }
func (e *deltaEncoder) signed(n int64)    { _, _ = e.w.Write(binary.AppendVarint(e.tmp[:0], n)) }

func (e *deltaEncoder) count(n int) int {
	e.unsigned(uint64(n))
	e.last = 0
	return n
}

func (e *deltaEncoder) line(l *Line) {
	e.signed(l.Seq - e.last)
	e.last = l.Seq
	e.signed(l.Ended)
	e.own(&l.ID)
	e.shared(&l.Batch)
}

func (e *deltaEncoder) shared(s *string) {
	no, ok := e.known[*s]
	if ok {
		e.unsigned(no)
		return
	}
	e.known[*s] = uint64(len(e.known) + 1)
	e.unsigned(0)
	e.own(s)
}

func (e *deltaEncoder) own(s *string) {
	e.unsigned(uint64(len(*s)))
	_, _ = e.w.WriteString(*s)
}

// bytes writes one more than the length; none at all is 0.
func (e *deltaEncoder) bytes(b *[]byte) {
	if *b == nil {
		e.unsigned(0)
		return
	}
	e.unsigned(uint64(len(*b)) + 1)
	_, _ = e.w.Write(*b)
}

func (e *deltaEncoder) list(l *[]string) {
	if *l == nil {
		e.unsigned(0)
		return
	}
	e.unsigned(uint64(len(*l)) + 1)
	for i := range *l {
		e.shared(&(*l)[i])
	}
}

func (e *deltaEncoder) number(n *int)    { e.signed(int64(*n)) }
func (e *deltaEncoder) day(d *civil.Day) { e.signed(int64(*d)) }

func (e *deltaEncoder) flag(f *bool) {
	var n uint64
	if *f {
		n = 1
	}
	e.unsigned(n)
}

func (e *deltaEncoder) maybeDay(d **civil.Day) {
	given := *d != nil
	e.flag(&given)
	if given {
		e.day(*d)
	}
}

func (e *deltaEncoder) moment(t *time.Time) {
	e.signed(t.Unix())
	e.unsigned(uint64(t.Nanosecond()))
}

func (e *deltaEncoder) maybeMoment(t **time.Time) {
	given := *t != nil
	e.flag(&given)
	if given {
		e.moment(*t)
	}
}

// deltaDecoder reads. After a fault it is broken and gives nothing but zeros.
type deltaDecoder struct {
	rest   string
	known  []string
	last   int64
	days   []civil.Day // room for days that are pointed to
	broken bool
}

func (r *deltaDecoder) fault() {
	r.broken = true
	r.rest = ""
}

func (r *deltaDecoder) unsigned() uint64 {
	var n uint64
	for i := range min(len(r.rest), binary.MaxVarintLen64) {
		b := r.rest[i]
		n |= uint64(b&0x7f) << (7 * i)
		if b < 0x80 {
			if i == binary.MaxVarintLen64-1 && b > 1 {
				break
			}
			r.rest = r.rest[i+1:]
			return n
		}
	}
	r.fault()
	return 0
}

func (r *deltaDecoder) signed() int64 {
	n := r.unsigned()
	return int64(n>>1) ^ -int64(n&1)
}

// length is of something of which each part takes so many bytes at least.
func (r *deltaDecoder) length(n uint64, each int) int {
	if n > uint64(len(r.rest)/each) {
		r.fault()
		return 0
	}
	return int(n)
}

// leastRow is the number of bytes of the shortest row: its line, and three fields.
const leastRow = 7

func (r *deltaDecoder) count(int) int {
	r.last = 0
	return r.length(r.unsigned(), leastRow)
}

func (r *deltaDecoder) line(l *Line) {
	r.last += r.signed()
	l.Seq = r.last
	l.Ended = r.signed()
	r.own(&l.ID)
	r.shared(&l.Batch)
}

func (r *deltaDecoder) shared(s *string) {
	no := r.unsigned()
	switch {
	case no == 0:
		r.own(s)
		r.known = append(r.known, *s)
	case no <= uint64(len(r.known)):
		*s = r.known[no-1]
	default:
		r.fault()
	}
}

func (r *deltaDecoder) own(s *string) {
	n := r.length(r.unsigned(), 1)
	*s, r.rest = r.rest[:n], r.rest[n:]
}

func (r *deltaDecoder) bytes(b *[]byte) {
	n := r.unsigned()
	if n == 0 {
		return
	}
	size := r.length(n-1, 1)
	*b, r.rest = append([]byte{}, r.rest[:size]...), r.rest[size:]
}

func (r *deltaDecoder) list(l *[]string) {
	n := r.unsigned()
	if n == 0 {
		return
	}
	*l = make([]string, r.length(n-1, 1))
	for i := range *l {
		r.shared(&(*l)[i])
	}
}

func (r *deltaDecoder) number(n *int) { *n = int(r.signed()) }

func (r *deltaDecoder) flag(f *bool) {
	n := r.unsigned()
	if n > 1 {
		r.fault()
	}
	*f = n == 1
}

func (r *deltaDecoder) day(d *civil.Day) {
	n := r.signed()
	if n < math.MinInt32 || n > math.MaxInt32 {
		r.fault()
		return
	}
	*d = civil.Day(n)
}

func (r *deltaDecoder) maybeDay(d **civil.Day) {
	var given bool
	r.flag(&given)
	if !given {
		return
	}
	if len(r.days) == cap(r.days) {
		r.days = make([]civil.Day, 0, min(1024, max(1, len(r.rest))))
	}
	r.days = r.days[:len(r.days)+1]
	*d = &r.days[len(r.days)-1]
	r.day(*d)
}

func (r *deltaDecoder) moment(t *time.Time) {
	seconds, nanos := r.signed(), r.unsigned()
	if nanos >= uint64(time.Second) {
		r.fault()
		return
	}
	*t = time.Unix(seconds, int64(nanos)).UTC()
}

func (r *deltaDecoder) maybeMoment(t **time.Time) {
	var given bool
	r.flag(&given)
	if !given {
		return
	}
	*t = new(time.Time)
	r.moment(*t)
}
