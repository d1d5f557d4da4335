package web

import (
	"net/http"
	"strings"
	"testing"

	"lodebook/models/book"
)

// TestNothingTypedIsLost sends bad forms and looks for what was typed, and for the fault at its field.
func TestNothingTypedIsLost(t *testing.T) {
	h := furnished(t)
	officer := h.as(book.SafetyOfficer)
	base := "/s/" + fell
	for _, c := range []struct {
		path, field string
		pairs       []string
	}{
		{"/record", "on", []string{"record", "training/level-2", "subject", "person:P1", "on", "2026-12-24", "result", "pass", "note", "kept words"}},
		{"/record", "subject", []string{"record", "training/level-2", "subject", "person:P99", "on", "2026-11-24", "note", "kept words"}},
		{"/session", "people", []string{"record", "training/level-2", "on", "2026-11-24", "note", "kept words"}},
		{"/screening", "limit", []string{"record", "screening/staff", "person", "P1", "on", "2026-11-24", "outcome", "restricted", "by", "kept words"}},
		{"/keep-person", "joined", []string{"code", "P9", "name", "kept words", "joined", "2026-02-30"}},
		{"/keep-fixture", "kind", []string{"code", "F9", "name", "kept words", "kind", "rocket"}},
		{"/excuse", "to", []string{"item", "TRAIN-L2", "subject", "person:P1", "from", "2026-12-01", "to", "2026-11-01", "reason", "kept words"}},
		{"/pause", "from", []string{"subject", "person:P1", "from", "soon", "reason", "kept words"}},
		{"/event", "event", []string{"event", "flood", "subject", "fixture:V1", "on", "2026-11-24", "note", "kept words"}},
		{"/plan", "day", []string{"record", "drill/quench", "crew", "night", "day", "", "note", "kept words"}},
	} {
		size, err := h.b.Size(t.Context())
		h.ok(err)
		a := h.post(officer, base+c.path, c.pairs...)
		if a.Code != http.StatusUnprocessableEntity {
			t.Errorf("%s: %d, want 422\n%s", c.path, a.Code, a.text("main"))
			continue
		}
		if !strings.Contains(a.Body.String(), "kept words") {
			t.Errorf("%s: what was typed is lost", c.path)
		}
		if len(a.all("#f-"+c.field+"-fault")) == 0 {
			t.Errorf("%s: no fault stands at the field %s:\n%s", c.path, c.field, a.text("main"))
		}
		if now, err := h.b.Size(t.Context()); err != nil || now != size {
			t.Errorf("%s: something was written (%v)", c.path, err)
		}
	}
}

func TestSheetIsJudgedBeforeItIsKept(t *testing.T) {
	h := furnished(t)
	j := h.as(book.Facilities)
	path := "/s/" + fell + "/sheet"
	form := h.page(j, path+"?record=inspection/vent-yearly&fixture=V1")
	id := attribute(form.all("[name=id]")[0], "value")
	values := []string{"id", id, "record", "inspection/vent-yearly", "fixture", "V1", "on", "2026-12-01", "v-outlet_clear", "yes", "v-clear_of_path_m", "2.1"}
	size, err := h.b.Size(t.Context())
	h.ok(err)
	seen := h.post(j, path, values...)
	if seen.Code != http.StatusOK || !strings.Contains(seen.text("main"), "fails") || !strings.Contains(seen.text("main"), "2.1 m") {
		t.Fatalf("%d: %s", seen.Code, seen.text("main"))
	}
	if now, err := h.b.Size(t.Context()); err != nil || now != size {
		t.Fatalf("judging wrote something (%v)", err)
	}
	verdict := attribute(seen.all("[name=seen]")[0], "value")
	changed := append(append([]string{}, values[:len(values)-1]...), "5", "keep", "1", "seen", verdict)
	if a := h.post(j, path, changed...); a.Code != http.StatusOK || !strings.Contains(a.text("main"), "passes") {
		t.Errorf("a value changed after it was judged was kept unseen: %d", a.Code)
	}
	keep := append(append([]string{}, values...), "keep", "1", "seen", verdict)
	h.sent(j, path, keep...)
	h.sent(j, path, keep...) // a double click
	if now, err := h.b.Size(t.Context()); err != nil || now != size+1 {
		t.Errorf("sent twice it is %d entries (%v)", now-size, err)
	}
	if text := h.page(j, "/s/"+fell+"/gaps").text("main"); !strings.Contains(text, "North vent") || !strings.Contains(text, "failed") {
		t.Errorf("the gap is not seen: %s", text)
	}
}

func TestCorrectionShowsBoth(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	id := h.record("training/level-2", "person:P1", "2026-11-01", "pass")
	form := h.page(j, "/s/"+fell+"/correct/"+id)
	if v := attribute(form.all("[name=on]")[0], "value"); v != "2026-11-01" {
		t.Fatalf("the form opens with %q", v)
	}
	after := h.sent(j, "/s/"+fell+"/correct/"+id, "subject", "person:P1", "on", "2026-11-02", "result", "pass", "reason", "wrong-day")
	text := after.text("main")
	for _, part := range []string{"Before", "Now", "2026-11-01", "2026-11-02", "another day"} {
		if !strings.Contains(text, part) {
			t.Errorf("the page does not say %q: %s", part, text)
		}
	}
	if a := h.post(j, "/s/"+fell+"/correct/"+id, "subject", "person:P1", "on", "2026-11-03", "result", "pass", "reason", "wrong-day"); a.Code != http.StatusConflict {
		t.Errorf("a stale correction: %d", a.Code)
	}
	if a := h.post(j, "/s/"+fell+"/withdraw/"+id, "reason", "not-done"); a.Code != http.StatusConflict {
		t.Errorf("a stale withdrawal: %d", a.Code)
	}
}

