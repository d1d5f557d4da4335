package web

import (
	"errors"
	"net/http"
	"net/url"
	"strings"
	"time"

	"github.com/gin-gonic/gin"

	"lodebook/models/book"
	"lodebook/models/civil"
)

// cookieName is that of the session: over TLS the browser itself holds it to this host and path.
func (s *server) cookieName() string {
	if s.o.Secure {
		return "__Host-lodebook"
	}
	return "lodebook"
}

func (s *server) cookie(name, value string, life time.Duration) *http.Cookie {
	c := &http.Cookie{Name: name, Value: value, Path: "/", HttpOnly: true, Secure: s.o.Secure, SameSite: http.SameSiteLaxMode, MaxAge: int(life.Seconds())}
	if value == "" {
		c.MaxAge = -1
	}
	return c
}

// actorOf gives who sends a request, by its session. A request without one is a *book.BadSignIn.
func (s *server) actorOf(r *http.Request) (book.Actor, error) {
	c, err := r.Cookie(s.cookieName())
	if err != nil {
		return book.Actor{}, &book.BadSignIn{}
	}
	return s.b.BySession(r.Context(), c.Value)
}

// visitor is the visit of somebody who may or may not be signed in.
func (s *server) visitor(c *gin.Context) *visit {
	v := &visit{server: s, c: c}
	if actor, err := s.actorOf(c.Request); err == nil {
		v.actor = actor
	}
	return v
}

// readOn reads the day that a page is to show.
func (v *visit) readOn() (*civil.Day, error) {
	text := v.query("on")
	if text == "" || v.c.Request.Method != get {
		return nil, nil
	}
	d, err := civil.ParseDay(text)
	if err != nil {
		return nil, &book.Invalid{Faults: []book.Fault{{Field: "as of", Value: text, Problem: "is not a day", Accepted: "write it as YYYY-MM-DD"}}}
	}
	return &d, nil
}

type signInLeaf struct {
	page
	Form  *Form
	Next  string
	Ended bool // the session ended while a form was being filled in
}

var signInSheet = leafOf[signInLeaf]("sign-in")

func signInPage(v *visit) error {
	return signInSheet.show(v, http.StatusOK, &signInLeaf{page: page{Title: "Sign in"}, Form: &Form{}, Next: localPath(v.query("next"))})
}

func signIn(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	next := localPath(f.Get("next"))
	in, err := v.b.SignIn(v.ctx(), f.Get("name"), f.Get("password"), v.c.ClientIP())
	if err != nil {
		return signInAgain(v, f, next, err)
	}
	v.begin(in)
	return v.seeOther(next)
}

// signInAgain shows the form with what kept the sign-in from working.
func signInAgain(v *visit, f *Form, next string, err error) error {
	k := book.Classify(err)
	if k.Status == http.StatusInternalServerError {
		return err
	}
	f.Forget("password")
	f.Loose("password", k.Sentence)
	var many *book.TooMany
	if errors.As(err, &many) {
		v.c.Header("Retry-After", many.Until.UTC().Format(http.TimeFormat))
	}
	return signInSheet.show(v, k.Status, &signInLeaf{page: page{Title: "Sign in"}, Form: f, Next: next})
}

// begin hands the session's secret to the browser.
func (v *visit) begin(in book.SignedIn) {
	http.SetCookie(v.c.Writer, v.cookie(v.cookieName(), in.Secret, in.Expires.Sub(v.b.Now())))
}

func signOut(v *visit) error {
	if c, err := v.c.Request.Cookie(v.cookieName()); err == nil {
		if err := v.b.SignOut(v.ctx(), c.Value); err != nil {
			return err
		}
	}
	http.SetCookie(v.c.Writer, v.cookie(v.cookieName(), "", 0))
	return v.seeOther("/sign-in")
}

// askSignIn sends somebody without a session to the sign-in page. What they were about to send is
// not lost: it is in the form that the browser goes back to.
func (s *server) askSignIn(v *visit) error {
	if v.c.Request.Method == get {
		next := v.c.Request.URL.RequestURI()
		if next == "/" {
			next = ""
		}
		return v.seeOther(with("/sign-in", "next", next))
	}
	return signInSheet.show(v, http.StatusUnauthorized, &signInLeaf{page: page{Title: "Sign in"}, Form: &Form{}, Next: "/", Ended: true})
}

// localPath keeps a path of this server and nothing else.
func localPath(next string) string {
	u, err := url.Parse(next)
	if err != nil || u.IsAbs() || u.Host != "" || !strings.HasPrefix(next, "/") || strings.HasPrefix(next, "//") || strings.ContainsAny(next, "\\\r\n\t") {
		return "/"
	}
	return next
}

type linkLeaf struct {
	page
	Token string
}

var linkSheet = leafOf[linkLeaf]("link")

// linkPage shows a button: a mail scanner that only opens the link does not use it up.
func linkPage(v *visit) error {
	return linkSheet.show(v, http.StatusOK, &linkLeaf{page{Title: "Sign in once"}, v.param("token")})
}

func takeLink(v *visit) error {
	in, err := v.b.SignInByLink(v.ctx(), v.param("token"))
	if err != nil {
		return err
	}
	v.begin(in)
	return v.seeOther("/password?first=yes")
}

type passwordLeaf struct {
	page
	Form  *Form
	Name  string
	First bool
}

var passwordSheet = leafOf[passwordLeaf]("password")

func passwordPage(v *visit) error {
	return passwordSheet.show(v, http.StatusOK, &passwordLeaf{page{Title: "Your password"}, &Form{}, v.actor.Name, v.query("first") != ""})
}

func setPassword(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	password := f.Get("password")
	if password != f.Get("again") {
		err = &book.Invalid{Faults: []book.Fault{{Field: "again", Problem: "is not the same as above", Accepted: "write the same password twice"}}}
	} else {
		err = v.b.SetPassword(v.ctx(), v.actor, v.actor.Name, password)
	}
	if f.Take(err) {
		f.Forget("password", "again")
		return passwordSheet.show(v, http.StatusUnprocessableEntity, &passwordLeaf{page{Title: "Your password"}, f, v.actor.Name, v.query("first") != ""})
	}
	if err != nil {
		return err
	}
	v.setNotice(notice{Text: "Your password is set. Use it with the name " + v.actor.Name + "."})
	return v.seeOther("/")
}

// home leads to today at the first site.
func home(v *visit) error {
	sites, err := v.b.Sites(v.ctx(), v.actor)
	if err != nil {
		return err
	}
	if len(sites) == 0 {
		return &book.NotFound{What: "site of this account", Code: v.actor.Name}
	}
	return v.seeOther(siteURL(sites[0].Code, "today"))
}

type helpLeaf struct{ page }

var helpSheet = leafOf[helpLeaf]("help")

func helpPage(v *visit) error {
	return helpSheet.show(v, http.StatusOK, &helpLeaf{page{Title: "What the words mean"}})
}
