package web

import (
	"net/http"
	"slices"
	"strings"
	"testing"

	"lodebook/models/book"
	"lodebook/models/standing"
)

// word is the standing of an item for a subject today.
func (h *house) word(item, subject string) standing.Word {
	h.Helper()
	st, err := h.b.Standings(h.Context(), h.op, book.StandingQuery{Site: fell, Item: item, Subject: subject})
	h.ok(err)
	if len(st.Rows) == 0 {
		return ""
	}
	return st.Rows[0].Word
}

func (h *house) size() int64 {
	h.Helper()
	n, err := h.b.Size(h.Context())
	h.ok(err)
	return n
}

// TestSubjectIsChosenFirst opens a form without what it is about, finds it by name, and goes on.
func TestSubjectIsChosenFirst(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	a := h.page(j, "/s/"+fell+"/record?record=training/level-2&find=arr")
	a.says("main", "Ines Arruda")
	a.hides("main", "Milo Prent")
	a.hides("main", "North vent") // no training is asked of a fixture
	form := h.page(j, attribute(a.all("ul.choices a")[0], "href"))
	form.says("h1", "Ines Arruda")
	if got := form.value("record"); got != "training/level-2" {
		t.Errorf("what was chosen before is lost: %q", got)
	}
	form.hides("select", "Vent") // sheets are filled in, not recorded
	event := h.page(j, "/s/"+fell+"/event?event=roof-work")
	event.says("main", "North vent")
	event.hides("main", "Door detector") // roof work happens to vents
	event.hides("main", "Milo Prent")
}

func TestRecordIsKeptOnce(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	path := "/s/" + fell + "/record"
	form := h.page(j, path+"?subject=person:P1&record=training/level-2")
	sent := []string{"id", form.value("id"), "subject", "person:P1", "record", "training/level-2", "on", "2026-11-20", "result", "pass", "by", "Odd Lien"}
	before := h.size()
	a := h.sent(j, path, sent...)
	a.says(".notice", "Kept: Level 2 training for Ines Arruda.")
	h.sent(j, path, sent...)
	if n := h.size() - before; n != 1 {
		t.Errorf("sent twice it is %d entries", n)
	}
	if w := h.word("TRAIN-L2", "person:P1"); w != standing.Met {
		t.Errorf("the training stands at %q", w)
	}
	sent[7] = "2026-11-21"
	if a := h.post(j, path, sent...); a.Code != http.StatusConflict || !strings.Contains(a.text("main"), "2026-11-20") || !strings.Contains(a.text("main"), "2026-11-21") {
		t.Errorf("the same form with another day: %d %s", a.Code, a.text("main"))
	}
}

// TestSessionWithoutScript goes the way of somebody whose browser runs no script: choose, tick, keep.
func TestSessionWithoutScript(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	path := "/s/" + fell + "/session"
	h.record("training/level-2", "person:P1", "2026-11-01", book.Pass)
	id := h.page(j, path).value("id")
	typed := []string{"id", id, "record", "training/level-2", "on", "2026-11-28", "by", "Odd Lien", "note", "words typed", "people", "P2"}
	before := h.size()
	shown := h.post(j, path, append(typed, "show-due", "yes", "do", "show")...)
	if shown.Code != http.StatusOK || h.size() != before {
		t.Fatalf("showing others: %d", shown.Code)
	}
	var visible []string
	for _, n := range shown.all(".crowd li") {
		if !slices.ContainsFunc(n.Attr, isHidden) {
			visible = append(visible, textOf(n))
		}
	}
	// Of Level 2, P1 is met; P3 and P4 never had the training; P2 is asked for no such thing, but ticked.
	if list := strings.Join(visible, ";"); len(visible) != 3 || strings.Contains(list, "Ines Arruda") || !strings.Contains(list, "Milo Prent") || strings.Count(list, "missing") != 2 {
		t.Errorf("closing or a gap shows %q", list)
	}
	if shown.value("note") != "words typed" || shown.value("by") != "Odd Lien" || shown.value("id") != id {
		t.Error("what was typed is lost")
	}
	ticked := h.post(j, path, append(typed, "show-crew", "night", "do", "tick")...)
	if got := checked(ticked, "people"); !slices.Equal(got, []string{"P2", "P3", "P4"}) {
		t.Errorf("the night crew and who was ticked: %v", got)
	}
	if got := checked(h.post(j, path, append(typed, "do", "untick")...), "people"); len(got) != 0 {
		t.Errorf("unticked: %v", got)
	}
	keep := append(typed, "people", "P3", "people", "P4", "failed", "P4")
	kept := h.sent(j, path, keep...)
	kept.says(".notice", "Kept: Level 2 training for two people, and one who did not pass.")
	h.sent(j, path, keep...)
	if n := h.size() - before; n != 3 {
		t.Errorf("three people sent twice are %d entries", n)
	}
	if a, b := h.word("TRAIN-L2", "person:P3"), h.word("TRAIN-L2", "person:P4"); a != standing.Met || b != standing.Failed {
		t.Errorf("who passed is %q, who did not %q", a, b)
	}
}

