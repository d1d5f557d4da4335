package program

import (
	"bytes"
	"encoding/json"
	"maps"
	"slices"
	"strings"
	"testing"

	"github.com/santhosh-tekuri/jsonschema/v6"
)

func compiledSchema(t *testing.T) *jsonschema.Schema {
	t.Helper()
	doc, err := jsonschema.UnmarshalJSON(bytes.NewReader(Schema()))
	if err != nil {
		t.Fatal(err)
	}
	c := jsonschema.NewCompiler()
	if err := c.AddResource("program.json", doc); err != nil {
		t.Fatal(err)
	}
	s, err := c.Compile("program.json")
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// value makes JSON of a tree: what a scalar means is what YAML 1.2's core schema says of it.
func value(n *node) any {
	switch n.kind {
	case mapping:
		m := map[string]any{}
		for _, e := range n.entries {
			m[e.key.text] = value(e.value)
		}
		return m
	case list:
		l := []any{}
		for _, item := range n.items {
			l = append(l, value(item))
		}
		return l
	case nothing, refused:
		return nil
	}
	switch {
	case n.style == plain && (n.text == "true" || n.text == "false"):
		return n.text == "true"
	case n.style == plain && numberPattern.MatchString(n.text):
		return json.Number(n.text)
	}
	return n.text
}

func treeOf(t *testing.T, src string) *node {
	t.Helper()
	text, faults := cleaned([]byte(src))
	if len(faults) > 0 {
		t.Fatal(faults)
	}
	root, faults := grow(text)
	if len(faults) > 0 {
		t.Fatal(faults)
	}
	return root
}

// everyKey is a program that uses every key of every object.
const everyKey = vocabulary + `
  - {code: X, title: T, help: H, group: G, asks: person, when: "subject.level == 'L1'", record: [training/x], every: P1Y, to: month-end, early: P1M, first: P0D, notice: P1D, grace: P1D, since: 2025-01-01, guards: [III], confers: L1, local: true, basis: B, owner: MRSO}
  - {code: Y, title: T, asks: fixture, when: "subject.kind == 'vent'", record: inspection/vent-yearly, after: [roof-work], within: P1D}
  - {code: Z, title: T, asks: crew, record: drill/z, within: P1Y, count: 2}
  - {code: W, title: T, asks: site, record: check/w, each: day, days: operating}
  - {code: V, title: 1, asks: post, holds: true}
  - {code: U, title: T, asks: site, cover: {level: L2, at_least: 2, duties: [duty], hours: all}}
  - {code: UP, title: T, asks: site, cover: {post: MRSO, hours: operating}}
  - {code: 010, title: T, asks: person, record: training/x, once: true}
in_force_from: 2025-01-01
calendar: {open: [mon], hours: {mon-fri: "07:30-20:00", "sat, sun": ["22:00-06:00"]}, closed: [2025-01-01]}
documents: [{code: D, title: T}]
remedies: [{severity: low, name: N, due: P90D, confirm: false}, {severity: high, due: P7D, confirm: true}]
incidents: [{code: near-miss, name: N}, {code: burn}]
reports: [{code: BODY, to: T, within: 3, days: working, kinds: [burn]}]
`

// The schema and the reader know the same objects and, in each, the same keys.
func TestSchemaKnowsTheReadersKeys(t *testing.T) {
	r := newReader(everyKey)
	r.program(treeOf(t, everyKey))
	if len(r.faults) > 0 {
		t.Fatal(r.faults)
	}
	type object struct{ Properties map[string]any }
	var s struct {
		object
		Defs map[string]object `json:"$defs"`
	}
	if err := json.Unmarshal(Schema(), &s); err != nil {
		t.Fatal(err)
	}
	s.Defs["program"] = s.object
	for name, def := range s.Defs {
		if len(def.Properties) == 0 {
			continue // a value, not an object of the file
		}
		same(t, "keys of "+name, slices.Sorted(maps.Keys(def.Properties)), sortedKeys(r.asked[name]))
		delete(r.asked, name)
	}
	if len(r.asked) > 0 {
		t.Errorf("the schema does not know %v", slices.Sorted(maps.Keys(r.asked)))
	}
}

func TestSchemaTakesPrograms(t *testing.T) {
	s := compiledSchema(t)
	for name, src := range map[string]string{"example": string(example(t)), "every key": everyKey, "least": head, "empty sections": head + "calendar:\nzones:\nitems:\nperson_facts:\n"} {
		mustParse(t, src)
		if err := s.Validate(value(treeOf(t, src))); err != nil {
			t.Errorf("%s: %v", name, err)
		}
	}
}

// What both can tell, both refuse.
func TestSchemaRefuses(t *testing.T) {
	s := compiledSchema(t)
	for _, c := range []struct{ name, old, new string }{
		{"unknown key", "group: G", "gruop: G"},
		{"unknown key of a zone", "{code: IV}", "{code: IV, shut: true}"},
		{"version", "lodebook: 1", "lodebook: 2"},
		{"no code", "{code: X,", "{cod: X,"},
		{"code", "code: MRSO}", "code: M S}"},
		{"duration", "every: P1Y", "every: 1 year"},
		{"no length", "every: P1Y", "every: P0D"},
		{"two cadences", "once: true", "once: true, every: P1Y"},
		{"once is not false", "once: true", "once: false"},
		{"to without every", "once: true", "once: true, to: month-end"},
		{"count with after", "within: P1D", "within: P1D, count: 2"},
		{"first with after", "within: P1D", "within: P1D, first: P1D"},
		{"guards with within", "count: 2", "count: 2, guards: [III]"},
		{"confers asks no person", "days: operating", "days: operating, confers: L1"},
		{"record", "record: drill/z", "record: dril/z"},
		{"day", "since: 2025-01-01", "since: 1.1.2025"},
		{"hours", "22:00-06:00", "22-6"},
		{"weekday", "open: [mon]", "open: [monday]"},
		{"kind named like a subject", "{code: magnet}", "{code: zone}"},
		{"must on a choice", "type: yesno}]", "type: choice, choices: [a], must: true}]"},
		{"no time for a remedy", "due: P7D", "dew: P7D"},
		{"a time that is none", "due: P7D", "due: a week"},
		{"a report to nobody", "to: T, within", "within"},
		{"days of a report", "days: working", "days: weekdays"},
		{"days before the incident", "within: 3", "within: -3"},
		{"choice without choices", "type: yesno}]", "type: choice}]"},
	} {
		src := strings.Replace(everyKey, c.old, c.new, 1)
		if src == everyKey {
			t.Fatalf("%s: %q does not stand in the file", c.name, c.old)
		}
		if _, err := Parse([]byte(src)); err == nil {
			t.Errorf("%s: the reader took it", c.name)
		}
		if err := s.Validate(value(treeOf(t, src))); err == nil {
			t.Errorf("%s: the schema took it", c.name)
		}
	}
}
