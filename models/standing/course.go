package standing

import (
	"slices"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// A course is an obligation's standings over all days: points in order of day, each with the state
// that begins on its day. Before the first point, and from a point of none on, there is no obligation.
type point int32

// States by number: those of the words that open nothing, or that always open (met), at the places of
// Words; no obligation; and closing and excused where they open reach.
const (
	none = len(Words) + iota
	closingOpen
	excusedOpen
)

const (
	wordBits  = 4
	wordMask  = 1<<wordBits - 1
	dayBefore = civil.FirstDay - 1
)

func pointOf(d civil.Day, state uint8) point { return point(d)<<wordBits | point(state) }

func (p point) day() civil.Day { return civil.Day(p >> wordBits) }
func (p point) state() uint8   { return uint8(p & wordMask) }
func (p point) word() uint8    { return wordOf[p.state()] }

// wordOf is the number of a state's word.
var wordOf = [wordMask + 1]uint8{0, 1, 2, 3, 4, 5, 6, 7, uint8(none), 1, 5}

// stateOf numbers what a finding says.
func stateOf(f *finding) uint8 {
	switch {
	case f.open && f.word == Closing:
		return uint8(closingOpen)
	case f.open && f.word == Excused:
		return uint8(excusedOpen)
	}
	return codeOf(f.word)
}

// opens tells whether an obligation in the state is open in the sense of reach.
func opens(state uint8) bool {
	return state == codeOf(Met) || state == uint8(closingOpen) || state == uint8(excusedOpen)
}

// codeOf numbers a word by its place in Words.
func codeOf(w Word) uint8 {
	switch w {
	case Met:
		return 0
	case Closing:
		return 1
	case Lapsed:
		return 2
	case Missing:
		return 3
	case Failed:
		return 4
	case Excused:
		return 5
	case Awaited:
		return 6
	}
	return 7
}

// stateOn is the state on the day.
func stateOn(course []point, on civil.Day) uint8 {
	key := pointOf(on, wordMask)
	for i := len(course) - 1; i >= 0; i-- {
		if course[i] <= key {
			return course[i].state()
		}
	}
	return uint8(none)
}

// wordOn is the number of the word on the day.
func wordOn(course []point, on civil.Day) uint8 { return wordOf[stateOn(course, on)] }

// nextTurn is the day after the given one on which the state changes, noDay where none does.
func nextTurn(course []point, after civil.Day) civil.Day {
	key := pointOf(after, wordMask)
	next := noDay
	for i := len(course) - 1; i >= 0 && course[i] > key; i-- {
		next = course[i].day()
	}
	return next
}

// segment is a run of days, both ends included, on which an obligation is judged by one version and
// from one start; a faulty one cannot be judged.
type segment struct {
	first, last civil.Day
	start       civil.Day
	reign       int16
	faulty      bool
}

// segments lists, in order, the runs of days on which the item of that code is asked of the subject,
// or cannot be told to be.
func (v *view) segments(code string, l *local, to []segment) []segment {
	v.turnDays.days = v.turnDays.days[:0]
	v.turnDays.after, v.turnDays.upTo = dayBefore, civil.LastDay
	if !v.askTurns(&v.turnDays, code, l) {
		return to
	}
	days := v.turnDays.days
	slices.Sort(days)
	days = slices.Compact(days)
	for i, d := range days {
		s, ok := v.segment(code, l, d)
		if !ok {
			continue
		}
		s.last = civil.LastDay
		if i+1 < len(days) {
			s.last = days[i+1] - 1
		}
		to = append(to, s)
	}
	v.turnDays.days = days // looking back for a start takes a list of its own
	return to
}

// askTurns adds every day on which it may change whether the item is asked of the subject, from which
// start and by which version. It is false where no version asks it of such a subject.
func (v *view) askTurns(t *turns, code string, l *local) bool {
	asked := false
	var last *program.Item
	for i := range v.reigns {
		item := v.reigns[i].byCode[code]
		if item == nil || item.Asks != l.subject.Asks || item == last {
			continue
		}
		asked, last = true, item
		if item.Since != nil {
			t.add(*item.Since)
		}
		for _, sel := range [2]*program.Selector{item.When, item.Cadence.Holds} {
			if sel == nil {
				continue
			}
			for _, field := range sel.Reads() {
				v.fieldTurns(t, l, field)
			}
		}
	}
	if asked {
		v.reignTurns(t)
		v.stintTurns(t, l)
	}
	return asked
}

// segment is the run of days that begins on a turn; false where the item is not asked.
func (v *view) segment(code string, l *local, d civil.Day) (segment, bool) {
	r := v.reign(d)
	if r < 0 {
		return segment{}, false
	}
	item := v.reigns[r].byCode[code]
	if item == nil || item.Asks != l.subject.Asks || v.inForce(item, d) > d {
		return segment{}, false
	}
	p, here := v.presence(l, d)
	if !here {
		return segment{}, false
	}
	s := segment{first: d, reign: int16(r)}
	yes, err := v.matches(item, l, d)
	if err != nil {
		s.faulty = true
		return s, true
	}
	if !yes {
		return segment{}, false
	}
	s.start = v.began(item, l, max(p.since, v.inForce(item, d)), d)
	return s, true
}

// course appends the points of the obligation to a list.
func (v *view) course(code string, l *local, segments []segment, to []point) []point {
	v.due = noDay
	at := len(to)
	for i := range segments {
		s := &segments[i]
		if i > 0 && segments[i-1].last+1 < s.first {
			to = turnTo(to, at, segments[i-1].last+1, uint8(none))
		}
		to = v.stretch(code, l, s, s.first, at, to)
	}
	if n := len(segments); n > 0 && segments[n-1].last < civil.LastDay {
		to = turnTo(to, at, segments[n-1].last+1, uint8(none))
	}
	return to
}

// turnTo appends a point unless the state goes on. The course begins at the place at.
func turnTo(to []point, at int, d civil.Day, state uint8) []point {
	if n := len(to); n > at && to[n-1].state() == state || n == at && state == uint8(none) {
		return to
	}
	return append(to, pointOf(d, state))
}

// stretch appends the points of a segment from a day of it on.
func (v *view) stretch(code string, l *local, s *segment, from civil.Day, at int, to []point) []point {
	if s.faulty {
		return turnTo(to, at, from, codeOf(DataFault))
	}
	ed := v.reigns[s.reign].edition
	ob := &v.obligation
	*ob = obligation{view: v, edition: ed, item: ed.byCode[code], subject: presence{local: l}, start: s.start, started: true}
	deeds := v.gather(ob.item, l, ed, civil.LastDay)
	return v.walk(ob, deeds, s, from, at, to)
}

// walk judges the obligation on each day of the segment, from one on, on which its word may change.
// The deeds are all that bear on it, or at least those that decide from that day on.
func (v *view) walk(ob *obligation, deeds []deed, s *segment, from civil.Day, at int, to []point) []point {
	ob.excusals = v.excuse(ob.item.Code, ob.subject.local)
	var events []happening
	if ob.item.Cadence.Rule == program.After {
		events = v.happenings(ob.item, ob.subject.local, ob.edition, civil.LastDay)
	}
	n, m := 0, 0
	for d := from; d <= s.last; {
		for n < len(deeds) && deeds[n].on <= d {
			n++
		}
		for m < len(events) && events[m].on <= d {
			m++
		}
		ob.on, ob.deeds, ob.events = d, deeds[:n], events[:m]
		v.days = v.days[:0] // nothing keeps the due days of a course
		f, asked := ob.judge()
		next := civil.LastDay
		if asked {
			to = turnTo(to, at, d, stateOf(&f))
			next = f.stays
		} else {
			to = turnTo(to, at, d, uint8(none))
		}
		if n == len(deeds) && m == len(events) && len(ob.excusals) == 0 && f.ends != 0 {
			to = ob.runsOut(f, s, at, to) // nothing more will happen
			break
		}
		next = max(next, d) + 1
		if n < len(deeds) {
			next = min(next, deeds[n].on)
		}
		if m < len(events) {
			next = min(next, events[m].on)
		}
		d = nextExcusal(ob.excusals, d, next)
	}
	v.due = noDay
	if ob.fold.record != nil && ob.folded == len(deeds) && len(deeds) > 0 {
		v.due = ob.fold.due
	}
	return to
}

// runsOut appends what follows a finding that goes by a due day when nothing more happens.
func (ob *obligation) runsOut(f finding, s *segment, at int, to []point) []point {
	if ob.on < f.closes && f.closes <= s.last {
		state := codeOf(Closing)
		if f.open && ob.item.Cadence.Rule != program.Within {
			state = uint8(closingOpen)
		}
		to = turnTo(to, at, f.closes, state)
	}
	if ob.on < f.ends && f.ends <= s.last {
		to = turnTo(to, at, f.ends, codeOf(ob.gap()))
	}
	return to
}

// nextExcusal is the first day after d, and before next, on which an excusal begins or has ended.
func nextExcusal(all []*Excusal, d, next civil.Day) civil.Day {
	for _, x := range all {
		if x.From > d {
			next = min(next, x.From)
		}
		if x.To != nil && *x.To >= d {
			next = min(next, *x.To+1)
		}
	}
	return next
}
