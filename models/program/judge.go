package program

import (
	"fmt"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"lodebook/models/civil"
)

// Judgement is what a filled-in sheet comes to: a pass, a pass with a remark, or a fail, with the
// reasons in sentences.
type Judgement struct {
	Passed, Remark bool
	Reasons        []string
}

// FieldFault is a value that cannot be judged.
type FieldFault struct{ Field, Value, Problem, Accepted string }

// verdict is what one value comes to.
type verdict struct {
	fails, remark bool
	reason        string
}

// Judge computes what the values come to. Values are as typed, by field code; faults name what
// cannot be judged, and then the judgement is void. A value of no field of the sheet is a fault.
func (s *Sheet) Judge(values map[string]string) (Judgement, []FieldFault) {
	j := Judgement{Passed: true}
	var faults []FieldFault
	for i := range s.Fields {
		f := &s.Fields[i]
		v, fault := f.judge(strings.TrimSpace(values[f.Code]))
		if fault != nil {
			faults = append(faults, *fault)
			continue
		}
		j.Passed = j.Passed && !v.fails
		j.Remark = j.Remark || v.remark
		if v.reason != "" {
			j.Reasons = append(j.Reasons, v.reason)
		}
	}
	for code, value := range values {
		if !slices.ContainsFunc(s.Fields, func(f Field) bool { return f.Code == code }) {
			faults = append(faults, FieldFault{code, value, "is no field of this sheet", "leave it out"})
		}
	}
	j.Remark = j.Remark && j.Passed
	return j, faults
}

func (f *Field) judge(text string) (verdict, *FieldFault) {
	if text == "" {
		if f.Required {
			return verdict{}, f.fault(text, "is empty", f.wanted())
		}
		return verdict{}, nil
	}
	switch f.Type {
	case FieldNumber:
		return f.judgeNumber(text)
	case FieldYesNo:
		return f.judgeYesNo(text)
	case FieldChoice:
		return f.judgeChoice(text)
	case FieldDay:
		if _, err := civil.ParseDay(text); err != nil {
			return verdict{}, f.fault(text, "is not a day", f.wanted())
		}
	}
	return verdict{}, nil
}

func (f *Field) fault(value, problem, accepted string) *FieldFault {
	return &FieldFault{f.Code, value, problem, accepted}
}

// wanted says what the field takes.
func (f *Field) wanted() string {
	switch f.Type {
	case FieldNumber:
		return strings.TrimSpace("write a number such as 2.1 " + f.inUnit())
	case FieldYesNo:
		return "answer yes or no"
	case FieldChoice:
		return "choose one of " + strings.Join(f.Choices, ", ")
	case FieldDay:
		return "write a day as YYYY-MM-DD"
	default:
		return "write something"
	}
}

func (f *Field) inUnit() string {
	if f.Unit == "" {
		return ""
	}
	return "in " + f.Unit
}

func (f *Field) judgeNumber(text string) (verdict, *FieldFault) {
	typed, ok := f.Number(text)
	if !ok {
		return verdict{}, f.fault(text, "is not a number"+spaced(f.inUnit()), f.wanted())
	}
	n, err := strconv.ParseFloat(typed, 64)
	if err != nil {
		return verdict{}, f.fault(text, "is not a number that can be counted with", f.wanted())
	}
	is := f.Label + " is " + typed + f.unitAfter()
	switch {
	case f.Min != nil && n < *f.Min:
		return verdict{fails: true, reason: is + "; at least " + f.written(*f.Min) + " is asked."}, nil
	case f.Max != nil && n > *f.Max:
		return verdict{fails: true, reason: is + "; at most " + f.written(*f.Max) + " is allowed."}, nil
	case f.WarnBelow != nil && n < *f.WarnBelow:
		return verdict{remark: true, reason: is + ", which is less than " + f.written(*f.WarnBelow) + "."}, nil
	case f.WarnAbove != nil && n > *f.WarnAbove:
		return verdict{remark: true, reason: is + ", which is more than " + f.written(*f.WarnAbove) + "."}, nil
	}
	return verdict{}, nil
}

func spaced(s string) string {
	if s == "" {
		return ""
	}
	return " " + s
}

func (f *Field) unitAfter() string { return spaced(f.Unit) }

func (f *Field) written(n float64) string {
	return strconv.FormatFloat(n, 'f', -1, 64) + f.unitAfter()
}

var plainNumber = regexp.MustCompile(`^[+-]?(\d{1,12}([.]\d{0,12})?|[.]\d{1,12})$`)

// Number reads a number as typed and gives it with a decimal point, its digits kept (19.50 stays
// 19.50). A decimal comma will do, and the field's own unit behind it; nothing else will.
func (f *Field) Number(text string) (string, bool) {
	text = strings.TrimSpace(text)
	if f.Unit != "" {
		text = strings.TrimSpace(strings.TrimSuffix(text, f.Unit))
	}
	text = strings.Replace(text, ",", ".", 1)
	return text, plainNumber.MatchString(text)
}

func (f *Field) judgeYesNo(text string) (verdict, *FieldFault) {
	var yes bool
	switch strings.ToLower(text) {
	case "yes":
		yes = true
	case "no":
	default:
		return verdict{}, f.fault(text, "is neither yes nor no", f.wanted())
	}
	if f.Must != nil && yes != *f.Must {
		return verdict{fails: true, reason: fmt.Sprintf("%s: %s.", f.Label, strings.ToLower(text))}, nil
	}
	return verdict{}, nil
}

func (f *Field) judgeChoice(text string) (verdict, *FieldFault) {
	if !slices.Contains(f.Choices, text) {
		return verdict{}, f.fault(text, "is not one of the choices", f.wanted())
	}
	if slices.Contains(f.FailOn, text) {
		return verdict{fails: true, reason: f.Label + ": " + text + "."}, nil
	}
	return verdict{}, nil
}
