package web

import (
	"net/http"
	"slices"
	"testing"

	"lodebook/models/book"
	"lodebook/models/standing"
)

func TestDrillsSayWhoNeverHeldOne(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	path := "/s/" + fell + "/drills"
	a := h.page(j, path)
	a.says(".say", "Early crew has never held a quench drill. Night crew has never held a quench drill.")
	a.says(".caution", "never takes a ferrous prop past the door")
	h.record("drill/quench", "crew:early", "2026-05-05", book.Pass)
	h.record("drill/quench", "crew:early", "2026-11-05", book.Pass)
	a = h.page(j, path)
	a.says(".say", "Night crew has never held a quench drill.")
	a.hides(".say", "Early crew")
	a.says("table.grid", "met")
	h.sent(j, "/s/"+fell+"/plan", "record", "drill/quench", "crew", "night", "day", "2026-12-10", "at", "02:30", "note", "an alarm at night")
	a = h.page(j, path)
	a.says(".say", "a quench drill (planned for 10 Dec)")
	a.says("main", "10 Dec, 02:30")
	a.has(0, "table.grid a.btn") // who has a plan needs no second one
	h.page(j, path+"?on=2026-11-30").has(0, ".acts a")
}

// TestDrillIsRecordedFromItsPlan with the crew ticked, one of it away, and a guest.
func TestDrillIsRecordedFromItsPlan(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	base := "/s/" + fell
	h.sent(j, base+"/plan", "record", "drill/quench", "crew", "night", "day", "2026-11-30")
	a := h.page(j, base+"/drills")
	a.says(".say", "One plan is past its day and nobody has recorded it.")
	_, err := h.b.Pause(t.Context(), h.officer(), fell, book.PauseForm{Subject: "person:P4", From: "2026-11-20", To: "2026-12-20"}, book.Correction{})
	h.ok(err)
	form := h.page(j, attribute(a.all(".do a.btn")[0], "href"))
	if got := checked(form, "people"); !slices.Equal(got, []string{"P3"}) {
		t.Errorf("of the night crew %v are ticked, want P3: P4 is away", got)
	}
	if form.value("on") != "2026-11-30" || form.value("crew") != "night" || form.value("record") != "drill/quench" {
		t.Error("the plan does not fill its form in")
	}
	form.says(".guests", "Ines Arruda")
	send := []string{"id", form.value("id"), "plan", form.value("plan"), "ticked-for", "night", "record", "drill/quench", "crew", "night", "on", "2026-11-30", "result", "pass", "people", "P3", "people", "P1", "note", "the door was slow"}
	before := h.size()
	kept := h.sent(j, base+"/drill", send...)
	kept.says(".notice", "Kept: Quench drill, with two people.")
	h.sent(j, base+"/drill", send...)
	if n := h.size() - before; n != 3 {
		t.Errorf("a crew and two people, sent twice, are %d entries", n)
	}
	kept.says("table.history", "two people: ")
	kept.says("table.history", "Sanna Holm")
	kept.says("table.history", "Ines Arruda")
	kept.hides("main", "Planned")
	if w := h.word("DRILL-QUENCH", "crew:night"); w != standing.Lapsed {
		t.Errorf("one drill of two in a year leaves the crew at %q", w)
	}
}

// TestAnotherCrewIsTickedInstead: with another crew its people are ticked, and guests stay.
func TestAnotherCrewIsTickedInstead(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	path := "/s/" + fell + "/drill"
	typed := []string{"record", "drill/quench", "on", "2026-11-30", "result", "pass", "note", "kept words", "ticked-for", "early", "people", "P1", "people", "P3"}
	shown := h.post(j, path, append(typed, "crew", "night", "do", "show")...)
	if got := checked(shown, "people"); !slices.Equal(got, []string{"P3", "P4"}) {
		t.Errorf("after another crew was chosen %v are ticked", got)
	}
	before := h.size()
	unseen := h.post(j, path, append(typed, "crew", "night")...)
	if unseen.Code != http.StatusUnprocessableEntity || len(unseen.all("#f-crew-fault")) != 1 || h.size() != before {
		t.Errorf("kept for a crew whose people nobody looked at: %d", unseen.Code)
	}
	if unseen.value("note") != "kept words" || unseen.value("ticked-for") != "night" {
		t.Error("what was typed is lost, or the new crew is not ticked")
	}
}
