// Package standing is the evaluator: a site's items, its subjects, and what is on record about
// them in, standings out, on any day and as known at any moment. It is pure: it reads no clock and
// touches no store. Package book feeds it.
package standing

import (
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// Word is the standing of an obligation on a day.
type Word string

// The standings. DataFault marks a subject whose selector needs a fact that is not on record: what
// is asked of it cannot be told.
const (
	Met       Word = "met"
	Closing   Word = "closing"
	Lapsed    Word = "lapsed"
	Missing   Word = "missing"
	Failed    Word = "failed"
	Excused   Word = "excused"
	Awaited   Word = "awaited"
	DataFault Word = "data-fault"
)

// IsGap tells whether the standing is a gap: lapsed, missing or failed.
func (w Word) IsGap() bool { return w == Lapsed || w == Missing || w == Failed }

// Subject names a subject of a site. A person's code is the book's, every other's the site's.
type Subject struct {
	Asks program.Asks
	Code string
}

// Line says which entry put something on record and which one took it off again: Seq is the
// sequence number of the entry, Ended that of the entry which superseded or withdrew it, 0 while
// it stands. As known at sequence number K a line counts when Seq <= K and not (0 < Ended <= K).
type Line struct {
	Seq, Ended int64
	ID         string // the entry's identifier
}

// KnownAt tells whether the line counts as known at sequence number k.
func (l Line) KnownAt(k int64) bool { return l.Seq <= k && (l.Ended == 0 || l.Ended > k) }

// Always is the moment that knows everything recorded.
const Always int64 = 1<<63 - 1

// Version is one recorded version of the site's program. Number counts from 1.
type Version struct {
	Line
	Number      int
	InForceFrom civil.Day
	Program     *program.Program
}

// Stint is a span in which a subject exists at the site: a person on staff, a fixture in use. Nil
// ends are open; both days are included. Of the stints of one subject at one site that begin on the
// same day and are known, the last recorded counts.
type Stint struct {
	Line
	Subject     Subject
	First, Last *civil.Day
}

// Fact is a dated value: it holds from the day until a later fact of the same code. Codes level,
// crew, zone and kind are the built-in ones; the others are declared. A nil Value takes the fact
// off the record from that day. Of two for the same day the later recorded one counts.
type Fact struct {
	Line
	Subject Subject
	Code    string
	From    civil.Day
	Value   any // string, float64, bool or nil
}

// Record is something done. Of those of one moment the one of the later entry is the later. Time is nil where only the day is known; a record with a time falls on
// the day that the judging site's zone gives it. Site is where it was recorded (for local items).
type Record struct {
	Line
	Site    string
	Subject Subject
	What    string // kind/code
	Day     civil.Day
	Time    *time.Time
	Passed  bool
	Until   *civil.Day
	Limit   []string // zones that a clearance with a restriction still opens; empty: no limit
}

// Event is something that happened to a subject.
type Event struct {
	Line
	Subject Subject
	Code    string
	Day     civil.Day
	Time    *time.Time
}

// Excusal is an approved exception. Item is empty for a pause, which excuses all the subject's
// items. Both days are included; a nil To is open (pauses only). Opens is true only for an
// excusal that also opens reach.
type Excusal struct {
	Line
	Subject Subject
	Item    string
	From    civil.Day
	To      *civil.Day
	Opens   bool
}

// Query asks for standings on a day as known at a sequence number (Always: all of it). Item, Subject and
// Words narrow it; Why asks for the explanation in sentences.
type Query struct {
	On      civil.Day
	KnownAt int64
	Item    string
	Subject *Subject
	Words   []Word // only these; nil: all
	Why     bool
}

// Standing is where one obligation is. Due is nil where the rules give none; Start is nil where
// nothing bounds it. Record is the identifier of the entry that decided, or empty.
type Standing struct {
	Item         string
	Version      int
	Subject      Subject
	Word         Word
	Due          *civil.Day
	Start        *civil.Day
	Rule         program.CadenceRule
	Record       string
	InGrace      bool
	ExcusedUntil *civil.Day
	// Since is the day from which the obligation has been a gap without a break, as far as Due
	// tells it: the day after the last good day, or the failure's day. Nil when it is no gap.
	Since *civil.Day
	// Left is the share of the span that is left, 0 to 1, for the well of ink.
	Left float64
	Why  []string
}
