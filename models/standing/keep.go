package standing

import (
	"cmp"
	"slices"
	"strings"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// happenedTo brings the boards up to date with what happened to a subject: a person's at every site
// where they are known, any other's at its own.
func (e *Engine) happenedTo(site string, p *past, l *local, c change) {
	if l != nil {
		e.changed(e.owned(site), l, c)
		return
	}
	for _, h := range p.homes {
		// Owned also where no board is made: a reader of the engine before may be making one, without the change.
		s := e.ownedSite(h.site)
		e.changed(s, s.locals[h.local], c)
	}
}

// changed brings the site's board, if it has one, up to date with a change of a subject.
func (e *Engine) changed(s *site, l *local, c change) {
	if s.made.Load() == nil {
		return
	}
	b := e.ownedBoard(s)
	v := e.writing(s, b)
	delete(v.ladders, l.no)
	from := len(b.memo.tracks) // changes may come inside changes
	b.memo.tracks = b.plan.touched(&c, l, b.memo.tracks)
	for _, i := range b.memo.tracks[from:] {
		if b.plan.confers[i] {
			e.refresh(b, v, i, l, &c)
		}
	}
	for _, i := range b.memo.tracks[from:] { // which may hang on the level held
		if !b.plan.confers[i] {
			e.refresh(b, v, i, l, &c)
		}
	}
	b.memo.tracks = b.memo.tracks[:from]
	if l.subject.Asks == program.AsksPerson && (c.stint || c.post != "") {
		e.refill(s, b, v, l)
	}
}

// refill brings up to date what hangs on who holds the posts that the person was ever appointed to.
func (e *Engine) refill(s *site, b *board, v *view, person *local) {
	readers := addAll(slices.Clone(b.plan.fields["holders"]), 0, b.plan.fields["deputies"])
	readers = addAll(readers, 0, b.plan.other)
	if len(readers) == 0 {
		return
	}
	for post, list := range s.appointed {
		if no, ok := s.number[Subject{program.AsksPost, strings.TrimSuffix(post, deputy)}]; ok && slices.Contains(list, person.no) {
			for _, i := range readers {
				e.refresh(b, v, i, s.locals[no], &change{fact: "holders"})
			}
		}
	}
}

// ownedBoard gives the board to write on.
func (e *Engine) ownedBoard(s *site) *board {
	b := s.made.Load()
	if b.own != e.own {
		c := *b
		c.own = e.own
		c.tracks, c.tallies = slices.Clone(b.tracks), slices.Clone(b.tallies)
		b = &c
		s.made.Store(b)
	}
	if b.memo == nil {
		b.memo = &memo{calendar: newCalendar(0), answers: map[*program.Selector]*answers{}}
	}
	return b
}

// ownedTrack gives the track to write on.
func (b *board) ownedTrack(own *owner, i int32) *track {
	t := b.tracks[i]
	if t.own != own {
		c := *t
		c.own = own
		c.rows, c.asked = slices.Clone(t.rows), slices.Clone(t.asked)
		t = &c
		b.tracks[i] = t
	}
	return t
}

// writing is the view through which the writer brings a board up to date.
func (e *Engine) writing(s *site, b *board) *view {
	if v := e.views[s.no]; v != nil && v.site == s && v.board == b {
		return v
	}
	v := e.viewOf(s, Always)
	v.board, v.answers, v.beneath.answers = b, b.memo.answers, b.memo.answers
	if e.views == nil {
		e.views, e.room = map[int32]*view{}, [2]*scratch{v.scratch, v.beneath.scratch}
	}
	v.scratch, v.beneath.scratch = e.room[0], e.room[1] // one room for all sites lies nearer at hand
	e.views[s.no] = v
	return v
}

// refresh makes the course of an item and a subject anew, from the change on.
func (e *Engine) refresh(b *board, v *view, i int32, l *local, c *change) {
	no := b.row(i, l.no)
	written := false
	if no >= 0 && c.done && b.plan.plain[i] && v.within(&b.tracks[i].asked[no], c) {
		written = e.goOn(b, v, i, no, l, c)
	} else {
		no, written = e.anew(b, v, i, no, l)
	}
	if written {
		b.follow(i, no)
	}
}

// within tells whether the record bears on no day before the last segment of the row. The zone of another
// version may give it another day, by one at most.
func (v *view) within(a *asking, c *change) bool {
	return a.reign >= 0 && (!a.before || c.record.in(v.reigns[a.reign].loc)-1 >= a.first)
}

// anew makes the whole course, and a row for it where there is none yet.
func (e *Engine) anew(b *board, v *view, i, no int32, l *local) (int32, bool) {
	m, code := b.memo, b.plan.items[i]
	m.segments = v.segments(code, l, m.segments[:0])
	m.course = v.course(code, l, m.segments, m.course[:0])
	if no < 0 && len(m.course) == 0 {
		return no, false
	}
	t := b.ownedTrack(e.own, i)
	if no < 0 {
		return b.addRow(e.own, i, v.askingOf(l.no, m.segments), m.course), true
	}
	t.asked[no] = v.askingOf(l.no, m.segments)
	t.rewrite(no, m.course)
	return no, true
}

// goOn writes the course anew from a record's day on: what is done on a day bears on no day before it.
// It is false where nothing changes.
func (e *Engine) goOn(b *board, v *view, i, no int32, l *local, c *change) bool {
	t := b.tracks[i]
	a := t.asked[no]
	ed, item := v.reigns[a.reign].edition, t.judged[a.reign]
	from := max(c.record.in(ed.loc), a.first)
	if from > a.last || !slices.Contains(item.Records, e.kinds.what[c.kind]) || c.behind && c.record.ended != 0 {
		return false
	}
	old := t.course(no)
	keep := len(old)
	for keep > 0 && old[keep-1].day() >= from {
		keep--
	}
	m := b.memo
	m.course = append(m.course[:0], old[:keep]...)
	ob := &v.obligation
	*ob = obligation{view: v, edition: ed, item: item, subject: presence{local: l}, start: a.start, started: true}
	s := segment{first: a.first, last: a.last, start: a.start, reign: a.reign}
	deeds := v.deciding(ob, l, &a, c)
	same := v.unchangedFrom(item, deeds, from)
	s.last = min(s.last, same-1)
	m.course = v.walk(ob, deeds, &s, from, 0, m.course)
	if same <= a.last {
		m.course = turnTo(m.course, 0, same, stateOn(old, same))
		for _, p := range old {
			if p.day() > same {
				m.course = append(m.course, p)
			}
		}
		v.due = a.due
	} else if a.last < civil.LastDay {
		m.course = turnTo(m.course, 0, a.last+1, uint8(none))
	}
	if v.due != a.due {
		b.ownedTrack(e.own, i).asked[no].due = v.due
	}
	if slices.Equal(old, m.course) {
		return false
	}
	b.ownedTrack(e.own, i).rewrite(no, m.course)
	return true
}

// unchangedFrom is the day of the first accepted record after the day, of an item that goes by the last one
// alone: from it on nothing hangs on what was before. Else it is after all days.
func (v *view) unchangedFrom(item *program.Item, deeds []deed, after civil.Day) civil.Day {
	if item.Cadence.Rule != program.Each && item.Cadence.Rule != program.Once {
		return noDay
	}
	i, _ := slices.BinarySearchFunc(deeds, after+1, func(d deed, day civil.Day) int { return cmp.Compare(d.on, day) })
	for ; i < len(deeds); i++ {
		if deeds[i].passed {
			return deeds[i].on
		}
	}
	return noDay
}

// deciding lists the deeds that decide the item's standings from the changed record on. For most rules
// a few of the last do; the rest may be many.
func (v *view) deciding(ob *obligation, l *local, a *asking, c *change) []deed {
	item, ed := ob.item, ob.edition
	if len(item.Records) > 1 {
		return v.gather(item, l, ed, civil.LastDay)
	}
	wants := 1
	switch item.Cadence.Rule {
	case program.Each, program.Once:
	case program.Within:
		wants = item.Cadence.Count
	case program.Every:
		if d, ok := v.lastDeed(item, l, ed); ok && c.behind && a.due != noDay {
			ob.fold = renewal{deed: deed{a.first, &folded}, due: a.due}
			return append(v.deeds[:0], d)
		}
		return v.gather(item, l, ed, civil.LastDay)
	default:
		return v.gather(item, l, ed, civil.LastDay)
	}
	return v.lastDeeds(item, l, ed, wants, c.record.in(ed.loc))
}

// folded stands for the records that made a due day.
var folded record

// lastDeed is the last record of an item that one kind answers, if it is after all others in the zone
// too.
func (v *view) lastDeed(item *program.Item, l *local, ed *edition) (deed, bool) {
	list := v.records(l, item.Records[0])
	n := len(list)
	if n < 2 || item.Local {
		return deed{}, false
	}
	last, other := &list[n-1], &list[n-2]
	d, o := deed{last.in(ed.loc), last}, deed{other.in(ed.loc), other}
	return d, o.on < d.on || last.at == untimed && other.at == untimed
}

// lastDeeds lists the last deeds: as many as hold accepted ones of so many days before the given one,
// and a few more, since zones may order them otherwise.
func (v *view) lastDeeds(item *program.Item, l *local, ed *edition, wants int, before civil.Day) []deed {
	list := v.records(l, item.Records[0])
	out := v.deeds[:0]
	enough := noDay // records of days before it need not be looked at
	for i := len(list) - 1; i >= 0; i-- {
		r := &list[i]
		if !r.knownAt(v.k) || item.Local && int32(r.site) != v.site.no {
			continue
		}
		d := r.in(ed.loc)
		if enough != noDay && d < enough {
			break
		}
		out = append(out, deed{d, r})
		if r.passed && d < before {
			if wants--; wants <= 0 && enough == noDay {
				enough = d - 2
			}
			before = d
		}
	}
	slices.Reverse(out)
	if !slices.IsSortedFunc(out, compareDeeds) {
		slices.SortFunc(out, compareDeeds)
	}
	v.deeds = out
	return out
}

// follow counts a row whose course was written under its state of the present day, and puts its next
// turn in the calendar.
func (b *board) follow(i, no int32) {
	if b.present == noDay {
		return
	}
	t := b.tracks[i]
	course := t.course(no)
	r := &t.rows[no]
	if now := stateOn(course, b.present); now != r.now() {
		b.tallies[i][r.now()]--
		b.tallies[i][now]++
		r.size = r.size&^wordMask | uint32(now)
	}
	if next := nextTurn(course, b.present); next != noDay {
		b.memo.calendar.put(next, ref{i, no})
	}
}

// Turn makes a day the present one of the site: the counts of that day are then kept current. From one
// day to a later one only the obligations whose standing may change between them are looked at.
func (e *Engine) Turn(site string, to civil.Day) {
	no, ok := e.number[site]
	if !ok || len(e.sites[no].editions) == 0 {
		return
	}
	if b := e.board(e.sites[no]); b.present == to {
		return
	}
	s := e.ownedSite(no)
	b := e.ownedBoard(s)
	const stride = 400 // beyond so many days it is quicker to look at all
	m := *b.memo       // a fork that is thrown away leaves the calendar of the other as it is
	b.memo = &m
	if b.present == noDay || to < b.present || to > b.present+stride {
		m.calendar = newCalendar(to)
		b.turnAll(e.own, to)
		return
	}
	m.calendar = m.calendar.from(b.present)
	was := b.present
	b.present = to
	for d := was + 1; d <= to; d++ {
		for _, r := range b.memo.calendar.on(d) {
			if int(r.row) < len(b.tracks[r.track].rows) {
				b.ownedTrack(e.own, r.track)
				b.follow(r.track, r.row)
			}
		}
	}
}

// turnAll looks at every row.
func (b *board) turnAll(own *owner, to civil.Day) {
	b.present, b.tallies = to, make([]counter, len(b.tracks))
	for i := range b.tracks {
		t := b.ownedTrack(own, int32(i))
		for no := range t.rows {
			b.tallies[i][t.rows[no].now()]++
			b.follow(int32(i), int32(no))
		}
	}
}

// Present is the present day of a site (see Turn); false where it has none yet.
func (e *Engine) Present(site string) (civil.Day, bool) {
	if s := e.site(site); s != nil {
		if b := s.made.Load(); b != nil && b.present != noDay {
			return b.present, true
		}
	}
	return 0, false
}
