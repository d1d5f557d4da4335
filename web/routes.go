package web

import (
	"net/http"

	"github.com/gin-gonic/gin"

	"lodebook/models/book"
)

// route is one line of the table: what is asked, the action that it needs (public: none), and
// who answers. Limit is the most bytes that may be sent; 0: smallBody.
type route struct {
	method, path string
	action       book.Action
	handle       func(*visit) error
	limit        int64
}

// public marks a route that needs no sign-in.
const public book.Action = ""

const (
	get  = http.MethodGet
	post = http.MethodPost

	smallBody = 1 << 20
)

// routes is every page. A test walks it with every role and with none.
var routes = []route{
	{get, "/sign-in", public, signInPage, 0},
	{post, "/sign-in", public, signIn, 0},
	{post, "/sign-out", public, signOut, 0},
	{get, "/link/:token", public, linkPage, 0},
	{post, "/link/:token", public, takeLink, 0},
	{get, "/static/:file", public, staticFile, 0},

	{get, "/", book.SeeOwn, home, 0},
	{get, "/password", book.SeeOwn, passwordPage, 0},
	{post, "/password", book.SeeOwn, setPassword, 0},
	{get, "/help", book.SeeOwn, helpPage, 0},
	{get, "/accounts", book.KeepAccounts, accountsPage, 0},
	{post, "/accounts", book.KeepAccounts, addAccount, 0},
	{get, "/accounts/:name", book.KeepAccounts, accountPage, 0},
	{post, "/accounts/:name", book.KeepAccounts, changeAccount, 0},
	{post, "/accounts/:name/link", book.KeepAccounts, accountLink, 0},
	{get, "/jobs", book.SeeBook, jobsPage, 0},

	{get, "/s/:site/today", book.SeeOwn, todayPage, 0},
	{get, "/s/:site/week", book.SeeOwn, weekPage, 0},
	{get, "/s/:site/people", book.SeeSite, peoplePage, 0},
	{get, "/s/:site/people/:code", book.SeeOwn, personPage, 0},
	{get, "/s/:site/keep-person", book.KeepPeople, keepPersonPage, 0},
	{post, "/s/:site/keep-person", book.KeepPeople, keepPerson, 0},
	{get, "/s/:site/erase", book.Erase, erasePage, 0},
	{post, "/s/:site/erase", book.Erase, erase, 0},
	{get, "/s/:site/record", book.RecordDone, recordPage, 0},
	{post, "/s/:site/record", book.RecordDone, recordOne, 0},
	{get, "/s/:site/session", book.RecordDone, sessionPage, 0},
	{post, "/s/:site/session", book.RecordDone, recordSession, 0},
	{get, "/s/:site/screening", book.RecordDone, screeningPage, 0},
	{post, "/s/:site/screening", book.RecordDone, recordScreening, 0},
	{get, "/s/:site/acknowledge", book.Acknowledge, acknowledgePage, 0},
	{post, "/s/:site/acknowledge", book.Acknowledge, acknowledge, 0},
	{get, "/s/:site/excuse", book.Excuse, excusePage, 0},
	{post, "/s/:site/excuse", book.Excuse, excuse, 0},
	{get, "/s/:site/pause", book.Excuse, pausePage, 0},
	{post, "/s/:site/pause", book.Excuse, pause, 0},
	{post, "/s/:site/pause-end", book.Excuse, endPause, 0},
	{post, "/s/:site/confirm", book.Excuse, confirmExcusal, 0},
	{get, "/s/:site/event", book.ReportEvent, eventPage, 0},
	{post, "/s/:site/event", book.ReportEvent, reportEvent, 0},
	{get, "/s/:site/fixtures", book.SeeSite, fixturesPage, 0},
	{get, "/s/:site/fixtures/:code", book.SeeSite, fixturePage, 0},
	{get, "/s/:site/subjects/:kind/:code", book.SeeSite, subjectPage, 0},
	{get, "/s/:site/keep-fixture", book.KeepFixtures, keepFixturePage, 0},
	{post, "/s/:site/keep-fixture", book.KeepFixtures, keepFixture, 0},
	{get, "/s/:site/rounds", book.SeeOwn, roundsPage, 0},
	{get, "/s/:site/round-sheet", book.SeeOwn, roundSheetPage, 0},
	{get, "/s/:site/sheet", book.FillSheet, sheetPage, 0},
	{post, "/s/:site/sheet", book.FillSheet, fillSheet, 0},
	{get, "/s/:site/drills", book.SeeSite, drillsPage, 0},
	{get, "/s/:site/plan", book.PlanDrills, planPage, 0},
	{post, "/s/:site/plan", book.PlanDrills, planDrill, 0},
	{get, "/s/:site/drill", book.RecordDone, drillPage, 0},
	{post, "/s/:site/drill", book.RecordDone, recordDrill, 0},
	{get, "/s/:site/checklist", book.SeeSite, checklistPage, 0},
	{get, "/s/:site/checklist/:item", book.SeeSite, itemPage, 0},
	{get, "/s/:site/groups", book.SetProgram, groupsPage, 0},
	{post, "/s/:site/groups", book.SetProgram, adoptGroup, 0},
	{get, "/s/:site/program", book.SeeSite, programPage, 0},
	{post, "/s/:site/program", book.SetProgram, saveProgram, 0},
	{get, "/s/:site/program.yaml", book.SeeSite, programFile, 0},
	{get, "/s/:site/gaps", book.SeeSite, gapsPage, 0},
	{get, "/s/:site/book", book.SeeBook, bookPage, 0},
	{get, "/s/:site/book/:id", book.SeeOwn, entryPage, 0},
	{get, "/s/:site/correct/:id", book.CorrectOwn, correctPage, 0},
	{post, "/s/:site/correct/:id", book.CorrectOwn, correct, 0},
	{post, "/s/:site/withdraw/:id", book.CorrectOwn, withdraw, 0},
	{post, "/s/:site/undo/:id", book.ImportTables, undoImport, 0},
	{get, "/s/:site/import", book.ImportTables, importPage, 0},
	{post, "/s/:site/import", book.ImportTables, importTable, 32 << 20},
}

// serve opens a visit for a route: limits what is sent, finds who asks and at which site, and maps
// what goes wrong.
func (s *server) serve(r route) gin.HandlerFunc {
	limit := r.limit
	if limit == 0 {
		limit = smallBody
	}
	return func(c *gin.Context) {
		c.Request.Body = http.MaxBytesReader(c.Writer, c.Request.Body, limit)
		v := &visit{server: s, c: c}
		if r.action != public {
			if err := v.enter(r.action); err != nil {
				s.fail(v, err)
				return
			}
		}
		if err := r.handle(v); err != nil {
			s.fail(v, err)
		}
	}
}

// enter finds the actor, and the site where the path names one, and checks the action.
func (v *visit) enter(action book.Action) error {
	actor, err := v.actorOf(v.c.Request)
	if err != nil {
		return err
	}
	v.actor = actor
	if !v.may(action) {
		return &book.Denied{Action: action, Role: actor.Role}
	}
	code := v.param("site")
	if code == "" {
		return nil
	}
	if v.on, err = v.readOn(); err != nil {
		return err
	}
	v.site, err = v.b.SiteHead(v.ctx(), actor, code, v.on)
	return err
}
