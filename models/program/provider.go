package program

import (
	"fmt"
	"slices"
	"strings"

	"github.com/google/cel-go/cel"
	"github.com/google/cel-go/common/types"
	"github.com/google/cel-go/common/types/ref"
)

// scope is what selectors over one kind of subject can read. It is the type provider of their
// language: a field that is not here does not compile.
type scope struct {
	types.Provider // the language's own types
	asks           Asks
	fields, facts  map[string]*attribute
	env            *cel.Env
	print          []byte // of what can be read
}

// attribute is one field of a subject, or one fact.
type attribute struct {
	name  string // as in Selector.Reads
	typ   *types.Type
	codes []string            // what a text literal compared with it may be; nil: anything
	open  bool                // codes that resemble none of these are let stand, and warned of
	check func(string) string // tells why such a literal cannot be meant, or nothing
	read  func(*Subject) any  // nil: not on record
}

const factsField = "facts"

func (s *scope) typeName() string      { return typePrefix + string(s.asks) }
func (s *scope) factsTypeName() string { return s.typeName() + "." + factsField }

// scope gives the reader's scope of a kind of subject; the vocabulary is read by then.
func (r *reader) scope(asks Asks) *scope {
	if r.scopes[asks] == nil {
		r.scopes[asks] = newScope(r.p, asks)
	}
	return r.scopes[asks]
}

func newScope(p *Program, asks Asks) *scope {
	s := &scope{asks: asks, fields: map[string]*attribute{}, facts: map[string]*attribute{}}
	for _, a := range fieldsOf(p, asks) {
		s.fields[a.name] = a
	}
	for _, f := range p.FactsOf(asks) {
		s.facts[f.Code] = factAttribute(p, f)
	}
	return s
}

// fieldsOf lists what a subject of the kind has beside its facts.
func fieldsOf(p *Program, asks Asks) []*attribute {
	text := func(name string, codes []string, read func(*Subject) string) *attribute {
		return &attribute{name: name, typ: types.StringType, codes: codes, read: func(s *Subject) any {
			if v := read(s); v != "" {
				return v
			}
			return nil
		}}
	}
	texts := func(name string, codes []string, read func(*Subject) []string) *attribute {
		return &attribute{name: name, typ: types.NewListType(types.StringType), codes: codes, read: func(s *Subject) any { return read(s) }}
	}
	own, _ := p.codesOf(asks)
	// A subject always has a code, and a name even when it is erased: they are never missing.
	fields := []*attribute{{name: "code", typ: types.StringType, codes: own, read: func(s *Subject) any { return s.Code }}}
	switch asks {
	case AsksPerson:
		return append(fields,
			&attribute{name: "name", typ: types.StringType, read: func(s *Subject) any { return s.Name }},
			text("level", p.levelCodes(), func(s *Subject) string { return s.Level }),
			text("held", p.levelCodes(), func(s *Subject) string { return s.Held }),
			text("crew", p.crewCodes(), func(s *Subject) string { return s.Crew }),
			texts("posts", p.postCodes(), func(s *Subject) []string { return s.Posts }),
			texts("zones", p.zoneCodes(), func(s *Subject) []string { return s.Zones }))
	case AsksFixture:
		kind := text("kind", p.kindCodes(), func(s *Subject) string { return s.Kind })
		kind.open = true
		return append(fields, kind,
			text("zone", p.zoneCodes(), func(s *Subject) string { return s.Zone }))
	case AsksPost:
		return append(fields, texts("holders", nil, func(s *Subject) []string { return s.Holders }),
			texts("deputies", nil, func(s *Subject) []string { return s.Deputies }))
	case AsksSite:
		for _, name := range []string{FactDoorListAge, FactDoorListOpen} {
			fields = append(fields, &attribute{name: name, typ: types.DoubleType, read: func(s *Subject) any { return s.Facts[name] }})
		}
		return fields
	}
	return fields
}

