package web

import (
	"net/http"
	"os"
	"strings"
	"testing"

	"lodebook/models/book"
)

// The words that nobody but a safety officer may read.
var secretWords = []string{"trolley", "in green", "pulled out", "tethered"}

// whispered is a house in which a member reported an incident, with all that belongs to one.
func whispered(t *testing.T) (h *house, incident string) {
	h = furnished(t)
	source, err := os.ReadFile("testdata/site.yaml")
	h.ok(err)
	h.open([]byte(strings.Replace(strings.Replace(string(source), "items:", "reports: [{code: BODY, to: The body that is told, within: 3, kinds: [projectile]}]\nitems:", 1),
		"    on_fail: Call", "    on_fail_out: true\n    also_zone: true\n    on_fail: Call", 1)))
	member := h.as(book.Member)
	form := h.page(member, "/s/"+fell+"/incident")
	h.sent(member, "/s/"+fell+"/incident", "id", form.value("id"), "incident", "projectile", "at", "2026-11-27 08:30", "zone", "IV", "severity", "high", "what", "the trolley flew", "who", "somebody in green", "action", "the table was pulled out", "people", "P1", "name", "yes")
	list, err := h.b.Incidents(t.Context(), h.officer(), fell)
	h.ok(err)
	_, err = h.b.KeepRemedy(t.Context(), h.officer(), fell, book.RemedyForm{Incident: "1", Severity: "low", Owner: "P3", What: "keep the trolley tethered"})
	h.ok(err)
	_, err = h.b.RemedyDone(t.Context(), h.officer(), fell, 1, book.RemedyDoneForm{Day: "2026-12-01", Note: "the trolley is tethered"})
	h.ok(err)
	return h, list[0].Entry
}

// TestIncidentsLeakNowhere fetches every page and listing as every role, and looks for the words.
func TestIncidentsLeakNowhere(t *testing.T) {
	h, incident := whispered(t)
	entries, err := h.b.Entries(t.Context(), h.officer(), book.EntryQuery{Site: fell, Limit: 500})
	h.ok(err)
	var paths []string
	for _, r := range routes {
		if r.method != get || r.action == public {
			continue
		}
		path := strings.NewReplacer(":site", fell, ":code", "P1", ":kind", "zone", ":item", "TRAIN-L2", ":name", "reader", ":number", "1", ":id", incident).Replace(r.path)
		paths = append(paths, path, path+"?format=csv", path+"?format=json")
	}
	for _, e := range entries {
		paths = append(paths, "/s/"+fell+"/book/"+e.ID)
	}
	paths = append(paths, "/s/"+fell+"/book?kind=incident", "/s/"+fell+"/book?site=all", "/s/"+fell+"/people?find=trolley", "/s/"+fell+"/gaps?on=2026-12-30", "/s/"+fell+"/gaps?on=2026-12-30&format=csv", "/s/"+fell+"/remedies?all=yes", "/s/"+fell+"/remedies?all=yes&format=csv")
	for _, role := range book.Roles {
		if role == book.SafetyOfficer {
			continue
		}
		j := h.as(role)
		for _, path := range paths {
			body := h.get(j, path).Body.String()
			for _, w := range secretWords {
				if strings.Contains(body, w) && !strings.Contains(path, "find=trolley") {
					t.Errorf("%s reads %q on %s", role, w, path)
				}
			}
		}
	}
	// And an officer reads them all, so that the words are there to be found.
	officer := h.as(book.SafetyOfficer)
	all := h.page(officer, "/s/"+fell+"/incidents/1").Body.String() + h.page(officer, "/s/"+fell+"/remedies/1").Body.String()
	for _, w := range secretWords {
		if !strings.Contains(all, w) {
			t.Errorf("the officer does not read %q", w)
		}
	}
	h.page(h.as(book.Member), "/s/"+fell+"/incidents").says("main", "Incident 1")
	h.page(h.as(book.Reader), "/s/"+fell+"/incidents").hides("main", "Incident 1")
	h.page(h.as(book.Reader), "/s/"+fell+"/book/"+incident).says("main", "kept for safety officers")
}

// A conflict page shows what stands on record: not of an incident.
func TestConflictPageShowsNoIncident(t *testing.T) {
	h, incident := whispered(t)
	for _, role := range []book.Role{book.Member, book.Facilities} {
		a := h.post(h.as(role), "/s/"+fell+"/incident", "id", incident, "incident", "burn", "at", "2026-11-27 08:30", "severity", "low", "what", "x", "name", "yes")
		if a.Code != http.StatusConflict || strings.Contains(a.Body.String(), "trolley") {
			t.Errorf("%s: %d %s", role, a.Code, a.text("main"))
		}
	}
}

