package web

import (
	"fmt"
	"net/http"
	"strings"
	"testing"

	"lodebook/models/book"
)

func TestPeopleAreFoundByNameCrewAndWord(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	path := "/s/" + fell + "/people"
	h.record("training/level-2", "person:P1", "2026-11-01", book.Pass)
	all := h.page(j, path)
	all.says(".say", "Four people are on staff.")
	all.has(4, "table.people tbody tr")
	for query, want := range map[string]string{"find=milo": "Milo Prent", "find=skerry": "Ines Arruda", "crew=night": "Sanna Holm", "find=night+crew": "Sanna Holm"} {
		a := h.page(j, path+"?"+query)
		a.says("table.people tbody", want)
		a.hides("table.people tbody", map[bool]string{true: "Ines Arruda", false: "Sanna Holm"}[strings.Contains(query, "night")])
	}
	a := h.page(j, path+"?find=missing")
	a.says("table.people", "Milo Prent")
	a.says("table.people", "missing")
	h.page(j, path+"?find=nobody+at+all").says("main", "Nobody on staff fits.")
}

// TestManyPeopleArePaged: a hundred lines a page, those on staff first, and who left under a fold.
func TestManyPeopleArePaged(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	for i := range 120 {
		p := book.PersonForm{Code: fmt.Sprintf("Q%03d", i), Name: fmt.Sprintf("Person %03d", i), Joined: "2026-01-01"}
		if i == 7 {
			p.Left = "2026-03-01"
		}
		_, err := h.b.KeepPerson(t.Context(), h.officer(), fell, p, book.Correction{})
		h.ok(err)
	}
	first := h.page(j, "/s/"+fell+"/people")
	first.has(100, "table.people tbody tr")
	first.says(".pager", "1 to 100 of 124")
	next := attribute(first.all(".pager a[rel=next]")[0], "href")
	second := h.page(j, next)
	second.has(24, "table.people tbody tr")
	second.says("details", "Not on staff on this day: one")
	second.says("details", "Person 007")
	second.says("details", "left 1 Mar")
}

// TestPersonSaysWhatTheyHold: a training of 10 November 2025, renewed every year and kept to the month's
// end, is good to 30 November 2026, by hand.
func TestPersonSaysWhatTheyHold(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	path := "/s/" + fell + "/people/P1"
	h.page(j, path).says(".say", "Ines Arruda is assigned Level 2 and holds no level;")
	h.record("training/level-2", "person:P1", "2026-11-10", book.Pass)
	for _, x := range []string{"screening/staff", "acknowledgement/POL-ACCESS", "training/induction"} {
		h.record(x, "person:P1", "2026-11-10", book.Pass)
	}
	h.page(j, path).says(".say", "Ines Arruda holds Level 2 until 30 Nov 2027; nothing has run out.")
	h.record("training/induction", "person:P1", "2026-11-20", book.Fail)
	a := h.page(j, path)
	a.says(".say", "one thing has run out or failed")
	a.says(".why", "failed")
	h.page(j, path+"?on=2027-12-01").says(".say", "is assigned Level 2 and holds no level")
	_, err := h.b.Pause(t.Context(), h.officer(), fell, book.PauseForm{Subject: "person:P1", From: "2026-12-01", Reason: "leave"}, book.Correction{})
	h.ok(err)
	h.page(j, path).says(".say", "is paused from 1 Dec to no end yet")
}