func factAttribute(p *Program, f Fact) *attribute {
	a := &attribute{name: factsField + "." + f.Code, typ: types.StringType, read: func(s *Subject) any { return s.Facts[f.Code] }}
	switch f.Type {
	case FactNumber:
		a.typ = types.DoubleType
	case FactYesNo:
		a.typ = types.BoolType
	case FactChoice:
		a.codes = slices.Concat([]string{}, f.Choices)
	case FactZone:
		a.codes = p.zoneCodes()
	case FactDay:
		a.check = notADay
	}
	return a
}

// fits tells whether a value on record has the declared type.
func (a *attribute) fits(v any) bool {
	switch v.(type) {
	case string:
		return a.typ == types.StringType
	case float64:
		return a.typ == types.DoubleType
	case bool:
		return a.typ == types.BoolType
	case []string:
		return a.typ.Kind() == types.ListKind
	}
	return false
}

// FindStructType knows the two types of the scope: the subject and its facts.
func (s *scope) FindStructType(name string) (*types.Type, bool) {
	if name == s.typeName() || name == s.factsTypeName() {
		return types.NewTypeTypeWithParam(types.NewObjectType(name)), true
	}
	return s.Provider.FindStructType(name)
}

// FindStructFieldNames lists the fields of the subject or its facts.
func (s *scope) FindStructFieldNames(name string) ([]string, bool) {
	switch name {
	case s.typeName():
		return append(sortedKeys(s.fields), factsField), true
	case s.factsTypeName():
		return sortedKeys(s.facts), true
	}
	return s.Provider.FindStructFieldNames(name)
}

// FindStructFieldType gives the type of a field and how to read it from a *view.
func (s *scope) FindStructFieldType(name, field string) (*types.FieldType, bool) {
	switch name {
	case s.typeName():
		if field == factsField {
			same := func(v any) (any, error) { return v, nil }
			return &types.FieldType{Type: types.NewObjectType(s.factsTypeName()), IsSet: func(any) bool { return true }, GetFrom: same}, true
		}
		return s.fields[field].fieldType()
	case s.factsTypeName():
		return s.facts[field].fieldType()
	}
	return s.Provider.FindStructFieldType(name, field)
}

// NewValue refuses to make subjects out of nothing.
func (s *scope) NewValue(name string, fields map[string]ref.Val) ref.Val {
	return types.NewErr("a selector cannot make a %s", name)
}

func (a *attribute) fieldType() (*types.FieldType, bool) {
	if a == nil {
		return nil, false
	}
	return &types.FieldType{
		Type:    a.typ,
		IsSet:   func(v any) bool { return a.read(v.(*view).subject) != nil },
		GetFrom: func(v any) (any, error) { return v.(*view).get(a) },
	}, true
}

// view is one evaluation: the subject, and what was looked for in vain.
type view struct {
	subject *Subject
	missing []string
}

// ResolveName gives the only variable of the language.
func (v *view) ResolveName(name string) (any, bool) { return v, name == subjectName }

// Parent ends the chain of scopes.
func (v *view) Parent() cel.Activation { return nil }

func (v *view) get(a *attribute) (any, error) {
	value := a.read(v.subject)
	if value == nil {
		v.missing = append(v.missing, a.name)
		return nil, &MissingFact{Facts: []string{a.name}}
	}
	if !a.fits(value) {
		return nil, fmt.Errorf("%s of %s %s is %v, and it is declared as %s", a.name, v.subject.Asks, v.subject.Code, value, typeWord(a.typ.String()))
	}
	return value, nil
}

func sortedKeys[T any](m map[string]T) []string {
	keys := make([]string, 0, len(m))
	for k := range m {
		keys = append(keys, k)
	}
	slices.Sort(keys)
	return keys
}

// typeWord names a type of the selector language in words.
func typeWord(t string) string {
	switch t {
	case "string":
		return "a text"
	case "double", "int", "uint":
		return "a number"
	case "bool":
		return "a yes or no"
	case "list(string)":
		return "a list of texts"
	}
	if strings.HasPrefix(t, "list(") {
		return "a list"
	}
	return t
}