func TestReportWithoutAName(t *testing.T) {
	h := furnished(t)
	j := h.as(book.Member)
	form := h.page(j, "/s/"+fell+"/incident")
	form.says("main", "neither your account nor anything that leads to it")
	form.says("main", "Name no patient")
	bad := h.post(j, "/s/"+fell+"/incident", "id", form.value("id"), "incident", "near-miss", "at", "2026-11-27 08:30", "severity", "low", "what", "bolt 40028922 lay about", "name", "no")
	if bad.Code != http.StatusUnprocessableEntity || len(bad.all("#f-what-fault")) == 0 || bad.value("what") != "bolt 40028922 lay about" {
		t.Fatalf("%d: %s", bad.Code, bad.text("main"))
	}
	after := h.sent(j, "/s/"+fell+"/incident", "id", form.value("id"), "incident", "near-miss", "at", "2026-11-27 08:30", "severity", "low", "what", "bolt 40028922 lay about", "name", "no", "sure", "yes")
	after.says("main", "Received")
	after.hides("main", "Incident 1")
	if len(after.all(".notice a")) != 0 {
		t.Error("the notice leads to the entry")
	}
	h.page(h.as(book.SafetyOfficer), "/s/"+fell+"/incidents/1").says("main", "nobody named")
}

// From a gap, a failed record and an incident a remedy is one click away; it goes to its second person.
func TestRemedyByPages(t *testing.T) {
	h, _ := whispered(t)
	officer := h.as(book.SafetyOfficer)
	gaps := h.page(officer, "/s/"+fell+"/gaps")
	found := ""
	for _, a := range gaps.all(".do a") {
		if to := attribute(a, "href"); found == "" && strings.Contains(to, "/remedy?") {
			found = to
		}
	}
	form := h.page(officer, found)
	pairs := []string{"id", form.value("id"), "item", form.value("item"), "subject", form.value("subject"), "severity", "high", "owner", "Milo Prent", "what", "put it right"}
	h.sent(officer, "/s/"+fell+"/remedy", pairs...).says("main", "Remedy 2")
	if bad := h.post(officer, "/s/"+fell+"/remedy", append(pairs[2:], "due", "soon")...); bad.Code != http.StatusUnprocessableEntity || bad.value("what") != "put it right" || len(bad.all("#f-due-fault")) == 0 {
		t.Errorf("%d: %s", bad.Code, bad.text("main"))
	}
	h.page(officer, "/s/"+fell+"/gaps").says("main", "Remedy 2")
	failed := h.record("training/level-2", "person:P1", "2026-11-01", "fail")
	h.page(officer, "/s/"+fell+"/book/"+failed).says("main", "Make a remedy")
	h.page(officer, "/s/"+fell+"/incidents/1").says("main", "Make a remedy")

	owner := h.as(book.Member)
	h.page(owner, "/s/"+fell+"/remedies").says("main", "Remedy 2")
	h.page(owner, "/s/"+fell+"/remedies").hides("main", "Remedy 1")
	mine := h.page(owner, "/s/"+fell+"/remedies/2")
	if bad := h.post(owner, "/s/"+fell+"/remedies/2/done", "id", mine.value("id"), "day", "2027-01-01", "note", "kept words"); bad.Code != http.StatusUnprocessableEntity || !strings.Contains(bad.Body.String(), "kept words") {
		t.Errorf("%d: %s", bad.Code, bad.text("main"))
	}
	h.sent(owner, "/s/"+fell+"/remedies/2/done", "id", mine.value("id"), "day", "2026-12-01").says("main", "waits for a second person")
	if a := h.post(owner, "/s/"+fell+"/remedies/2/check", "word", "confirmed"); a.Code != http.StatusForbidden {
		t.Errorf("the owner confirmed: %d", a.Code)
	}
	done := h.page(officer, "/s/"+fell+"/remedies/2").value("done")
	if bad := h.post(officer, "/s/"+fell+"/remedies/2/check", "done", done, "word", "refused"); bad.Code != http.StatusUnprocessableEntity || len(bad.all("#f-note-fault")) == 0 {
		t.Errorf("%d: %s", bad.Code, bad.text("main"))
	}
	h.sent(officer, "/s/"+fell+"/remedies/2/check", "done", done, "word", "confirmed").says("main", "done and confirmed")
	if a := h.post(officer, "/s/"+fell+"/remedies/2/check", "done", done, "word", "confirmed"); a.Code != http.StatusUnprocessableEntity {
		t.Errorf("confirmed twice: %d", a.Code)
	}
	if a := h.get(officer, "/s/"+fell+"/remedies/99"); a.Code != http.StatusNotFound {
		t.Errorf("no such remedy: %d", a.Code)
	}
	if a := h.get(officer, "/s/"+fell+"/remedies/two"); a.Code != http.StatusNotFound {
		t.Errorf("no number: %d", a.Code)
	}
}

