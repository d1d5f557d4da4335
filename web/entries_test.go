package web

import (
	"fmt"
	"net/http"
	"strings"
	"testing"
	"time"

	"lodebook/models/book"
)

func TestBookIsFilteredAndPaged(t *testing.T) {
	h := furnished(t)
	path := "/s/" + fell + "/book"
	for i := range 105 {
		h.record("training/level-2", "person:P1", fmt.Sprintf("2026-%02d-%02d", 1+i/28, 1+i%28), book.Pass)
	}
	h.now = h.now.Add(24 * time.Hour)
	j := h.as(book.SafetyOfficer)
	h.record("training/induction", "person:P2", "2026-12-01", book.Pass)
	a := h.page(j, path)
	a.has(100, "table.entries tbody tr")
	a.says("table.entries tbody", "Induction training, passed, Milo Prent, 2026-12-01")
	older := h.page(j, attribute(a.all(".pager a[rel=next]")[0], "href"))
	older.hides("main", "Induction training")
	older.says("main", "Everything, newest first")
	if n := len(older.all("table.entries tbody tr")); n == 0 || n == 100 {
		t.Errorf("the older entries are %d", n)
	}
	h.page(j, path+"?day=2026-12-02").has(1, "table.entries tbody tr")
	h.page(j, path+"?kind=fixture").has(3, "table.entries tbody tr")
	officer := h.actor(book.SafetyOfficer)
	h.page(j, path+"?kind=record&actor="+officer.Account).has(100, "table.entries tbody tr")
	h.page(j, path+"?actor=operator&kind=record").says("main", "No entry fits.")
	h.page(j, path+"?day=soon").says(".faults", "is not a day")
	if a := h.get(h.as(book.Facilities), path); a.Code != http.StatusForbidden {
		t.Errorf("the book for facilities: %d", a.Code)
	}
}

func TestEntryShowsItsFieldsAndBytes(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	r, err := h.b.Record(t.Context(), h.officer(), fell, book.RecordForm{Record: "training/level-2", Subject: "person:P1", On: "2026-11-30T09:30:00Z", By: "Odd Lien", Note: "in the small room"}, book.Correction{})
	h.ok(err)
	a := h.page(j, "/s/"+fell+"/book/"+r.ID())
	for _, words := range []string{"Level 2 training", "Ines Arruda", "2026-11-30, 09:30", "Odd Lien", "in the small room"} {
		a.says("dl.facts", words)
	}
	a.says("pre.bytes", r.ID())
	a.hides("pre.bytes", "Odd Lien") // free text is not in the hashed bytes
}

// TestCorrectionFormsOpenFilledIn: each kind's form opens with what the entry says.
func TestCorrectionFormsOpenFilledIn(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	ctx, o := t.Context(), h.officer()
	event, err := h.b.ReportEvent(ctx, o, fell, book.EventForm{Event: "roof-work", Subject: "fixture:V1", On: "2026-11-27", Note: "new cable"}, book.Correction{})
	h.ok(err)
	excusal, err := h.b.Excuse(ctx, o, fell, book.ExcusalForm{Item: "TRAIN-L2", Subject: "person:P1", From: "2026-12-01", To: "2026-12-20", Reason: "full"}, book.Correction{})
	h.ok(err)
	pause, err := h.b.Pause(ctx, o, fell, book.PauseForm{Subject: "person:P3", From: "2026-12-01", Reason: "leave"}, book.Correction{})
	h.ok(err)
	plan, err := h.b.PlanDrill(ctx, o, fell, book.PlanForm{Record: "drill/quench", Crew: "night", Day: "2026-12-10", At: "02:30", Note: "at night"}, book.Correction{})
	h.ok(err)
	for id, want := range map[string]map[string]string{
		event.ID():   {"event": "roof-work", "subject": "fixture:V1", "on": "2026-11-27", "note": "new cable"},
		excusal.ID(): {"item": "TRAIN-L2", "subject": "person:P1", "from": "2026-12-01", "to": "2026-12-20", "because": "full"},
		pause.ID():   {"subject": "person:P3", "from": "2026-12-01", "because": "leave"},
		plan.ID():    {"record": "drill/quench", "crew": "night", "day": "2026-12-10", "at": "02:30", "note": "at night"},
	} {
		form := h.page(j, "/s/"+fell+"/correct/"+id)
		var send []string
		for name, value := range want {
			if got := form.value(name); got != value {
				t.Errorf("%s opens with %s %q, want %q", form.text("h1"), name, got, value)
			}
			send = append(send, name, value)
		}
		after := h.sent(j, "/s/"+fell+"/correct/"+id, append(send, "reason_text", "looked at again")...)
		after.says("main", "It took the place of an earlier entry.")
	}
}

// TestReasonIsAskedAfterTenMinutes: a slip of one's own needs none within ten minutes.
func TestReasonIsAskedAfterTenMinutes(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	id := h.record("training/level-2", "person:P1", "2026-11-01", book.Pass)
	send := []string{"subject", "person:P1", "on", "2026-11-02", "result", "pass", "note", "kept words"}
	h.now = h.now.Add(11 * time.Minute)
	a := h.post(j, "/s/"+fell+"/correct/"+id, send...)
	if a.Code != http.StatusUnprocessableEntity || len(a.all("#f-reason-fault")) != 1 || a.value("note") != "kept words" {
		t.Errorf("after ten minutes without a reason: %d", a.Code)
	}
	a = h.post(j, "/s/"+fell+"/withdraw/"+id)
	if a.Code != http.StatusUnprocessableEntity || len(a.all("#f-reason-fault")) != 1 {
		t.Errorf("a withdrawal without a reason: %d", a.Code)
	}
	h.sent(j, "/s/"+fell+"/withdraw/"+id, "reason", "not-done").says(".say", "It was withdrawn")
	fresh := h.record("training/level-2", "person:P1", "2026-11-01", book.Pass)
	h.sent(j, "/s/"+fell+"/correct/"+fresh, send...).says(".say", "It took the place")
}

