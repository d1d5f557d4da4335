package program

import (
	"fmt"
	"regexp"
	"slices"
	"strings"
)

// listed reads a list of {code, name}.
func listed[T any](root object, key, name string, build func(code, name string) T) []T {
	var out []T
	taken := map[string]int{}
	root.objects(key, name, "write a list such as [{code: A, name: Name of A}]", func(o object) {
		code := o.ownCode()
		out = append(out, build(code, o.named("name", code)))
		root.r.register(o.get("code"), o.at("code"), code, taken)
	})
	return out
}

func (r *reader) zones(root object) {
	taken := map[string]int{}
	root.objects("zones", "zone", "write a list such as [{code: I}, {code: IV, restricted: true}]", func(o object) {
		z := Zone{Code: o.ownCode(), Restricted: o.yesNo("restricted", false), Devices: o.yesNo("devices", true)}
		z.Name = o.named("name", z.Code)
		if n := o.get("escort"); n != nil {
			z.Escort = r.one(n, o.at("escort"), "a level", r.p.levelCodes())
		}
		r.register(o.get("code"), o.at("code"), z.Code, taken)
		r.p.Zones = append(r.p.Zones, z)
	})
}

func (r *reader) levels(root object) {
	r.p.Levels = listed(root, "levels", "level", func(code, name string) Level { return Level{Code: code, Name: name} })
	for i := range r.p.Levels {
		r.p.Levels[i].Rank = i + 1
	}
}

func (r *reader) fixtureKinds(root object) {
	taken := map[string]int{}
	root.objects("fixture_kinds", "fixture_kind", "write a list such as [{code: door, name: Door}]", func(o object) {
		k := FixtureKind{Code: o.ownCode()}
		k.Name = o.named("name", k.Code)
		r.register(o.get("code"), o.at("code"), k.Code, taken)
		if slices.Contains(AllAsks, Asks(k.Code)) {
			r.wrong(o.get("code"), o.at("code"), "the word names a kind of subject", "give the fixture kind another code")
		}
		k.Facts = r.facts(o, "facts", AsksFixture)
		for _, f := range k.Facts {
			if _, known := r.kindOf[f.Code]; !known {
				r.kindOf[f.Code] = kindFact{k.Code, f}
			}
		}
		r.p.FixtureKinds = append(r.p.FixtureKinds, k)
	})
}

// columns are the headers of the tables of people and fixtures, and what the book itself puts on
// record; a fact of that name could not be told from them.
var columns = map[Asks][]string{
	AsksPerson:  {"code", "name", "email", "level", "held", "crew", "zone", "kind", "badge", "joined", "left", "from"},
	AsksFixture: {"code", "kind", "name", "level", "crew", "zone", "since", "until", "from"},
}

// factPattern is that of an identifier of the selector language; celWords are its own words.
var (
	factPattern = regexp.MustCompile(`^[A-Za-z_][A-Za-z0-9_]{0,63}$`)
	celWords    = []string{
		"as", "break", "const", "continue", "else", "false", "for", "function", "if", "import", "in",
		"let", "loop", "namespace", "null", "package", "return", "true", "var", "void", "while",
	}
)

// facts reads {employer: text, outlet_height_m: {type: number, unit: m}}.
func (r *reader) facts(parent object, key string, of Asks) []Fact {
	n := parent.get(key)
	if n == nil || n.kind == nothing {
		return nil
	}
	path := parent.at(key)
	if n.kind != mapping {
		r.wrong(n, path, "not a mapping", "write facts and their types, as in {employer: text}")
		return nil
	}
	var facts []Fact
	taken := map[string]int{}
	r.gather(n, path, func(e entry) {
		f := r.fact(e, join(path, e.key.text), of)
		// Table headers are matched without regard to case.
		r.register(e.key, join(path, e.key.text), strings.ToLower(f.Code), taken)
		r.sameEverywhere(e.key, join(path, e.key.text), f, of)
		facts = append(facts, f)
	})
	return facts
}

func (r *reader) fact(e entry, path string, of Asks) Fact {
	f := Fact{Code: e.key.text, Label: spoken(e.key.text)}
	switch {
	case !factPattern.MatchString(f.Code):
		r.fault(e.key, path, shown(f.Code), "not a code that selectors can read", "write letters, digits and _, beginning with a letter")
	case slices.Contains(celWords, f.Code):
		r.fault(e.key, path, shown(f.Code), "a word of the selector language", "give the fact another code")
	case slices.Contains(columns[of], strings.ToLower(f.Code)):
		r.fault(e.key, path, shown(f.Code), "a column of the tables has that name", "give the fact another code")
	}
	r.notOfPregnancy(e.key, path, f.Code)
	if e.value.kind != mapping {
		f.Type = FactType(r.word(e.value, path, factTypes))
		if f.Type == FactChoice {
			r.wrong(e.value, path, "a choice needs its choices", "write {type: choice, choices: [a, b]}")
		}
		return f
	}
	o, _ := r.object(e.value, path, "fact")
	o.need("type", "write one of "+anyOf(factTypes))
	f.Type = FactType(o.word("type", factTypes))
	f.Label = o.named("label", f.Label)
	r.notOfPregnancy(o.get("label"), o.at("label"), f.Label)
	onlyFor(o, "unit", f.Type, FactNumber)
	f.Unit = o.text("unit")
	f.Choices = choices(o, f.Type, FactChoice)
	o.close()
	return f
}