func TestOverdueShowsEverywhere(t *testing.T) {
	h, _ := whispered(t)
	h.now = h.now.AddDate(0, 4, 0)
	_, err := h.b.KeepRemedy(t.Context(), h.officer(), fell, book.RemedyForm{Item: "VENT", Subject: "fixture:V1", Severity: "high", Owner: "P2", What: "mend it"})
	h.ok(err)
	h.now = h.now.AddDate(0, 0, 10)
	clear(h.jars) // those sessions are over
	officer := h.as(book.SafetyOfficer)
	for _, path := range []string{"gaps", "today", "gaps?by=owner", "remedies"} {
		h.page(officer, "/s/"+fell+"/"+path).says("main", "Remedy 2")
	}
	h.page(officer, "/s/"+fell+"/gaps?by=owner").says("main", "Milo Prent")
	h.page(h.as(book.Member), "/s/"+fell+"/today").says("main", "Remedy 2")
	h.page(officer, "/s/"+fell+"/today").says("main", "To tell outside")
	csv := h.get(officer, "/s/"+fell+"/remedies?format=csv").Body.String()
	if !strings.Contains(csv, "VENT") || !strings.Contains(csv, "mend it") {
		t.Errorf("%s", csv)
	}
}

func TestOutOfServiceByPages(t *testing.T) {
	h, _ := whispered(t)
	facilities, officer := h.as(book.Facilities), h.as(book.SafetyOfficer)
	_, _, err := h.b.FillSheet(t.Context(), h.actor(book.Facilities), fell, book.SheetForm{Record: "inspection/vent-yearly", Fixture: "V1", On: "2026-12-01", Values: map[string]string{"outlet_clear": "no", "clear_of_path_m": "5"}}, book.Correction{})
	h.ok(err)
	for _, path := range []string{"today", "rounds", "fixtures/V1", "subjects/zone/IV"} {
		h.page(facilities, "/s/"+fell+"/"+path).says("main", "out of service")
	}
	h.page(facilities, "/s/"+fell+"/fixtures/V1").hides("main", "Sign it back")
	h.page(officer, "/s/"+fell+"/fixtures/V1").says("main", "Sign it back")
	form := h.page(officer, "/s/"+fell+"/back-in-service?subject=fixture:V1")
	if bad := h.post(officer, "/s/"+fell+"/back-in-service", "id", form.value("id"), "subject", "fixture:V1"); bad.Code != http.StatusUnprocessableEntity || len(bad.all("#f-note-fault")) == 0 {
		t.Errorf("%d: %s", bad.Code, bad.text("main"))
	}
	h.sent(officer, "/s/"+fell+"/back-in-service", "id", form.value("id"), "subject", "fixture:V1", "note", "the nest is gone").hides("main", "until a safety officer signs")
	h.page(officer, "/s/"+fell+"/today").hides("main", "until a safety officer signs")
	out := h.page(facilities, "/s/"+fell+"/out-of-service?subject=fixture:V2")
	if bad := h.post(facilities, "/s/"+fell+"/out-of-service", "id", out.value("id"), "subject", "fixture:V2", "from", "tomorrow", "because", "kept words"); bad.Code != http.StatusUnprocessableEntity || bad.value("because") != "kept words" {
		t.Errorf("%d: %s", bad.Code, bad.text("main"))
	}
	h.sent(facilities, "/s/"+fell+"/out-of-service", "id", out.value("id"), "subject", "fixture:V2", "because", "it leans").says("main", "it leans")
}

func TestIncidentByPages(t *testing.T) {
	h, _ := whispered(t)
	officer := h.as(book.SafetyOfficer)
	page := h.page(officer, "/s/"+fell+"/incidents/1")
	page.says("main", "The body that is told")
	page.says("main", "one working day left")
	if bad := h.post(officer, "/s/"+fell+"/incidents/1/report", "report", "BODY", "day", "2027-01-01", "reference", "kept words"); bad.Code != http.StatusUnprocessableEntity || !strings.Contains(bad.Body.String(), "kept words") {
		t.Errorf("%d: %s", bad.Code, bad.text("main"))
	}
	h.sent(officer, "/s/"+fell+"/incidents/1/report", "report", "BODY", "day", "2026-12-01", "reference", "A-1").says("main", "told on 1 Dec")
	form := h.page(officer, "/s/"+fell+"/incidents/1/correct")
	if form.value("what") != "the trolley flew" || form.value("at") != "2026-11-27 08:30" {
		t.Errorf("%q %q", form.value("what"), form.value("at"))
	}
	h.sent(officer, "/s/"+fell+"/incidents/1/correct", "supersedes", form.value("supersedes"), "incident", "near-miss", "at", "2026-11-27 08:30", "severity", "low", "what", "the trolley rolled", "reason", "slip").says("main", "the trolley rolled")
	if a := h.post(officer, "/s/"+fell+"/incidents/1/correct", "supersedes", form.value("supersedes"), "incident", "near-miss", "at", "2026-11-27 08:30", "severity", "low", "what", "kept words", "reason", "slip"); a.Code != http.StatusConflict || a.value("what") != "kept words" || !strings.Contains(a.text("main"), "the trolley rolled") {
		t.Errorf("a stale correction: %d", a.Code)
	}
	for _, format := range []string{"csv", "json"} {
		if body := h.get(officer, "/s/"+fell+"/incidents?format="+format).Body.String(); !strings.Contains(body, "the trolley rolled") {
			t.Errorf("%s: %s", format, body)
		}
	}
}
