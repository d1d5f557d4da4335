package program

import (
	"errors"
	"fmt"
	"slices"
	"strings"
	"testing"
)

// declared is a program with something of every kind that a selector can name.
func declared(t testing.TB) *Program {
	return mustParse(t, `lodebook: 1
site: {code: A, time_zone: Etc/UTC}
zones: [{code: III}, {code: IV}]
levels: [{code: L1}, {code: L2}]
posts: [{code: MRSO}, {code: MRMD}]
crews: [{code: early}, {code: late}]
documents: [{code: D1}]
person_facts: {employer: text, badge_day: day, home: zone, pads: yesno, boss: person}
fixture_kinds:
  - {code: vent, facts: {height: {type: number, unit: m}, swing: {type: choice, choices: [in, out]}}}
  - {code: door, facts: {swing: {type: choice, choices: [out, slide]}}}
`)
}

func person(facts map[string]any) Subject {
	return Subject{Asks: AsksPerson, Code: "P1", Name: "Ada", Level: "L2", Held: "L1", Crew: "late", Posts: []string{"MRSO"}, Zones: []string{"IV"}, Facts: facts}
}

// Whether an expression matches: its value by the CEL language definition, with what is absent an
// error that && and || may absorb from either side.
func TestMatch(t *testing.T) {
	p := declared(t)
	vent := Subject{Asks: AsksFixture, Code: "V1", Kind: "vent", Zone: "IV", Facts: map[string]any{"height": 4.0, "swing": "in"}}
	bare := Subject{Asks: AsksFixture, Code: "X1", Kind: "door"}
	nobody := Subject{Asks: AsksPerson, Code: "P2"}
	ada := person(map[string]any{"employer": "Acme", "badge_day": "2025-03-01", "pads": true})
	for _, c := range []struct {
		expr string
		sub  Subject
		want string // true, false, or the fields that are missing
	}{
		{"subject.level == 'L2'", ada, "true"},
		{"subject.level != 'L2'", ada, "false"},
		{"subject.held == 'L1' && subject.crew in ['early', 'late']", ada, "true"},
		{"'MRSO' in subject.posts && !('III' in subject.zones)", ada, "true"},
		{"subject.posts.exists(p, p == 'MRMD')", ada, "false"},
		{"subject.zones.all(z, z == 'IV')", ada, "true"},
		{"size(subject.posts) > 0", nobody, "false"},
		{"subject.facts.badge_day < '2025-03-02'", ada, "true"},
		{"subject.facts.pads", ada, "true"},
		{"subject.facts.pads ? subject.code == 'P1' : false", ada, "true"},
		{"subject.facts.employer.startsWith('Ac')", ada, "true"},
		{"subject.name.contains('da') || subject.name.endsWith('x')", ada, "true"},
		{"subject.facts.height < 4", vent, "false"},
		{"subject.facts.height <= 4", vent, "true"},
		{"subject.facts.height == 4", vent, "true"},
		{"subject.facts.height + 1 == 5", vent, "true"},
		{"subject.facts.height in [3, 4]", vent, "true"},
		{"subject.facts.height > 3.5 && subject.facts.height * 2 != 9", vent, "true"},
		{"subject.kind == 'vent' && subject.zone == 'IV'", vent, "true"},
		{"subject.facts.swing == 'slide'", vent, "false"},
		// Absent, and the answer hangs on it.
		{"subject.level == 'L2'", nobody, "level"},
		{"subject.crew == 'early' || subject.held == 'L1'", nobody, "crew held"},
		{"subject.facts.employer == 'Acme'", nobody, "facts.employer"},
		{"subject.zone == 'IV'", bare, "zone"},
		{"subject.kind == 'door' && subject.facts.swing == 'out'", bare, "facts.swing"},
		{"!(subject.facts.swing == 'out')", bare, "facts.swing"},
		// Absent, and it does not.
		{"subject.facts.height > 3 && subject.kind == 'vent'", bare, "false"},
		{"subject.kind == 'vent' && subject.facts.height > 3", bare, "false"},
		{"subject.facts.height > 3 || subject.kind == 'door'", bare, "true"},
		{"subject.level == 'L1' || true", nobody, "true"},
		{"has(subject.level)", nobody, "false"},
		{"has(subject.level) && subject.level == 'L1'", nobody, "false"},
		{"has(subject.facts.height) && subject.facts.height > 3", bare, "false"},
		{"has(subject.facts.height)", vent, "true"},
		{"!has(subject.zone)", bare, "true"},
		{"has(subject.posts)", nobody, "true"},
	} {
		sel, err := CompileSelector(p, c.sub.Asks, c.expr)
		if err != nil {
			t.Errorf("%s: %v", c.expr, err)
			continue
		}
		if got := outcome(sel.Match(c.sub)); got != c.want {
			t.Errorf("%s of %s: got %s, want %s", c.expr, c.sub.Code, got, c.want)
		}
	}
}

