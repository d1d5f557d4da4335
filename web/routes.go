package web

import (
	"net/http"

	"github.com/gin-gonic/gin"

	"lodebook/models/book"
)

// route is one line of the table: what is asked, the action that it needs (public: none), who answers,
// and how.
type route struct {
	method, path string
	action       book.Action
	handle       func(*visit) error
	manner
}

// manner is how a route answers. Limit is the most bytes that may be sent. A held page may be given from
// memory: it is one that only reads, and hangs on nothing but the book, the day, the address and the actor.
type manner struct {
	limit int64
	held  bool
}

var (
	plain = manner{limit: 1 << 20}
	large = manner{limit: 32 << 20}
	held  = manner{limit: 1 << 20, held: true}
)

// public marks a route that needs no sign-in.
const public book.Action = ""

const (
	get  = http.MethodGet
	post = http.MethodPost
)

// routes is every page. A test walks it with every role and with none.
var routes = []route{
	{get, "/sign-in", public, signInPage, plain},
	{post, "/sign-in", public, signIn, plain},
	{post, "/sign-out", public, signOut, plain},
	{get, "/link/:token", public, linkPage, plain},
	{post, "/link/:token", public, takeLink, plain},
	{get, "/static/:file", public, staticFile, plain},

	{get, "/", book.SeeOwn, home, plain},
	{get, "/password", book.SeeOwn, passwordPage, plain},
	{post, "/password", book.SeeOwn, setPassword, plain},
	{get, "/help", book.SeeOwn, helpPage, plain},
	{get, "/accounts", book.KeepAccounts, accountsPage, plain},
	{post, "/accounts", book.KeepAccounts, addAccount, plain},
	{get, "/accounts/:name", book.KeepAccounts, accountPage, plain},
	{post, "/accounts/:name", book.KeepAccounts, changeAccount, plain},
	{post, "/accounts/:name/link", book.KeepAccounts, accountLink, plain},
	{get, "/jobs", book.SeeBook, jobsPage, plain},

	{get, "/s/:site/today", book.SeeOwn, todayPage, held},
	{get, "/s/:site/week", book.SeeOwn, weekPage, held},
	{get, "/s/:site/people", book.SeeSite, peoplePage, held},
	{get, "/s/:site/people/:code", book.SeeOwn, personPage, held},
	{get, "/s/:site/keep-person", book.KeepPeople, keepPersonPage, plain},
	{post, "/s/:site/keep-person", book.KeepPeople, keepPerson, plain},
	{get, "/s/:site/erase", book.Erase, erasePage, plain},
	{post, "/s/:site/erase", book.Erase, erase, plain},
	{get, "/s/:site/record", book.RecordDone, recordPage, plain},
	{post, "/s/:site/record", book.RecordDone, recordOne, plain},
	{get, "/s/:site/session", book.RecordDone, sessionPage, plain},
	{post, "/s/:site/session", book.RecordDone, recordSession, plain},
	{get, "/s/:site/screening", book.RecordDone, screeningPage, plain},
	{post, "/s/:site/screening", book.RecordDone, recordScreening, plain},
	{get, "/s/:site/acknowledge", book.Acknowledge, acknowledgePage, plain},
	{post, "/s/:site/acknowledge", book.Acknowledge, acknowledge, plain},
	{get, "/s/:site/excuse", book.Excuse, excusePage, plain},
	{post, "/s/:site/excuse", book.Excuse, excuse, plain},
	{get, "/s/:site/pause", book.Excuse, pausePage, plain},
	{post, "/s/:site/pause", book.Excuse, pause, plain},
	{post, "/s/:site/pause-end", book.Excuse, endPause, plain},
	{post, "/s/:site/confirm", book.Excuse, confirmExcusal, plain},
	{get, "/s/:site/event", book.ReportEvent, eventPage, plain},
	{post, "/s/:site/event", book.ReportEvent, reportEvent, plain},
	{get, "/s/:site/zones", book.SeeSite, zonesPage, plain},
	{get, "/s/:site/zones/:zone", book.SeeSite, zonePage, held},
	{get, "/s/:site/zones/:zone/list", book.SeeSite, doorListPage, held},
	{get, "/s/:site/desk", book.HandleVisits, deskPage, plain},
	{get, "/s/:site/announce", book.HandleVisits, announcePage, plain},
	{post, "/s/:site/announce", book.HandleVisits, announce, plain},
	{get, "/s/:site/visit-step", book.HandleVisits, stepPage, plain},
	{post, "/s/:site/visit-step", book.HandleVisits, stepVisit, plain},
	{get, "/s/:site/visits", book.SeeVisits, visitsPage, held},
	{get, "/s/:site/visits/:id", book.SeeVisits, visitPage, plain},
	{post, "/s/:site/erase-visit", book.Erase, eraseVisit, plain},
	{get, "/s/:site/visitor-person", book.KeepPeople, visitorPerson, plain},
	{get, "/s/:site/self-report", book.SelfReport, selfPage, plain},
	{post, "/s/:site/self-report", book.SelfReport, selfReport, plain},
	{get, "/s/:site/passages", book.SeePassages, passagesPage, held},
	{get, "/s/:site/badges", book.SeePassages, badgesPage, held},
	{get, "/s/:site/explain", book.ExplainPassage, explainPage, plain},
	{post, "/s/:site/explain", book.ExplainPassage, explain, plain},
	{get, "/s/:site/coverage", book.SeeSite, coveragePage, plain},
	{get, "/s/:site/duty", book.KeepRoster, dutyPage, plain},
	{post, "/s/:site/duty", book.KeepRoster, keepDuty, plain},
	{get, "/s/:site/appoint", book.RecordDone, appointPage, plain},
	{post, "/s/:site/appoint", book.RecordDone, appoint, plain},
	{get, "/s/:site/end-appointment", book.RecordDone, endAppointmentPage, plain},
	{post, "/s/:site/end-appointment", book.RecordDone, endAppointment, plain},
	{get, "/s/:site/grant", book.KeepRights, grantPage, plain},
	{post, "/s/:site/grant", book.KeepRights, grant, plain},
	{get, "/s/:site/end-right", book.KeepRights, endRightPage, plain},
	{post, "/s/:site/end-right", book.KeepRights, endRight, plain},
	{get, "/s/:site/fixtures", book.SeeSite, fixturesPage, held},
	{get, "/s/:site/fixtures/:code", book.SeeSite, fixturePage, held},
	{get, "/s/:site/subjects/:kind/:code", book.SeeSite, subjectPage, held},
	{get, "/s/:site/keep-fixture", book.KeepFixtures, keepFixturePage, plain},
	{post, "/s/:site/keep-fixture", book.KeepFixtures, keepFixture, plain},
	{get, "/s/:site/rounds", book.SeeOwn, roundsPage, held},
	{get, "/s/:site/round-sheet", book.SeeOwn, roundSheetPage, held},
	{get, "/s/:site/sheet", book.FillSheet, sheetPage, plain},
	{post, "/s/:site/sheet", book.FillSheet, fillSheet, plain},
	{get, "/s/:site/drills", book.SeeSite, drillsPage, held},
	{get, "/s/:site/plan", book.PlanDrills, planPage, plain},
	{post, "/s/:site/plan", book.PlanDrills, planDrill, plain},
	{get, "/s/:site/drill", book.RecordDone, drillPage, plain},
	{post, "/s/:site/drill", book.RecordDone, recordDrill, plain},
	{get, "/s/:site/checklist", book.SeeSite, checklistPage, held},
	{get, "/s/:site/checklist/:item", book.SeeSite, itemPage, held},
	{get, "/s/:site/groups", book.SetProgram, groupsPage, plain},
	{post, "/s/:site/groups", book.SetProgram, adoptGroup, plain},
	{get, "/s/:site/program", book.SeeSite, programPage, plain},
	{post, "/s/:site/program", book.SetProgram, saveProgram, plain},
	{get, "/s/:site/program.yaml", book.SeeSite, programFile, plain},
	{get, "/s/:site/gaps", book.SeeSite, gapsPage, held},
	{get, "/s/:site/incident", book.ReportIncident, reportIncidentPage, plain},
	{post, "/s/:site/incident", book.ReportIncident, reportIncident, plain},
	{get, "/s/:site/incidents", book.ReportIncident, incidentsPage, plain},
	{get, "/s/:site/incidents/:number", book.SeeIncidents, incidentPage, plain},
	{get, "/s/:site/incidents/:number/correct", book.SeeIncidents, correctIncidentPage, plain},
	{post, "/s/:site/incidents/:number/correct", book.SeeIncidents, correctIncident, plain},
	{post, "/s/:site/incidents/:number/report", book.SeeIncidents, markReported, plain},
	{get, "/s/:site/remedies", book.SeeOwn, remediesPage, plain},
	{get, "/s/:site/remedies/:number", book.SeeOwn, remedyPage, plain},
	{get, "/s/:site/remedies/:number/change", book.KeepRemedies, changeRemedyPage, plain},
	{post, "/s/:site/remedies/:number/change", book.KeepRemedies, changeRemedy, plain},
	{post, "/s/:site/remedies/:number/done", book.DoRemedies, remedyDone, plain},
	{post, "/s/:site/remedies/:number/check", book.ConfirmRemedies, checkRemedy, plain},
	{get, "/s/:site/remedy", book.KeepRemedies, makeRemedyPage, plain},
	{post, "/s/:site/remedy", book.KeepRemedies, makeRemedy, plain},
	{get, "/s/:site/out-of-service", book.TakeOut, takeOutPage, plain},
	{post, "/s/:site/out-of-service", book.TakeOut, takeOut, plain},
	{get, "/s/:site/back-in-service", book.SignBack, signBackPage, plain},
	{post, "/s/:site/back-in-service", book.SignBack, signBack, plain},
	{get, "/s/:site/book", book.SeeBook, bookPage, plain},
	{get, "/s/:site/book/:id", book.SeeOwn, entryPage, plain},
	{get, "/s/:site/correct/:id", book.CorrectOwn, correctPage, plain},
	{post, "/s/:site/correct/:id", book.CorrectOwn, correct, plain},
	{post, "/s/:site/withdraw/:id", book.CorrectOwn, withdraw, plain},
	{post, "/s/:site/undo/:id", book.ImportTables, undoImport, plain},
	{get, "/s/:site/import", book.ImportTables, importPage, plain},
	{post, "/s/:site/import", book.ImportTables, importTable, large},
}

