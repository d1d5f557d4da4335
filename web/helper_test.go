package web

import (
	"crypto/rand"
	"net/http"
	"net/http/httptest"
	"net/url"
	"os"
	"strings"
	"testing"
	"time"
	_ "time/tzdata"

	"golang.org/x/net/html"

	"lodebook/migrations/scratch"
	"lodebook/models/book"
)

// house is a book with a site, an account of every role, and the pages over it. Its clock stands
// still on Tuesday 1 December 2026, 08:00, until a test moves it.
type house struct {
	testing.TB
	b       *book.Book
	path    string // of the book
	handler http.Handler
	blank   http.Handler // see forgetful
	now     time.Time
	op      book.Actor
	actors  map[book.Role]book.Actor
	jars    map[book.Role]*jar
}

const fell = "FELL"

func newHouse(t testing.TB) *house {
	t.Helper()
	h := &house{TB: t, now: time.Date(2026, 12, 1, 8, 0, 0, 0, time.UTC), op: book.SystemOperator("ops"), actors: map[book.Role]book.Actor{}, jars: map[book.Role]*jar{}}
	h.path = scratch.Book(t)
	b, err := book.Create(t.Context(), h.path, h.options())
	h.ok(err)
	h.b = b
	t.Cleanup(func() { h.ok(b.Close()) })
	h.handler, err = New(b, Options{PublicURL: "http://book.example"})
	h.ok(err)
	return h
}

func (h *house) options() book.Options {
	return book.Options{Clock: func() time.Time { return h.now }, Random: rand.Reader}
}

// elsewhere opens the book once more, as another program would.
func (h *house) elsewhere() *book.Book {
	h.Helper()
	b, err := book.Open(h.Context(), h.path, h.options())
	h.ok(err)
	h.Cleanup(func() { h.ok(b.Close()) })
	return b
}

// furnished is a house with the site of testdata and people and fixtures in it.
func furnished(t testing.TB) *house {
	t.Helper()
	h := newHouse(t)
	source, err := os.ReadFile("testdata/site.yaml")
	h.ok(err)
	h.open(source)
	h.people()
	h.fixtures()
	return h
}

func (h *house) open(source []byte) {
	h.Helper()
	_, err := h.b.OpenProgram(h.Context(), h.op, source, "")
	h.ok(err)
}

func (h *house) ok(err error) {
	h.Helper()
	if err != nil {
		h.Fatal(err)
	}
}

// officer is the safety officer's actor.
func (h *house) officer() book.Actor { return h.actor(book.SafetyOfficer) }

// actor gives the account of a role, made when it is first asked for.
func (h *house) actor(r book.Role) book.Actor {
	h.Helper()
	if a, ok := h.actors[r]; ok {
		return a
	}
	f := book.AccountForm{Name: string(r), Role: r}
	if r != book.Administrator {
		f.Sites = []string{fell}
	}
	if r == book.Member {
		f.Person = "P2"
	}
	_, err := h.b.AddAccount(h.Context(), h.op, f)
	h.ok(err)
	h.actors[r], err = h.b.ActorNamed(h.Context(), f.Name)
	h.ok(err)
	return h.actors[r]
}

func (h *house) people() {
	h.Helper()
	for _, p := range []book.PersonForm{
		{Code: "P1", Name: "Ines Arruda", Level: "L2", Crew: "early", Joined: "2025-02-01", Facts: map[string]string{"employer": "Skerry Works"}},
		{Code: "P2", Name: "Milo Prent", Level: "L1", Crew: "early", Joined: "2025-02-01"},
		{Code: "P3", Name: "Sanna Holm", Level: "L2", Crew: "night", Joined: "2025-06-01"},
		{Code: "P4", Name: "Teo Varga", Level: "L2", Crew: "night", Joined: "2026-11-20"},
	} {
		_, err := h.b.KeepPerson(h.Context(), h.officer(), fell, p, book.Correction{})
		h.ok(err)
	}
}

func (h *house) fixtures() {
	h.Helper()
	for _, f := range []book.FixtureForm{
		{Code: "V1", Kind: "vent", Name: "North vent", Zone: "IV", Since: "2025-02-01", Facts: map[string]string{"over_public_path": "yes"}},
		{Code: "V2", Kind: "vent", Name: "South vent", Zone: "IV", Since: "2025-02-01"},
		{Code: "D1", Kind: "detector", Name: "Door detector", Zone: "III", Since: "2025-02-01"},
	} {
		_, err := h.b.KeepFixture(h.Context(), h.officer(), fell, f, book.Correction{})
		h.ok(err)
	}
}

// record puts something on record as the officer.
func (h *house) record(what, subject, on, result string) string {
	h.Helper()
	r, err := h.b.Record(h.Context(), h.officer(), fell, book.RecordForm{Record: what, Subject: subject, On: on, Result: result}, book.Correction{})
	h.ok(err)
	return r.ID()
}

// jar is a browser's cookies.
type jar struct{ cookies map[string]string }

// as signs the role's account in, once.
func (h *house) as(r book.Role) *jar {
	h.Helper()
	if j, ok := h.jars[r]; ok {
		return j
	}
	h.actor(r)
	secret, err := h.b.NewLink(h.Context(), h.op, string(r))
	h.ok(err)
	in, err := h.b.SignInByLink(h.Context(), secret)
	h.ok(err)
	h.jars[r] = &jar{map[string]string{"lodebook": in.Secret}}
	return h.jars[r]
}

// answer is what came back.
type answer struct {
	*httptest.ResponseRecorder
	t    testing.TB
	root *html.Node
}