// TestLateCorrectionShowsBothAndKeepsWhatWasTyped and goes on from what stands now.
func TestLateCorrectionShowsBothAndKeepsWhatWasTyped(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	id := h.record("training/level-2", "person:P1", "2026-11-01", book.Pass)
	first, err := h.b.Record(t.Context(), h.officer(), fell, book.RecordForm{Record: "training/level-2", Subject: "person:P1", On: "2026-11-02"}, book.Correction{Supersedes: id})
	h.ok(err)
	second, err := h.b.Record(t.Context(), h.officer(), fell, book.RecordForm{Record: "training/level-2", Subject: "person:P1", On: "2026-11-03"}, book.Correction{Supersedes: first.ID()})
	h.ok(err)
	send := []string{"subject", "person:P1", "on", "2026-11-04", "result", "pass", "note", "kept words", "reason", "wrong-day"}
	a := h.post(j, "/s/"+fell+"/correct/"+id, send...)
	if a.Code != http.StatusConflict || a.value("note") != "kept words" || a.value("on") != "2026-11-04" {
		t.Fatalf("a late correction: %d, %s", a.Code, a.text("main"))
	}
	a.says(".two", "2026-11-01")
	a.says(".two", "2026-11-03")
	onward := attribute(a.all("form.sheet")[0], "action")
	if !strings.HasSuffix(onward, second.ID()) {
		t.Fatalf("the form leads to %s, want the entry that stands, %s", onward, second.ID())
	}
	h.sent(j, onward, send...).says("main", "2026-11-04")
	gone := h.record("training/induction", "person:P1", "2026-11-01", book.Pass)
	_, err = h.b.Withdraw(t.Context(), h.officer(), gone, book.Correction{})
	h.ok(err)
	a = h.post(j, "/s/"+fell+"/correct/"+gone, send...)
	if a.Code != http.StatusConflict || !strings.Contains(a.text("main"), "kept words") || len(a.all("form.sheet")) != 0 {
		t.Errorf("a correction of what was withdrawn: %d %s", a.Code, a.text("main"))
	}
	a = h.post(j, "/s/"+fell+"/withdraw/"+gone, "reason", "twice", "reason_text", "kept words")
	if a.Code != http.StatusConflict || !strings.Contains(a.text("main"), "recorded twice: kept words") {
		t.Errorf("a late withdrawal: %d %s", a.Code, a.text("main"))
	}
}

func TestLateSheetKeepsItsValues(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	fill := func(value string, fix book.Correction) string {
		r, _, err := h.b.FillSheet(t.Context(), h.officer(), fell, book.SheetForm{Record: "inspection/vent-yearly", Fixture: "V1", On: "2026-11-30", Values: map[string]string{"outlet_clear": "yes", "clear_of_path_m": value}}, fix)
		h.ok(err)
		return r.ID()
	}
	id := fill("5", book.Correction{})
	newer := fill("6", book.Correction{Supersedes: id})
	send := []string{"supersedes", id, "record", "inspection/vent-yearly", "fixture", "V1", "on", "2026-11-30", "v-outlet_clear", "yes", "v-clear_of_path_m", "7", "reason", "slip"}
	a := h.post(j, "/s/"+fell+"/sheet", send...)
	a = h.post(j, "/s/"+fell+"/sheet", append(send, "id", a.value("id"), "keep", "1", "seen", a.value("seen"))...)
	if a.Code != http.StatusConflict || a.value("v-clear_of_path_m") != "7" || a.value("supersedes") != newer {
		t.Fatalf("a late correction of a sheet: %d %s", a.Code, a.text("main"))
	}
	a.says(".two", "5")
	a.says(".two", "6")
}

func TestImportListsItsRowsAndIsUndoneWhole(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	csv := "record,subject,on,result\ntraining/level-2,P1,2026-11-02,pass\ntraining/level-2,P3,2026-11-03,pass\n"
	r, err := h.b.Import(t.Context(), h.officer(), book.ImportOptions{Table: "records", Site: fell, File: strings.NewReader(csv), Size: int64(len(csv)), FileName: "history.csv"})
	h.ok(err)
	a := h.page(j, "/s/"+fell+"/book/"+r.Batch)
	a.says("h1", "Import of 2 records")
	a.has(2, "table.entries tbody tr")
	row := h.page(j, attribute(a.all("table.entries tbody a")[0], "href"))
	row.says(".acts", "Its import")
	done := h.sent(j, "/s/"+fell+"/undo/"+r.Batch)
	done.says(".say", "The whole import was taken back")
	done.has(2, "tr.over")
	done.has(0, "button.risk")
	if w := h.word("TRAIN-L2", "person:P3"); !w.IsGap() {
		t.Errorf("after the import was taken back the training stands at %q", w)
	}
	if a := h.post(j, "/s/"+fell+"/undo/"+r.Batch); a.Code != http.StatusConflict {
		t.Errorf("taken back a second time: %d", a.Code)
	}
}
