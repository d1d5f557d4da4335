package web

import (
	"fmt"
	"strconv"
	"strings"
	"testing"

	"lodebook/models/book"
)

// TestGapsOfACrowd: of each item the page counts all gaps and shows the first few, longest first, and a link
// away is every one of them, by page.
func TestGapsOfACrowd(t *testing.T) {
	h := crowded(t, 500)
	j, at := h.as(book.SafetyOfficer), "/s/"+fell+"/gaps"
	st, err := h.b.Standings(t.Context(), h.officer(), book.StandingQuery{Site: fell})
	h.ok(err)
	count, titles := map[string]int{}, map[string]string{}
	for _, r := range st.Gaps() {
		count[r.Item]++
		titles[r.Item] = r.Title
	}
	all := h.page(j, at)
	all.has(len(count), "section")
	cut := 0
	for _, s := range all.all("section") {
		a := &answer{t: t, root: s}
		head, n := a.text("h2"), strings.TrimSuffix(a.text("header span"), ", longest first")
		shown := len(a.all("li"))
		for item, title := range titles {
			if title != head {
				continue
			}
			if n != strconv.Itoa(count[item]) || shown != count[item] && (shown != groupFew || count[item] <= groupWhole) {
				t.Errorf("%s has %s and shows %d, want %d", item, n, shown, count[item])
			}
			if shown == count[item] {
				a.has(0, ".further")
				continue
			}
			cut++
			if n := h.wholeGroup(j, attribute(a.all(".further a")[0], "href"), title); n != count[item] {
				t.Errorf("%s: %d are on its pages, want %d", title, n, count[item])
			}
		}
	}
	if cut == 0 {
		t.Error("no item has more gaps than are shown")
	}
	h.page(j, at+"?of=NONE").says("main", "Nothing falls short here")
	h.page(j, at+"?of=SCREEN").has(1, "section")
}

// wholeGroup walks the pages of one group and counts the gaps on them: each subject of an item once.
func (h *house) wholeGroup(j *jar, link, head string) int {
	h.Helper()
	seen := map[string]bool{}
	for link != "" {
		a := h.page(j, link)
		a.has(1, "section")
		a.says("h2", head)
		for _, li := range a.all("ul.lines li") {
			acts := (&answer{root: li}).all(".do a") // the last one excuses that item of that subject
			seen[attribute(acts[len(acts)-1], "href")] = true
		}
		next := a.all(".pager [rel=next]")
		if link = ""; len(next) > 0 {
			link = attribute(next[0], "href")
		}
	}
	return len(seen)
}

// TestGapsByOwner: whoever answers for gaps sees theirs, all of them by page.
func TestGapsByOwner(t *testing.T) {
	h := crowded(t, 500)
	j := h.as(book.SafetyOfficer)
	st, err := h.b.Standings(t.Context(), h.officer(), book.StandingQuery{Site: fell})
	h.ok(err)
	count := map[string]int{}
	for _, r := range st.Gaps() {
		count[upperFirst(book.Role(r.Owner).Words())]++
	}
	a := h.page(j, "/s/"+fell+"/gaps?by=owner")
	a.has(2, "section")
	officer := (&answer{t: t, root: a.all("section")[1]})
	officer.says("h2", "Safety officer")
	officer.has(groupWhole, "li")
	if count["Safety officer"] <= perPage {
		t.Fatalf("%d gaps of the officer are no list of several pages", count["Safety officer"])
	}
	link := attribute(officer.all(".further a")[0], "href")
	if n := h.wholeGroup(j, link, "Safety officer"); n != count["Safety officer"] {
		t.Errorf("%d gaps of the officer are on the pages, want %d", n, count["Safety officer"])
	}
	back := h.page(j, link).all(".acts a")[0]
	h.page(j, attribute(back, "href")).has(2, "section")
}

// TestManyThingsAreOneLineOfToday, where a few stand alone.
func TestManyThingsAreOneLineOfToday(t *testing.T) {
	for _, c := range []struct {
		vents, lines int
		says         string
	}{{thingsAlone, thingsAlone, "Vent 3"}, {thingsAlone + 1, 1, "seven fixtures Vent 1, Vent 2, Vent 3, Vent 4 and three more"}} {
		h := furnished(t)
		for i := range c.vents - 2 { // there are two already
			_, err := h.b.KeepFixture(t.Context(), h.officer(), fell, book.FixtureForm{Code: fmt.Sprintf("W%d", i+3), Kind: "vent", Name: fmt.Sprintf("Vent %d", i+3), Zone: "IV", Since: "2025-02-01"}, book.Correction{})
			h.ok(err)
		}
		for i, code := range []string{"V1", "V2"} {
			_, err := h.b.KeepFixture(t.Context(), h.officer(), fell, book.FixtureForm{Code: code, Kind: "vent", Name: fmt.Sprintf("Vent %d", i+1), Zone: "IV"}, book.Correction{})
			h.ok(err)
		}
		a := h.page(h.as(book.SafetyOfficer), "/s/"+fell+"/today")
		lines := 0
		for _, li := range a.all("ul.lines li") {
			if strings.Contains(textOf(li), "Each quench vent is looked at once a year") {
				lines++
			}
		}
		if lines != c.lines {
			t.Errorf("%d vents are %d lines, want %d", c.vents, lines, c.lines)
		}
		a.says("ul.lines", c.says)
	}
}
