package network

import (
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// Version is one version of a site's program.
type Version struct {
	From   civil.Day
	Source []byte // YAML
}

// Subject names what a row is about.
type Subject struct {
	Asks program.Asks
	Code string
}

// String is the subject as a table names it.
func (s Subject) String() string { return string(s.Asks) + ":" + s.Code }

// NoDay stands for a day that is not said.
const NoDay = civil.FirstDay - 1

// Person is a row of the table people: a stint, or facts that changed from a day. What is empty is not said.
type Person struct {
	Code, Name, Email, Badge string
	Level, Crew              string
	Joined, Left, From       civil.Day // or NoDay
	Employer                 string
	Cryogen                  string // yes or no; empty: not said
}

// Fixture is a row of the table fixtures.
type Fixture struct {
	Code, Kind, Name, Zone string
	Since, Until           civil.Day // or NoDay
	Facts                  map[string]string
}

// Record is a row of the table records. Rows are in the order in which they were handed in, which is
// mostly that of their days.
type Record struct {
	What    string
	Subject Subject
	Day     civil.Day
	Time    time.Time // zero where only the day is known
	Failed  bool
	Until   civil.Day // or NoDay
	Limit   string
	By      string // code of a person, or empty
	Note    string
}

// Event is a row of the table events.
type Event struct {
	Code    string
	Subject Subject
	Day     civil.Day
	Note    string
}

// Excusal is a row of the table excusals.
type Excusal struct {
	Item       string
	Subject    Subject
	From, To   civil.Day
	Reason     string
	ApprovedBy string
	Opens      bool
}

// Pause is a row of the table pauses.
type Pause struct {
	Subject  Subject
	From, To civil.Day // To: NoDay where it is open
	Reason   string
}

// Passage is a row of the table passages: somebody went through a door.
type Passage struct {
	At                     time.Time
	Door, Badge, Direction string
}

// Site is all that is to be put on record of one site.
type Site struct {
	Code, Name, TimeZone string
	Location             *time.Location
	Versions             []Version
	People               []Person
	Fixtures             []Fixture
	Records              []Record
	Events               []Event
	Excusals             []Excusal
	Pauses               []Pause

	n  *Network
	no int
}