// TestSessionFaultKeepsTicks: everything typed and ticked survives a fault.
func TestSessionFaultKeepsTicks(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	a := h.post(j, "/s/"+fell+"/session", "record", "training/level-2", "on", "2027-01-01", "people", "P1", "people", "P3", "failed", "P3", "show-find", "a")
	if a.Code != http.StatusUnprocessableEntity || len(a.all("#f-on-fault")) != 1 {
		t.Fatalf("a day to come: %d %s", a.Code, a.text("main"))
	}
	if got := checked(a, "people"); !slices.Equal(got, []string{"P1", "P3"}) || !slices.Equal(checked(a, "failed"), []string{"P3"}) {
		t.Errorf("ticked after the fault: %v, not passed: %v", got, checked(a, "failed"))
	}
	if a.value("show-find") != "a" {
		t.Error("the filter is lost")
	}
}

func TestScreeningKeepsOnlyTheOutcome(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	path := "/s/" + fell + "/screening"
	form := h.page(j, path+"?person=P1")
	form.says("main", "nothing medical belongs here")
	form.has(0, "textarea")
	form.has(0, "[name=note]")
	form.has(1, "[name=record] option") // the only kind there is needs no choosing
	if a := h.post(j, path, "person", "P1", "record", "screening/staff", "on", "2026-11-30", "by", "kept words"); a.Code != http.StatusUnprocessableEntity || len(a.all("#f-outcome-fault")) != 1 || a.value("by") != "kept words" {
		t.Errorf("without an outcome: %d", a.Code)
	}
	h.sent(j, path, "id", form.value("id"), "person", "P1", "record", "screening/staff", "on", "2026-11-30", "outcome", "restricted", "limit", "III", "until", "2027-03-31", "by", "Odd Lien")
	a := h.page(j, "/s/"+fell+"/people/P1")
	a.says("table.history", "good until 31 Mar 2027")
	a.says("table.history", "only for III")
	h.sent(j, path, "person", "P3", "record", "screening/staff", "on", "2026-11-30", "outcome", "not")
	if w := h.word("SCREEN", "person:P3"); w != standing.Failed {
		t.Errorf("not cleared stands at %q", w)
	}
	if a := h.post(j, path, "person", "P99", "record", "screening/staff", "on", "2026-11-30", "outcome", "cleared"); a.Code != http.StatusUnprocessableEntity || len(a.all("#f-person-fault")) != 1 {
		t.Errorf("of nobody: %d %s", a.Code, a.text("main"))
	}
}

// TestNobodyScreensThemselves: nobody approves, confirms or grants for themselves.
func TestNobodyScreensThemselves(t *testing.T) {
	h := furnished(t)
	offered := ".do a[href=/s/" + fell + "/screening?person=P3&record=screening%2Fstaff]"
	h.page(h.as(book.SafetyOfficer), "/s/"+fell+"/people/P3").has(1, offered)
	_, err := h.b.AddAccount(t.Context(), h.op, book.AccountForm{Name: "sanna", Role: book.SafetyOfficer, Sites: []string{fell}, Person: "P3"})
	h.ok(err)
	secret, err := h.b.NewLink(t.Context(), h.op, "sanna")
	h.ok(err)
	in, err := h.b.SignInByLink(t.Context(), secret)
	h.ok(err)
	j := &jar{map[string]string{"lodebook": in.Secret}}
	h.page(j, "/s/"+fell+"/people/P3").has(0, offered)
	if a := h.post(j, "/s/"+fell+"/screening", "person", "P3", "record", "screening/staff", "on", "2026-11-30", "outcome", "cleared"); a.Code != http.StatusForbidden {
		t.Errorf("one's own screening: %d", a.Code)
	}
}

func TestMemberAcknowledges(t *testing.T) {
	h := furnished(t)
	j := h.as(book.Member)
	a := h.page(j, "/s/"+fell+"/people/P2")
	a.says(".do", "Read and acknowledge")
	h.page(j, "/s/"+fell+"/acknowledge?document=POL-ACCESS").says("h1", "Access policy")
	h.sent(j, "/s/"+fell+"/acknowledge", "document", "POL-ACCESS").says(".notice", "you have read it")
	if w := h.word("POLICY", "person:P2"); w != standing.Met {
		t.Errorf("the policy stands at %q", w)
	}
}
