// Package program is what a site configures for itself: its zones, levels, posts, crews, fixture
// kinds, sheets and checklist. It reads, validates and writes them as YAML and compiles the
// selectors of the checklist. It is pure: bytes in, a Program or every fault out.
package program

import (
	"time"

	"lodebook/models/civil"
)

// Asks is the kind of subject that an item is asked of.
type Asks string

// The kinds of subject.
const (
	AsksPerson   Asks = "person"
	AsksFixture  Asks = "fixture"
	AsksZone     Asks = "zone"
	AsksCrew     Asks = "crew"
	AsksPost     Asks = "post"
	AsksDocument Asks = "document"
	AsksSite     Asks = "site"
)

// AllAsks are the kinds of subject in the order of the formats page.
var AllAsks = []Asks{AsksPerson, AsksFixture, AsksZone, AsksCrew, AsksPost, AsksDocument, AsksSite}

// RecordKinds are the kinds of record; the code behind the slash is the site's own.
var RecordKinds = []string{"training", "screening", "inspection", "check", "drill", "review", "acknowledgement", "appointment"}

// Program is one version of a site's program, read whole and found free of faults. It is never
// changed after Parse.
type Program struct {
	InForceFrom  *civil.Day // nil: the day on which it is recorded
	Site         Site
	Calendar     civil.Calendar
	Hours        []OpenHours // empty: the whole day
	Zones        []Zone      // in order of restriction
	Levels       []Level     // in order, lowest first
	Posts        []Post
	Crews        []Crew
	PersonFacts  []Fact
	FixtureKinds []FixtureKind
	Events       []Event
	Documents    []Document
	Sheets       []Sheet
	Severities   []Severity     // in order, mildest first; never empty
	Incidents    []IncidentKind // never empty
	Reports      []Report
	Items        []Item
	Source       []byte // the YAML that it was read from

	notes []string // what Warnings tells about how the file is written
}

// Site names the place and the zone in which its days are counted.
type Site struct {
	Code, Name string
	TimeZone   string
	Location   *time.Location
}

// OpenHours are the operating hours of one weekday, in minutes from midnight; To may pass 24:00
// for hours that cross it.
type OpenHours struct {
	Weekday  time.Weekday
	From, To int
}

// Zone is a controlled part of the site.
type Zone struct {
	Code, Name string
	Restricted bool
	Devices    bool   // a phone or tablet may go in; default true
	Escort     string // the lowest level whose holders may escort there; empty: nobody may
}

// Level is an MR safety level; Rank is its place in the program's order, from 1.
type Level struct {
	Code, Name string
	Rank       int
}

// Post is a named appointment that must not stand empty.
type Post struct{ Code, Name string }

// Crew is a shift team.
type Crew struct{ Code, Name string }

// FactType is the type of a declared fact.
type FactType string

// The types of a fact.
const (
	FactText   FactType = "text"
	FactNumber FactType = "number"
	FactYesNo  FactType = "yesno"
	FactDay    FactType = "day"
	FactChoice FactType = "choice"
	FactPerson FactType = "person"
	FactZone   FactType = "zone"
)

// Fact declares what may be on record about a person or a fixture.
type Fact struct {
	Code, Label string
	Type        FactType
	Unit        string   // number only
	Choices     []string // choice only
}

// FixtureKind is a kind of thing that is inspected.
type FixtureKind struct {
	Code, Name string
	Facts      []Fact
}

// Event declares something that may happen to a subject and asks for an answer.
type Event struct {
	Code, Name string
	Of         string // person, zone, crew, post, document, site, fixture or a fixture kind
	SelfReport bool   // the one that a person reports of themselves, without saying what has changed
}

// Document is a policy or a procedure that the site keeps.
type Document struct{ Code, Title string }

// FieldType is the type of a sheet's field.
type FieldType string

// The types of a field.
const (
	FieldNumber FieldType = "number"
	FieldYesNo  FieldType = "yesno"
	FieldChoice FieldType = "choice"
	FieldText   FieldType = "text"
	FieldDay    FieldType = "day"
)

// Field is one line of a sheet. Limits are nil where there is none; they are in the field's unit.
type Field struct {
	Code, Label, Help    string
	Type                 FieldType
	Unit                 string
	Choices              []string
	Required             bool     // default: true for numbers, yes/no and choices
	Must                 *bool    // yes/no: any other answer fails
	Min, Max             *float64 // outside: fails
	WarnBelow, WarnAbove *float64 // outside: passes with a remark
	FailOn               []string // choices that fail
}

// Sheet is the form of an inspection or check.
type Sheet struct {
	Code, Title string
	For         string   // fixture kind
	RecordedBy  []string // roles, crews or levels
	OnFail      string
	Cautions    []string
	Fields      []Field
	// What a failed one takes out of service, until a safety officer signs it back: its fixture, and with it
	// the fixture's zone; and that whoever recorded the failure may not be who signs.
	OnFailOut, AlsoZone, BackByAnother bool
}

// CadenceRule is the name of a cadence.
type CadenceRule string

// The cadences.
const (
	Every  CadenceRule = "every"
	Within CadenceRule = "within"
	Once   CadenceRule = "once"
	Each   CadenceRule = "each"
	After  CadenceRule = "after"
	Holds  CadenceRule = "holds"
	Cover  CadenceRule = "cover"
)

// Cadence is how often an item asks.
type Cadence struct {
	Rule      CadenceRule
	Every     civil.Duration  // every
	MonthEnd  bool            // every: to: month-end
	Early     *civil.Duration // every
	Within    civil.Duration  // within, after
	Count     int             // within; at least 1
	Each      civil.Unit      // each
	Operating bool            // each: days: operating
	After     []string        // after: event codes
	Holds     *Selector       // holds; of cover: that nobody is missing by what the book has reckoned
	Cover     *CoverDemand    // cover
}

// Item is one line of the checklist.
type Item struct {
	Code, Title, Help string
	Group             string
	Asks              Asks
	When              *Selector // nil: all subjects of the kind
	Records           []string  // kind/code of the records that answer it
	Cadence           Cadence
	First             civil.Duration // resolved: the default is filled in
	Notice            Notice
	Grace             civil.Duration
	Since             *civil.Day
	Guards            []string // zones
	Confers           string   // level, or empty
	Local             bool
	Basis             string
	Owner             string // a role or post that owns its gaps; empty: the default of its subject's kind
	Line              int    // in the source, for messages
}

// Notice is how long before the due day a standing turns to closing: a duration where the
// program gives one, else a plain number of days.
type Notice struct {
	Given *civil.Duration
	Days  int
}

// Before gives the first day of the notice for a due day.
func (n Notice) Before(due civil.Day) civil.Day {
	if n.Given != nil {
		return due.Sub(*n.Given)
	}
	return max(due-civil.Day(n.Days), civil.FirstDay)
}

// Fault is one thing wrong with a program file.
type Fault struct {
	Line     int    `json:"line"`
	Column   int    `json:"column"`
	Path     string `json:"path"`     // as in items[3].every
	Found    string `json:"found"`    // what stands there
	Problem  string `json:"problem"`  // what is wrong with it
	Accepted string `json:"accepted"` // what would be accepted
}

// Faults is every fault of one file, in order of line and column. It is an error.
type Faults []Fault
