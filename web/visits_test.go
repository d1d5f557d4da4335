package web

import (
	"net/http"
	"os"
	"strings"
	"testing"
	"time"

	"lodebook/models/book"
)

// escorted is a house whose zones are escorted by level 2, which P1 holds, with a self-reported event and what follows it.
func escorted(t *testing.T) *house {
	t.Helper()
	h := newHouse(t)
	source, err := os.ReadFile("testdata/site.yaml")
	h.ok(err)
	text := strings.ReplaceAll(string(source), "restricted: true", "restricted: true, escort: L2")
	text = strings.ReplaceAll(text, "{code: health-change, of: person}", "{code: health-change, of: person, self_report: true}")
	h.open([]byte(text))
	h.people()
	h.record("training/level-2", "person:P1", "2026-11-01", book.Pass)
	return h
}

// TestTheDesk goes through a visit as somebody at the door would, and sees who taps second.
func TestTheDesk(t *testing.T) {
	h := escorted(t)
	j := h.as(book.SafetyOfficer)
	desk := "/s/" + fell + "/desk"
	h.page(j, desk).says(".say", "Nobody is visiting now.")
	a := h.post(j, "/s/"+fell+"/announce", "visitor", "Ada Lund", "kind", "vendor", "zones", "IV", "escort", "P2", "to", "2026-12-01 09:00", "tools", "torque wrench")
	if a.Code != http.StatusUnprocessableEntity {
		t.Fatal(a.Code)
	}
	a.says("main", "does not hold L2 then")
	if got := a.value("visitor"); got != "Ada Lund" {
		t.Errorf("what was typed is gone: %q", got)
	}
	a.says("textarea", "torque wrench")
	h.sent(j, "/s/"+fell+"/announce", "visitor", "Ada Lund", "employer", "Skerry Magnets", "kind", "vendor", "zones", "IV", "escort", "P1", "to", "2026-12-01 09:00", "tools", "torque wrench").says("main", "Announced: Ada Lund.")
	page := h.page(j, desk)
	page.says(".say", "Nobody is visiting now; one more is announced for today.")
	step := attribute(page.all(".visits .do a")[0], "href")
	h.page(j, step).says("h1", "Ada Lund is here")
	list, err := h.b.Visits(t.Context(), h.officer(), book.VisitQuery{Site: fell, Open: true})
	h.ok(err)
	id := list[0].Entry
	a = h.post(j, "/s/"+fell+"/visit-step", "visit", id, "step", "arrived", "screener", "P1")
	a.says("main", "Is not on record")
	h.sent(j, "/s/"+fell+"/visit-step", "visit", id, "step", "arrived", "screener", "P1", "outcome", "cleared", "tools", "torque wrench").says(".say", "One visitor is here.")
	a = h.post(j, "/s/"+fell+"/visit-step", "visit", id, "step", "arrived", "screener", "P1", "outcome", "cleared")
	a.says("main", "the visitor is here already")
	h.page(j, "/s/"+fell+"/today").says("main", "Ada Lund")
	h.now = h.now.Add(90 * time.Minute)
	page = h.page(j, desk)
	page.says(".say", "One visitor is here, one of them longer than announced.")
	page.says(".visits", "should be gone since 09:00")
	h.post(j, "/s/"+fell+"/visit-step", "visit", id, "step", "gone").says("main", "not checked out is: torque wrench")
	h.sent(j, "/s/"+fell+"/visit-step", "visit", id, "step", "gone", "tools", "torque wrench")
	// Announced again in two taps: the name, and the button under the form that it fills in.
	page = h.page(j, desk)
	again := attribute(page.all(".known a")[0], "href")
	form := h.page(j, again)
	if form.value("visitor") != "Ada Lund" || form.value("escort") != "P1" {
		t.Errorf("the form holds %q and %q", form.value("visitor"), form.value("escort"))
	}
	day := h.page(h.as(book.Reader), "/s/"+fell+"/visits")
	day.says("table", "gone 09:30")
	day.hides("main", "To the desk")
	one := h.page(j, "/s/"+fell+"/visits/"+id)
	one.says("dl", "torque wrench")
	one.says(".acts", "Make a person of them")
	h.page(j, "/s/"+fell+"/visitor-person?visit="+id).says("h1", "Add a person")
	h.sent(j, "/s/"+fell+"/erase-visit", "visit", id).hides("main", "Ada Lund")
}

// TestSelfReportPage: the member's own page leads there, says what will happen, and asks for no word.
func TestSelfReportPage(t *testing.T) {
	h := escorted(t)
	j := h.as(book.Member)
	h.page(j, "/s/"+fell+"/people/P2").says(".acts", "Something about my screening has changed")
	form := h.page(j, "/s/"+fell+"/self-report")
	form.says("main", "You do not say what.")
	form.has(0, "main textarea")
	form.has(0, "main input[type=text]")
	h.sent(j, "/s/"+fell+"/self-report").says("main", "you ask to be screened again")
	h.page(h.as(book.SafetyOfficer), "/s/"+fell+"/people/P2").says("main", "Health change")
	h.page(h.as(book.SafetyOfficer), "/s/"+fell+"/people/P2").hides("main", "Something about my screening")
}
