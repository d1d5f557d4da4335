package web

import (
	"html/template"
	"slices"
	"strings"

	"lodebook/models/book"
	"lodebook/models/standing"
)

// crowd is the list of people to tick, with what chooses whom it shows. Without a script its buttons
// send the whole form, so that nothing typed is lost; nothing is kept by them.
type crowd struct {
	Label, HelpText, Fault string
	Lines, Guests          []crowdLine
	GuestsOpen             bool
	Crews                  []option
	ByStanding, OnlyDue    bool
	Find                   string
	Shown, Total, Ticked   int
	Cut                    bool // more fit than are shown
	Hidden                 []hidden
}

// crowdLine is one person of the list.
type crowdLine struct {
	Code, Name, Note, Crew, Text string
	Word                         standing.Word // what the record answers for them; empty where it is of no matter
	Disc                         template.HTML
	Ticked, Failed, Hidden       bool
	MayFail                      bool
}

// most people that one list shows beside those who are ticked.
const crowdMost = 300

// The names of the fields that choose whom a list shows, and of the button.
const (
	crowdCrew = "show-crew"
	crowdFind = "show-find"
	crowdDue  = "show-due"
	crowdDo   = "do"
)

// choosing tells that a button of the list was pressed: the form is shown again and not kept.
func choosing(f *Form) bool { return f.Get(crowdDo) != "" }

// newCrowd makes the list of people, and does what the pressed button asks. With mayFail each may be
// marked as not having passed.
func (v *visit) newCrowd(f *Form, label string, people []book.Attendee, mayFail bool) *crowd {
	c := &crowd{Label: label, Fault: f.Fault("people"), Find: f.Get(crowdFind), OnlyDue: f.Get(crowdDue) != "", Total: len(people)}
	c.Crews = f.chosen(crowdCrew, v.crewChoices("Everybody"))
	crew, do := f.Get(crowdCrew), f.Get(crowdDo)
	words := strings.Fields(strings.ToLower(c.Find))
	room := crowdMost
	for _, a := range people {
		c.ByStanding = c.ByStanding || a.Word != ""
		l := newCrowdLine(a)
		fits := (crew == "" || a.Crew == crew) && hasAll(l.Text, words) && (!c.OnlyDue || l.Word != "")
		l.Ticked = (f.Has("people", a.Code) || do == "tick" && fits) && do != "untick"
		l.MayFail, l.Failed, l.Hidden = mayFail, l.Ticked && f.Has("failed", a.Code), !fits && !l.Ticked
		c.take(l, &room)
	}
	return c
}

// take puts a line into the list while there is room; who is ticked is always in it.
func (c *crowd) take(l crowdLine, room *int) {
	if l.Ticked {
		c.Ticked++
	} else if *room == 0 {
		c.Cut = true
		return
	} else {
		*room--
	}
	if !l.Hidden {
		c.Shown++
	}
	c.Lines = append(c.Lines, l)
}

func newCrowdLine(a book.Attendee) crowdLine {
	var note []string
	for _, s := range []string{a.CrewName, a.Level} {
		if s != "" {
			note = append(note, s)
		}
	}
	if a.Away {
		note = append(note, "away")
	}
	l := crowdLine{Code: a.Code, Name: a.Name, Note: strings.Join(note, ", "), Crew: a.Crew}
	l.Text = strings.ToLower(a.Name + " " + a.Code + " " + l.Note)
	if a.Word.IsGap() || a.Word == standing.Closing {
		l.Word, l.Disc = a.Word, disc(a.Word, 0)
	}
	return l
}

// split keeps those of a crew in the list and lays everybody else among the guests.
func (c *crowd) split(crew string) {
	if crew == "" {
		return
	}
	all := c.Lines
	c.Lines, c.Shown = nil, 0
	for _, l := range all {
		if l.Crew == crew {
			l.Hidden = false
			c.Lines = append(c.Lines, l)
			c.Shown++
			continue
		}
		c.GuestsOpen = c.GuestsOpen || l.Ticked
		c.Guests = append(c.Guests, l)
	}
	c.GuestsOpen = c.GuestsOpen || c.Find != ""
}

// passedAndFailed are the codes of those who took part, by how they fared.
func passedAndFailed(f *Form) (passed, failed []string) {
	for _, code := range f.All("people") {
		if f.Has("failed", code) {
			failed = append(failed, code)
		} else {
			passed = append(passed, code)
		}
	}
	return slices.Compact(passed), slices.Compact(failed)
}
