package web

import (
	"net/http"
	"net/http/httptest"
	"reflect"
	"strings"
	"testing"

	"lodebook/models/book"
)

// TestEveryRouteWithEveryRole walks the table with every role and with none: a role that the action
// allows is never told that it may not, any other always is.
func TestEveryRouteWithEveryRole(t *testing.T) {
	h := furnished(t)
	entry := h.record("training/level-2", "person:P1", "2026-11-01", "pass")
	for _, r := range routes {
		path := strings.NewReplacer(":site", fell, ":code", "P1", ":kind", "zone", ":zone", "IV", ":item", "TRAIN-L2", ":id", entry, ":name", "reader", ":number", "1", ":token", "none", ":file", "lodebook.css").Replace(r.path)
		if strings.Contains(r.path, "fixtures/:code") {
			path = "/s/" + fell + "/fixtures/V1"
		}
		for _, role := range append([]book.Role{""}, book.Roles...) {
			if r.action == public || r.path == "/sign-out" {
				continue
			}
			var j *jar
			if role != "" {
				j = h.as(role)
			}
			a := h.do(j, httptest.NewRequest(r.method, path, nil))
			switch {
			case role == "":
				if !strings.Contains(a.text("main"), "Sign in") && !strings.HasPrefix(a.Header().Get("Location"), "/sign-in") {
					t.Errorf("%s %s with nobody signed in: %d, and no sign-in", r.method, path, a.Code)
				}
			case !book.Allows(r.action, role):
				if a.Code != http.StatusForbidden {
					t.Errorf("%s %s as %s: %d, want 403", r.method, path, role, a.Code)
				}
			case a.Code == http.StatusForbidden && !own(r, role), a.Code >= 500:
				t.Errorf("%s %s as %s: %d: %s", r.method, path, role, a.Code, a.text("main"))
			}
		}
	}
}

// own tells whether a role may see only some of what the route gives: what is their own.
func own(r route, role book.Role) bool {
	return r.action == book.SeeOwn && (role == book.Member || role == book.Administrator || role == book.Reader || role == book.Facilities) ||
		r.action == book.FillSheet || r.action == book.SelfReport || r.action == book.Acknowledge || r.action == book.CorrectOwn || r.action == book.KeepAccounts
}

// TestEveryRouteIsInTheTable holds that nothing is served that the table does not name.
func TestEveryRouteIsInTheTable(t *testing.T) {
	h := newHouse(t)
	s := &server{b: h.b}
	e, err := s.engine()
	h.ok(err)
	named := map[string]bool{}
	for _, r := range routes {
		if named[r.method+" "+r.path] {
			t.Errorf("%s %s stands twice in the table", r.method, r.path)
		}
		named[r.method+" "+r.path] = true
	}
	for _, r := range e.Routes() {
		if !named[r.Method+" "+r.Path] {
			t.Errorf("%s %s is served and not in the table", r.Method, r.Path)
		}
	}
}

// TestEveryTemplate executes each template with its own struct, empty and filled, so that a renamed
// field is found here and not by a person.
func TestEveryTemplate(t *testing.T) {
	all, err := parseTemplates()
	if err != nil {
		t.Fatal(err)
	}
	files, err := templateFiles.ReadDir("templates")
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range files {
		name := strings.TrimSuffix(f.Name(), ".html")
		if _, ok := leaves[name]; !ok && !strings.HasPrefix(name, "_") {
			t.Errorf("no page shows the template %s", name)
		}
	}
	for name, make := range leaves {
		for _, full := range []bool{false, true} {
			data := make()
			if full {
				fill(reflect.ValueOf(data).Elem(), 0)
			}
			var b strings.Builder
			if err := all[name].ExecuteTemplate(&b, "layout", data); err != nil && full {
				t.Errorf("%s: %v", name, err)
			}
		}
	}
}

// fill puts something into every field, two of each list.
func fill(v reflect.Value, depth int) {
	if depth > 6 || !v.CanSet() {
		return
	}
	switch v.Kind() {
	case reflect.String:
		v.SetString("x")
	case reflect.Bool:
		v.SetBool(true)
	case reflect.Int, reflect.Int64, reflect.Int32:
		v.SetInt(2)
	case reflect.Float64:
		v.SetFloat(0.5)
	case reflect.Pointer:
		v.Set(reflect.New(v.Type().Elem()))
		fill(v.Elem(), depth+1)
	case reflect.Slice:
		v.Set(reflect.MakeSlice(v.Type(), 2, 2))
		for i := range 2 {
			fill(v.Index(i), depth+1)
		}
	case reflect.Struct:
		for i := range v.NumField() {
			fill(v.Field(i), depth+1)
		}
	}
}
