package web

import (
	"net/http"
	"testing"

	"lodebook/models/book"
	"lodebook/models/standing"
)

func TestFixturesStandByKindAndZone(t *testing.T) {
	h := furnished(t)
	j := h.as(book.Facilities)
	a := h.page(j, "/s/"+fell+"/fixtures")
	a.says(".say", "Three fixtures are in use")
	a.has(2, "tr.kind")
	a.says("table.things", "Ferromagnetic detector Door detector")
	a.says("table.things", "Quench vent North vent")
	h.page(j, "/s/"+fell+"/fixtures?find=south").hides("table.things", "North vent")
	_, err := h.b.KeepFixture(t.Context(), h.officer(), fell, book.FixtureForm{Code: "V2", Since: "2025-02-01", Until: "2026-06-30"}, book.Correction{})
	h.ok(err)
	a = h.page(j, "/s/"+fell+"/fixtures")
	a.says("details", "Not in use on this day: one")
	a.says("details", "until 30 Jun")
	h.page(j, "/s/"+fell+"/fixtures?on=2026-06-30").hides("main", "Not in use")
}

// TestFixtureIsAddedByItsKind: each kind has facts of its own, so the kind is asked first.
func TestFixtureIsAddedByItsKind(t *testing.T) {
	h := furnished(t)
	j := h.as(book.Facilities)
	path := "/s/" + fell + "/keep-fixture"
	kinds := h.page(j, path)
	kinds.says("ul.choices", "Oxygen monitor")
	form := h.page(j, path+"?kind=vent")
	form.says("h1", "quench vent")
	form.has(1, "select[name=fact-over_public_path]")
	h.page(j, path+"?kind=detector").has(0, "[name=fact-over_public_path]")
	if a := h.post(j, path, "kind", "vent", "code", "bad code", "name", "kept words"); a.Code != http.StatusUnprocessableEntity || a.value("name") != "kept words" {
		t.Errorf("a bad code: %d", a.Code)
	}
	a := h.sent(j, path, "kind", "vent", "code", "V3", "name", "East vent", "zone", "IV", "since", "2026-11-01", "fact-over_public_path", "no")
	a.says("h1", "East vent")
	a.says(".say", "A quench vent in Zone IV;")
	a.says("dl.facts", "Over public path no from 1 Nov")
	change := h.page(j, path+"?code=V3")
	change.has(2, "[name=fact-over_public_path] option") // yes and no: emptying it would take nothing off
	h.sent(j, path, "known", "1", "kind", "vent", "code", "V3", "name", "East vent", "zone", "IV", "since", "2026-11-01", "from", "2026-11-20", "fact-over_public_path", "yes").says("dl.facts", "yes from 20 Nov no from 1 Nov")
}

// TestEventAsksForAnAnswer: roof work on 27 November, to be answered within two days.
func TestEventAsksForAnAnswer(t *testing.T) {
	h := furnished(t)
	j := h.as(book.Facilities)
	h.record("inspection/vent-yearly", "fixture:V1", "2026-11-10", book.Pass)
	form := h.page(j, "/s/"+fell+"/event?subject=fixture:V1")
	form.says("h1", "North vent")
	form.has(1, "[name=event] option") // roof work; a change of health happens to people
	send := []string{"id", form.value("id"), "subject", "fixture:V1", "event", "roof-work", "on", "2026-11-27", "note", "new cable"}
	before := h.size()
	h.sent(j, "/s/"+fell+"/event", send...).says("main", "Roof work")
	h.sent(j, "/s/"+fell+"/event", send...)
	if n := h.size() - before; n != 1 {
		t.Errorf("sent twice it is %d entries", n)
	}
	if w := h.word("VENT-AFTER", "fixture:V1"); w != standing.Lapsed {
		t.Errorf("the vent after roof work stands at %q", w)
	}
}

func TestFixturePageShowsWhyAndHistory(t *testing.T) {
	h := furnished(t)
	j := h.as(book.Facilities)
	id := h.record("inspection/vent-yearly", "fixture:V1", "2026-11-10", book.Pass)
	_, err := h.b.Record(t.Context(), h.officer(), fell, book.RecordForm{Record: "inspection/vent-yearly", Subject: "fixture:V1", On: "2026-11-11"}, book.Correction{Supersedes: id})
	h.ok(err)
	a := h.page(j, "/s/"+fell+"/fixtures/V1")
	a.has(2, "table.history tbody tr")
	a.has(1, "tr.over")
	both := h.page(j, attribute(a.all("tr.over a.both")[0], "href"))
	both.says("main", "2026-11-10")
	both.says("main", "2026-11-11")
	a.says(".why", "2026-11-11")
	for _, n := range a.all("main a") {
		if got := h.get(j, attribute(n, "href")); got.Code != http.StatusOK {
			t.Errorf("a link that facilities are shown, %s: %d", attribute(n, "href"), got.Code)
		}
	}
	zone := h.page(j, "/s/"+fell+"/subjects/zone/IV")
	zone.says(".say", "A zone; nothing is asked on this day.")
}
