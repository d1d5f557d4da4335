package web

import (
	"context"
	"net/http"
	"net/url"

	"github.com/gin-gonic/gin"

	"lodebook/models/book"
	"lodebook/models/civil"
)

// visit is one request: who asks, and of which site and day.
type visit struct {
	*server
	c     *gin.Context
	actor book.Actor
	site  book.SiteView // zero on pages outside a site
	on    *civil.Day    // the day asked for with ?on=; nil: today
	proof *proof        // takes the page that is shown, where it is to be held; nil: it is sent at once
}

func (v *visit) ctx() context.Context { return v.c.Request.Context() }

// may tells whether the visitor's role allows the action.
func (v *visit) may(a book.Action) bool { return book.Allows(a, v.actor.Role) }

// today is the civil day at the site.
func (v *visit) today() civil.Day { return v.site.Today }

// day is the day that the page shows.
func (v *visit) day() civil.Day {
	if v.on != nil {
		return *v.on
	}
	return v.site.Today
}

// elsewhen tells that the page shows another day than today; forms are hidden then.
func (v *visit) elsewhen() bool { return v.day() != v.today() }

// acts tells whether the page may offer forms of the action: the role allows it and the day is today.
func (v *visit) acts(a book.Action) bool { return v.may(a) && !v.elsewhen() }

// query is one value of the address; form is one that was sent.
func (v *visit) query(name string) string { return v.c.Query(name) }

// param is a part of the path.
func (v *visit) param(name string) string { return v.c.Param(name) }

// form reads what was sent.
func (v *visit) form() (*Form, error) {
	if err := v.c.Request.ParseForm(); err != nil {
		return nil, unreadable(err)
	}
	return &Form{Values: v.c.Request.PostForm}, nil
}

// asked makes a form of the address, for a page that is opened with some fields filled in.
func (v *visit) asked() *Form { return &Form{Values: v.c.Request.URL.Query()} }

// url is the address of a page of the site: v.url("people", code). It keeps the day that is shown.
func (v *visit) url(parts ...string) string {
	u := siteURL(v.site.Code, parts...)
	if v.on != nil {
		u += "?on=" + v.on.String()
	}
	return u
}

// siteURL is the address of a page of a site; each part is escaped.
func siteURL(site string, parts ...string) string {
	u := "/s/" + url.PathEscape(site)
	for _, p := range parts {
		u += "/" + url.PathEscape(p)
	}
	return u
}

// with adds a query to an address: pairs of name and value, empty values left out.
func with(address string, pairs ...string) string {
	q := url.Values{}
	for i := 0; i+1 < len(pairs); i += 2 {
		if pairs[i+1] != "" {
			q.Add(pairs[i], pairs[i+1])
		}
	}
	if len(q) == 0 {
		return address
	}
	sep := "?"
	if u, err := url.Parse(address); err == nil && u.RawQuery != "" {
		sep = "&"
	}
	return address + sep + q.Encode()
}

// seeOther sends the browser to another page after a write.
func (v *visit) seeOther(address string) error {
	v.c.Redirect(http.StatusSeeOther, address)
	return nil
}

// kept sends the browser to another page that shows a notice; entry (may be empty) is what was
// written, so that a slip can be put right from there.
func (v *visit) kept(address, text, entry string) error {
	n := notice{Text: text}
	if entry != "" {
		n.Link, n.LinkText = siteURL(v.site.Code, "book", entry), "See the entry, or put a slip right"
	}
	v.setNotice(n)
	return v.seeOther(address)
}

// shortISO is a day for a date box; empty for none.
func shortISO(d *civil.Day) string {
	if d == nil {
		return ""
	}
	return d.String()
}
