package web

import (
	"context"
	"fmt"
	"log/slog"
	"net/http"
	"net/netip"
	"net/url"
	"time"

	"github.com/gin-gonic/gin"

	"lodebook/models/book"
)

// Options are what the pages need from outside.
type Options struct {
	PublicURL      string         // the address under which people reach the book, without a slash at its end
	Secure         bool           // people reach it over TLS: cookies are kept to it
	TrustedProxies []netip.Prefix // whose word is believed on where a request comes from
	Log            *slog.Logger
	// Jobs tells when each scheduled job runs next; nil: the jobs page does without.
	Jobs func(context.Context) ([]JobLine, error)
	// API puts the routes of the JSON API beside the pages; nil: there are none. It is given what
	// turns a request into its actor.
	API func(gin.IRouter, func(*http.Request) (book.Actor, error))
}

// JobLine says when a job runs next at a site, by the site's clocks.
type JobLine struct {
	Name, About, Site string
	Next              time.Time
}

// server is what all requests share.
type server struct {
	b      *book.Book
	o      Options
	leaves templates
	files  static
	pages  *memo[proof]
	shorts *memo[short]
	flags  *memo[map[string]int] // by site: how often flags that stand came back
	tray   tray
}

// New makes the handler of all pages. It fails when a template is not readable or an option cannot be.
func New(b *book.Book, o Options) (http.Handler, error) {
	s, err := newServer(b, o)
	if err != nil {
		return nil, err
	}
	return s.handler()
}

func newServer(b *book.Book, o Options) (*server, error) {
	if o.Log == nil {
		o.Log = slog.New(slog.DiscardHandler)
	}
	leaves, err := parseTemplates()
	if err != nil {
		return nil, err
	}
	files, err := readStatic()
	if err != nil {
		return nil, err
	}
	s := &server{b: b, o: o, leaves: leaves, files: files}
	s.remember(pageRoom, shortRoom, flagRoom)
	return s, nil
}

// remember gives the server an empty memory with so much room.
func (s *server) remember(pages, shorts, flags int) {
	s.pages, s.shorts, s.flags = newMemo[proof](pages), newMemo[short](shorts), newMemo[map[string]int](flags)
}

// handler is the engine behind its guard.
func (s *server) handler() (http.Handler, error) {
	engine, err := s.engine()
	if err != nil {
		return nil, err
	}
	return s.guard(engine)
}

// engine puts the route table on a router.
func (s *server) engine() (*gin.Engine, error) {
	gin.SetMode(gin.ReleaseMode)
	e := gin.New()
	e.UseRawPath = true // a code may hold a slash
	e.HandleMethodNotAllowed = true
	proxies := make([]string, len(s.o.TrustedProxies))
	for i, p := range s.o.TrustedProxies {
		proxies[i] = p.String()
	}
	if err := e.SetTrustedProxies(proxies); err != nil {
		return nil, fmt.Errorf("trusted proxies: %w", err)
	}
	e.Use(s.recover, s.headers)
	for _, r := range routes {
		e.Handle(r.method, r.path, s.serve(r))
	}
	if s.o.API != nil {
		s.o.API(e, s.actorOf)
	}
	e.NoRoute(func(c *gin.Context) { s.fail(s.visitor(c), errNoPage) })
	e.NoMethod(func(c *gin.Context) { s.fail(s.visitor(c), errNoMethod) })
	return e, nil
}

// guard refuses what another site's page sends in a person's name.
func (s *server) guard(next http.Handler) (http.Handler, error) {
	p := http.NewCrossOriginProtection()
	if u, err := url.Parse(s.o.PublicURL); err == nil && u.Host != "" {
		// A proxy may change the Host header, so the public address is named.
		if err := p.AddTrustedOrigin(u.Scheme + "://" + u.Host); err != nil {
			return nil, fmt.Errorf("public address: %w", err)
		}
	}
	p.SetDenyHandler(http.HandlerFunc(func(w http.ResponseWriter, _ *http.Request) {
		setHeaders(w.Header())
		http.Error(w, "This form was sent from another site. Nothing was kept. Open the page here and send it again.", http.StatusForbidden)
	}))
	return p.Handler(next), nil
}
