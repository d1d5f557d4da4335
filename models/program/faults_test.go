package program

import (
	"slices"
	"strings"
	"testing"
)

// head and vocabulary begin most of the faulty files; items stand from line 14 on.
const head = "lodebook: 1\nsite: {code: A, time_zone: Etc/UTC}\n"

const vocabulary = head + `zones: [{code: III, restricted: true}, {code: IV}]
levels: [{code: L1}, {code: L2}]
posts: [{code: MRSO}]
crews: [{code: early}]
person_facts: {employer: text, badge_day: day, home: zone}
fixture_kinds:
  - {code: vent, facts: {height: {type: number, unit: m}, swing: {type: choice, choices: [in, out]}, public: yesno}}
  - {code: magnet}
events: [{code: quench, of: magnet}, {code: roof-work, of: vent}, {code: storm, of: fixture}, {code: change, of: person}]
sheets: [{code: vent-yearly, for: vent, fields: [{code: a, type: yesno}]}]
items:
`

// refusedFile is a file and every fault that it must be refused with.
type refusedFile struct {
	name, src string
	want      []string
}

// TestFaults reads files with every kind of fault and compares the whole list: line, column, path,
// what was found and what would be accepted.
func TestFaults(t *testing.T) {
	for _, c := range slices.Concat(faultyFiles, faultyItems, faultyRemedies, faultyCover) {
		t.Run(c.name, func(t *testing.T) {
			p, err := Parse([]byte(c.src))
			if err == nil || p != nil {
				t.Fatalf("the file was taken")
			}
			if got, want := err.Error(), strings.Join(c.want, "\n"); got != want {
				t.Errorf("faults\n%s\nwant\n%s", got, want)
			}
		})
	}
}

