// Package api is the JSON API: one route table, thin handlers. Its answers are those of the
// commands, field for field; its errors are problem details (RFC 9457).
package api

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"net/http"
	"strings"
	"time"

	"github.com/gin-gonic/gin"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/program"
)

// Auth gives the actor of a request, or an error that maps to a problem.
type Auth func(*http.Request) (book.Actor, error)

// route is one line of the table: what is asked, and the action that it needs.
type route struct {
	method, path string
	action       book.Action // empty: anybody
	handle       func(*server, *gin.Context, book.Actor) (any, error)
}

// routes is every route of the API.
var routes = []route{
	{http.MethodGet, "/api/health", "", (*server).health},
	{http.MethodGet, "/api/schema", "", (*server).schema},
	{http.MethodGet, "/api/sites", book.SeeOwn, (*server).sites},
	{http.MethodGet, "/api/sites/:site/standings", book.SeeOwn, (*server).standings},
	{http.MethodGet, "/api/sites/:site/gaps", book.SeeOwn, (*server).gaps},
	{http.MethodGet, "/api/sites/:site/reach", book.SeeOwn, (*server).reach},
	{http.MethodGet, "/api/sites/:site/visits", book.SeeVisits, (*server).visits},
	{http.MethodGet, "/api/sites/:site/passages", book.SeePassages, (*server).passages},
	{http.MethodGet, "/api/sites/:site/rights-diff", book.SeePassages, (*server).rightsDiff},
	{http.MethodGet, "/api/sites/:site/coverage", book.SeeSite, (*server).coverage},
	{http.MethodGet, "/api/sites/:site/remedies", book.SeeOwn, (*server).remedies},
	{http.MethodGet, "/api/sites/:site/incidents", book.SeeIncidents, (*server).incidents},
}

type server struct {
	b    *book.Book
	auth Auth
}

// Register puts the API's routes on an engine.
func Register(e gin.IRouter, b *book.Book, auth Auth) {
	s := &server{b, auth}
	for _, r := range routes {
		e.Handle(r.method, r.path, s.serve(r))
	}
}

// serve checks the action, calls the handler and writes its answer or problem.
func (s *server) serve(r route) gin.HandlerFunc {
	return func(c *gin.Context) {
		c.Header("Cache-Control", "no-store")
		actor, err := s.actor(c, r)
		if err != nil {
			writeProblem(c, err)
			return
		}
		answer, err := r.handle(s, c, actor)
		if err != nil {
			writeProblem(c, err)
			return
		}
		if r.action == "" {
			c.JSON(http.StatusOK, answer)
			return
		}
		if err := writeTagged(c, answer); err != nil {
			writeProblem(c, err)
		}
	}
}

// writeTagged writes an answer with a tag of its bytes; whoever names that tag has it already and is sent
// nothing. It may be kept by whoever asked, who asks again each time.
func writeTagged(c *gin.Context, answer any) error {
	body, err := json.Marshal(answer)
	if err != nil {
		return err
	}
	sum := sha256.Sum256(body)
	tag := `"` + hex.EncodeToString(sum[:16]) + `"`
	c.Header("Cache-Control", "private, no-cache")
	c.Header("ETag", tag)
	if hasTag(c.GetHeader("If-None-Match"), tag) {
		c.Status(http.StatusNotModified)
		return nil
	}
	c.Data(http.StatusOK, "application/json; charset=utf-8", body)
	return nil
}

// hasTag tells whether a list of tags, some of them marked as weak, names one.
func hasTag(list, tag string) bool {
	for t := range strings.SplitSeq(list, ",") {
		if t = strings.TrimPrefix(strings.TrimSpace(t), "W/"); t == tag || t == "*" {
			return true
		}
	}
	return false
}

func (s *server) actor(c *gin.Context, r route) (book.Actor, error) {
	if r.action == "" {
		return book.Actor{}, nil
	}
	actor, err := s.auth(c.Request)
	if err != nil {
		return actor, err
	}
	if !book.Allows(r.action, actor.Role) {
		return actor, &book.Denied{Action: r.action, Role: actor.Role}
	}
	return actor, nil
}