func TestGapsExportIsHarmless(t *testing.T) {
	h := furnished(t)
	_, err := h.b.KeepPerson(t.Context(), h.officer(), fell, book.PersonForm{Code: "P7", Name: `=HYPERLINK("http://evil.example","x")`, Level: "L2", Joined: "2025-01-01"}, book.Correction{})
	h.ok(err)
	a := h.get(h.as(book.SafetyOfficer), "/s/"+fell+"/gaps?format=csv")
	if a.Code != http.StatusOK || !strings.Contains(a.Header().Get("Content-Disposition"), ".csv") {
		t.Fatalf("%d %v", a.Code, a.Header())
	}
	if body := a.Body.String(); strings.Contains(body, ",=HYPERLINK") || strings.Contains(body, `,"=HYPERLINK`) || !strings.Contains(body, "'=HYPERLINK") {
		t.Errorf("a formula went out as one:\n%s", body)
	}
}

func TestPastDayOffersNoForms(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	for _, path := range []string{"today", "gaps", "rounds", "people/P1", "drills", "checklist/TRAIN-L2", "fixtures/V1"} {
		a := h.page(j, "/s/"+fell+"/"+path+"?on=2026-06-01")
		if !strings.Contains(a.text("main"), "This is how it stood") {
			t.Errorf("%s does not say that it is a past day", path)
		}
		if n := len(a.all(".do a")); n > 0 {
			t.Errorf("%s offers %d forms on a past day", path, n)
		}
	}
	if a := h.get(j, "/s/"+fell+"/today?on=yesterday"); a.Code != http.StatusUnprocessableEntity {
		t.Errorf("a day that is none: %d", a.Code)
	}
}

func TestProgramWithFaultsIsShownAgain(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	src, err := h.b.Source(t.Context(), h.officer(), fell)
	h.ok(err)
	bad := strings.Replace(string(src), "every: P1Y", "every: yearly", 1)
	if bad == string(src) {
		t.Fatal("the test's program has no P1Y")
	}
	a := h.post(j, "/s/"+fell+"/program", "text", bad)
	if a.Code != http.StatusUnprocessableEntity || !strings.Contains(a.text("main"), "Line ") || !strings.Contains(a.Body.String(), "every: yearly") {
		t.Errorf("%d: %s", a.Code, a.text("main"))
	}
	if a := h.post(j, "/s/"+fell+"/groups", "group", "drills"); a.Code != http.StatusSeeOther {
		t.Errorf("adopting a group: %d %s", a.Code, a.text("main"))
	}
}

func TestEmptySiteSaysWhatToDo(t *testing.T) {
	h := newHouse(t)
	h.open([]byte("lodebook: 1\nsite: {code: FELL, name: Fell, time_zone: Atlantic/Faroe}\nzones: [{code: I}]\n"))
	j := h.as(book.SafetyOfficer)
	for _, path := range []string{"today", "rounds", "people", "drills", "checklist", "gaps", "book", "fixtures", "week", "groups", "import", "session", "drill"} {
		h.page(j, "/s/"+fell+"/"+path)
	}
	if text := h.page(j, "/s/"+fell+"/today").text("main"); !strings.Contains(text, "First steps") {
		t.Errorf("an empty site's Today: %s", text)
	}
}

func TestNoInlineScriptOrStyle(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	for _, path := range []string{"today", "rounds", "people", "people/P1", "drills", "checklist", "gaps", "book", "sheet?record=inspection/vent-yearly&fixture=V1"} {
		a := h.page(j, "/s/"+fell+"/"+path)
		for _, bad := range []string{"<script>", " style=", " onclick=", "javascript:"} {
			if strings.Contains(a.Body.String(), bad) {
				t.Errorf("%s holds %q", path, bad)
			}
		}
		if !strings.Contains(a.Header().Get("Content-Security-Policy"), "default-src 'none'") {
			t.Errorf("%s has no strict policy", path)
		}
	}
}

func TestSheetIsCorrectedOnItsOwnForm(t *testing.T) {
	h := furnished(t)
	j := h.as(book.Facilities)
	r, _, err := h.b.FillSheet(t.Context(), h.actor(book.Facilities), fell, book.SheetForm{Record: "inspection/vent-yearly", Fixture: "V1", On: "2026-11-30", Values: map[string]string{"outlet_clear": "yes", "clear_of_path_m": "2.1"}}, book.Correction{})
	h.ok(err)
	to := h.get(j, "/s/"+fell+"/correct/"+r.ID())
	if to.Code != http.StatusSeeOther {
		t.Fatalf("%d: %s", to.Code, to.text("main"))
	}
	form := h.page(j, to.Header().Get("Location"))
	if v := form.value("v-clear_of_path_m"); v != "2.1" {
		t.Fatalf("the form opens with %q", v)
	}
	values := []string{"id", form.value("id"), "record", "inspection/vent-yearly", "fixture", "V1", "supersedes", r.ID(), "on", "2026-11-30", "v-outlet_clear", "yes", "v-clear_of_path_m", "5.10"}
	seen := h.post(j, "/s/"+fell+"/sheet", values...)
	h.sent(j, "/s/"+fell+"/sheet", append(values, "keep", "1", "seen", seen.value("seen"))...)
	old, err := h.b.Entry(t.Context(), h.officer(), r.ID())
	h.ok(err)
	if old.New == nil || !strings.Contains(old.New.Canonical, `"5.10"`) || !strings.Contains(old.Canonical, `"2.1"`) {
		t.Errorf("the sheet was not superseded: %+v", old.EntryLine)
	}
}
