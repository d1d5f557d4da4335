// Package scenario invents the site that the demo shows: an imaging centre on a harbour that is on
// no map, with two magnets, its people and firms, its fixtures, and eighteen months of history that
// end yesterday, with gaps in them. It is pure: the same day gives the same bytes. What it gives is
// what a user would bring: a program file, tables to import, and sheets to fill in.
package scenario

import (
	"fmt"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// Site is an invented site and all that is to be put on record of it.
type Site struct {
	Code, Name, TimeZone string
	Program              []byte // YAML
	Files                []File // in the order in which they are to be imported
	Sheets               []SheetEntry
	Accounts             []Account
	Plans                []Plan
}

// File is one table as CSV: UTF-8, commas, a header row.
type File struct {
	Table string // as in "people"
	Name  string
	CSV   []byte
}

// SheetEntry is a sheet to be filled in once the tables are imported, in order. Its result follows
// from the values. Facilities and safety officers may record every one of them.
type SheetEntry struct {
	Fixture string
	Record  string // inspection/code or check/code
	On      civil.Day
	Values  map[string]string
	Note    string
}

// Account is one sign-in; there is one for each role. Person is empty where it is nobody's.
type Account struct{ Name, Role, Person string }

// Plan is a drill to come, today or later. Day is in this or the next week; At is HH:MM.
type Plan struct {
	Record, Crew string
	Day          civil.Day
	At, Note     string
}

// accounts are those of the demo, one for each role.
var accounts = []Account{
	{"office", "administrator", ""},
	{"sunniva", "safety-officer", officer},
	{"jakup", "facilities", facilityHead},
	{"runi", "member", technologist},
	{"auditor", "reader", ""},
}

// Make invents the site as it stands on the given day at the site. Everything is dated up to the
// day before; what is due that day is still to be done. It panics if the site's own program has a
// fault, which its tests rule out.
func Make(today civil.Day) Site {
	src, err := source(today)
	if err != nil {
		panic(err)
	}
	p, err := program.Parse(src)
	if err != nil {
		panic(fmt.Errorf("the program of the demo: %w", err))
	}
	a := newAlmanac(today, p.Calendar, p.Site.Location)
	t := tell(a)
	h := &history{almanac: a, program: p, never: t.never}
	h.write(subjects(a, p, t))
	t.change(h)
	return Site{
		Code: p.Site.Code, Name: p.Site.Name, TimeZone: p.Site.TimeZone, Program: src,
		Files: []File{
			{"people", "people.csv", peopleTable(a)},
			{"fixtures", "fixtures.csv", fixturesTable(a)},
			{"records", "records.csv", recordsTable(h.rows)},
			{"events", "events.csv", eventsTable(t.events)},
			{"excusals", "excusals.csv", excusalsTable(t.excusals)},
			{"pauses", "pauses.csv", pausesTable(t.pauses)},
			{"rights", "rights.csv", rightsTable(a)},
			{"roster", "roster.csv", rosterTable(a)},
			{"passages", "passages.csv", passagesTable(a)},
			{"holders", "holders.csv", holdersTable()},
		},
		Sheets: t.sheets, Accounts: accounts, Plans: plans(a),
	}
}
