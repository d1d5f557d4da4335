package book

import (
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// SiteView is a site as a page heads with it.
type SiteView struct {
	Code, Name string
	TimeZone   string
	Location   *time.Location
	Today      civil.Day
	Program    *program.Program // the version in force on the day asked for
	Version    int
	People     int // on staff on the day
	Fixtures   int // in use on the day
}

// Row is one standing with what a person needs to read it.
type Row struct {
	standing.Standing
	Site        string
	Title       string
	Group       string
	Basis       string
	Cadence     string // in words: "every year, kept to the month's end"
	Records     []string
	SubjectName string
	SubjectNote string // crew and employer of a person, kind and zone of a fixture
	Owner       string // role or post that answers for it; of a remedy, the person's code or the account's name
	OwnerName   string // where the owner is a person or an account
	Guards      []string
	Asked       bool // false for a subject whose data is missing: what is asked of it cannot be told
}

// RowJSON is a standing as commands and the API give it.
type RowJSON struct {
	Site         string     `json:"site"`
	Item         string     `json:"item"`
	Version      int        `json:"version"`
	Asks         string     `json:"asks"`
	Subject      string     `json:"subject"`
	Standing     string     `json:"standing"`
	Due          *civil.Day `json:"due"`
	Start        *civil.Day `json:"start"`
	Rule         string     `json:"rule"`
	Record       *string    `json:"record"`
	InGrace      bool       `json:"in_grace"`
	ExcusedUntil *civil.Day `json:"excused_until"`
	Owner        *string    `json:"owner,omitempty"`
	Why          []string   `json:"why,omitempty"`
}

// JSON gives the row as commands and the API do; owner only where gaps are listed.
func (r Row) JSON(owner bool) RowJSON {
	j := RowJSON{
		Site: r.Site, Item: r.Item, Version: r.Version, Asks: string(r.Subject.Asks), Subject: r.Subject.Code,
		Standing: string(r.Word), Due: r.Due, Start: r.Start, Rule: string(r.Rule), InGrace: r.InGrace,
		ExcusedUntil: r.ExcusedUntil, Why: r.Why,
	}
	if r.Record != "" {
		j.Record = &r.Record
	}
	if owner {
		j.Owner = &r.Owner
	}
	return j
}

// Standings is the answer to a question about standings.
type Standings struct {
	Site    SiteView
	On      civil.Day
	KnownAt *time.Time
	Rows    []Row // in order of item, then subject; data faults among them
}

// Gaps are the rows that are gaps.
func (s Standings) Gaps() []Row { return s.only(func(r Row) bool { return r.Word.IsGap() }) }

// Faults are the rows that cannot be told for want of a fact.
func (s Standings) Faults() []Row {
	return s.only(func(r Row) bool { return r.Word == standing.DataFault })
}

func (s Standings) only(keep func(Row) bool) []Row {
	var out []Row
	for _, r := range s.Rows {
		if keep(r) {
			out = append(out, r)
		}
	}
	return out
}

// Count is the number of rows of each word.
func (s Standings) Count() map[standing.Word]int {
	n := map[standing.Word]int{}
	for _, r := range s.Rows {
		n[r.Word]++
	}
	return n
}

// PersonSummary is one line of the People page.
type PersonSummary struct {
	Code, Name, Crew string
	Level, Held      string
	Joined, Left     *civil.Day
	Here             bool // on staff on the day
	Erased           bool
	Gaps, Closing    int
	Worst            standing.Word // of their obligations; empty: none
	NextDue          *civil.Day
	Employer         string // the declared fact "employer", where there is one
}

// FactLine is one dated value of a subject's facts.
type FactLine struct {
	Code, Label, Value string
	From               civil.Day
	Entry              string // the entry that put it on record
	Imported           bool
	Ended              bool // superseded or withdrawn
}

// RecordLine is one record in a history.
type RecordLine struct {
	Entry       string
	What        string // kind/code
	Title       string // of the item or sheet that it answers
	SubjectKind string
	Subject     string
	SubjectName string
	Site        string
	Day         civil.Day
	Time        *time.Time
	Passed      bool
	Remark      bool
	Until       *civil.Day
	Limit       string
	Ended       bool // superseded or withdrawn
	Imported    bool
	Session     string
}

// ExcusalLine is one excusal or pause (Item empty) in a history.
type ExcusalLine struct {
	Entry, Item, Title       string
	From                     civil.Day
	To                       *civil.Day
	Opens, Waiting           bool
	Because, ApprovedBy      string
	Ended                    bool
	SubjectKind, SubjectCode string
	SubjectName              string
}

// EventLine is one event in a history.
type EventLine struct {
	Entry, Event, Name string
	Day                civil.Day
	Time               *time.Time
	Ended              bool
}

// StintLine is one span of presence.
type StintLine struct {
	First, Last *civil.Day
	Entry       string
}

// SubjectView is one subject with all that stands on record about it.
type SubjectView struct {
	Site    SiteView
	On      civil.Day
	Subject standing.Subject
	Name    string
	Kind    string // fixture
	Zone    string
	Level   string
	Held    string
	HeldWhy []string
	// HeldUntil is the last day of the held level if nothing more goes on record; nil: none in sight.
	HeldUntil *civil.Day
	Crew      string
	Email     string
	Badge     string
	Erased    bool
	Stints    []StintLine
	Rows      []Row
	Facts     []FactLine
	Records   []RecordLine // newest first
	Events    []EventLine
	Excusals  []ExcusalLine
}

// FixtureSummary is one line of a list of fixtures.
type FixtureSummary struct {
	Code, Name, Kind, KindName, Zone string
	Since, Until                     *civil.Day
	Here                             bool
	Gaps, Closing                    int
	Worst                            standing.Word
	NextDue                          *civil.Day
}

// ItemSummary is one line of the Checklist page.
type ItemSummary struct {
	program.Item
	CadenceWords string
	Counts       map[standing.Word]int
	Subjects     int
	Worst        standing.Word
}

// VersionLine is one version of the program.
type VersionLine struct {
	Number      int
	InForceFrom civil.Day
	Recorded    time.Time
	Retroactive bool
	Entry       string
	Items       int
}

// Checklist is the checklist in force on a day.
type Checklist struct {
	Site     SiteView
	On       civil.Day
	Items    []ItemSummary
	Versions []VersionLine // newest first
	Warnings []string
}

// PlanLine is a drill or session that is planned.
type PlanLine struct {
	Entry, What, Title string
	Crew, CrewName     string
	Day                civil.Day
	At                 string
	Note               string
	Done               bool
}

// DrillView is what the Drills page shows.
type DrillView struct {
	Site   SiteView
	On     civil.Day
	Rows   []Row // obligations that drills answer
	Plans  []PlanLine
	Held   []RecordLine // drills of crews, newest first
	Codes  []string     // kind/code of every drill that the checklist asks for
	Titles map[string]string
}

// RoundStop is one fixture on a round and what is due on it.
type RoundStop struct {
	Fixture FixtureSummary
	Rows    []Row
	Devices bool // a phone may go into its zone
}

// Round is what facilities have to look at.
type Round struct {
	Site  SiteView
	On    civil.Day
	Due   []RoundStop // gaps and closing, by zone and code
	Later []Row       // awaited and met, soonest due first
}

// EntryLine is one entry of the book, in words.
type EntryLine struct {
	Seq          int64
	ID, Kind     string
	Site         string
	At           time.Time // recorded
	Actor        string    // name of the account, or of the operator
	ActorID      string
	Summary      string
	Batch        string
	Supersedes   string
	SupersededBy string // identifier of the entry that did, or of a withdrawn import
	Withdrawn    bool
}

// Field is one labelled value of an entry.
type Field struct {
	Label, Value string
	Erased       bool
}

// EntryView is one entry with everything in it.
type EntryView struct {
	EntryLine
	Fields     []Field
	Reason     string
	Canonical  string
	Old        *EntryView // what it superseded
	New        *EntryView // what superseded it
	SubjectRef *standing.Subject
	Record     string // of a record: kind/code
	MayCorrect bool
	NeedReason bool
	Failed     bool // a record that failed and stands
	Hidden     bool // it is kept for safety officers, and the actor is none
}
