package web

import (
	"context"
	"errors"
	"net/http"

	"lodebook/models/book"
	"lodebook/models/program"
)

var (
	errNoPage   = &book.NotFound{What: "page", Code: "of this address"}
	errNoMethod = errors.New("no such method")
)

// unreadable is a body that was too large or no form.
func unreadable(err error) error {
	var large *http.MaxBytesError
	if errors.As(err, &large) {
		return err
	}
	return &book.Invalid{Faults: []book.Fault{{Field: "form", Problem: "could not be read", Accepted: "send the form of the page"}}}
}

type failLeaf struct {
	page
	Status         int
	Sentence       string
	Faults         []book.Fault
	Lines          []string // faults of a program file
	Entry, Newer   string   // of a stale correction: the entry and what took its place
	EntryURL       string
	NewerURL       string
	Recorded       string // of a conflict: what stands and what was given
	Given          string
	Back           string
	MayTryLater    bool
	SignedIn, Site bool
}

var failSheet = leafOf[failLeaf]("fail")

// fail is the one place where an error becomes a page.
func (s *server) fail(v *visit, err error) {
	var bad *book.BadSignIn
	if errors.As(err, &bad) {
		if err := s.askSignIn(v); err != nil {
			s.lastWord(v, err)
		}
		return
	}
	p := v.failure(err)
	if p.Status >= http.StatusInternalServerError && !errors.Is(err, context.Canceled) {
		s.o.Log.Error("a page failed", "method", v.c.Request.Method, "path", v.c.FullPath(), "error", err)
	}
	if err := failSheet.show(v, p.Status, p); err != nil {
		s.lastWord(v, err)
	}
}

// lastWord is for when not even the page of the error can be shown.
func (s *server) lastWord(v *visit, err error) {
	s.o.Log.Error("a page could not be shown", "path", v.c.FullPath(), "error", err)
	http.Error(v.c.Writer, book.Unknown, http.StatusInternalServerError)
}

func (v *visit) failure(err error) *failLeaf {
	p := &failLeaf{SignedIn: v.actor.Account != "", Site: v.site.Code != "", Back: "/"}
	if p.Site {
		p.Back = siteURL(v.site.Code, "today")
	}
	k := book.Classify(err)
	p.Status, p.Sentence = k.Status, k.Sentence
	var large *http.MaxBytesError
	switch {
	case errors.Is(err, errNoPage):
		p.Sentence = "There is no page at this address."
	case errors.Is(err, errNoMethod):
		p.Status, p.Sentence = http.StatusMethodNotAllowed, "This page cannot be used in this way."
	case errors.As(err, &large):
		p.Status, p.Sentence = http.StatusRequestEntityTooLarge, "What was sent is too large for this page. Nothing was kept."
	}
	p.detail(v, err)
	p.Title = failTitles[p.Status]
	if p.Title == "" {
		p.Title = failTitles[http.StatusInternalServerError]
	}
	return p
}

var failTitles = map[int]string{
	http.StatusForbidden:             "Not for this account",
	http.StatusNotFound:              "Nothing here",
	http.StatusMethodNotAllowed:      "Not in this way",
	http.StatusConflict:              "Somebody was faster",
	http.StatusRequestEntityTooLarge: "Too large",
	http.StatusUnprocessableEntity:   "This cannot be kept as it is",
	http.StatusTooManyRequests:       "Wait a little",
	http.StatusServiceUnavailable:    "The book cannot be opened",
	http.StatusInternalServerError:   "Something went wrong",
}

func (p *failLeaf) detail(v *visit, err error) {
	var invalid *book.Invalid
	var faults program.Faults
	var stale *book.Stale
	var conflict *book.Conflict
	switch {
	case errors.As(err, &invalid):
		p.Faults, p.Sentence = invalid.Faults, "Nothing was kept. Go back and put this right:"
	case errors.As(err, &faults):
		p.Sentence = "The program has faults. Nothing was kept."
		p.Lines = faultLines(faults)
	case errors.As(err, &stale):
		p.Entry, p.Newer = stale.ID, stale.By
		if p.Site {
			p.EntryURL, p.NewerURL = siteURL(v.site.Code, "book", stale.ID), siteURL(v.site.Code, "book", stale.By)
		}
	case errors.As(err, &conflict):
		p.Sentence = "This identifier already stands for another entry. Nothing was kept."
		p.Recorded, p.Given = conflict.Recorded, conflict.Given
	}
}
