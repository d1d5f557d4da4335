package web

import (
	"net/http"
	"strings"
	"testing"

	"lodebook/models/book"
)

func TestSignInAndOut(t *testing.T) {
	h := furnished(t)
	h.actor(book.SafetyOfficer)
	h.ok(h.b.SetPassword(t.Context(), h.op, "safety-officer", "a long enough secret"))
	browser := &jar{map[string]string{}}
	bad := h.post(browser, "/sign-in", "name", "safety-officer", "password", "a wrong one here", "next", "/s/"+fell+"/gaps")
	if bad.Code == http.StatusSeeOther {
		t.Fatal("a wrong password signed somebody in")
	}
	bad.says("main", "do not fit")
	if bad.value("name") != "safety-officer" || strings.Contains(bad.Body.String(), "a wrong one here") {
		t.Error("the name is lost, or the password came back")
	}
	in := h.sent(browser, "/sign-in", "name", "safety-officer", "password", "a long enough secret", "next", "/s/"+fell+"/gaps")
	in.says("h1", "Gaps")
	in.has(1, "form[action=/sign-out]")
	h.post(browser, "/sign-out")
	out := h.get(browser, "/s/"+fell+"/gaps")
	if out.Code != http.StatusSeeOther || !strings.HasPrefix(out.Header().Get("Location"), "/sign-in") {
		t.Errorf("signed out, and still there: %d", out.Code)
	}
	for _, away := range []string{"https://evil.example/", "//evil.example/", `/\evil.example`} {
		a := h.post(&jar{map[string]string{}}, "/sign-in", "name", "safety-officer", "password", "a long enough secret", "next", away)
		if to := a.Header().Get("Location"); strings.Contains(to, "evil") {
			t.Errorf("next=%s leads to %s", away, to)
		}
	}
}

func TestLinkWorksOnce(t *testing.T) {
	h := furnished(t)
	h.actor(book.Facilities)
	secret, err := h.b.NewLink(t.Context(), h.op, "facilities")
	h.ok(err)
	browser := &jar{map[string]string{}}
	h.page(browser, "/link/"+secret).hides("main", "used already")
	if a := h.post(browser, "/link/"+secret); a.Code != http.StatusSeeOther {
		t.Fatalf("the link was not taken: %d", a.Code)
	}
	if a := h.post(&jar{map[string]string{}}, "/link/"+secret); a.Code == http.StatusSeeOther && !strings.HasPrefix(a.Header().Get("Location"), "/sign-in") {
		t.Errorf("the link worked twice: %d to %s", a.Code, a.Header().Get("Location"))
	}
}

func TestSessionCookieOverTLS(t *testing.T) {
	h := newHouse(t)
	handler, err := New(h.b, Options{PublicURL: "https://book.example", Secure: true})
	h.ok(err)
	h.handler = handler
	h.open([]byte("lodebook: 1\nsite: {code: FELL, name: Fell, time_zone: Atlantic/Faroe}\nzones: [{code: I}]\n"))
	h.actor(book.Reader)
	secret, err := h.b.NewLink(t.Context(), h.op, "reader")
	h.ok(err)
	a := h.post(&jar{map[string]string{}}, "/link/"+secret)
	for _, c := range a.Result().Cookies() {
		if strings.HasPrefix(c.Name, "__Host-lodebook") && c.Secure && c.HttpOnly && c.Path == "/" && c.Domain == "" && c.SameSite == http.SameSiteLaxMode {
			return
		}
	}
	t.Errorf("no session cookie held to this host: %v", a.Result().Cookies())
}

func TestFormsOfOtherSitesAreRefused(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	r := h.request("POST", "/s/"+fell+"/plan", "record=drill/quench&crew=night&day=2026-12-05")
	r.Header.Set("Sec-Fetch-Site", "cross-site")
	r.Header.Set("Origin", "https://evil.example")
	if a := h.do(j, r); a.Code != http.StatusForbidden {
		t.Errorf("a form of another site: %d", a.Code)
	}
}

// request makes a request with a form's body.
func (h *house) request(method, path, body string) *http.Request {
	h.Helper()
	r, err := http.NewRequestWithContext(h.Context(), method, path, strings.NewReader(body))
	h.ok(err)
	r.Header.Set("Content-Type", "application/x-www-form-urlencoded")
	return r
}
