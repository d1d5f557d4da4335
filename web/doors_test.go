package web

import (
	"net/http"
	"strings"
	"testing"

	"lodebook/models/book"
)

// imp brings in a table as the officer.
func (h *house) imp(table, csv string) {
	h.Helper()
	r, err := h.b.Import(h.Context(), h.officer(), book.ImportOptions{Table: table, Site: fell, File: strings.NewReader(csv), Size: int64(len(csv)), FileName: table + ".csv"})
	h.ok(err)
	if len(r.Faults) > 0 || r.Written == 0 {
		h.Fatalf("%s: %+v", table, r)
	}
}

func TestDoorEvents(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	path := "/s/" + fell + "/passages"
	h.page(j, path).says(".say", "No door events are on record of this time.")
	h.imp("people", "code,badge,from\nP3,B-3,2026-01-01\n")
	h.grant("P3", "III", "2026-11-20", "")
	h.imp("passages", "at,door,badge,direction\n2026-11-30T07:00:00Z,D1,B-3,in\n2026-11-30T08:00:00Z,D1,B-9,in\n2026-11-30T09:00:00Z,D8,B-3,in\n2026-11-10T09:00:00Z,D1,B-3,in\n")
	a := h.page(j, path)
	a.says(".say", "Three door events. One was by somebody not entitled and is not explained; two more are of a badge or a door that is not known.")
	a.says("section", "Sanna Holm")
	a.says("section", "Level 2 training: missing")
	a.says("section", "then the book did not know the door")
	h.page(j, path+"?from=2026-11-10&to=2026-11-10").says(".say", "One door event.")
	if a := h.get(j, path+"?from=yesterday"); a.Code != http.StatusUnprocessableEntity {
		t.Errorf("%d", a.Code)
	}
	form := ""
	for _, n := range a.all("td a") {
		if textOf(n) == "Explain " && strings.Contains(attribute(n, "href"), "B-9") {
			form = attribute(n, "href")
		}
	}
	h.page(j, form).says("h1", "Explain a passage: D1, 30 Nov, 08:00")
	if a := h.post(j, "/s/"+fell+"/explain", "at", "2026-11-30T08:00:00Z", "door", "D1", "badge", "B-9"); a.Code != http.StatusUnprocessableEntity || !strings.Contains(a.text("main"), "say how the passage is explained") {
		t.Errorf("%d %s", a.Code, a.text("main"))
	}
	h.sent(j, "/s/"+fell+"/explain", "at", "2026-11-30T08:00:00Z", "door", "D1", "badge", "B-9", "note", "a test of the reader")
	a = h.page(j, path)
	a.says(".tally", "1 explained")
	a.says("details", "The explanation")
	csv := h.get(j, path+"?format=csv").Body.String()
	if lines := strings.Split(strings.TrimSpace(csv), "\n"); len(lines) != 4 || !strings.Contains(csv, "D1,III,B-9,,in,explained,unknown-door,") {
		t.Error(csv)
	}
	reader := h.page(h.as(book.Reader), path)
	reader.hides("main", "Explain ")
}

func TestBadgesAgainstRights(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	path := "/s/" + fell + "/badges"
	h.page(j, path).says(".say", "No list of who can open which door has been brought in.")
	h.imp("people", "code,badge,from\nP3,B-3,2026-01-01\n")
	h.imp("holders", "badge,door\nB-3,D1\nB-9,D1\n")
	a := h.page(j, path)
	a.says(".say", "The doors' list is from today. Two lines let somebody in who should not be let in.")
	a.says("section", "withdraw")
	a.says("section", "No right")
	a.says("section", "nobody's badge")
	csv := h.get(j, path+"?format=csv").Body.String()
	if !strings.Contains(csv, "badge,person,name,door,zone,change,reasons,at") || !strings.Contains(csv, "B-3,P3,Sanna Holm,D1,III,withdraw,") {
		t.Error(csv)
	}
}
