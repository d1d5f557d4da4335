package program

import (
	"strings"
	"testing"
)

// What each warning is about, and that a program which gives no cause has none.
func TestWarnings(t *testing.T) {
	quiet := `lodebook: 1
site: {code: A, time_zone: Etc/UTC}
zones: [{code: I}, {code: IV, restricted: true}]
levels: [{code: L1}, {code: L2}]
person_facts: {employer: text}
fixture_kinds: [{code: vent}]
events: [{code: storm, of: vent}]
sheets: [{code: vent-look, for: vent, fields: [{code: a, type: yesno}]}]
items:
  - {code: A1, title: T, asks: person, when: "subject.level == 'L1'", record: training/a, every: P1Y, guards: [IV], confers: L1}
  - {code: A2, title: T, asks: person, when: "subject.level == 'L2'", record: training/a, every: P1Y, guards: [IV], confers: L2}
  - {code: V, title: T, asks: fixture, when: "subject.kind == 'vent'", record: inspection/vent-look, after: [storm], within: P1D}
`
	same(t, "quiet", len(mustParse(t, quiet).Warnings()), 0)
	for _, c := range []struct{ name, old, new, want string }{
		{"a level without a guard", "every: P1Y, guards: [IV], confers: L2", "every: P1Y, confers: L2", "Zone IV is restricted and no item guards it for level L2: nobody of that level is ever entitled to it."},
		{"no guard at all", "{code: I}", "{code: I}, {code: III, restricted: true}", "Zone III is restricted and no item guards it: nobody is ever entitled to it."},
		{"a guard for some", "subject.level == 'L2'", "subject.level == 'L2' && subject.facts.employer == 'a'", "Zone IV is guarded for level L2 only for some people, by more than their level: who is asked none of A1 or A2 is never entitled to it."},
		{"a zone that is not restricted", "guards: [IV], confers: L1", "guards: [I, IV], confers: L1", "Zone I is guarded by A1 and is not marked restricted."},
		{"a level that nothing confers", ", confers: L2", "", "No item confers level L2: nobody is ever held to have it."},
		{"a kind that is not declared", "'vent'", "'detector'", "Fixture kind detector, named by item V, is not declared: no fixture can be of it."},
		{"an event without an answer", "{code: storm, of: vent}", "{code: storm, of: vent}, {code: flood, of: site}", "No item comes after the event flood: recording one asks for nothing."},
		{"a sheet without a use", "record: inspection/vent-look", "record: inspection/vent-loook", "No item is answered by the sheet vent-look."},
		{"a sheet misspelt", "record: inspection/vent-look", "record: inspection/vent-loook", "Item V is answered by inspection/vent-loook, for which there is no sheet; there is a sheet vent-look."},
		{"closing all the time", "every: P1Y, guards: [IV], confers: L1", "every: P1Y, notice: P366D, guards: [IV], confers: L1", "Item A1 has a notice of P366D and asks every P1Y: it is closing all the time."},
		{"grace of a condition", "every: P1Y, guards: [IV], confers: L1}", "every: P1Y, guards: [IV], confers: L1}\n  - {code: H, title: T, asks: site, holds: true, grace: P1D}", "Item H holds or does not: its notice and grace have no effect."},
		{"hours of a closed day", "levels:", "calendar: {open: [mon], hours: {sun: \"08:00-09:00\"}}\nlevels:", "Sunday has operating hours and is not an operating day."},
	} {
		src := strings.Replace(quiet, c.old, c.new, 1)
		if c.old == "'vent'" {
			src = strings.Replace(strings.Replace(quiet, "record: inspection/vent-look, after: [storm], within: P1D", "record: check/x, each: day", 1), c.old, c.new, 1)
		}
		found := false
		warnings := mustParse(t, src).Warnings()
		for _, w := range warnings {
			found = found || w == c.want
		}
		if !found {
			t.Errorf("%s: got %q, want %q", c.name, warnings, c.want)
		}
	}
}