// TestFactsStandOverTime changes a crew from a day on: the days before it stay as they were.
func TestFactsStandOverTime(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	form := h.page(j, "/s/"+fell+"/keep-person?code=P1")
	for name, want := range map[string]string{"name": "Ines Arruda", "level": "L2", "crew": "early", "joined": "2025-02-01", "from": "2026-12-01", "fact-employer": "Skerry Works"} {
		if got := form.value(name); got != want {
			t.Errorf("the form opens with %s %q, want %q", name, got, want)
		}
	}
	a := h.sent(j, "/s/"+fell+"/keep-person", "known", "1", "code", "P1", "name", "Ines Arruda", "level", "L2", "crew", "night", "joined", "2025-02-01", "from", "2026-11-15", "fact-employer", "Skerry Works")
	a.says(".notice", "Kept: Ines Arruda.")
	a.says("dl.facts", "Night crew from 15 Nov")
	a.says("dl.facts", "Early crew from 1 Feb 2025")
	h.page(j, "/s/"+fell+"/people?crew=early&on=2026-11-14").says("table.people", "Ines Arruda")
	h.page(j, "/s/"+fell+"/people?crew=early").hides("table.people", "Ines Arruda")
	again := h.sent(j, "/s/"+fell+"/keep-person", "known", "1", "code", "P1", "name", "Ines Arruda", "crew", "night")
	again.says(".notice", "Nothing was new")
}

func TestMemberSeesOnlyTheirOwnPage(t *testing.T) {
	h := furnished(t)
	j := h.as(book.Member) // Milo Prent, P2
	h.record("training/level-1", "person:P2", "2026-11-10", book.Pass)
	own := h.page(j, "/s/"+fell+"/people/P2")
	own.says("h1", "Milo Prent")
	own.has(0, ".acts a")
	record := attribute(own.all("table.history a")[0], "href")
	h.page(j, record)
	for _, path := range []string{"/people/P1", "/people", "/fixtures/V1"} {
		if a := h.get(j, "/s/"+fell+path); a.Code != http.StatusForbidden || strings.Contains(a.Body.String(), "Arruda") {
			t.Errorf("a member at %s: %d", path, a.Code)
		}
	}
	for _, n := range own.all("main a") {
		if a := h.get(j, attribute(n, "href")); a.Code != http.StatusOK {
			t.Errorf("a link on a member's own page, %s: %d", attribute(n, "href"), a.Code)
		}
	}
}

func TestEraseAsksTwiceAndForgets(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	h.page(j, "/s/"+fell+"/people/P3").hides("main", "Erase this person")
	_, err := h.b.KeepPerson(t.Context(), h.officer(), fell, book.PersonForm{Code: "P3", Joined: "2025-06-01", Left: "2026-11-30"}, book.Correction{})
	h.ok(err)
	a := h.page(j, "/s/"+fell+"/people/P3")
	a.says(".say", "Sanna Holm left on 30 Nov")
	form := h.page(j, attribute(a.all("a.risk")[0], "href"))
	form.says("main", "cannot be taken back")
	if a := h.post(j, "/s/"+fell+"/erase", "person", "P3", "again", "P4"); a.Code != http.StatusUnprocessableEntity {
		t.Errorf("with another code: %d", a.Code)
	}
	h.sent(j, "/s/"+fell+"/erase", "person", "P3", "again", "P3").says(".say", "were erased")
	h.page(j, "/s/"+fell+"/people").hides("main", "Sanna Holm")
}

func TestExcuseAndPauseFromTheirForms(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	base := "/s/" + fell
	form := h.page(j, base+"/excuse?subject=person:P1&item=TRAIN-L2")
	form.says("h1", "Excuse: Ines Arruda")
	form.hides("form.sheet", "Each quench vent") // only what is asked of people
	h.sent(j, base+"/excuse", "id", form.value("id"), "subject", "person:P1", "item", "TRAIN-L2", "from", "2026-12-01", "to", "2026-12-20", "reason", "the course is full").says("main", "the course is full")
	a := h.sent(j, base+"/pause", "subject", "person:P1", "from", "2026-11-25", "reason", "leave")
	a.says("main", "Everything paused")
	entry := attribute(a.all("form[action=" + base + "/pause-end] [name=entry]")[0], "value")
	h.sent(j, base+"/pause-end", "entry", entry)
	a = h.page(j, base+"/people/P1")
	a.says("main", "25 Nov to 1 Dec")
	a.has(1, "li.over") // the pause without an end, which the ended one took the place of
}
