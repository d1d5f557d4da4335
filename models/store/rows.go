package store

import (
	"time"

	"lodebook/models/civil"
)

// Line says which entry wrote a projected row and which one ended it (superseded or withdrew it);
// Ended is 0 while the row stands.
type Line struct {
	Seq, Ended int64
	ID         string // the entry's identifier
	Batch      string // the import that it came in, or empty
}

// Entry is one line of the book as stored. Bytes are its canonical JSON and are never re-encoded.
type Entry struct {
	Seq        int64 // the leaf index, from 0
	ID         string
	Kind       string
	V          int
	Site       string // empty: the whole book
	Batch      string
	Supersedes string // identifier of the entry that this one supersedes or withdraws
	Actor      string // an account's identifier, or "operator" or "job"
	RecordedAt time.Time
	Bytes      []byte
}

// Veil is one erasable value of an entry: the entry's bytes hold the commitment
// ledger.Commit(Salt, Value), the value stands here. An erased veil has neither salt nor value.
type Veil struct {
	Seq    int64
	Path   string // the field in the entry's body, as in "name" or "facts.employer"
	Person string // code of the person whom it is about, or empty
	Salt   []byte
	Value  []byte
	Erased bool
}

// SubjectKey names a subject in the book. Site is empty for a person, who belongs to the book.
type SubjectKey struct{ Site, Kind, Code string }

// SiteRow is a site as one version of its program names it; the last counts.
type SiteRow struct {
	Line
	Code, Name, TimeZone string
}

// VersionRow is one recorded version of a site's program.
type VersionRow struct {
	Line
	Site        string
	Number      int
	InForceFrom civil.Day
	Retroactive bool
	Source      []byte
}

// PersonRow is what one entry says of who a person is; of those that stand, the last counts. The
// names are empty once the person is erased.
type PersonRow struct {
	Line
	Code, Name, Email, Badge string
	From                     *civil.Day // the day from which the badge is theirs; nil: always
	Erased                   bool
}

// FixtureRow is what one entry says of what a fixture is; of those that stand, the last counts.
type FixtureRow struct {
	Line
	Site, Code, Kind, Name string
}

// StintRow is a span of presence at a site: of a person (joined, left) or a fixture (since, until).
// Of those of one subject that begin on the same day and stand, the last recorded counts.
type StintRow struct {
	Line
	Site, Kind, Code string
	First, Last      *civil.Day
}

// FactRow is one dated value. Value is JSON: a string, a number, true, false or null.
type FactRow struct {
	Line
	Site, Kind, Code string
	Fact             string
	From             civil.Day
	Value            string
}

// RecordRow is something done.
type RecordRow struct {
	Line
	Order   int64 // order of recording
	Site    string
	Subject SubjectKey
	What    string // kind/code
	Day     civil.Day
	Time    *time.Time
	Passed  bool
	Remark  bool // passed with a remark
	Until   *civil.Day
	Limit   string // zone codes separated by spaces
	Session string // what was recorded in one form shares it, or empty
}

// EventRow is something that happened to a subject.
type EventRow struct {
	Line
	Site    string
	Subject SubjectKey
	Event   string
	Day     civil.Day
	Time    *time.Time
}

// ExcusalRow is an excusal, or a pause where Item is empty. Waiting says that it asks to open reach
// and that no safety officer has confirmed it; Opens is true only when it does open.
type ExcusalRow struct {
	Line
	Site    string
	Subject SubjectKey
	Item    string
	From    civil.Day
	To      *civil.Day
	Opens   bool
	Waiting bool
}

// RightRow is a person's standing permission to enter a zone: from a moment, which is included, up to one that
// is not; nil: until it is withdrawn.
type RightRow struct {
	Line
	Site, Person, Zone string
	From               time.Time
	To                 *time.Time
}

// DutyRow is one turn of the roster: from an instant, which is included, up to one that is not.
type DutyRow struct {
	Line
	Site, Person string
	From, To     time.Time
	Duty         string
}

// StockRow is when a site is short of people by an item, as it was reckoned: all between two instants, of which the
// second is excluded. A later one counts in its own time. Each span is written as the instants from and up to
// which fewer are there, how many are, and how many are needed, with strokes between.
type StockRow struct {
	Line
	Site, Item string
	From, To   time.Time
	Spans      []string
}

// IncidentRow is an incident or near miss as one entry tells it; of those of one number that stand, the last
// counts. Reporter is the entry's writer, or the fixed word of whoever reported without a name.
type IncidentRow struct {
	Line
	Site                 string
	Number               int // at its site, from 1
	Kind, Zone, Severity string
	At                   time.Time
	Anonymous            bool
	Reporter             string
	People               []string // codes of those who were involved
}