// do sends a request; a nil jar is nobody's.
func (h *house) do(j *jar, r *http.Request) *answer {
	h.Helper()
	if j != nil {
		for name, value := range j.cookies {
			r.AddCookie(&http.Cookie{Name: name, Value: value})
		}
	}
	w := httptest.NewRecorder()
	h.handler.ServeHTTP(w, r)
	if j != nil {
		for _, c := range w.Result().Cookies() {
			if c.MaxAge < 0 {
				delete(j.cookies, c.Name)
			} else {
				j.cookies[c.Name] = c.Value
			}
		}
	}
	root, err := html.Parse(strings.NewReader(w.Body.String()))
	h.ok(err)
	return &answer{w, h.TB, root}
}

func (h *house) get(j *jar, path string) *answer {
	h.Helper()
	return h.do(j, httptest.NewRequest(get, path, nil))
}

// page gets a page that must be there.
func (h *house) page(j *jar, path string) *answer {
	h.Helper()
	a := h.get(j, path)
	if a.Code != http.StatusOK {
		h.Fatalf("%s: %d\n%s", path, a.Code, a.text("main"))
	}
	return a
}

// post sends a form: pairs of name and value.
func (h *house) post(j *jar, path string, pairs ...string) *answer {
	h.Helper()
	q := url.Values{}
	for i := 0; i+1 < len(pairs); i += 2 {
		q.Add(pairs[i], pairs[i+1])
	}
	r := httptest.NewRequest(post, path, strings.NewReader(q.Encode()))
	r.Header.Set("Content-Type", "application/x-www-form-urlencoded")
	return h.do(j, r)
}

// sent sends a form that must be taken, and gives the page that follows.
func (h *house) sent(j *jar, path string, pairs ...string) *answer {
	h.Helper()
	a := h.post(j, path, pairs...)
	if a.Code != http.StatusSeeOther {
		h.Fatalf("POST %s: %d\n%s", path, a.Code, a.text("main"))
	}
	return h.page(j, a.Header().Get("Location"))
}

// all finds elements by a small selector language: "tag", ".class", "tag.class", "#id",
// "[name=value]", and descendants by blanks.
func (a *answer) all(selector string) []*html.Node { return find2(a.root, strings.Fields(selector)) }

func find2(n *html.Node, path []string) []*html.Node {
	var out []*html.Node
	for c := range n.Descendants() {
		if c.Type != html.ElementNode || !matches(c, path[0]) {
			continue
		}
		if len(path) == 1 {
			out = append(out, c)
			continue
		}
		for _, x := range find2(c, path[1:]) {
			if len(out) == 0 || out[len(out)-1] != x {
				out = append(out, x)
			}
		}
	}
	return out
}

func matches(n *html.Node, simple string) bool {
	simple, attr, ok := strings.Cut(simple, "[")
	if ok {
		name, value, _ := strings.Cut(strings.TrimSuffix(attr, "]"), "=")
		if attribute(n, name) != value {
			return false
		}
	}
	simple, id, ok := strings.Cut(simple, "#")
	if ok && attribute(n, "id") != id {
		return false
	}
	tag, class, ok := strings.Cut(simple, ".")
	if ok && !strings.Contains(" "+attribute(n, "class")+" ", " "+class+" ") {
		return false
	}
	return tag == "" || n.Data == tag
}

func attribute(n *html.Node, name string) string {
	for _, a := range n.Attr {
		if a.Key == name {
			return a.Val
		}
	}
	return ""
}

// text is the words of all elements that the selector finds, blanks folded.
func (a *answer) text(selector string) string {
	var b strings.Builder
	for _, n := range a.all(selector) {
		b.WriteString(textOf(n))
		b.WriteString(" ")
	}
	return strings.Join(strings.Fields(b.String()), " ")
}

func textOf(n *html.Node) string {
	var b strings.Builder
	for c := range n.Descendants() {
		if c.Type == html.TextNode {
			b.WriteString(c.Data)
			b.WriteString(" ")
		}
	}
	return b.String()
}

// says fails the test when the words are not in what the selector finds.
func (a *answer) says(selector, words string) {
	a.t.Helper()
	if text := a.text(selector); !strings.Contains(text, words) {
		a.t.Errorf("%s says %q, want %q in it", selector, text, words)
	}
}

// hides fails the test when the words are there.
func (a *answer) hides(selector, words string) {
	a.t.Helper()
	if text := a.text(selector); strings.Contains(text, words) {
		a.t.Errorf("%s says %q, want no %q in it", selector, text, words)
	}
}

// has fails the test when the selector does not find n elements.
func (a *answer) has(n int, selector string) {
	a.t.Helper()
	if got := len(a.all(selector)); got != n {
		a.t.Errorf("%d of %s, want %d in\n%s", got, selector, n, a.text("main"))
	}
}

// value is what a field of a form holds.
func (a *answer) value(name string) string {
	a.t.Helper()
	for _, tag := range []string{"input", "textarea", "select"} {
		for _, n := range a.all(tag + "[name=" + name + "]") {
			switch {
			case tag == "textarea":
				return strings.TrimSuffix(strings.TrimPrefix(textOf(n), "\n"), " ")
			case tag == "input":
				return attribute(n, "value")
			}
			for c := range n.Descendants() {
				for _, at := range c.Attr {
					if at.Key == "selected" {
						return attribute(c, "value")
					}
				}
			}
		}
	}
	a.t.Errorf("there is no field %s", name)
	return ""
}

// checked are the values of the boxes of a name that are ticked.
func checked(a *answer, name string) []string {
	var out []string
	for _, n := range a.all("[name=" + name + "]") {
		for _, at := range n.Attr {
			if at.Key == "checked" {
				out = append(out, attribute(n, "value"))
			}
		}
	}
	return out
}

// isHidden tells that an element is not shown.
func isHidden(a html.Attribute) bool { return a.Key == "hidden" }
