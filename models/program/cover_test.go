package program

import (
	"errors"
	"testing"
	"time"
)

func TestEscort(t *testing.T) {
	p := mustParse(t, head+"zones: [{code: III, restricted: true, escort: L2}, {code: IV}]\nlevels: [{code: L1}, {code: L2}]\n")
	same(t, "escort of III", p.Zones[0].Escort, "L2")
	same(t, "escort of IV", p.Zones[1].Escort, "")
}

// faultyCover are wrong in who must be there.
var faultyCover = []refusedFile{
	{"escort", head + "zones: [{code: III, escort: L3}, {code: IV, escort: [L1]}]\nlevels: [{code: L1}]\n", []string{
		`line 3, column 29: zones[0].escort: found "L3"; there is no such level; write L1`,
		"line 3, column 53: zones[1].escort: found a list; write L1",
	}},
	{"cover", vocabulary + `  - {code: A, title: T, asks: person, cover: {level: L2}}
  - {code: B, title: T, asks: site, cover: {level: L9, at_least: 0, duties: [], hours: night}}
  - {code: C, title: T, asks: site, cover: {post: MRSX, level: L1}}
  - {code: D, title: T, asks: site, cover: {post: MRSX, at_least: 2}}
  - {code: E, title: T, asks: site, cover: {}, first: P1D}
  - {code: F, title: T, asks: site, cover: {level: L1, crew: early}, record: check/x}
  - {code: G, title: T, asks: site, cover: L2, each: day}
`, []string{
		`line 14, column 39: items[0].cover: found "cover"; only an item that asks the site can have it; write asks: site, or another cadence`,
		`line 15, column 52: items[1].cover.level: found "L9"; there is no such level; did you mean L1? write L1 or L2`,
		`line 15, column 66: items[1].cover.at_least: found "0"; write a whole number from 1 on`,
		`line 15, column 77: items[1].cover.duties: found a list; no duty would ever count; name one, or leave it out`,
		`line 15, column 88: items[1].cover.hours: found "night"; write operating or all`,
		`line 16, column 45: items[2].cover.post: found "post"; a post beside a level; keep one of the two`,
		`line 17, column 51: items[3].cover.post: found "MRSX"; there is no such post; write MRSO`,
		`line 17, column 67: items[3].cover.at_least: found "2"; a post needs one person; leave it out`,
		`line 18, column 44: items[4].cover: neither a level nor a post is given; write {level: L2, at_least: 2} or {post: A}`,
		`line 18, column 48: items[4].first: found "first"; it does not go with after, holds or cover; leave it out`,
		`line 19, column 56: items[5].cover.crew: found "crew"; no such key here; write at_least, duties, hours, level or post`,
		`line 19, column 70: items[5].record: found "record"; no record answers for who was there; leave it out`,
		`line 20, column 5: items[6].record: not given; write the records that answer it as kind/code, such as training/level-2`,
		`line 20, column 37: items[6].cover: found "cover"; a second cadence beside each; keep one of the two`,
		`line 20, column 44: items[6].cover: found "L2"; write keys and values, as in {code: A}`,
	}},
}

func TestCover(t *testing.T) {
	p := mustParse(t, vocabulary+`  - {code: A, title: T, asks: site, cover: {level: L2, at_least: 2}}
  - {code: B, title: T, asks: site, cover: {post: MRSO, duties: [duty], hours: all}}
`)
	a, b := p.Items[0].Cadence, p.Items[1].Cadence
	same(t, "rule", a.Rule, Cover)
	same(t, "the demand of A", *a.Cover, CoverDemand{Level: "L2", AtLeast: 2})
	same(t, "the demand of B", *b.Cover, CoverDemand{Post: "MRSO", AtLeast: 1, Duties: []string{"duty"}, AllDay: true})
	same(t, "words of A", a.Cover.Words()+" "+a.Words(), "2 people of level L2 in all operating hours")
	same(t, "words of B", b.Cover.Words()+" "+b.Words(), "the post MRSO or its deputy at all hours")
	for _, c := range []struct {
		of   *CoverDemand
		duty string
		want bool
	}{{a.Cover, "duty", true}, {a.Cover, OnCall, false}, {a.Cover, "", true}, {b.Cover, OnCall, false}, {b.Cover, "duty", true}, {&CoverDemand{Post: "MRSO"}, OnCall, true}} {
		same(t, "whether "+c.duty+" counts", c.of.Counts(c.duty), c.want)
	}
	for _, c := range []struct {
		facts map[string]any
		want  bool
	}{{map[string]any{"uncovered/A": true}, false}, {map[string]any{"uncovered/A": false, "uncovered/B": true}, true}} {
		got, err := a.Holds.Match(Subject{Asks: AsksSite, Code: "S", Facts: c.facts})
		if err != nil || got != c.want {
			t.Errorf("with %v it is %v, %v", c.facts, got, err)
		}
	}
	var missing *MissingFact
	if _, err := a.Holds.Match(Subject{Asks: AsksSite, Code: "S"}); !errors.As(err, &missing) {
		t.Errorf("without a roster it said %v", err)
	}
}

// By the IANA database Lisbon's clocks skip 01:00 to 02:00 on 30 March 2025, and show it twice on 26 October.
func TestOperatingHoursAtClockChanges(t *testing.T) {
	const site = "lodebook: 1\nsite: {code: S, time_zone: Europe/Lisbon}\n"
	byDay := mustParse(t, site+"calendar: {hours: {sun: [\"00:30-01:30\", \"01:45-03:00\"]}}\n")
	byNight := mustParse(t, site+"calendar: {hours: {sat: \"22:00-02:00\"}}\n")
	for _, c := range []struct {
		day  string
		want []string
	}{
		{"2025-03-29", []string{"2025-03-29T22:00:00Z 2025-03-30T01:00:00Z"}},
		{"2025-03-30", []string{"2025-03-30T00:30:00Z 2025-03-30T01:00:00Z", "2025-03-30T01:00:00Z 2025-03-30T02:00:00Z"}},
		{"2025-10-25", []string{"2025-10-25T21:00:00Z 2025-10-26T02:00:00Z"}},
		{"2025-10-26", []string{"2025-10-25T23:30:00Z 2025-10-26T01:30:00Z", "2025-10-26T00:45:00Z 2025-10-26T03:00:00Z"}},
		{"2025-06-02", nil},
	} {
		var got []string
		on, loc := *date(c.day), byDay.Site.Location
		for _, h := range append(byDay.Open(on, loc), byNight.Open(on, loc)...) {
			got = append(got, h[0].UTC().Format(time.RFC3339)+" "+h[1].UTC().Format(time.RFC3339))
		}
		same(t, "hours of "+c.day, got, c.want)
	}
}