func outcome(ok bool, err error) string {
	var missing *MissingFact
	if errors.As(err, &missing) {
		return strings.Join(missing.Facts, " ")
	}
	if err != nil {
		return "error: " + err.Error()
	}
	return fmt.Sprint(ok)
}

func TestMatchOtherSubjects(t *testing.T) {
	p := declared(t)
	for _, c := range []struct {
		asks Asks
		expr string
		sub  Subject
		want string
	}{
		{AsksPost, "size(subject.holders) == 1 && 'P1' in subject.holders", Subject{Code: "MRSO", Holders: []string{"P1"}}, "true"},
		{AsksPost, "subject.code == 'MRMD'", Subject{Code: "MRSO"}, "false"},
		{AsksCrew, "subject.code in ['early']", Subject{Code: "early"}, "true"},
		{AsksZone, "subject.code == 'IV'", Subject{Code: "IV"}, "true"},
		{AsksDocument, "subject.code != 'D1'", Subject{Code: "D1"}, "false"},
		{AsksSite, "subject.code == 'A'", Subject{Code: "A"}, "true"},
	} {
		sel, err := CompileSelector(p, c.asks, c.expr)
		if err != nil {
			t.Errorf("%s: %v", c.expr, err)
			continue
		}
		if got := outcome(sel.Match(c.sub)); got != c.want {
			t.Errorf("%s: got %s, want %s", c.expr, got, c.want)
		}
	}
}

// A value on record that is not of the declared type is the program's fault, not a missing fact.
func TestMatchWrongType(t *testing.T) {
	sel, err := CompileSelector(declared(t), AsksFixture, "subject.facts.height > 3")
	if err != nil {
		t.Fatal(err)
	}
	_, err = sel.Match(Subject{Asks: AsksFixture, Code: "V1", Kind: "vent", Facts: map[string]any{"height": "high"}})
	var missing *MissingFact
	if err == nil || errors.As(err, &missing) || !strings.Contains(err.Error(), "facts.height of fixture V1 is high") {
		t.Errorf("got %v, want a sentence about facts.height", err)
	}
}

func TestMatchCostLimit(t *testing.T) {
	sel, err := CompileSelector(declared(t), AsksPerson, "subject.posts.all(a, subject.posts.all(b, a != b + 'x'))")
	if err != nil {
		t.Fatal(err)
	}
	sub := person(nil)
	if got := outcome(sel.Match(sub)); got != "true" {
		t.Fatalf("two posts: %s", got)
	}
	sub.Posts = slices.Repeat([]string{"MRSO"}, 2000)
	if got := outcome(sel.Match(sub)); !strings.Contains(got, "cost limit") {
		t.Errorf("four million steps: got %s, want the cost limit", got)
	}
}

func TestReads(t *testing.T) {
	p := declared(t)
	for expr, want := range map[string][]string{
		"subject.level == 'L2' && subject.facts.employer == 'a' || has(subject.facts.pads)": {"facts.employer", "facts.pads", "level"},
		"subject.held == 'L1' || subject.held == 'L2'":                                      {"held"},
		"subject.posts.exists(p, p == 'MRSO' && subject.crew == 'late')":                    {"crew", "posts"},
		"true": {},
	} {
		sel, err := CompileSelector(p, AsksPerson, expr)
		if err != nil {
			t.Errorf("%s: %v", expr, err)
			continue
		}
		same(t, expr, sel.Reads(), want)
	}
}

