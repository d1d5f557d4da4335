package program

import (
	"fmt"
	"math/big"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"lodebook/models/civil"
)

// Judgement is the result of a filled-in sheet. Passed is false where anything fails; Remark is
// true where all passes and something lies beyond a warn limit. Reasons say, in sentences and in
// order of the fields, what failed or was remarked. Values are the answers as they are kept: numbers
// with the digits that were typed, a decimal comma made a point and the unit left off; yes or no;
// days as YYYY-MM-DD. Fields left empty are not among them.
type Judgement struct {
	Passed  bool
	Remark  bool
	Reasons []string
	Values  map[string]string
}

// FieldFault is an answer that cannot be judged.
type FieldFault struct {
	Field    string `json:"field"`    // the field's code
	Value    string `json:"value"`    // what was given
	Problem  string `json:"problem"`  // what is wrong with it
	Accepted string `json:"accepted"` // what would be accepted
}

// Judge computes the result from the answers by field code. With faults, nothing has passed, and
// the judgement covers the other fields alone.
func (s *Sheet) Judge(values map[string]string) (Judgement, []FieldFault) {
	j := Judgement{Passed: true, Values: map[string]string{}}
	var faults []FieldFault
	for i := range s.Fields {
		f := &s.Fields[i]
		given := strings.TrimSpace(values[f.Code])
		if given == "" {
			if f.Required {
				faults = append(faults, FieldFault{f.Code, "", "not filled in", "give " + f.wanted()})
			}
			continue
		}
		kept, problem := f.keep(given)
		if problem != "" {
			faults = append(faults, FieldFault{f.Code, given, problem, "give " + f.wanted()})
			continue
		}
		j.Values[f.Code] = kept
		j.weigh(f, kept)
	}
	faults = append(faults, s.unknown(values)...)
	j.Passed = j.Passed && len(faults) == 0
	j.Remark = j.Remark && j.Passed
	return j, faults
}

// unknown lists answers to questions that the sheet does not ask.
func (s *Sheet) unknown(values map[string]string) []FieldFault {
	var faults []FieldFault
	asked := codes(s.Fields, func(f Field) string { return f.Code })
	for _, code := range sortedKeys(values) {
		if !slices.Contains(asked, code) {
			faults = append(faults, FieldFault{code, values[code], "the sheet has no such field", suggest(code, asked)})
		}
	}
	return faults
}

// wanted says what the field takes.
func (f *Field) wanted() string {
	switch f.Type {
	case FieldNumber:
		if f.Unit != "" {
			return "a number in " + f.Unit + ", such as 2.1"
		}
		return "a number such as 2.1"
	case FieldYesNo:
		return "yes or no"
	case FieldChoice:
		return anyOf(f.Choices)
	case FieldDay:
		return "a day as YYYY-MM-DD"
	}
	return "a text"
}

// keep turns an answer into what is kept of it, or tells why it cannot be.
func (f *Field) keep(given string) (kept, problem string) {
	switch f.Type {
	case FieldNumber:
		return f.keepNumber(given)
	case FieldYesNo:
		switch strings.ToLower(given) {
		case "yes", "true":
			return "yes", ""
		case "no", "false":
			return "no", ""
		}
		return "", "neither yes nor no"
	case FieldChoice:
		if !slices.Contains(f.Choices, given) {
			return "", "not one of the choices"
		}
	case FieldDay:
		if _, err := civil.ParseDay(given); err != nil {
			return "", "not a day of the calendar"
		}
	}
	return given, ""
}

// typedNumber is a number as people type it: plain digits, with a point or a comma.
var typedNumber = regexp.MustCompile(`^[+-]?[0-9]{1,20}([.,][0-9]{1,20})?$`)

func (f *Field) keepNumber(given string) (kept, problem string) {
	number := given
	if f.Unit != "" {
		number = strings.TrimSpace(strings.TrimSuffix(given, f.Unit))
	}
	number = strings.Replace(number, "\u2212", "-", 1) // the minus sign that tables print
	if typedNumber.MatchString(number) {
		return strings.TrimPrefix(strings.Replace(number, ",", ".", 1), "+"), ""
	}
	if digits, unit := splitUnit(number); unit != "" && typedNumber.MatchString(digits) {
		if f.Unit == "" {
			return "", "the field has no unit"
		}
		return "", "the unit is not the field's own"
	}
	return "", "not a number"
}

// splitUnit splits "2.1 cm" where the digits end.
func splitUnit(s string) (number, unit string) {
	i := strings.LastIndexAny(s, "0123456789") + 1
	return s[:i], strings.TrimSpace(s[i:])
}

// weigh holds what is kept against the field's demands.
func (j *Judgement) weigh(f *Field, kept string) {
	fail := func(format string, args ...any) {
		j.Passed = false
		j.Reasons = append(j.Reasons, fmt.Sprintf(format, args...))
	}
	switch f.Type {
	case FieldNumber:
		j.weighNumber(f, kept, fail)
	case FieldYesNo:
		if f.Must != nil && kept != yesOrNo(*f.Must) {
			fail("%s: the answer is %s; %s is asked.", f.Label, kept, yesOrNo(*f.Must))
		}
	case FieldChoice:
		if slices.Contains(f.FailOn, kept) {
			fail("%s is %s, which fails.", f.Label, kept)
		}
	}
}

func (j *Judgement) weighNumber(f *Field, kept string, fail func(string, ...any)) {
	v, ok := new(big.Rat).SetString(kept)
	if !ok {
		fail("%s is %s, which cannot be compared.", f.Label, kept)
		return
	}
	remark := func(format string, args ...any) {
		j.Remark = true
		j.Reasons = append(j.Reasons, fmt.Sprintf(format, args...))
	}
	switch {
	case f.Min != nil && v.Cmp(exactly(*f.Min)) < 0:
		fail("%s is %s; at least %s is asked.", f.Label, f.inUnit(kept), f.inUnit(decimal(*f.Min)))
	case f.Max != nil && v.Cmp(exactly(*f.Max)) > 0:
		fail("%s is %s; at most %s is asked.", f.Label, f.inUnit(kept), f.inUnit(decimal(*f.Max)))
	case f.WarnBelow != nil && v.Cmp(exactly(*f.WarnBelow)) < 0:
		remark("%s is %s; below %s is worth a remark.", f.Label, f.inUnit(kept), f.inUnit(decimal(*f.WarnBelow)))
	case f.WarnAbove != nil && v.Cmp(exactly(*f.WarnAbove)) > 0:
		remark("%s is %s; above %s is worth a remark.", f.Label, f.inUnit(kept), f.inUnit(decimal(*f.WarnAbove)))
	}
}

// exactly is the limit as it is written: 0.1 is one tenth, and not the nearest binary fraction, so
// that an answer of 0.1 is never below it.
func exactly(limit float64) *big.Rat {
	r, ok := new(big.Rat).SetString(decimal(limit))
	if !ok {
		return new(big.Rat).SetFloat64(limit)
	}
	return r
}

func decimal(v float64) string { return strconv.FormatFloat(v, 'f', -1, 64) }

func (f *Field) inUnit(number string) string {
	if f.Unit == "" {
		return number
	}
	return number + " " + f.Unit
}

func yesOrNo(b bool) string {
	if b {
		return "yes"
	}
	return "no"
}
