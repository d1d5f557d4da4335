package web

import (
	"net/http"
	"strings"
	"testing"
	"time"

	"lodebook/models/book"
)

func (h *house) grant(person, zone, from, to string) string {
	h.Helper()
	r, err := h.b.Grant(h.Context(), h.officer(), fell, book.RightForm{Person: person, Zone: zone, From: from, To: to}, book.Correction{})
	h.ok(err)
	return r.ID()
}

// TestZonePage: who may enter, until when, who may not although they hold a right, why, and what would restore it.
// A screening of 10 December 2025 is good for a year, so through 10 December 2026; by hand.
func TestZonePage(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	path := "/s/" + fell + "/zones/IV"
	h.page(j, path).says(".say", "No people are entitled at this moment, no hold a right but are not, four have no right.")
	for _, p := range []string{"P1", "P3", "P4"} {
		h.grant(p, "IV", "2026-11-20", "")
	}
	h.record("training/level-2", "person:P1", "2026-11-01", book.Pass)
	h.record("screening/staff", "person:P1", "2025-12-10", book.Pass)
	h.record("training/level-2", "person:P3", "2026-11-01", book.Fail)
	a := h.page(j, path)
	a.says(".say", "One person is entitled at this moment, two hold a right but are not, one has no right. The next to end is that of Ines Arruda, after 10 Dec.")
	a.has(3, "ul.ribbons svg.band")
	a.says("ul.ribbons", "through 10 Dec")
	a.says("ul.ribbons", "Level 2 training: failed")
	a.says("ul.ribbons", "restored by: Level 2 training")
	a.says(".caution", "no permission to walk in")
	a.says("main", "0.9 mT")
	a.says("details", "Milo Prent")
	// The list for the door names those alone who may enter.
	list := h.page(j, path+"/list")
	list.says("table", "Ines Arruda")
	list.hides("table", "Sanna Holm")
	list.says(".say", "One person is entitled at 08:00 on Tuesday 1 December 2026")
	// Another moment, and as it was known at one: the training was typed in today.
	a = h.page(j, path+"?at=2026-12-11+00:00")
	a.says(".say", "No people are entitled")
	a.says(".caution", "This is how it stood at 11 Dec, 00:00, by all that is recorded now.")
	a = h.page(j, path+"?at=2026-11-30+12:00&known_at=2026-11-30+12:00")
	a.says(".caution", "as the book knew it at 30 Nov, 12:00")
	for query, want := range map[string]string{"at=2026-10-25+01:30": "comes twice", "at=2026-12-01": "is a day and not a moment", "known_at=never": "is not a day"} {
		if a := h.get(j, path+"?"+query); a.Code != http.StatusUnprocessableEntity || !strings.Contains(a.text("main"), want) {
			t.Errorf("%s: %d %s", query, a.Code, a.text("main"))
		}
	}
	if a := h.get(j, "/s/"+fell+"/zones/IX"); a.Code != http.StatusNotFound {
		t.Errorf("a zone that is not there: %d", a.Code)
	}
	h.page(j, "/s/"+fell+"/zones/I").says(".say", "is not restricted")
}

func TestZoneCSV(t *testing.T) {
	h := furnished(t)
	h.grant("P3", "IV", "2026-11-20", "2026-12-24")
	a := h.get(h.as(book.Reader), "/s/"+fell+"/zones/IV?format=csv&at=2026-12-01+08:00")
	body := a.Body.String()
	if !strings.Contains(body, "person,name,zone,entitled,until,reasons,restored_by,at,known_at") || !strings.Contains(body, "P3,Sanna Holm,IV,false,,") || !strings.Contains(body, "2026-12-01T08:00:00Z") {
		t.Error(body)
	}
}

// TestGrantAndWithdraw goes through the forms: what was typed stays, and the person's page shows the right.
func TestGrantAndWithdraw(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	a := h.post(j, "/s/"+fell+"/grant", "person", "P1", "zone", "IV", "from", "tomorrow", "because", "leads the crew")
	if a.Code != http.StatusUnprocessableEntity {
		t.Fatalf("%d", a.Code)
	}
	a.says("main", "is not a day")
	a.says("textarea[name=because]", "leads the crew")
	h.sent(j, "/s/"+fell+"/grant", "person", "P1", "zone", "IV", "from", "2026-12-01 07:30", "because", "leads the crew")
	page := h.page(j, "/s/"+fell+"/people/P1")
	page.says("ul.ribbons", "Right from 1 Dec, 07:30")
	end := ""
	for _, n := range page.all("ul.ribbons a") {
		if textOf(n) == "Withdraw " {
			end = attribute(n, "href")
		}
	}
	h.page(j, end).says("h1", "Withdraw a right: Ines Arruda, zone IV")
	rights, err := h.b.Rights(t.Context(), h.officer(), fell, "P1")
	h.ok(err)
	a = h.post(j, "/s/"+fell+"/end-right", "entry", rights[0].Entry, "person", "P1", "zone", "IV")
	a.says("main", "say why the right is withdrawn")
	h.now = h.now.Add(time.Hour)
	h.sent(j, "/s/"+fell+"/end-right", "entry", rights[0].Entry, "person", "P1", "zone", "IV", "reason", "works elsewhere")
	h.page(j, "/s/"+fell+"/people/P1").says("ul.ribbons", "to 1 Dec, 09:00")
	// A member sees their own ribbons and no other's.
	own := h.page(h.as(book.Member), "/s/"+fell+"/people/P2")
	own.says("section h2", "Zones")
	own.hides("main", "Withdraw")
	own.hides("main", "Grant")
}
