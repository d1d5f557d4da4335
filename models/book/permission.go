package book

import (
	"slices"

	"lodebook/models/civil"
)

// Role decides what an account may do.
type Role string

// The roles. Operator, Scheduler and Anonymous sign in nowhere: the one is whoever runs a command on the
// machine without naming an account, the other the program's own jobs.
const (
	Administrator Role = "administrator"
	SafetyOfficer Role = "safety-officer"
	Facilities    Role = "facilities"
	Member        Role = "member"
	Reader        Role = "reader"
	Operator      Role = "operator"
	Scheduler     Role = "scheduler"
	Anonymous     Role = "anonymous" // who reports an incident and leaves no name
)

// Roles are those that an account can have.
var Roles = []Role{Administrator, SafetyOfficer, Facilities, Member, Reader}

// Words is the role as a person says it.
func (r Role) Words() string {
	if r == SafetyOfficer {
		return "safety officer"
	}
	return string(r)
}

// somebody is the role as the subject of a sentence.
func (r Role) somebody() string {
	switch r {
	case Facilities:
		return "facilities staff"
	case Administrator, Operator:
		return "an " + string(r)
	default:
		return "a " + r.Words()
	}
}

// Action is something that a role may be allowed to do.
type Action string

// The actions.
const (
	SeeOwn         Action = "see-own"      // one's own standings, and what one may record
	SeeSite        Action = "see-site"     // people, fixtures, standings, gaps, checklist
	SeeBook        Action = "see-book"     // entries and jobs
	FillSheet      Action = "fill-sheet"   // inspections and checks, where the sheet names one
	RecordDone     Action = "record-done"  // trainings, screenings, drills, reviews, appointments
	Acknowledge    Action = "acknowledge"  // one's own acknowledgements
	ReportEvent    Action = "report-event" // that something happened to a subject
	Excuse         Action = "excuse"       // excusals and pauses
	KeepRights     Action = "keep-rights"  // who may enter which zone
	SeePassages    Action = "see-passages" // door events, and who can open which door
	ExplainPassage Action = "explain-passage"
	HandleVisits   Action = "handle-visits" // announce visits, let visitors in and out
	SeeVisits      Action = "see-visits"
	SelfReport     Action = "self-report"   // that something about one's own screening has changed
	KeepRoster     Action = "keep-roster"   // who is on duty when
	KeepPeople     Action = "keep-people"   // people, their stints and facts
	KeepFixtures   Action = "keep-fixtures" // fixtures and their facts
	Correct        Action = "correct"       // supersede or withdraw somebody else's entry
	CorrectOwn     Action = "correct-own"   // supersede or withdraw one's own entry
	PlanDrills     Action = "plan-drills"
	SetProgram     Action = "set-program" // a new version of a site's program
	OpenSite       Action = "open-site"   // a new site
	ImportTables   Action = "import-tables"
	KeepAccounts   Action = "keep-accounts"
	Erase          Action = "erase" // forget a person
	RunJobs        Action = "run-jobs"

	ReportIncident  Action = "report-incident"
	SeeIncidents    Action = "see-incidents" // and all that is written about them
	KeepRemedies    Action = "keep-remedies"
	DoRemedies      Action = "do-remedies" // say that one's own are done
	ConfirmRemedies Action = "confirm-remedies"
	TakeOut         Action = "take-out"  // of service
	SignBack        Action = "sign-back" // what is out of service
)

var actionWords = map[Action]string{
	SeeOwn: "see this", SeeSite: "see the site's records", SeeBook: "read the book's entries",
	FillSheet: "record an inspection or check", RecordDone: "record trainings, screenings, drills and reviews",
	Acknowledge: "acknowledge", ReportEvent: "report an event", Excuse: "excuse or pause", KeepRights: "grant or withdraw a right", SeePassages: "see door events", HandleVisits: "announce or end a visit", SeeVisits: "see visits", SelfReport: "report a change about yourself", ExplainPassage: "explain a passage",
	KeepPeople: "change people", KeepRoster: "change the roster", KeepFixtures: "change fixtures", Correct: "correct another's entry",
	CorrectOwn: "correct an entry", PlanDrills: "plan a drill", SetProgram: "change the checklist",
	OpenSite: "open a site", ImportTables: "import", KeepAccounts: "change accounts", Erase: "erase a person",
	RunJobs: "run jobs", ReportIncident: "report an incident", SeeIncidents: "see incidents", KeepRemedies: "keep remedies",
	DoRemedies: "say that a remedy is done", ConfirmRemedies: "confirm a remedy", TakeOut: "take something out of service", SignBack: "sign something back",
}

