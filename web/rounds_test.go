package web

import (
	"net/http"
	"strings"
	"testing"

	"lodebook/models/book"
)

// TestRoundStandsBySheet: what one sheet answers is one line, and stands where the worst of it does.
func TestRoundStandsBySheet(t *testing.T) {
	h := furnished(t)
	j := h.as(book.Facilities)
	a := h.page(j, "/s/"+fell+"/rounds")
	a.says(".say", "Three fixtures want looking at in two zones.")
	text := a.text("main")
	if strings.Index(text, "Zone III") > strings.Index(text, "Zone IV") {
		t.Error("zones are not in walking order")
	}
	a.says("section header", "no phone or tablet goes in")
	if n := strings.Count(text, "Quench vent, yearly look"); n != 2 {
		t.Errorf("two vents with one sheet each stand in %d lines", n)
	}
	a.says("ul.lines", "every year; every 3 months")
	a.has(3, ".do a.btn")
	sheet := h.page(j, attribute(a.all(".do a.btn")[2], "href"))
	sheet.says("h1", "South vent")
	a = h.page(j, "/s/"+fell+"/rounds?on=2026-11-30")
	a.has(0, ".do a.btn")
}

func TestSheetOpensWithItsCautions(t *testing.T) {
	h := furnished(t)
	j := h.as(book.Facilities)
	a := h.page(j, "/s/"+fell+"/sheet?record=inspection/vent-yearly&fixture=V1")
	a.says(".caution", "No phone goes into Zone IV: print this")
	a.says(".caution", "An outside look proves nothing")
	a.says("fieldset", "Outlet free of nests and water")
	a.says(".unit", "m")
	a.says(".help", "at least 3 m; a remark below 4 m")
	a.says(".say", "never looked at")
	paper := h.page(j, attribute(a.all(".caution a")[0], "href"))
	paper.says("h1", "North vent")
	paper.has(1, ".paper-sheet")
	paper.has(2, ".box")
	if !strings.Contains(h.page(j, "/s/"+fell+"/sheet?record=check/detector&fixture=D1").Body.String(), "forms.js") {
		t.Error("the sheet has no script to judge it by")
	}
	h.page(j, "/s/"+fell+"/sheet?record=check/detector&fixture=D1").hides("main", "No phone goes into")
}

func TestFailedSheetSaysWhatToDo(t *testing.T) {
	h := furnished(t)
	j := h.as(book.Facilities)
	path := "/s/" + fell + "/sheet"
	values := []string{"record", "inspection/vent-yearly", "fixture", "V1", "on", "2026-12-01", "v-outlet_clear", "no", "v-clear_of_path_m", "3,5", "v-remark", "kept words"}
	a := h.post(j, path, values...)
	a.says("#result", "fails")
	a.says("#result", "Outlet free of nests and water")
	a.says("#result", "What to do: Call the safety officer; close the walkway below.")
	if a.value("v-clear_of_path_m") != "3,5" || a.value("v-remark") != "kept words" {
		t.Error("the preview changed what was typed")
	}
	kept := h.sent(j, path, append(values, "id", a.value("id"), "keep", "1", "seen", a.value("seen"))...)
	kept.says(".notice", "failed. Call the safety officer")
	bad := h.post(j, path, "record", "inspection/vent-yearly", "fixture", "V1", "on", "2026-12-01", "v-clear_of_path_m", "far", "v-remark", "kept words")
	if bad.Code != http.StatusUnprocessableEntity || len(bad.all("#f-v-clear_of_path_m-fault")) != 1 || len(bad.all("#f-v-outlet_clear-fault")) != 1 || bad.value("v-remark") != "kept words" {
		t.Errorf("a sheet with faults: %d %s", bad.Code, bad.text("main"))
	}
	bad.has(0, "[name=keep]")
}

func TestRoundOnPaper(t *testing.T) {
	h := furnished(t)
	j := h.as(book.Facilities)
	a := h.page(j, "/s/"+fell+"/round-sheet")
	a.has(3, ".paper-sheet")
	a.says("main", "no phone, tablet or steel clip goes in")
	a.says("main", "Never press a quench button")
	if n := strings.Count(a.text("main"), "An outside look proves nothing about the inside of the pipe"); n != 1 {
		t.Errorf("the caution of two sheets in one zone stands %d times", n)
	}
	h.page(j, "/s/"+fell+"/round-sheet?zone=III").has(1, ".paper-sheet")
}

// TestMemberFillsTheSheetsThatNameThem: the detector's sheet is recorded by the early crew, in which
// the member is; the vent's is not.
func TestMemberFillsTheSheetsThatNameThem(t *testing.T) {
	h := furnished(t)
	j := h.as(book.Member)
	a := h.page(j, "/s/"+fell+"/rounds")
	a.says("main", "Door detector")
	a.hides("main", "vent")
	h.page(j, "/s/"+fell+"/sheet?record=check/detector&fixture=D1")
	if got := h.get(j, "/s/"+fell+"/sheet?record=inspection/vent-yearly&fixture=V1"); got.Code != http.StatusForbidden {
		t.Errorf("the vent's sheet for a member: %d", got.Code)
	}
}
