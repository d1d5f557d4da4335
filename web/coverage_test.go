package web

import (
	"net/http"
	"os"
	"strings"
	"testing"

	"lodebook/models/book"
)

// rostered is a house whose checklist asks for people on duty from the first of November on.
func rostered(t testing.TB) *house {
	h := furnished(t)
	source, err := os.ReadFile("testdata/site.yaml")
	h.ok(err)
	text := strings.TrimRight(string(source), "\n") + `
  - {code: COVER-L2, title: Somebody of level 2 is there, asks: site, cover: {level: L2, hours: all}, basis: Site rule}
  - {code: COVER-MRSO, title: The safety officer can be reached, asks: site, cover: {post: MRSO, hours: all}, basis: Site rule}
`
	h.open([]byte(text))
	return h
}

func (h *house) duty(person, from, to, duty string) {
	h.Helper()
	_, err := h.b.KeepDuty(h.Context(), h.officer(), fell, book.DutyForm{Person: person, From: from, To: to, Duty: duty}, book.Correction{})
	h.ok(err)
}

func TestCoveragePage(t *testing.T) {
	h := rostered(t)
	j := h.as(book.SafetyOfficer)
	path := "/s/" + fell + "/coverage"
	h.page(j, path).says(".say", "No roster is on record")
	h.duty("P1", "2026-12-01 06:00", "2026-12-02 18:00", "night")
	a := h.page(j, path)
	a.says(".say", "in the next four weeks")
	a.says(".say", "is now")
	a.says("ul.roster", "Ines Arruda 06:00 to 2 Dec, 18:00, night")
	a.says("main", "Somebody of level 2 is there")
	a.says("main", "nobody there")
	a.says(".caution", "It does not know who came.")
	h.page(j, path+"?week=2026-12-09").hides("ul.roster", "Ines Arruda")
	h.page(j, "/s/"+fell+"/people/P1").says("main", "Tuesday 1 December 06:00 to 2 Dec, 18:00, night")
	h.page(j, "/s/"+fell+"/gaps").says("main", "nobody there")
	if a := h.get(j, path+"?format=csv"); !strings.Contains(a.Body.String(), "item,from,to,there,needed") || !strings.Contains(a.Body.String(), "COVER-MRSO,2026-12-01T06:00:00Z,") {
		t.Error(a.Body.String())
	}
	if a := h.get(j, path+"?format=json"); !strings.Contains(a.Body.String(), `"item":"COVER-L2"`) {
		t.Error(a.Body.String())
	}
}

func TestDutyForm(t *testing.T) {
	h := rostered(t)
	j := h.as(book.SafetyOfficer)
	path := "/s/" + fell + "/duty"
	h.page(j, path+"?person=P1").has(1, "form input[name=from]")
	if a := h.post(j, path, "person", "P1", "from", "2026-12-01 06:00", "to", "2026-12-01 05:00", "duty", "late"); a.Code != http.StatusUnprocessableEntity || !strings.Contains(a.text("main"), "is not after the beginning") {
		t.Errorf("%d %s", a.Code, a.text("main"))
	} else if !strings.Contains(a.Body.String(), `value="late"`) {
		t.Error("what was typed is lost")
	}
	if a := h.post(j, path, "person", "P1", "from", "2026-12-01 06:00", "to", "2026-12-01 15:00"); a.Code != http.StatusSeeOther {
		t.Errorf("%d %s", a.Code, a.text("main"))
	}
	h.page(j, "/s/"+fell+"/coverage").says("ul.roster", "06:00 to 15:00, duty")
}

func TestAppointForms(t *testing.T) {
	h := rostered(t)
	j := h.as(book.SafetyOfficer)
	if a := h.post(j, "/s/"+fell+"/appoint", "person", "P1", "post", "MRSO", "from", "2026-11-01", "deputy", "yes"); a.Code != http.StatusSeeOther {
		t.Fatalf("%d %s", a.Code, a.text("main"))
	}
	a := h.page(j, "/s/"+fell+"/subjects/post/MRSO")
	a.says("main", "deputy, from 1 Nov")
	list, err := h.b.Holders(t.Context(), h.officer(), fell, "MRSO")
	h.ok(err)
	var entry string
	for _, x := range list {
		if x.Deputy {
			entry = x.Entry
		}
	}
	if a := h.post(j, "/s/"+fell+"/end-appointment", "entry", entry, "post", "MRSO", "until", "soon"); a.Code != http.StatusUnprocessableEntity {
		t.Errorf("ended on no day: %d", a.Code)
	}
	if a := h.post(j, "/s/"+fell+"/end-appointment", "entry", entry, "post", "MRSO", "until", "2026-11-30"); a.Code != http.StatusSeeOther {
		t.Errorf("%d %s", a.Code, a.text("main"))
	}
	h.page(j, "/s/"+fell+"/subjects/post/MRSO").says("main", "deputy, from 1 Nov to 30 Nov")
}
