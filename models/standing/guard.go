package standing

import (
	"cmp"
	"slices"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// Guard tells, to the instant, what stands between people and the zones of a site, as known at one moment. It is for
// one caller at a time, and good as long as its engine is not written on.
type Guard struct {
	v      *view
	course bool                     // the boards are of the same moment
	guards map[string][]string      // see Items
	ofDay  map[editionZone][]string // see ItemsAt
	turns  []time.Time              // see Stretches
}

// Guard makes ready to tell about a site as known at k. The error tells that the site is not known.
func (e *Engine) Guard(site string, k int64) (*Guard, error) {
	v, err := e.view(site, k)
	if err != nil {
		return nil, err
	}
	g := &Guard{v: v, course: k == e.known, guards: map[string][]string{}, ofDay: map[editionZone][]string{}}
	if g.course {
		v.board = e.board(v.site)
	}
	return g, nil
}

// Stretch is what one guarding item says of a person and a zone from an instant on, until the next one.
type Stretch struct {
	From  time.Time // of the first: zero, which is before every instant
	Asked bool      // there is an obligation, or none can be told for want of a fact
	Open  bool
	Word  Word // empty where it is not asked
	// Limited tells that nothing but the limit of the latest accepted record keeps it from opening the zone.
	Limited bool
	Due     *civil.Day
}

// same tells whether two stretches say the same.
func (s *Stretch) same(o *Stretch) bool {
	return s.Asked == o.Asked && s.Open == o.Open && s.Word == o.Word && s.Limited == o.Limited &&
		(s.Due == nil) == (o.Due == nil) && (s.Due == nil || *s.Due == *o.Due)
}

// Items are the codes of all items that guard the zone in some version, those of the last version first and in its
// order.
func (g *Guard) Items(zone string) []string {
	if codes, ok := g.guards[zone]; ok {
		return codes
	}
	codes := []string{}
	for i := len(g.v.reigns) - 1; i >= 0; i-- {
		items := g.v.reigns[i].Program.Items
		for j := range items {
			if guards(&items[j], zone) && !slices.Contains(codes, items[j].Code) {
				codes = append(codes, items[j].Code)
			}
		}
	}
	g.guards[zone] = codes
	return codes
}

// ItemsAt are the codes of the items that guard the zone by the version of the instant's day, in the program's order.
func (g *Guard) ItemsAt(zone string, t time.Time) []string {
	i := g.v.reign(g.v.dayAt(t))
	if i < 0 {
		return nil
	}
	ed := g.v.reigns[i].edition
	key := editionZone{ed, zone}
	codes, ok := g.ofDay[key]
	if !ok {
		for i := range ed.Program.Items {
			if item := &ed.Program.Items[i]; guards(item, zone) {
				codes = append(codes, item.Code)
			}
		}
		g.ofDay[key] = codes
	}
	return codes
}

type editionZone struct {
	*edition
	zone string
}

// guards tells whether the item keeps the zone: only those can that ask a person and have every, once or after.
func guards(item *program.Item, zone string) bool {
	switch item.Cadence.Rule {
	case program.Every, program.Once, program.After:
		return item.Asks == program.AsksPerson && slices.Contains(item.Guards, zone)
	}
	return false
}

// At is what the item says at an instant. Due is there only where it is asked and not open.
func (g *Guard) At(item, zone, person string, t time.Time) Stretch {
	l := g.person(person)
	on := g.v.dayAt(t)
	s, ok := g.byCourse(item, zone, l, on)
	if !ok {
		s = g.at(item, zone, l, t, on)
	}
	s.From = t
	return s
}

// byCourse is what the item says through a day by its course alone; false where that does not tell, because
// something was done or happened on the day, or the item is shut and it takes more to say why.
func (g *Guard) byCourse(code, zone string, l *local, on civil.Day) (Stretch, bool) {
	if !g.course {
		return Stretch{}, false
	}
	ed := g.v.edition(on)
	if ed == nil || ed.byCode[code] == nil || !guards(ed.byCode[code], zone) {
		return Stretch{}, true
	}
	if g.stirs(ed, code, l, on, on) || g.restricted(ed, code, l) {
		return Stretch{}, false
	}
	state := stateOn(g.points(code, l), on)
	switch {
	case state == uint8(none):
		return Stretch{}, true
	case opens(state):
		return Stretch{Asked: true, Open: true, Word: Words[wordOf[state]]}, true
	}
	return Stretch{}, false
}

// stirs tells whether anything was done or happened from one day through another that bears on the item. Ended and
// unknown lines count as well: then it says yes too often.
func (g *Guard) stirs(ed *edition, code string, l *local, from, to civil.Day) bool {
	item := ed.byCode[code]
	for _, what := range item.Records {
		list := g.v.records(l, what)
		for i := len(list) - 1; i >= 0; i-- { // in order of their days in UTC, a day at most from those of any zone
			r := &list[i]
			day := r.in(time.UTC)
			if day < from-1 {
				break
			}
			if r.at != untimed {
				day = r.in(ed.loc)
			}
			if from <= day && day <= to {
				return true
			}
		}
	}
	for _, event := range item.Cadence.After {
		for _, ev := range g.v.past(l).eventsOf(event) {
			if day := dayIn(ev.Day, ev.Time, ed.loc); from <= day && day <= to {
				return true
			}
		}
	}
	return false
}

// at judges the item by what counts at an instant of a day: all that is of earlier days, and of the day itself what
// has come by then.
func (g *Guard) at(code, zone string, l *local, t time.Time, on civil.Day) Stretch {
	v := g.v
	ed := v.edition(on)
	if ed == nil {
		return Stretch{}
	}
	item := ed.byCode[code]
	if item == nil || !guards(item, zone) || v.inForce(item, on) > on {
		return Stretch{}
	}
	p, here := v.presence(l, on)
	if !here {
		return Stretch{}
	}
	yes, err := v.matches(item, l, on)
	if err != nil {
		return Stretch{Asked: true, Word: DataFault}
	}
	if !yes {
		return Stretch{}
	}
	ob := &v.obligation
	*ob = obligation{view: v, edition: ed, item: item, subject: p, on: on}
	ob.deeds = effective(v.gather(item, l, ed, on), on, t)
	ob.excusals = v.excuse(item.Code, l)
	if item.Cadence.Rule == program.After {
		ob.events = begun(v.happenings(item, l, ed, on), on, t)
	}
	f, asked := ob.judge()
	if !asked {
		return Stretch{}
	}
	s := Stretch{Asked: true, Open: f.open, Word: f.word}
	if f.due != nil {
		due := *f.due // which points into a list that is written over
		s.Due = &due
	}
	if last, ok := ob.accepted(); ok && f.open && !v.e.limits.allow(last.limit, zone) {
		s.Open, s.Limited = false, true
	}
	return s
}

// effective leaves of deeds up to a day those that count at an instant of it: of the day itself a pass with a time
// from that time on and one without not at all, a failure from its time or all day. The list is written over.
func effective(deeds []deed, on civil.Day, t time.Time) []deed {
	at := t.UnixMicro()
	return slices.DeleteFunc(deeds, func(d deed) bool {
		if d.on != on {
			return false
		}
		if d.at == untimed {
			return d.passed
		}
		return d.at > at
	})
}

// begun leaves of events up to a day those that have happened by an instant of it: one without a time has from the
// day's first instant on.
func begun(events []happening, on civil.Day, t time.Time) []happening {
	return slices.DeleteFunc(events, func(h happening) bool { return h.on == on && h.Time != nil && h.Time.After(t) })
}

// Stretches is what the item says of the person and the zone over all time, in order; neighbours differ.
func (g *Guard) Stretches(item, zone, person string) []Stretch {
	v := g.v
	l := g.person(person)
	g.itemTurns(item, l, civil.FirstDay)
	g.startTurns(item, l)
	out := []Stretch{{}}
	for _, t := range g.turns {
		s := g.at(item, zone, l, t, v.dayAt(t))
		if s.From = t; !s.same(&out[len(out)-1]) {
			out = append(out, s)
		}
	}
	return out
}

// Ends tells when an item stops letting a person in: shuts is the first instant after t at which it is asked and not
// open, rests the first one before that at which it is not asked. Either is zero where there is none.
func (g *Guard) Ends(item, zone, person string, t time.Time) (shuts, rests time.Time) {
	l := g.person(person)
	on := g.v.dayAt(t)
	if g.settled(item, zone, l, on) {
		return g.courseEnds(item, l, on)
	}
	g.itemTurns(item, l, on)
	for _, turn := range g.turns {
		if !turn.After(t) {
			continue
		}
		day := g.v.dayAt(turn)
		s, ok := g.byCourse(item, zone, l, day)
		if !ok {
			s = g.at(item, zone, l, turn, day)
		}
		if s.Asked && !s.Open {
			return turn, rests
		}
		if !s.Asked && rests.IsZero() {
			rests = turn
		}
	}
	return time.Time{}, rests
}

// restricted tells whether any record that answers the item has a limit, about which courses say nothing.
func (g *Guard) restricted(ed *edition, code string, l *local) bool {
	if len(g.v.e.limits.zones) == 0 {
		return false
	}
	for _, what := range ed.byCode[code].Records {
		if slices.ContainsFunc(g.v.records(l, what), func(r record) bool { return r.limit != 0 }) {
			return true
		}
	}
	return false
}

// settled tells whether the course of the item says all that there is from a day on: nothing was done or happens then,
// and no other version comes.
func (g *Guard) settled(code, zone string, l *local, on civil.Day) bool {
	v := g.v
	i := v.reign(on)
	if !g.course || i < 0 || i < len(v.reigns)-1 {
		return false
	}
	item := v.reigns[i].byCode[code]
	return item != nil && guards(item, zone) && !g.stirs(v.reigns[i].edition, code, l, on, civil.LastDay) && !g.restricted(v.reigns[i].edition, code, l)
}

// courseEnds is Ends by the course.
func (g *Guard) courseEnds(code string, l *local, on civil.Day) (shuts, rests time.Time) {
	points := g.points(code, l)
	for i, p := range points {
		switch {
		case p.day() <= on:
		case i+1 < len(points) && g.v.dawn(p.day()).Equal(g.v.dawn(points[i+1].day())): // through a day that never was
		case p.state() == uint8(none):
			if rests.IsZero() {
				rests = g.v.dawn(p.day())
			}
		case !opens(p.state()):
			return g.v.dawn(p.day()), rests
		}
	}
	return time.Time{}, rests
}

// itemTurns lists, in order, the instants of a day and later at which what the item says may change: where its course
// turns, where versions do, and on days on which something was done or happened each instant of it, the day's first
// and the next one's.
func (g *Guard) itemTurns(code string, l *local, since civil.Day) {
	v := g.v
	g.turns = g.turns[:0]
	for _, p := range g.points(code, l) {
		if p.day() >= since {
			g.turns = append(g.turns, v.dawn(p.day()))
		}
	}
	for _, r := range v.reigns {
		if r.from >= since {
			g.turns = append(g.turns, v.dawn(r.from))
		}
		item := r.byCode[code]
		if item == nil {
			continue
		}
		for _, what := range item.Records {
			list := v.records(l, what)
			for i := range list {
				if rec := &list[i]; rec.knownAt(v.k) {
					g.dayTurns(rec.in(r.loc), rec.time(), since)
				}
			}
		}
		for _, event := range item.Cadence.After {
			for _, ev := range v.past(l).eventsOf(event) {
				if ev.KnownAt(v.k) {
					g.dayTurns(dayIn(ev.Day, ev.Time, r.loc), ev.Time, since)
				}
			}
		}
	}
	g.sortTurns()
}

// startTurns adds the days on which the item may begin to be asked from another start: its word may stay then, but a
// due day that is counted from the start does not.
func (g *Guard) startTurns(code string, l *local) {
	t := turns{after: dayBefore, upTo: civil.LastDay}
	g.v.askTurns(&t, code, l)
	for _, d := range t.days {
		g.turns = append(g.turns, g.v.dawn(d))
	}
	g.sortTurns()
}

func (g *Guard) sortTurns() {
	slices.SortFunc(g.turns, time.Time.Compare)
	g.turns = slices.CompactFunc(g.turns, time.Time.Equal)
}

func (g *Guard) dayTurns(on civil.Day, at *time.Time, since civil.Day) {
	if on < since {
		return
	}
	g.turns = append(g.turns, g.v.dawn(on), g.v.dawn(on+1))
	if at != nil {
		g.turns = append(g.turns, at.UTC())
	}
}

// points is the course of the item asked of the person.
func (g *Guard) points(code string, l *local) []point {
	if g.course {
		if i, asked := g.v.board.plan.number[code]; asked && l.no >= 0 {
			if row := g.v.board.row(i, l.no); row >= 0 {
				return g.v.board.tracks[i].course(row)
			}
		}
		return nil
	}
	return g.v.course(code, l, g.v.segments(code, l, nil), nil)
}

// Versions are the instants from which each version judges, in order.
func (g *Guard) Versions() []time.Time {
	var out []time.Time
	for _, r := range g.v.reigns {
		out = append(out, g.v.dawn(r.from))
	}
	return out
}

// Dawn is the first instant of a day at the site.
func (g *Guard) Dawn(on civil.Day) time.Time { return g.v.dawn(on) }

// Day is the day of an instant at the site.
func (g *Guard) Day(t time.Time) civil.Day { return g.v.dayAt(t) }

// Grants are the times in which rights of the person are in force, of all zones.
func (g *Guard) Grants(person string) []Grant { return g.v.grants(g.person(person)) }

// Granted are the instants from which rights of the person in the zone were granted, whether they were ever in force
// or not.
func (g *Guard) Granted(person, zone string) []time.Time {
	var out []time.Time
	for _, r := range g.person(person).rights {
		if r.Zone == zone && r.KnownAt(g.v.k) {
			out = append(out, r.From)
		}
	}
	return out
}

// Holds tells whether a right of the person in the zone holds at the instant by its own span, whether they are on
// staff or not.
func (g *Guard) Holds(person, zone string, t time.Time) bool {
	l := g.person(person)
	for i := range l.rights {
		r := &l.rights[i]
		if r.Zone == zone && r.KnownAt(g.v.k) && !g.v.replaced(l, i) && !r.From.After(t) && (r.To == nil || r.To.After(t)) {
			return true
		}
	}
	return false
}

func (g *Guard) person(code string) *local { return g.v.local(Subject{program.AsksPerson, code}) }

// Days is a run of days; First may be civil.FirstDay and Last civil.LastDay, where it is open.
type Days struct{ First, Last civil.Day }

// Present are the days on which the person is on staff.
func (g *Guard) Present(person string) []Days {
	l := g.person(person)
	var out []Days
	for i := range l.stints {
		if s := &l.stints[i]; g.v.stands(l, i) {
			out = append(out, daysOf(s.First, s.Last))
		}
	}
	return out
}

// Paused are the days on which the person is paused.
func (g *Guard) Paused(person string) []Days {
	l := g.person(person)
	var out []Days
	for i := range g.v.past(l).pauses {
		if x := &g.v.past(l).pauses[i]; x.KnownAt(g.v.k) {
			out = append(out, daysOf(&x.From, x.To))
		}
	}
	return out
}

func daysOf(first, last *civil.Day) Days {
	d := Days{civil.FirstDay, civil.LastDay}
	if first != nil {
		d.First = *first
	}
	if last != nil {
		d.Last = *last
	}
	return d
}

// People are, by code, all of whom anything is on record at the site.
func (g *Guard) People() []string {
	list := g.v.site.ofKind[program.AsksPerson]
	out := make([]string, len(list))
	for i, no := range list {
		out[i] = g.v.site.locals[no].subject.Code
	}
	slices.Sort(out)
	return out
}

// Changes are, in order, the sequence numbers by which anything that bears on the person at the site, or on
// everybody there, came on record or off it. Between two of them what is known of the person stays the same.
func (e *Engine) Changes(site, person string) []int64 {
	at := e.site(site)
	if at == nil {
		return nil
	}
	var out []int64
	line := func(l Line) {
		out = append(out, l.Seq)
		if l.Ended > 0 {
			out = append(out, l.Ended)
		}
	}
	for _, ed := range at.editions {
		line(ed.Line)
	}
	if no, ok := at.number[Subject{program.AsksPerson, person}]; ok {
		at.locals[no].lines(line)
	}
	if no, ok := e.names.find(person); ok {
		e.people.at(no).lines(line)
	}
	slices.SortFunc(out, cmp.Compare[int64])
	return slices.Compact(out)
}

// lines calls fn with every line of the subject at the site.
func (l *local) lines(fn func(Line)) {
	for i := range l.stints {
		fn(l.stints[i].Line)
	}
	for i := range l.rights {
		fn(l.rights[i].Line)
	}
	for _, of := range l.facts {
		for i := range of.list {
			fn(of.list[i].Line)
		}
	}
	for _, of := range l.excusals {
		for i := range of.list {
			fn(of.list[i].Line)
		}
	}
}

// lines calls fn with every line of what happened to the subject.
func (p *past) lines(fn func(Line)) {
	for _, of := range p.deeds {
		for i := range of.list {
			fn(Line{Seq: int64(of.list[i].seq), Ended: int64(of.list[i].ended)})
		}
	}
	for _, of := range p.events {
		for i := range of.list {
			fn(of.list[i].Line)
		}
	}
	for i := range p.pauses {
		fn(p.pauses[i].Line)
	}
}
