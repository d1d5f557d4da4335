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
