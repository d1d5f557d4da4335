package program

import (
	"fmt"
	"slices"
)

// recorderRoles are the roles whose accounts may be named in recorded_by.
var recorderRoles = []string{"facilities", "safety-officer"}

func (r *reader) sheets(root object) {
	taken := map[string]int{}
	root.objects("sheets", "sheet", "write a list of sheets, each with code and fields", func(o object) {
		s := Sheet{Code: o.ownCode()}
		s.Title = o.named("title", spokenCode(s.Code))
		r.register(o.get("code"), o.at("code"), s.Code, taken)
		if n := o.get("for"); n != nil {
			s.For = r.one(n, o.at("for"), "a fixture kind", r.p.kindCodes())
		}
		s.RecordedBy = r.recorders(o)
		s.OnFail = o.text("on_fail")
		s.failOut(o)
		s.Cautions = o.distinct("cautions", "write a list of sentences", r.line)
		s.Fields = r.fields(o)
		r.p.Sheets = append(r.p.Sheets, s)
	})
}

func (r *reader) recorders(o object) []string {
	known := slices.Concat(recorderRoles, r.p.crewCodes(), r.p.levelCodes())
	out := o.distinct("recorded_by", "write a list such as [facilities, safety-officer]", func(n *node, path string) string {
		return r.one(n, path, "a role, crew or level", known)
	})
	if n := o.get("recorded_by"); n != nil && n.kind == list && len(n.items) == 0 {
		r.wrong(n, o.at("recorded_by"), "nobody could record it", suggest("", known))
	}
	return out
}

func (r *reader) fields(sheet object) []Field {
	const accepted = "write a list such as [{code: clear, label: Outlet clear, type: yesno, must: true}]"
	if n := sheet.need("fields", accepted); n != nil && n.kind == list && len(n.items) == 0 {
		r.wrong(n, sheet.at("fields"), "a sheet without fields records nothing", accepted)
	}
	var out []Field
	taken := map[string]int{}
	sheet.objects("fields", "field", accepted, func(o object) {
		f := r.field(o)
		r.register(o.get("code"), o.at("code"), f.Code, taken)
		out = append(out, f)
	})
	return out
}

var fieldTypes = []string{string(FieldNumber), string(FieldYesNo), string(FieldChoice), string(FieldText), string(FieldDay)}

func (r *reader) field(o object) Field {
	f := Field{Code: o.ownCode()}
	f.Label = o.named("label", spoken(f.Code))
	r.notOfPregnancy(o.get("code"), o.at("code"), f.Code)
	r.notOfPregnancy(o.get("label"), o.at("label"), f.Label)
	f.Help = o.text("help")
	o.need("type", "write one of "+anyOf(fieldTypes))
	f.Type = FieldType(o.word("type", fieldTypes))
	judged := f.Type == FieldNumber || f.Type == FieldYesNo || f.Type == FieldChoice
	f.Required = o.yesNo("required", judged)
	onlyFor(o, "unit", f.Type, FieldNumber)
	f.Unit = o.text("unit")
	f.Choices = choices(o, f.Type, FieldChoice)
	f.FailOn = r.failOn(o, f)
	if o.get("must") != nil {
		must := o.yesNo("must", true)
		f.Must = &must
		onlyFor(o, "must", f.Type, FieldYesNo)
	}
	r.limits(o, &f)
	return f
}

// onlyFor tells of a key that means something for one type alone. A type that is itself at fault
// (empty) is told elsewhere.
func onlyFor[T ~string](o object, key string, have, want T) {
	if o.get(key) != nil && have != want && have != "" {
		o.r.fault(o.place(key), o.at(key), shown(key), "means something only for the type "+string(want), "leave it out")
	}
}

func (r *reader) failOn(o object, f Field) []string {
	onlyFor(o, "fail_on", f.Type, FieldChoice)
	return o.distinct("fail_on", "write a list of choices", func(n *node, path string) string {
		if f.Type != FieldChoice {
			return ""
		}
		return r.one(n, path, "a choice", f.Choices)
	})
}

// limits reads the four limits of a number and finds those that contradict each other.
func (r *reader) limits(o object, f *Field) {
	for _, l := range []struct {
		key string
		to  **float64
	}{{"min", &f.Min}, {"max", &f.Max}, {"warn_below", &f.WarnBelow}, {"warn_above", &f.WarnAbove}} {
		*l.to = o.number(l.key)
		onlyFor(o, l.key, f.Type, FieldNumber)
	}
	for _, l := range []struct {
		low, high         *float64
		lowKey, highKey   string
		equal             bool
		problem, accepted string
	}{
		{f.Min, f.Max, "min", "max", true, "no number could pass", "write a max that is not below min"},
		{f.Min, f.WarnBelow, "min", "warn_below", false, "it never remarks: below min the sheet fails", "write a warn_below above min"},
		{f.WarnAbove, f.Max, "warn_above", "max", false, "it never remarks: above max the sheet fails", "write a max above warn_above"},
		{f.WarnBelow, f.WarnAbove, "warn_below", "warn_above", true, "every number would be remarked", "write a warn_above that is not below warn_below"},
	} {
		if l.low == nil || l.high == nil || *l.low < *l.high || l.equal && *l.low == *l.high {
			continue
		}
		r.wrong(o.get(l.highKey), o.at(l.highKey), fmt.Sprintf("%s is %v: %s", l.lowKey, *l.low, l.problem), l.accepted)
	}
}