// Words is the action as it follows "may".
func (a Action) Words() string { return actionWords[a] }

// permissions is the whole of what each role may do. An administrator records and approves
// nothing; an operator may import and open, and keeps accounts so that a book whose
// administrator is lost can be opened again.
var permissions = map[Action][]Role{
	SeeOwn:         {Administrator, SafetyOfficer, Facilities, Member, Reader},
	SeeSite:        {Administrator, SafetyOfficer, Facilities, Reader, Operator, Scheduler},
	SeeBook:        {Administrator, SafetyOfficer, Reader, Operator},
	FillSheet:      {SafetyOfficer, Facilities, Member},
	RecordDone:     {SafetyOfficer},
	Acknowledge:    {SafetyOfficer, Facilities, Member},
	ReportEvent:    {SafetyOfficer, Facilities},
	Excuse:         {SafetyOfficer},
	KeepRights:     {SafetyOfficer},
	SeePassages:    {Administrator, SafetyOfficer, Reader, Operator, Scheduler},
	HandleVisits:   {SafetyOfficer, Facilities, Member},
	SeeVisits:      {Administrator, SafetyOfficer, Facilities, Member, Reader, Operator, Scheduler},
	SelfReport:     {SafetyOfficer, Facilities, Member},
	ExplainPassage: {SafetyOfficer},
	KeepRoster:     {SafetyOfficer},
	KeepPeople:     {SafetyOfficer},
	KeepFixtures:   {SafetyOfficer, Facilities},
	Correct:        {SafetyOfficer},
	CorrectOwn:     {SafetyOfficer, Facilities, Member},
	PlanDrills:     {SafetyOfficer},
	SetProgram:     {SafetyOfficer, Operator},
	OpenSite:       {Administrator, Operator},
	ImportTables:   {SafetyOfficer, Operator},
	KeepAccounts:   {Administrator, Operator},
	Erase:          {Administrator, SafetyOfficer},
	RunJobs:        {Administrator, SafetyOfficer, Operator, Scheduler},

	ReportIncident:  {Administrator, SafetyOfficer, Facilities, Member, Reader},
	SeeIncidents:    {SafetyOfficer},
	KeepRemedies:    {SafetyOfficer, Facilities},
	DoRemedies:      {SafetyOfficer, Facilities, Member},
	ConfirmRemedies: {SafetyOfficer},
	TakeOut:         {SafetyOfficer, Facilities},
	SignBack:        {SafetyOfficer},
}

// Allows tells whether the role may do the action.
func Allows(a Action, r Role) bool { return slices.Contains(permissions[a], r) }

// Actions lists every action, for tests that walk the table.
func Actions() []Action {
	all := make([]Action, 0, len(permissions))
	for a := range permissions {
		all = append(all, a)
	}
	slices.Sort(all)
	return all
}

// Actor is who asks or writes.
type Actor struct {
	Account string // the account's identifier; empty for operator and scheduler
	Name    string // the account's name, or the system user behind an operator
	Role    Role
	Sites   []string // empty: all sites
	Person  string   // code of the person whom the account belongs to, or empty
	Until   *civil.Day
}

// SystemOperator is the actor of a command that names no account.
func SystemOperator(systemUser string) Actor { return Actor{Name: systemUser, Role: Operator} }

// JobActor is the actor of a scheduled job.
func JobActor() Actor { return Actor{Name: "jobs", Role: Scheduler} }

// id is what an entry carries as its writer.
func (a Actor) id() string {
	switch a.Role {
	case Operator:
		return "operator"
	case Scheduler:
		return "job"
	case Anonymous:
		return string(Anonymous)
	default:
		return a.Account
	}
}

// SeesSite tells whether the actor belongs to the site.
func (a Actor) SeesSite(site string) bool {
	return a.Role == Operator || a.Role == Scheduler || len(a.Sites) == 0 || slices.Contains(a.Sites, site)
}

// may checks the action at a site (empty: the whole book).
func (a Actor) may(action Action, site string) error {
	if !Allows(action, a.Role) {
		return &Denied{Action: action, Role: a.Role}
	}
	if site != "" && !a.SeesSite(site) {
		return &Denied{Action: action, Role: a.Role, Why: "this account does not belong to site " + site}
	}
	return nil
}
