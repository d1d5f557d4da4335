package program

import (
	"fmt"
	"slices"
	"time"

	"lodebook/models/civil"
)

// OnCall is the word of a duty on which somebody can be reached and is not there: it does not count towards a
// level unless the item says so.
const OnCall = "on-call"

// CoverDemand is who must be there: at least so many people on duty who hold the level or a higher one, or somebody who
// holds the post or is its deputy.
type CoverDemand struct {
	Level   string // or empty
	Post    string // or empty
	AtLeast int    // from 1
	Duties  []string
	AllDay  bool // in all hours and not only in the operating ones
}

// Counts tells whether being on such a duty counts: without a list any does, but on-call does not for a level.
func (c *CoverDemand) Counts(duty string) bool {
	if len(c.Duties) > 0 {
		return slices.Contains(c.Duties, duty)
	}
	return c.Post != "" || duty != OnCall
}

// Words says who must be there.
func (c *CoverDemand) Words() string {
	if c.Post != "" {
		return "the post " + c.Post + " or its deputy"
	}
	if c.AtLeast == 1 {
		return "somebody of level " + c.Level
	}
	return fmt.Sprintf("%d people of level %s", c.AtLeast, c.Level)
}

// cover reads who must be there.
func (r *reader) cover(o object, asks Asks) *CoverDemand {
	n := o.get("cover")
	if n == nil {
		return nil
	}
	if asks != AsksSite && asks != "" {
		r.fault(o.place("cover"), o.at("cover"), shown("cover"), "only an item that asks the site can have it", "write asks: site, or another cadence")
	}
	const accepted = "write {level: L2, at_least: 2} or {post: A}"
	c, ok := r.object(n, o.at("cover"), "cover")
	if !ok {
		return nil
	}
	d := &CoverDemand{AtLeast: c.whole("at_least", 1, 1)}
	level, post := c.get("level"), c.get("post")
	switch {
	case level == nil && post == nil:
		r.fault(n, c.path, "", "neither a level nor a post is given", accepted)
	case level != nil && post != nil:
		r.fault(c.place("post"), c.at("post"), shown("post"), "a post beside a level", "keep one of the two")
	case level != nil:
		d.Level = r.one(level, c.at("level"), "a level", r.p.levelCodes())
	default:
		d.Post = r.one(post, c.at("post"), "a post", r.p.postCodes())
		if d.AtLeast > 1 {
			r.wrong(c.get("at_least"), c.at("at_least"), "a post needs one person", "leave it out")
		}
	}
	d.Duties = c.distinct("duties", "write a list of words of the roster such as [duty, on-call]", func(n *node, path string) string {
		s, _ := r.code(n, path)
		return s
	})
	if n := c.get("duties"); n != nil && n.kind == list && len(n.items) == 0 {
		r.wrong(n, c.at("duties"), "no duty would ever count", "name one, or leave it out")
	}
	d.AllDay = c.word("hours", []string{"operating", "all"}) == "all"
	if r.p.Calendar.Open == [7]bool{} && !d.AllDay {
		r.fault(n, c.path, "", "the calendar has no open weekday, so there is no operating hour", "open a weekday in calendar.open, or write hours: all")
	}
	c.close()
	return d
}

// UncoveredFact is the fact of a site that tells whether the item is short of people on a day.
func UncoveredFact(item string) string { return "uncovered/" + item }

// covered is the condition of an item with cover: by what the book has reckoned, nobody is missing that day.
func covered(item string, c *CoverDemand) *Selector {
	fact := UncoveredFact(item)
	return NewSelector(c.Words()+" on duty", []string{factsField + "." + fact}, func(s Subject) (bool, error) {
		missing, known := s.Facts[fact].(bool)
		if !known {
			return false, &MissingFact{Facts: []string{"a roster for the day"}}
		}
		return !missing, nil
	})
}

// Open are the operating hours that begin on the day, in order: from the first instant, up to the second, which is
// excluded. Hours are by the wall clock: over a clock change they are longer or shorter, and of a time that comes
// twice the first opens and the second closes.
func (p *Program) Open(day civil.Day, loc *time.Location) [][2]time.Time {
	if !p.Calendar.Operates(day) {
		return nil
	}
	if len(p.Hours) == 0 {
		return [][2]time.Time{{day.Midnight(loc), (day + 1).Midnight(loc)}}
	}
	var out [][2]time.Time
	for _, h := range p.Hours {
		if h.Weekday != day.Weekday() {
			continue
		}
		from, _ := shows(day, h.From, loc)
		_, to := shows(day, h.To, loc)
		if from.Before(to) {
			out = append(out, [2]time.Time{from, to})
		}
	}
	return out
}

// shows are the first and the last instant at which the clocks show so many minutes after the beginning of the day.
// A time that is skipped is the instant of the clock change; midnight begins a day and comes once.
func shows(day civil.Day, minutes int, loc *time.Location) (first, last time.Time) {
	const whole = 24 * 60
	if day += civil.Day(minutes / whole); minutes%whole == 0 {
		t := day.Midnight(loc)
		return t, t
	}
	y, m, d := day.Date()
	clock := time.Date(y, m, d, 0, minutes%whole, 0, 0, time.UTC)
	_, before := clock.Add(-whole * time.Minute).In(loc).Zone()
	_, after := clock.Add(whole * time.Minute).In(loc).Zone()
	a := clock.Add(-time.Duration(before) * time.Second).In(loc)
	b := clock.Add(-time.Duration(after) * time.Second).In(loc)
	_, atA := a.Zone()
	_, atB := b.Zone()
	switch {
	case atA == before && atB == after:
		return a, b // the same instant but where the time comes twice
	case atA == before:
		return a, a
	case atB == after:
		return b, b
	}
	change, _ := a.ZoneBounds()
	return change, change
}