// serve opens a visit for a route: limits what is sent, finds who asks and at which site, and maps
// what goes wrong.
func (s *server) serve(r route) gin.HandlerFunc {
	return func(c *gin.Context) {
		c.Request.Body = http.MaxBytesReader(c.Writer, c.Request.Body, r.limit)
		v := &visit{server: s, c: c}
		if err := v.answer(r); err != nil {
			v.proof = nil
			s.fail(v, err)
		}
	}
}

// answer lets in who may come in, and gives them the page.
func (v *visit) answer(r route) error {
	if r.action != public {
		if err := v.enter(r.action); err != nil {
			return err
		}
	}
	if r.held && !v.hasNotice() {
		return v.fromMemory(r)
	}
	return v.make(r)
}

// enter finds the actor and checks the action.
func (v *visit) enter(action book.Action) error {
	actor, err := v.actorOf(v.c.Request)
	if err != nil {
		return err
	}
	v.actor = actor
	if !v.may(action) {
		return &book.Denied{Action: action, Role: actor.Role}
	}
	return nil
}

// make finds the site, where the path names one, and lets the handler answer.
func (v *visit) make(r route) error {
	if code := v.param("site"); code != "" && r.action != public {
		var err error
		if v.on, err = v.readOn(); err != nil {
			return err
		}
		if v.site, err = v.b.SiteHead(v.ctx(), v.actor, code, v.on); err != nil {
			return err
		}
	}
	return r.handle(v)
}
