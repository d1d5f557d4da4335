package scenario

import (
	"math/rand/v2"
	"slices"
	"strings"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// course is one item kept by one subject over time.
type course struct {
	*history
	item    *program.Item
	subject subject
	chance  *rand.Rand
	due     *civil.Day // the last good day by the records so far, from any span; nil: none yet
}

// run invents the records of one span.
func (c *course) run(sp span) {
	switch c.item.Cadence.Rule {
	case program.Each:
		c.each(sp)
	case program.Every, program.Within:
		c.renew(sp)
	case program.Once:
		if c.due == nil {
			c.done(sp.first)
			c.due = &sp.last
		}
	case program.After, program.Holds: // the stories have the events, and posts are filled once
	}
}

// each does one record a period, in the first half of its days that count.
func (c *course) each(sp span) {
	unit := c.item.Cadence.Each
	last := min(sp.last, c.yesterday())
	for p := civil.PeriodOf(unit, max(sp.first, c.began)); p.First <= last; p = p.Next(unit) {
		days := c.working(max(p.First, sp.first), min(p.Last, sp.last))
		if len(days) > 0 {
			c.done(days[c.chance.IntN(len(days)/2+1)])
		}
	}
}

// working are the operating days of a stretch.
func (c *course) working(first, last civil.Day) []civil.Day {
	var days []civil.Day
	for d := first; d <= last; d++ {
		if c.calendar.Operates(d) {
			days = append(days, d)
		}
	}
	return days
}

// renew does one record a cadence, each before the one before it runs out.
func (c *course) renew(sp span) {
	for day := c.opening(sp); day <= min(sp.last, c.yesterday()); day = c.next(day) {
		c.done(day)
	}
}

// opening is the day of the span's first record: of a subject that was there before the program, at
// some point of the cadence before it; of one that came later, the day on which it came or soon
// after; of one that came back in time, when its last record asks.
func (c *course) opening(sp span) civil.Day {
	switch {
	case c.due != nil && *c.due >= sp.first:
		return c.openFrom(max(sp.first, c.ahead(*c.due)))
	case sp.first < c.began:
		cycle := int(c.spacing(c.began) - c.began)
		return c.openFrom(max(sp.first, c.began-civil.Day(c.chance.IntN(cycle))))
	default:
		grace := int(sp.first.Add(c.item.First) - sp.first)
		return c.openFrom(sp.first + civil.Day(c.chance.IntN(min(grace, 10)+1)))
	}
}

// next is the day of the record after one of the given day.
func (c *course) next(day civil.Day) civil.Day {
	due := c.spacing(day)
	c.due = &due
	return max(day+1, c.ahead(due))
}

// spacing is the last good day after a record; for a count within a window, an even share of it.
func (c *course) spacing(day civil.Day) civil.Day {
	cad := c.item.Cadence
	if cad.Rule == program.Within {
		return day + (day.Add(cad.Within)-day)/civil.Day(cad.Count)
	}
	from := day
	if cad.Early != nil && c.due != nil && c.due.Sub(*cad.Early) <= day && day <= *c.due {
		from = *c.due
	}
	due := from.Add(cad.Every)
	if cad.MonthEnd {
		due = due.MonthEnd()
	}
	return due
}

// ahead is a day inside the notice before a due day, early rather than late: one on which the site
// works, and for what is done in groups, one of its sessions.
func (c *course) ahead(due civil.Day) civil.Day {
	notice := int(due-c.item.Notice.Before(due)) + 1
	early := civil.Day(notice/10 + c.chance.IntN(notice*3/10+1))
	if c.inGroups() {
		return c.session(due - early)
	}
	return c.openBy(due - early - civil.Day(notice/10))
}

// inGroups tells whether the records are those of sessions that many people come to.
func (c *course) inGroups() bool {
	kind, _, _ := strings.Cut(c.item.Records[0], "/")
	return slices.Contains([]string{"training", "screening"}, kind)
}

// done puts a record on the day.
func (c *course) done(day civil.Day) {
	r := row{what: c.item.Records[0], subject: c.subject.ref(), day: day, by: c.signer(day)}
	if c.item.Cadence.Each == civil.ByDay {
		r.clock = c.at(day, 6, 30+c.chance.IntN(28))
	}
	c.add(r)
}

// signer is who says that it was done.
func (c *course) signer(day civil.Day) string {
	kind, _, _ := strings.Cut(c.item.Records[0], "/")
	hands := signers[kind]
	switch {
	case kind == "drill" && c.subject.code == "night":
		hands = []string{nightLead}
	case c.item.Cadence.Each == civil.ByDay:
		hands = morningHands
	case kind == "acknowledgement":
		return ""
	}
	here := slices.DeleteFunc(slices.Clone(hands), func(code string) bool { return day < c.today-civil.Day(byCode(code).joined) })
	if len(here) == 0 {
		return "" // before anybody's time who is still here
	}
	return nameOf(pick(c.chance, here))
}

// signers are those who record each kind of thing.
var signers = map[string][]string{
	"training": {officer, deputy, expert}, "screening": {officer, deputy}, "inspection": {facilityHead, "S21", "S37"},
	"check": {facilityHead, "S21", officer}, "drill": {officer, deputy}, "review": {officer, director}, "appointment": {director},
}

// morningHands are the technologists who make the checks before the first patient.
var morningHands = []string{technologist, "S06", "S07", "S08", "S09", "S10"}
