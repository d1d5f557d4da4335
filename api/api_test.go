package api

import (
	"crypto/rand"
	"encoding/json"
	"net/http"
	"net/http/httptest"
	"strings"
	"testing"
	"time"
	_ "time/tzdata"

	"github.com/gin-gonic/gin"

	"lodebook/migrations/scratch"
	"lodebook/models/book"
)

const source = `
lodebook: 1
in_force_from: 2025-01-01
site: {code: QUAY, name: North Quay, time_zone: Atlantic/Faroe}
zones: [{code: I}, {code: IV, restricted: true}]
items:
  - {code: INDUCTION, title: Induction, asks: person, record: training/induction, once: true, basis: Site rule}
`

// served is a book behind the API; the header X-Role says who asks.
func served(t *testing.T) http.Handler {
	t.Helper()
	now := func() time.Time { return time.Date(2026, 3, 2, 9, 0, 0, 0, time.UTC) }
	b, err := book.Create(t.Context(), scratch.Book(t), book.Options{Clock: now, Random: rand.Reader})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { _ = b.Close() })
	op := book.SystemOperator("ops")
	if _, err := b.OpenProgram(t.Context(), op, []byte(source), ""); err != nil {
		t.Fatal(err)
	}
	people := "code,name,joined\nP1,Runa Sandoy,2025-02-01\nP2,Teis Joensen,2025-02-01\n"
	if _, err := b.Import(t.Context(), op, book.ImportOptions{Table: "people", Site: "QUAY", File: strings.NewReader(people), Size: int64(len(people))}); err != nil {
		t.Fatal(err)
	}
	gin.SetMode(gin.ReleaseMode)
	e := gin.New()
	Register(e, b, func(r *http.Request) (book.Actor, error) {
		role := book.Role(r.Header.Get("X-Role"))
		if role == "" {
			return book.Actor{}, &book.BadSignIn{}
		}
		return book.Actor{Account: "a", Name: "a", Role: role, Sites: []string{"QUAY"}, Person: "P1"}, nil
	})
	return e
}

func ask(t *testing.T, h http.Handler, path string, role book.Role) *httptest.ResponseRecorder {
	t.Helper()
	r := httptest.NewRequest(http.MethodGet, path, nil)
	r.Header.Set("X-Role", string(role))
	w := httptest.NewRecorder()
	h.ServeHTTP(w, r)
	return w
}

func TestEveryRouteWithEveryRole(t *testing.T) {
	h := served(t)
	for _, r := range routes {
		path := strings.Replace(r.path, ":site", "QUAY", 1)
		if strings.HasSuffix(path, "/reach") {
			path += "?zone=IV"
		}
		if strings.HasSuffix(path, "/passages") {
			path += "?from=2026-03-01T00:00:00Z&to=2026-03-02T00:00:00Z"
		}
		for _, role := range append([]book.Role{""}, book.Roles...) {
			want := http.StatusOK
			switch {
			case r.action == "":
			case role == "":
				want = http.StatusUnauthorized
			case !book.Allows(r.action, role):
				want = http.StatusForbidden
			}
			if w := ask(t, h, path, role); w.Code != want {
				t.Errorf("%s as %q: %d, want %d: %s", path, role, w.Code, want, w.Body)
			}
		}
	}
}

func TestStandingsAreThoseOfTheCommand(t *testing.T) {
	h := served(t)
	var rows []book.RowJSON
	if err := json.Unmarshal(ask(t, h, "/api/sites/QUAY/standings", book.SafetyOfficer).Body.Bytes(), &rows); err != nil {
		t.Fatal(err)
	}
	if len(rows) != 2 || rows[0].Standing != "missing" || rows[0].Owner != nil {
		t.Errorf("%+v", rows)
	}
	if err := json.Unmarshal(ask(t, h, "/api/sites/QUAY/gaps?why=1", book.Member).Body.Bytes(), &rows); err != nil {
		t.Fatal(err)
	}
	if len(rows) != 1 || rows[0].Subject != "P1" || rows[0].Owner == nil || len(rows[0].Why) == 0 {
		t.Errorf("a member's gaps: %+v", rows)
	}
}