var factTypes = []string{string(FactText), string(FactNumber), string(FactYesNo), string(FactDay), string(FactChoice), string(FactPerson), string(FactZone)}

// spoken makes a label of a code: outlet_height becomes Outlet height.
func spoken(code string) string {
	s := strings.TrimSpace(strings.ReplaceAll(code, "_", " "))
	if s == "" {
		return code
	}
	return strings.ToUpper(s[:1]) + s[1:]
}

// spokenCode makes a title of a code: roof-work becomes Roof work.
func spokenCode(code string) string { return spoken(strings.ReplaceAll(code, "-", " ")) }

// choices reads the choices of a choice, which must have some.
func choices[T ~string](o object, have, want T) []string {
	const accepted = "write a list such as [inward, outward]"
	n := o.get("choices")
	onlyFor(o, "choices", have, want)
	if n == nil {
		if have == want {
			o.need("choices", accepted)
		}
		return nil
	}
	if n.kind == list && len(n.items) == 0 {
		o.r.wrong(n, o.at("choices"), "there is nothing to choose from", accepted)
	}
	return o.distinct("choices", accepted, o.r.line)
}

// notOfPregnancy keeps one thing out of the book that it must never hold.
func (r *reader) notOfPregnancy(n *node, path, s string) {
	if n != nil && strings.Contains(strings.ToLower(s), "pregnan") {
		r.fault(n, path, shown(s), "a book keeps nothing on pregnancy", "leave it out; a screening keeps its outcome alone")
	}
}

// sameEverywhere tells of a fact that another fixture kind declares with another type or unit:
// selectors and tables read the facts of all kinds by one name.
func (r *reader) sameEverywhere(n *node, path string, f Fact, of Asks) {
	if of != AsksFixture {
		return
	}
	first, known := r.kindOf[f.Code]
	g := first.fact
	if !known || f.Type == "" || g.Type == "" || g.Type == f.Type && g.Unit == f.Unit {
		return
	}
	r.fault(n, path, shown(f.typed()), fmt.Sprintf("kind %s declares the fact as %s", first.kind, shown(g.typed())), "give it one type and unit, or two codes")
}

// kindFact is a fact and the fixture kind that declares it.
type kindFact struct {
	kind string
	fact Fact
}

func (f Fact) typed() string {
	if f.Unit != "" {
		return string(f.Type) + " in " + f.Unit
	}
	return string(f.Type)
}

func (r *reader) events(root object) {
	taken := map[string]int{}
	of := []string{}
	for _, a := range AllAsks {
		of = append(of, string(a))
	}
	of = append(of, r.p.kindCodes()...)
	root.objects("events", "event", "write a list such as [{code: storm, of: site}]", func(o object) {
		e := Event{Code: o.ownCode()}
		if n := o.need("of", "write what it happens to: "+anyOf(of)); n != nil {
			e.Of = r.kindOr(n, o.at("of"), of)
		}
		e.Name = o.named("name", spokenCode(e.Code))
		if e.SelfReport = o.yesNo("self_report", false); e.SelfReport {
			r.selfReport(o, e)
		}
		r.register(o.get("code"), o.at("code"), e.Code, taken)
		r.p.Events = append(r.p.Events, e)
	})
}

// selfReport checks that an event which people report of themselves is about people, and the only one.
func (r *reader) selfReport(o object, e Event) {
	n, path := o.get("self_report"), o.at("self_report")
	if e.Of != "" && e.Of != string(AsksPerson) {
		r.fault(n, path, shown(n.text), "only what happens to a person can be reported by them", "write of: person")
	}
	for _, other := range r.p.Events {
		if other.SelfReport {
			r.fault(n, path, shown(n.text), other.Code+" is reported by people of themselves already", "mark one event alone")
		}
	}
}

// kindOr reads a fixture kind or one of the other words. A kind that is not declared and that no
// declared one resembles is let stand, and warned of: there is no fixture of it before it is
// declared.
func (r *reader) kindOr(n *node, path string, known []string) string {
	_, slip := nearest(n.text, known)
	if n.kind != scalar || slip || !codePattern.MatchString(n.text) {
		return r.word(n, path, known)
	}
	return n.text
}

func (r *reader) documents(root object) {
	taken := map[string]int{}
	root.objects("documents", "document", "write a list such as [{code: POL-1, title: Access policy}]", func(o object) {
		d := Document{Code: o.ownCode()}
		d.Title = o.named("title", d.Code)
		r.register(o.get("code"), o.at("code"), d.Code, taken)
		r.p.Documents = append(r.p.Documents, d)
	})
}
