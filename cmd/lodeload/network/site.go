package network

import (
	"fmt"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// Outline makes site number i, from 0, with its versions only.
func (n *Network) Outline(i int) *Site {
	s := &Site{n: n, no: i, Code: SiteCode(i), TimeZone: zones[i%len(zones)]}
	s.Name = placeHeads[i%len(placeHeads)] + placeTails[i/len(placeHeads)%len(placeTails)]
	if i >= len(placeHeads)*len(placeTails) {
		s.Name += fmt.Sprintf(" %d", i/(len(placeHeads)*len(placeTails))+1)
	}
	loc, err := time.LoadLocation(s.TimeZone)
	if err != nil {
		panic(err) // the program embeds the zones
	}
	s.Location = loc
	s.Versions = s.programs()
	return s
}

// Site makes site number i, from 0.
func (n *Network) Site(i int) *Site {
	s := n.Outline(i)
	h := &history{Site: s, away: map[Subject][]Pause{}}
	people := s.staff()
	fixtures := s.things()
	h.pauses(people, fixtures)
	h.people(people)
	h.fixtures(fixtures)
	h.house(people)
	h.finish()
	return s
}

// SiteCode is the code of site number i, from 0.
func SiteCode(i int) string { return fmt.Sprintf("N%04d", i+1) }

// worker is a person as the history sees them at a site.
type worker struct {
	code, name, badge string
	spans             []span
	levels, crews     []change
	employer          string
	cryogen           bool
	guest             bool // home is another site
	post              string
}

// span is a run of days, both included; last is NoDay where it is open.
type span struct{ first, last civil.Day }

func (s span) holds(d civil.Day) bool { return s.first <= d && (s.last == NoDay || d <= s.last) }

type change struct {
	from  civil.Day
	value string
}

func valueOn(list []change, d civil.Day) string {
	value := ""
	for _, c := range list {
		if c.from <= d {
			value = c.value
		}
	}
	return value
}

func (w *worker) subject() Subject { return Subject{program.AsksPerson, w.code} }

// here tells whether the person is on staff on the day.
func (w *worker) here(d civil.Day) bool {
	for _, s := range w.spans {
		if s.holds(d) {
			return true
		}
	}
	return false
}
