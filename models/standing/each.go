package standing

import "lodebook/models/civil"

// asked is a period and the first and last of its days that count.
type asked struct {
	civil.Period
	first, last civil.Day
}

// schedule knows which periods of an item with each ask.
type schedule struct {
	unit     civil.Unit
	calendar civil.Calendar // every day, or the operating days
	from     civil.Day      // a period asks if its last counted day is not before this
	excusals []*Excusal
}

func (ob *obligation) schedule() schedule {
	s := schedule{unit: ob.item.Cadence.Each, calendar: civil.EveryDay(), excusals: ob.excusals}
	if ob.item.Cadence.Operating {
		s.calendar = ob.edition.Program.Calendar
	}
	s.from = ob.begins().Add(ob.item.First)
	return s
}

// each wants a record in every period that asks. The steps (i) to (iv) are those of the design.
func (ob *obligation) each() finding {
	s := ob.schedule()
	p, ok := s.current(ob.on)
	if !ok {
		return finding{word: Awaited, stays: ob.on} // the site never opens, so nothing will ever be asked
	}
	d, any := ob.accepted()
	if any && d.on >= p.First { // (i)
		f := finding{word: Met, record: d.record, period: p, from: d.on, open: true, lasts: s.next(p.Period).first - 1}
		f.stays = f.lasts
		if n, ok := s.asking(p.Next(s.unit), s.from); ok {
			f.due = ob.day(n.last)
		}
		return f
	}
	missed := func(a asked) bool { return !any || d.on < a.First }
	if q, ok := s.latest(p, ob.on, ob.item.Grace); ok && missed(q) { // (ii)
		return finding{word: ob.gap(), due: ob.day(q.last), period: q, since: q.last.Add(ob.item.Grace) + 1, stays: civil.LastDay}
	}
	if r, ok := s.latest(p, ob.on, civil.Duration{}); ok && missed(r) { // (iii)
		return finding{word: Closing, due: ob.day(r.last), period: r, from: ob.spanBegan(), stays: ob.on}
	}
	n, ok := s.asking(civil.PeriodOf(s.unit, ob.on), max(s.from, ob.on)) // (iv)
	if !ok {
		return finding{word: Awaited, stays: civil.LastDay}
	}
	f := finding{word: Awaited, due: ob.day(n.last), period: n, from: ob.spanBegan()}
	if notice := ob.item.Notice.Before(n.last); ob.on < notice {
		f.stays = notice - 1
	} else {
		f.word, f.stays = Closing, n.last
	}
	return f
}

// spanBegan is the day of the last accepted record, or the start.
func (ob *obligation) spanBegan() civil.Day {
	if d, any := ob.accepted(); any {
		return d.on
	}
	return ob.begins()
}

// counted finds the first and last counted day of a period; false where it has none.
func (s *schedule) counted(p civil.Period) (asked, bool) {
	a := asked{Period: p, first: p.First, last: p.Last}
	for a.first <= a.last && !s.calendar.Operates(a.first) {
		a.first++
	}
	for a.last > a.first && !s.calendar.Operates(a.last) {
		a.last--
	}
	return a, a.first <= a.last
}

// opens tells whether the calendar has an open weekday at all. Without one no period ever counts.
func (s *schedule) opens() bool { return s.calendar.Open != [7]bool{} }

// current is the latest period whose first counted day is on or before the day, whether it asks
// or not.
func (s *schedule) current(on civil.Day) (asked, bool) {
	for p := civil.PeriodOf(s.unit, on); s.opens() && p.Last >= civil.FirstDay; p = p.Prev(s.unit) {
		if a, ok := s.counted(p); ok && a.first <= on {
			return a, true
		}
	}
	return asked{}, false
}

// next is the first period after p that has a counted day.
func (s *schedule) next(p civil.Period) asked {
	for {
		p = p.Next(s.unit)
		if a, ok := s.counted(p); ok || p.First > civil.LastDay {
			return a
		}
	}
}

// asking is the first period from p on that asks and whose last counted day is not before the day;
// false where none ever will. It strides over the days before and over whole excusals.
func (s *schedule) asking(p civil.Period, notBefore civil.Day) (asked, bool) {
	for s.opens() && p.First <= civil.LastDay {
		a, ok := s.counted(p)
		resume := p.Last + 1
		if ok && a.last < notBefore {
			resume = max(resume, notBefore)
		} else if ok {
			x := s.excused(a)
			if x == nil {
				return a, true
			}
			resume = max(resume, x.end()+1)
		}
		p = civil.PeriodOf(s.unit, resume)
	}
	return asked{}, false
}

// latest is the latest period up to p that asks and whose last counted day, a grace later, is
// before the day.
func (s *schedule) latest(p asked, on civil.Day, grace civil.Duration) (asked, bool) {
	for q := p.Period; q.Last >= s.from; {
		a, ok := s.counted(q)
		before := q.First - 1
		if ok && a.last >= s.from && a.last.Add(grace) < on {
			if s.excused(a) == nil {
				return a, true
			}
			before = min(before, s.excusedFrom(a)-1)
		}
		q = civil.PeriodOf(s.unit, before)
	}
	return asked{}, false
}

// excused is nil unless every counted day of the period is excused; then it is the excusal of its
// last counted day that lasts longest.
func (s *schedule) excused(a asked) *Excusal {
	if len(s.excusals) == 0 {
		return nil
	}
	for d := a.first; d <= a.last; d++ {
		if s.calendar.Operates(d) && longest(s.excusals, d, civil.FirstDay-1) == nil {
			return nil
		}
	}
	return longest(s.excusals, a.last, civil.FirstDay-1)
}

// excusedFrom is the earliest begin of the excusals of the period's first counted day.
func (s *schedule) excusedFrom(a asked) civil.Day {
	from := a.first
	for _, x := range s.excusals {
		if x.covers(a.first) {
			from = min(from, x.From)
		}
	}
	return from
}