// ReportRow says that an outside body was told of an incident.
type ReportRow struct {
	Line
	Site     string
	Incident int
	Code     string // of the site's rule
	Day      civil.Day
}

// RemedyRow is a remedy as one entry tells it; of those of one number that stand, the last counts. It is for
// an incident, a failed record, or an item and its subject; the others are empty.
type RemedyRow struct {
	Line
	Site     string
	Number   int // at its site, from 1
	Incident int
	Record   string // identifier of the failed record's entry
	Item     string
	Subject  SubjectKey
	Severity string
	Owner    string // code of the person who owns it, or empty
	Account  string // identifier of the account that owns it, or empty
	Made     civil.Day
	Due      civil.Day
	Confirm  bool // a second person looks at it before it is closed
}

// RemedyStepRow is what became of a remedy: done, confirmed or refused. Account wrote it; DoneBy is the code of
// the person who did it, where that is known.
type RemedyStepRow struct {
	Line
	Site            string
	Remedy          int
	Step            string
	Day             civil.Day
	Account, DoneBy string
}

// OutageRow says that a fixture or zone is out of service from an instant on. Record is the failed record that
// took it out, or empty, and Cause the code of that record's fixture. Another says that whoever wrote it may not be who signs it back.
type OutageRow struct {
	Line
	Site    string
	Subject SubjectKey
	Cause   string
	Record  string
	From    time.Time
	Another bool
	Account string
}

// ReturnRow ends outages, which it names by their entries' identifiers.
type ReturnRow struct {
	Line
	Site    string
	Outages []string
	At      time.Time
}

// MarkRow says that a safety officer has explained a passage. The badge is empty once its holder is erased.
type MarkRow struct {
	Line
	Site        string
	At          time.Time
	Door, Badge string
}

// VisitRow is an announced visit. Names, employer, badge and tools are empty once they are erased.
type VisitRow struct {
	Line
	Site                     string
	Visitor, Employer, Badge string
	Kind                     string
	Zones                    []string
	From, To                 time.Time
	Escort, Person           string   // codes of people; Person is the visitor's own, if they have one
	Tools                    []string // brought along
	Late                     bool     // announced after it began
}

// VisitStepRow is what became of a visit: the visitor came, left, was turned away, or the visit was called off.
type VisitStepRow struct {
	Line
	Site, Visit, Step string // Visit is the entry that announced it
	At                time.Time
	Screener, Outcome string
	Account           string
}

// PlanRow is a drill or session that is planned. It is done once a record names it as its session.
type PlanRow struct {
	Line
	Site string
	What string // kind/code
	Crew string
	Day  civil.Day
	At   string // HH:MM or empty
}

// AccountRow is what one entry says of an account; of those of one ID that stand, the last counts.
type AccountRow struct {
	Line
	ID, Name, Role string
	Sites          []string // empty: all sites (administrators)
	Person         string   // code of the linked person, or empty
	Until          *civil.Day
	Disabled       bool
}

// BatchRow is one import; its own entry's identifier is the batch that its rows carry.
type BatchRow struct {
	Line
	Site, Table, File string
	Rows              int
	Actor             string
	At                time.Time
}

// The rows below are no part of the book: they can be lost without losing what was recorded.

// CredentialRow is an account's secret, as an encoded Argon2id hash.
type CredentialRow struct {
	Account, Hash string
	Changed       time.Time
}

// LinkRow is a one-time sign-in link; Hash is the SHA-256 of its token.
type LinkRow struct {
	Hash, Account string
	Expires       time.Time
	Used          *time.Time
}

// SessionRow is a signed-in browser; Hash is the SHA-256 of its token.
type SessionRow struct {
	Hash, Account  string
	Began, Expires time.Time
	LastSeen       time.Time
}

// AttemptRow counts failed sign-ins of one name or address.
type AttemptRow struct {
	Key   string
	Count int
	Last  time.Time
}

// FlagRow is what a job raised on a gap or a coming lapse. Its identity is site, item and subject.
type FlagRow struct {
	Site, Item, Kind, Code string
	Standing               string
	Owner                  string
	Due                    *civil.Day
	Opened                 civil.Day
	Cleared                *civil.Day
	Reopened               int
}

// RunRow is one run of a job for a site on a day. Its key (job, site, due) is claimed before it runs.
type RunRow struct {
	Job, Site string
	Due       time.Time
	Started   time.Time
	Ended     *time.Time
	Outcome   string // running, done, failed
	Message   string
}