// TestGapsAreThoseOfTheStandings holds the short way to the gaps against the long one, on several days.
func TestGapsAreThoseOfTheStandings(t *testing.T) {
	h := served(t)
	for _, role := range []book.Role{book.SafetyOfficer, book.Member} {
		found := 0
		for _, on := range []string{"2025-01-15", "2025-02-01", "2026-03-02", "2027-01-01"} {
			short, long := ask(t, h, "/api/sites/QUAY/gaps?on="+on, role), ask(t, h, "/api/sites/QUAY/gaps?on="+on+"&known_at=2030-01-01T00:00:00Z", role)
			if short.Code != http.StatusOK || short.Body.String() != long.Body.String() {
				t.Errorf("on %s as %s: %s, want %s", on, role, short.Body, long.Body)
			}
			found += strings.Count(short.Body.String(), `"standing"`)
		}
		if found == 0 {
			t.Errorf("%s was shown no gap", role)
		}
	}
}

// TestWhoHasTheAnswerIsSentNothing: an answer has a tag of its bytes, which is another when it is.
func TestWhoHasTheAnswerIsSentNothing(t *testing.T) {
	h := served(t)
	const path = "/api/sites/QUAY/gaps"
	first, other := ask(t, h, path, book.SafetyOfficer), ask(t, h, path, book.Member)
	tag := first.Header().Get("ETag")
	if tag == "" || first.Header().Get("Cache-Control") != "private, no-cache" || other.Header().Get("ETag") == tag {
		t.Fatalf("headers %v, and of another answer %v", first.Header(), other.Header())
	}
	for _, c := range []struct {
		has    string
		status int
	}{{tag, 304}, {"W/" + tag, 304}, {`"x", ` + tag, 304}, {"*", 304}, {`"x"`, 200}, {other.Header().Get("ETag"), 200}, {"", 200}} {
		r := httptest.NewRequest(http.MethodGet, path, nil)
		r.Header.Set("X-Role", string(book.SafetyOfficer))
		r.Header.Set("If-None-Match", c.has)
		w := httptest.NewRecorder()
		h.ServeHTTP(w, r)
		if w.Code != c.status || (w.Body.Len() == 0) != (c.status == 304) || w.Header().Get("ETag") != tag {
			t.Errorf("with %s: %d and %d bytes, want %d", c.has, w.Code, w.Body.Len(), c.status)
		}
	}
	if w := ask(t, h, "/api/sites/ELSEWHERE/gaps", book.SafetyOfficer); w.Header().Get("ETag") != "" || w.Header().Get("Cache-Control") != "no-store" {
		t.Errorf("a problem may be kept: %v", w.Header())
	}
}

func TestProblems(t *testing.T) {
	h := served(t)
	for path, want := range map[string]struct {
		status int
		says   string
	}{
		"/api/sites/QUAY/gaps?on=2026-02-30":            {http.StatusUnprocessableEntity, "2026-02-30"},
		"/api/sites/QUAY/gaps?known_at=yesterday":       {http.StatusUnprocessableEntity, "yesterday"},
		"/api/sites/QUAY/standings?item=NONE":           {http.StatusNotFound, "NONE"},
		"/api/sites/QUAY/standings?subject=zone:IX":     {http.StatusOK, "[]"},
		"/api/sites/ELSEWHERE/standings":                {http.StatusForbidden, "ELSEWHERE"},
		"/api/sites/QUAY/standings?subject=nobody-ever": {http.StatusUnprocessableEntity, "nobody-ever"},
	} {
		w := ask(t, h, path, book.SafetyOfficer)
		if w.Code != want.status || !strings.Contains(w.Body.String(), want.says) {
			t.Errorf("%s: %d %s, want %d with %q", path, w.Code, w.Body, want.status, want.says)
		}
		if w.Code != http.StatusOK && !strings.HasPrefix(w.Header().Get("Content-Type"), "application/problem+json") {
			t.Errorf("%s: a problem of type %s", path, w.Header().Get("Content-Type"))
		}
	}
}