func TestKinds(t *testing.T) {
	p := declared(t)
	for expr, want := range map[string][]string{
		"subject.kind == 'vent'":                                  {"vent"},
		"'vent' == subject.kind && subject.facts.height > 3":      {"vent"},
		"subject.kind in ['vent', 'door']":                        {"vent", "door"},
		"subject.kind == 'vent' || subject.kind == 'door'":        {"vent", "door"},
		"subject.kind in ['vent', 'door'] && subject.kind != 'x'": nil, // refused below
		"subject.kind == 'vent' || subject.zone == 'IV'":          nil,
		"!(subject.kind == 'vent')":                               nil,
		"subject.zone == 'IV'":                                    nil,
	} {
		sel, err := CompileSelector(p, AsksFixture, expr)
		if strings.Contains(expr, "'x'") {
			if err != nil {
				t.Errorf("%s: %v", expr, err)
			}
			same(t, expr, sel.undeclared, []string{"x"})
			continue
		}
		if err != nil {
			t.Errorf("%s: %v", expr, err)
			continue
		}
		same(t, expr, sel.Kinds(), want)
	}
}

func TestFaultyExpressions(t *testing.T) {
	p := declared(t)
	for _, c := range []struct {
		asks Asks
		expr string
		want string
	}{
		{AsksPerson, "subject.levl == 'L2'", `line 1, column 9: found "subject.levl"; a person has no field levl; did you mean level? write code, crew, held, level, name, posts, zones or facts`},
		{AsksFixture, "subject.facts.swnig == 'in'", `line 1, column 15: found "subject.facts.swnig"; no fact swnig is declared for a fixture; did you mean swing? write height or swing`},
		{AsksCrew, "subject.facts.x == 1", `line 1, column 15: found "subject.facts.x"; no fact x is declared for a crew; none is declared`},
		{AsksFixture, "has(subject.facts.heigth)", `line 1, column 19: found "subject.facts.heigth"; no fact heigth is declared for a fixture; did you mean height? write height or swing`},
		{AsksFixture, "subject.facts.height > 'high'", `line 1, column 22: found "subject.facts.height > 'high'"; a number and a text cannot stand on the two sides of >; compare values of one type; a text stands in single quotes`},
		{AsksFixture, "subject.facts.height == '4'", `line 1, column 22: found "subject.facts.height == '4'"; a number and a text cannot stand on the two sides of ==; compare values of one type; a text stands in single quotes`},
		{AsksPerson, "subject.posts == 'MRSO'", `line 1, column 15: found "subject.posts == 'MRSO'"; a list of texts and a text cannot stand on the two sides of ==; compare values of one type; a text stands in single quotes`},
		{AsksPerson, "subject.level", `line 1, column 1: found "subject.level"; the expression gives a text, not true or false; write a comparison such as subject.level == 'L2'`},
		{AsksPerson, "subject.level ==", `line 1, column 17: found "subject.level =="; the expression ends too early; write a CEL expression such as subject.code == 'A'`},
		{AsksPerson, "subject.level == 'L2", `line 1, column 18: found "subject.level == 'L2"; a quote or character that nothing completes; write a CEL expression such as subject.code == 'A'`},
		{AsksPerson, "level == 'L2'", `line 1, column 1: found "level"; no such name; write subject and one of its fields: code, crew, held, level, name, posts, zones or facts; a text stands in single quotes`},
		{AsksPerson, "subject.level == L2", `line 1, column 18: found "L2"; no such name; write subject and one of its fields: code, crew, held, level, name, posts, zones or facts; a text stands in single quotes`},
		{AsksPerson, "subject == subject", "line 1, column 1: found subject; the subject itself cannot be compared; name one of its fields: code, crew, held, level, name, posts, zones or facts\n" +
			"line 1, column 12: found subject; the subject itself cannot be compared; name one of its fields: code, crew, held, level, name, posts, zones or facts"},
		{AsksPost, "subject.facts == subject.holders", `line 1, column 8: found subject.facts; the facts are not compared all at once; name one of them; none is declared for a post`},
		{AsksFixture, "subject.kind == 'vnet'", `line 1, column 17: found "vnet"; subject.kind is never that; did you mean vent? write vent or door`},
		{AsksFixture, "subject.kind in ['vent', 'dor'] && 'dor' != subject.kind", `line 1, column 26: found "dor"; subject.kind is never that; did you mean door? write vent or door` + "\n" + `line 1, column 36: found "dor"; subject.kind is never that; did you mean door? write vent or door`},
		{AsksPerson, "subject.crew == 'night' || subject.level in ['L3'] || subject.held == 'X'", `line 1, column 17: found "night"; subject.crew is never that; write early or late` + "\n" + `line 1, column 46: found "L3"; subject.level is never that; did you mean L1? write L1 or L2` + "\n" + `line 1, column 71: found "X"; subject.held is never that; write L1 or L2`},
		{AsksPerson, "'MRDO' in subject.posts || subject.posts.exists(p, p == 'MRDO') || subject.facts.home == 'V'", `line 1, column 1: found "MRDO"; subject.posts is never that; did you mean MRSO? write MRSO or MRMD` + "\n" + `line 1, column 57: found "MRDO"; subject.posts is never that; did you mean MRSO? write MRSO or MRMD` + "\n" + `line 1, column 90: found "V"; subject.facts.home is never that; did you mean IV? write III or IV`},
		{AsksFixture, "subject.facts.swing == 'inn'", `line 1, column 24: found "inn"; subject.facts.swing is never that; did you mean in? write in, out or slide`},
		{AsksPerson, "subject.facts.badge_day < '1/3/2025'", `line 1, column 27: found "1/3/2025"; compare subject.facts.badge_day with a day such as '2025-01-31'`},
		{AsksPost, "subject.code == 'MRDO'", `line 1, column 17: found "MRDO"; subject.code is never that; did you mean MRSO? write MRSO or MRMD`},
		{AsksPerson, "dyn(subject).levl == 'L2'", `line 1, column 4: found "dyn"; selectors have no such function; use comparisons, in, has, exists, all, size, startsWith, endsWith and contains`},
		{AsksPerson, "timestamp(subject.facts.badge_day) < now", "line 1, column 10: found \"timestamp\"; selectors have no such function; use comparisons, in, has, exists, all, size, startsWith, endsWith and contains\n" +
			`line 1, column 38: found "now"; no such name; write subject and one of its fields: code, crew, held, level, name, posts, zones or facts; a text stands in single quotes`},
		{AsksPerson, "subject.posts[0] == 'MRSO'", `line 1, column 14: found "[ ]"; selectors have no such function; use comparisons, in, has, exists, all, size, startsWith, endsWith and contains`},
		{AsksPerson, "subject.posts.map(p, p + 'x') == ['a']", `line 1, column 18: found "map"; selectors have no such function; use comparisons, in, has, exists, all, size, startsWith, endsWith and contains`},
		{AsksPerson, "subject.name.matches('a+')", `line 1, column 21: found "matches"; selectors have no such function; use comparisons, in, has, exists, all, size, startsWith, endsWith and contains`},
		{AsksPerson, "{'a': 1} == {'b': 2}", "line 1, column 1: found {…}; a selector makes no values of its own; compare with a text, a number or a list\nline 1, column 13: found {…}; a selector makes no values of its own; compare with a text, a number or a list"},
		{AsksPerson, "subject.posts.exists(subject, subject == 'MRSO')", `line 1, column 21: found "subject"; the name stands for something else already; give the variable a name of its own`},
		{AsksPerson, "size(subject.code, 3) > 0", `line 1, column 5: found "size(subject.code, 3) > 0"; size does not take a text and a number; compare values of one type; a text stands in single quotes`},
		{AsksPerson, "true ||\n  subject.levl == 'x'\n", "line 2, column 11: found \"subject.levl\"; a person has no field levl; did you mean level? write code, crew, held, level, name, posts, zones or facts"},
		{AsksPerson, strings.Repeat("(", 60) + "true" + strings.Repeat(")", 60), ""},
		{AsksPerson, "true" + strings.Repeat(" || true", 300), ""},
	} {
		sel, err := CompileSelector(p, c.asks, c.expr)
		if err == nil || sel != nil {
			t.Errorf("%s was taken", c.expr)
			continue
		}
		if got := err.Error(); got != c.want && c.want != "" {
			t.Errorf("%s:\n%s\nwant\n%s", c.expr, got, c.want)
		}
	}
}

func BenchmarkMatch(b *testing.B) {
	sel, err := CompileSelector(declared(b), AsksFixture, "subject.kind == 'vent' && subject.facts.height > 3")
	if err != nil {
		b.Fatal(err)
	}
	vent := Subject{Asks: AsksFixture, Code: "V1", Kind: "vent", Facts: map[string]any{"height": 4.0}}
	for b.Loop() {
		if ok, err := sel.Match(vent); !ok || err != nil {
			b.Fatal(ok, err)
		}
	}
}