func (s *server) health(c *gin.Context, _ book.Actor) (any, error) {
	n, err := s.b.Size(c.Request.Context())
	return gin.H{"status": "ok", "entries": n}, err
}

func (s *server) schema(*gin.Context, book.Actor) (any, error) {
	return json.RawMessage(program.Schema()), nil
}

type siteJSON struct {
	Code     string    `json:"code"`
	Name     string    `json:"name"`
	TimeZone string    `json:"time_zone"`
	Today    civil.Day `json:"today"`
}

func (s *server) sites(c *gin.Context, a book.Actor) (any, error) {
	list, err := s.b.Sites(c.Request.Context(), a)
	out := make([]siteJSON, len(list))
	for i, v := range list {
		out[i] = siteJSON{v.Code, v.Name, v.TimeZone, v.Today}
	}
	return out, err
}

func (s *server) standings(c *gin.Context, a book.Actor) (any, error) {
	q, err := question(c)
	if err != nil {
		return nil, err
	}
	st, err := s.b.Standings(context.WithoutCancel(c.Request.Context()), a, q)
	return rowsJSON(st.Rows, false), err
}

func (s *server) gaps(c *gin.Context, a book.Actor) (any, error) {
	q, err := question(c)
	if err != nil {
		return nil, err
	}
	ctx := context.WithoutCancel(c.Request.Context())
	if q.KnownAt == nil && q.Item == "" && q.Subject == "" && !q.Why {
		// What falls short is found without evaluating and naming all the rest.
		st, err := s.b.Short(ctx, a, q.Site, q.On)
		return rowsJSON(st.Gaps(), true), err
	}
	st, err := s.b.Standings(ctx, a, q)
	return rowsJSON(st.Gaps(), true), err
}

func rowsJSON(rows []book.Row, owner bool) []book.RowJSON {
	out := make([]book.RowJSON, len(rows))
	for i, r := range rows {
		out[i] = r.JSON(owner)
	}
	return out
}

// question reads what is asked from the query: on, known_at, item, subject, why.
func question(c *gin.Context) (book.StandingQuery, error) {
	q := book.StandingQuery{Site: c.Param("site"), Item: c.Query("item"), Subject: c.Query("subject"), Why: c.Query("why") != ""}
	if text := c.Query("on"); text != "" {
		d, err := civil.ParseDay(text)
		if err != nil {
			return q, &book.Invalid{Faults: []book.Fault{{Field: "on", Value: text, Problem: "is not a day", Accepted: "write it as YYYY-MM-DD"}}}
		}
		q.On = &d
	}
	if text := c.Query("known_at"); text != "" {
		t, err := time.Parse(time.RFC3339, text)
		if err != nil {
			return q, &book.Invalid{Faults: []book.Fault{{Field: "known_at", Value: text, Problem: "is not an instant", Accepted: "write it as 2026-03-01T08:30:00Z"}}}
		}
		q.KnownAt = &t
	}
	return q, nil
}

// problem is an RFC 9457 problem; faults are those of an Invalid.
type problem struct {
	Type   string       `json:"type"`
	Title  string       `json:"title"`
	Status int          `json:"status"`
	Detail string       `json:"detail,omitempty"`
	Faults []book.Fault `json:"faults,omitempty"`
}

func writeProblem(c *gin.Context, err error) {
	k := book.Classify(err)
	p := problem{Type: "about:blank", Title: http.StatusText(k.Status), Status: k.Status, Detail: k.Sentence}
	var invalid *book.Invalid
	if errors.As(err, &invalid) {
		p.Faults = invalid.Faults
	}
	if k.Status == http.StatusInternalServerError {
		// The cause is for the log, which gin's error list feeds; the answer is a fixed sentence.
		_ = c.Error(err)
	}
	c.Header("Content-Type", "application/problem+json")
	c.AbortWithStatusJSON(k.Status, p)
}