// faultyFiles are wrong as YAML or outside their items.
var faultyFiles = []refusedFile{
	{"empty file", "", []string{
		"line 1, column 1: the file is empty; write a program that begins with lodebook: 1",
	}},
	{"blank file", `
  
`, []string{
		"line 1, column 1: the file is empty; write a program that begins with lodebook: 1",
	}},
	{"only comments", "# nothing\n", []string{
		"line 1, column 1: the file holds nothing but comments; write a program that begins with lodebook: 1",
	}},
	{"byte-order mark alone", "\ufeff", []string{
		"line 1, column 1: the file is empty; write a program that begins with lodebook: 1",
	}},
	{"utf-16", "\xff\xfel\x00o\x00", []string{
		"line 1, column 1: the file is UTF-16; save it as UTF-8",
	}},
	{"not utf-8", "lodebook: 1\nsite: {code: A, name: \xe9t\xe9, time_zone: Etc/UTC}\nzones: []  # \xff\n", []string{
		"line 2, column 23: found byte 0xE9; save the file as plain UTF-8 text",
		"line 3, column 14: found byte 0xFF; save the file as plain UTF-8 text",
	}},
	{"control character", "lodebook: 1\nsite: {code: A, name: \"a\u0000b\", time_zone: Etc/UTC}\n", []string{
		"line 2, column 25: found character U+0000; save the file as plain UTF-8 text",
	}},
	{"a text", "hello\n", []string{
		`line 1, column 1: found "hello"; write keys and values, as in {code: A}`,
	}},
	{"a list", "- a\n", []string{
		"line 1, column 1: found a list; write keys and values, as in {code: A}",
	}},
	{"tab in the indentation", "lodebook: 1\nsite:\n\tcode: A\n", []string{
		"line 3, column 1: found a tab; YAML is indented with spaces only; put spaces in its place",
	}},
	{"syntax: unclosed bracket", head + `zones: [{code: I}
levels: []
`, []string{
		`line 4, column 1: found "levels"; this is not YAML: ',' or ']' must be specified; write YAML 1.2`,
	}},
	{"syntax: unclosed quote", `lodebook: 1
site: {code: "A, time_zone: Etc/UTC}
`, []string{
		`line 2, column 14: found "\"A, time_zone: Etc/UTC}"; this is not YAML: could not find end character of double-quoted text; write YAML 1.2`,
	}},
	{"syntax: reserved character", head + `zones:
  - {code: @I}
`, []string{
		`line 4, column 12: found "@"; this is not YAML: '@' is a reserved character; write YAML 1.2`,
	}},
	{"two documents", head + `---
lodebook: 1
site: {code: A, time_zone: Etc/UTC}
`, []string{
		"line 3, column 1: found another document; a file holds one document, the program of one site; give each site a file of its own",
	}},
	{"anchor, alias, merge key, tag", head + `zones:
  - &z {code: I}
  - *z
  - {<<: *z, code: !!str III}
`, []string{
		"line 4, column 5: found an anchor; a program does without it; write the value out; put a text that begins with & in quotes",
		"line 5, column 5: found an alias; a program does without it; write the value out; put a text that begins with * in quotes",
		"line 6, column 6: found a merge key; a program does without it; write the keys out",
		"line 6, column 10: found an alias; a program does without it; write the value out; put a text that begins with * in quotes",
		"line 6, column 20: found a tag; a program does without it; leave it out; put a text that begins with ! in quotes",
	}},
	{"explicit key", `? lodebook
: 1
`, []string{
		"line 1, column 1: found an explicit key; a program does without it; write key: value",
	}},
	{"directive", `%TAG ! x
---
lodebook: 1
`, []string{
		"line 1, column 1: found a directive; a program does without it; leave it out",
	}},
	{"duplicate keys", `lodebook: 1
lodebook: 1
site: {code: A, code: B, time_zone: Etc/UTC}
`, []string{
		`line 2, column 1: lodebook: found "lodebook"; the key stands on line 1 already; keep one of the two`,
		`line 3, column 17: site.code: found "code"; the key stands on line 3 already; keep one of the two`,
	}},
	{"dash with nothing behind it", head + "crews:\n- {code: a}\n-\nlevels: []\n", []string{
		"line 6, column 1: found a mapping; the dash before it has nothing behind it; write an entry behind the dash, or take it away",
	}},
	{"colon without quotes", `lodebook: 1
site: {code: A name: B, time_zone: Etc/UTC}
`, []string{
		`line 2, column 14: found "A name: B"; a colon in a text without quotes; put the text in quotes, or a comma between two keys`,
	}},
	{"key without a value behind a comma", head + "zones: [{code: I, restricted}]\n", []string{
		`line 3, column 16: zones[0].code: found "I, restricted"; write a code of letters, digits, - _ and . that begins with a letter or a digit, at most 64 long`,
		`line 3, column 19: zones[0].code: found "restricted"; a key without a value; write restricted: and its value, or put the text before it in quotes`,
	}},
	{"unknown keys", head + `zone: []
calendar: {opne: [mon]}
wholly_unknown: 1
`, []string{
		`line 3, column 1: zone: found "zone"; no such key here; did you mean zones? write calendar, crews, documents, events, fixture_kinds, in_force_from, incidents, items, levels, lodebook, person_facts, posts, remedies, reports, sheets, site or zones`,
		`line 4, column 12: calendar.opne: found "opne"; no such key here; did you mean open? write closed, hours or open`,
		`line 5, column 1: wholly_unknown: found "wholly_unknown"; no such key here; write calendar, crews, documents, events, fixture_kinds, in_force_from, incidents, items, levels, lodebook, person_facts, posts, remedies, reports, sheets, site or zones`,
	}},
	{"missing keys", "site: {}\n", []string{
		"line 1, column 1: lodebook: not given; write lodebook: 1",
		"line 1, column 7: site.code: not given; write a code of letters, digits, - _ and . that begins with a letter or a digit, at most 64 long",
		"line 1, column 7: site.time_zone: not given; write a name of the IANA time zone database, such as Atlantic/Azores or Etc/UTC",
	}},
	{"version", `lodebook: 2
site: {code: A, time_zone: Etc/UTC}
`, []string{
		`line 1, column 11: lodebook: found "2"; this Lodebook reads program files of version 1; write lodebook: 1`,
	}},
	{"null where a value is needed", `lodebook:
site: {code: null, time_zone: ~, name: ""}
`, []string{
		"line 1, column 10: lodebook: found nothing; this Lodebook reads program files of version 1; write lodebook: 1",
		"line 2, column 14: site.code: found nothing; write a code of letters, digits, - _ and . that begins with a letter or a digit, at most 64 long",
		"line 2, column 31: site.time_zone: found nothing; write a name of the IANA time zone database, such as Atlantic/Azores or Etc/UTC",
		`line 2, column 40: site.name: found ""; the text is blank; write a text`,
	}},
	{"time zone", `lodebook: 1
site: {code: A, time_zone: Local}
`, []string{
		`line 2, column 28: site.time_zone: found "Local"; no time zone has that name; write a name of the IANA time zone database, such as Atlantic/Azores or Etc/UTC`,
	}},
	{"time zone, empty", `lodebook: 1
site: {code: A, time_zone: ""}
`, []string{
		`line 2, column 28: site.time_zone: found ""; no time zone has that name; write a name of the IANA time zone database, such as Atlantic/Azores or Etc/UTC`,
	}},
	{"time zone, unknown", `lodebook: 1
site: {code: A, time_zone: Europe/Lisboa}
`, []string{
		`line 2, column 28: site.time_zone: found "Europe/Lisboa"; no time zone has that name; write a name of the IANA time zone database, such as Atlantic/Azores or Etc/UTC`,
	}},
	{"code pattern", `lodebook: 1
site: {code: "A B", time_zone: Etc/UTC}
zones: [{code: -I}, {code: [x]}, {code: Ü}]
`, []string{
		`line 2, column 14: site.code: found "A B"; write a code of letters, digits, - _ and . that begins with a letter or a digit, at most 64 long`,
		`line 3, column 16: zones[0].code: found "-I"; write a code of letters, digits, - _ and . that begins with a letter or a digit, at most 64 long`,
		"line 3, column 28: zones[1].code: found a list; write a code of letters, digits, - _ and . that begins with a letter or a digit, at most 64 long",
		`line 3, column 41: zones[2].code: found "Ü"; write a code of letters, digits, - _ and . that begins with a letter or a digit, at most 64 long`,
	}},
	{"in force from", `in_force_from: 2025-02-29
lodebook: 1
site: {code: A, time_zone: Etc/UTC}
`, []string{
		`line 1, column 16: in_force_from: found "2025-02-29"; write a day as YYYY-MM-DD, such as 2025-01-31`,
	}},
	{"calendar", head + `calendar:
  open: [mon, Tuesday, mon]
  closed: [2026-12-25, 25.12.2026, 2026-12-25]
  hours: {mon-fry: "07:30-20:00", tue: "7:30-20", wed: ["08:00-12:00", "12:00-12:00"]}
`, []string{
		`line 4, column 15: calendar.open[1]: found "Tuesday"; write mon, tue, wed, thu, fri, sat or sun`,
		`line 4, column 24: calendar.open[2]: found "mon"; stands in the list twice; keep one of the two`,
		`line 5, column 24: calendar.closed[1]: found "25.12.2026"; write a day as YYYY-MM-DD, such as 2025-01-31`,
		`line 5, column 36: calendar.closed[2]: found "2026-12-25"; stands in the list twice; keep one of the two`,
		`line 6, column 11: calendar.hours.mon-fry: found "mon-fry"; write mon, mon-fri or "sat, sun" with the days mon, tue, wed, thu, fri, sat, sun`,
		`line 6, column 40: calendar.hours.tue: found "7:30-20"; write hours in quotes such as "07:30-20:00"; "22:00-06:00" crosses midnight, "00:00-24:00" is the whole day`,
		`line 6, column 72: calendar.hours.wed[1]: found "12:00-12:00"; write hours in quotes such as "07:30-20:00"; "22:00-06:00" crosses midnight, "00:00-24:00" is the whole day`,
	}},
	{"hours overlap", head + `calendar:
  hours: {sun: "22:00-06:00", mon: "05:00-20:00"}
`, []string{
		"line 4, column 10: calendar.hours: found a mapping; the hours sun 22:00-06:00 and mon 05:00-20:00 overlap; write each hour of the week once",
	}},
	{"hours not a mapping", head + `calendar: {hours: "07:30-20:00", open: mon}
`, []string{
		`line 3, column 19: calendar.hours: found "07:30-20:00"; write hours such as mon-fri: "07:30-20:00"`,
		`line 3, column 40: calendar.open: found "mon"; write a list such as [mon, tue]`,
	}},
	{"codes taken", head + `zones: [{code: I}, {code: I}]
crews:
  - {code: a}
  - {code: b}
  - {code: a}
`, []string{
		`line 3, column 27: zones[1].code: found "I"; the code is taken on line 3; give each its own code`,
		`line 7, column 12: crews[2].code: found "a"; the code is taken on line 5; give each its own code`,
	}},
	{"true or false", head + `zones: [{code: I, restricted: yes, devices: "true"}]
`, []string{
		`line 3, column 31: zones[0].restricted: found "yes"; write true or false, without quotes`,
		`line 3, column 45: zones[0].devices: found "true"; write true or false, without quotes`,
	}},
	{"facts", head + "person_facts: {badge-no: text, level: text, in: text, x: txt, y: choice, z: {type: text, unit: m}, X: text, pregnant: yesno, v: {unit: m}, w: [text]}\n", []string{
		`line 3, column 16: person_facts.badge-no: found "badge-no"; write letters, digits and _, beginning with a letter`,
		`line 3, column 32: person_facts.level: found "level"; a column of the tables has that name; give the fact another code`,
		`line 3, column 45: person_facts.in: found "in"; a word of the selector language; give the fact another code`,
		`line 3, column 58: person_facts.x: found "txt"; did you mean text? write text, number, yesno, day, choice, person or zone`,
		`line 3, column 66: person_facts.y: found "choice"; a choice needs its choices; write {type: choice, choices: [a, b]}`,
		`line 3, column 90: person_facts.z.unit: found "unit"; means something only for the type number; leave it out`,
		`line 3, column 100: person_facts.X: found "X"; the code is taken on line 3; give each its own code`,
		`line 3, column 109: person_facts.pregnant: found "pregnant"; a book keeps nothing on pregnancy; leave it out; a screening keeps its outcome alone`,
		"line 3, column 129: person_facts.v.type: not given; write one of text, number, yesno, day, choice, person or zone",
		"line 3, column 143: person_facts.w: found a list; write text, number, yesno, day, choice, person or zone",
	}},
	{"fact of two types", head + `fixture_kinds:
  - {code: vent, facts: {height: {type: number, unit: m}}}
  - {code: door, facts: {height: {type: number, unit: cm}}}
  - {code: fan, facts: {height: text}}
`, []string{
		`line 5, column 26: fixture_kinds[1].facts.height: found "number in cm"; kind vent declares the fact as "number in m"; give it one type and unit, or two codes`,
		`line 6, column 25: fixture_kinds[2].facts.height: found "text"; kind vent declares the fact as "number in m"; give it one type and unit, or two codes`,
	}},
	{"kind named like a subject", head + "fixture_kinds: [{code: person}, {code: vent, facts: [a]}]\n", []string{
		`line 3, column 24: fixture_kinds[0].code: found "person"; the word names a kind of subject; give the fixture kind another code`,
		"line 3, column 53: fixture_kinds[1].facts: found a list; write facts and their types, as in {employer: text}",
	}},
	{"events", head + `fixture_kinds: [{code: vent}]
events: [{code: a, of: vnet}, {code: a, of: vent}, {code: b}]
`, []string{
		`line 4, column 24: events[0].of: found "vnet"; did you mean vent? write person, fixture, zone, crew, post, document, site or vent`,
		`line 4, column 38: events[1].code: found "a"; the code is taken on line 4; give each its own code`,
		"line 4, column 52: events[2].of: not given; write what it happens to: person, fixture, zone, crew, post, document, site or vent",
	}},
	{"sheets", head + `fixture_kinds: [{code: vent}]
sheets:
  - code: s
    for: vnet
    recorded_by: [facilities, boss]
    fields:
      - {code: a, type: nummer}
      - {code: a, type: number, must: true, choices: [x]}
      - {code: b, type: number, min: 4, max: 3, warn_below: "5"}
      - {code: c, type: choice}
      - {code: d, type: choice, choices: [x, y], fail_on: [z], min: 1}
      - {code: e, type: number, min: 3, warn_below: 3, max: 9, warn_above: 0x1F}
      - {code: f, label: Pregnancy asked, type: yesno}
  - code: t
    recorded_by: []
    fields: []
  - {code: u}
`, []string{
		`line 6, column 10: sheets[0].for: found "vnet"; there is no such fixture kind; write vent`,
		`line 7, column 31: sheets[0].recorded_by[1]: found "boss"; there is no such role, crew or level; write facilities or safety-officer`,
		`line 9, column 25: sheets[0].fields[0].type: found "nummer"; did you mean number? write number, yesno, choice, text or day`,
		`line 10, column 16: sheets[0].fields[1].code: found "a"; the code is taken on line 9; give each its own code`,
		`line 10, column 33: sheets[0].fields[1].must: found "must"; means something only for the type yesno; leave it out`,
		`line 10, column 45: sheets[0].fields[1].choices: found "choices"; means something only for the type choice; leave it out`,
		`line 11, column 46: sheets[0].fields[2].max: found "3"; min is 4: no number could pass; write a max that is not below min`,
		`line 11, column 61: sheets[0].fields[2].warn_below: found "5"; write a number such as 3 or 0.5, without quotes or a unit`,
		"line 12, column 9: sheets[0].fields[3].choices: not given; write a list such as [inward, outward]",
		`line 13, column 60: sheets[0].fields[4].fail_on[0]: found "z"; there is no such choice; did you mean x? write x or y`,
		`line 13, column 64: sheets[0].fields[4].min: found "min"; means something only for the type number; leave it out`,
		`line 14, column 53: sheets[0].fields[5].warn_below: found "3"; min is 3: it never remarks: below min the sheet fails; write a warn_below above min`,
		`line 14, column 76: sheets[0].fields[5].warn_above: found "0x1F"; write a number such as 3 or 0.5, without quotes or a unit`,
		`line 15, column 26: sheets[0].fields[6].label: found "Pregnancy asked"; a book keeps nothing on pregnancy; leave it out; a screening keeps its outcome alone`,
		"line 17, column 18: sheets[1].recorded_by: found a list; nobody could record it; write facilities or safety-officer",
		"line 18, column 13: sheets[1].fields: found a list; a sheet without fields records nothing; write a list such as [{code: clear, label: Outlet clear, type: yesno, must: true}]",
		"line 19, column 5: sheets[2].fields: not given; write a list such as [{code: clear, label: Outlet clear, type: yesno, must: true}]",
	}},
}
