package book

import (
	"encoding/json"
	"slices"
	"strconv"
	"strings"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/store"
)

// factValue is a value as an entry carries it: numbers as they were typed, free text veiled.
type factValue struct {
	Type  string `json:"t"` // text, number, yesno, day, choice, person, zone, code or none
	Value string `json:"v,omitempty"`
	Text  Veiled `json:"w,omitzero"`
}

// noFact takes a fact off the record.
const noFact = "none"

// row gives the value as a projected row holds it: JSON.
func (f factValue) row() string {
	var v any
	switch f.Type {
	case noFact:
		return "null"
	case string(program.FactNumber):
		n, err := strconv.ParseFloat(f.Value, 64)
		if err != nil {
			return "null"
		}
		v = n
	case string(program.FactYesNo):
		v = f.Value == "yes"
	case string(program.FactText):
		if f.Text.Erased {
			return "null"
		}
		v = f.Text.Value
	default:
		v = f.Value
	}
	out, err := json.Marshal(v)
	if err != nil {
		return "null"
	}
	return string(out)
}

// show gives the value as a person reads it.
func (f factValue) show() string {
	if f.Type == string(program.FactText) {
		return f.Text.String()
	}
	return f.Value
}

// builtin facts of people and fixtures; the others are declared by the program.
const (
	factLevel = "level"
	factCrew  = "crew"
	factZone  = "zone"
	factKind  = "kind"
)

// parseFact reads one value for a declared fact. An empty text takes it off the record.
func parseFact(f program.Fact, text, person string, people func(string) bool, zones []string) (factValue, *Fault) {
	text = strings.TrimSpace(text)
	if text == "" {
		return factValue{Type: noFact}, nil
	}
	bad := func(problem, accepted string) (factValue, *Fault) {
		return factValue{}, &Fault{f.Code, text, problem, accepted}
	}
	v := factValue{Type: string(f.Type), Value: text}
	switch f.Type {
	case program.FactText:
		return factValue{Type: string(f.Type), Text: veiled(text, person)}, nil
	case program.FactNumber:
		n, ok := readNumber(text)
		if !ok {
			return bad("is not a number", "write a number such as 2.1"+inUnit(f.Unit))
		}
		v.Value = n
	case program.FactYesNo:
		yes, ok := readYesNo(text)
		if !ok {
			return bad("is neither yes nor no", "write yes or no")
		}
		v.Value = yes
	case program.FactDay:
		if _, err := civil.ParseDay(text); err != nil {
			return bad("is not a day", "write it as YYYY-MM-DD")
		}
	case program.FactChoice:
		if !slices.Contains(f.Choices, text) {
			return bad("is not one of the choices", "one of "+strings.Join(f.Choices, ", "))
		}
	case program.FactPerson:
		if !people(text) {
			return bad("is no person on record", "write the code of a person")
		}
	case program.FactZone:
		if !slices.Contains(zones, text) {
			return bad("is no zone of this site", "one of "+strings.Join(zones, ", "))
		}
	}
	return v, nil
}

func inUnit(unit string) string {
	if unit == "" {
		return ""
	}
	return ", in " + unit
}

// readNumber takes a plain decimal number as typed; a decimal comma becomes a point.
func readNumber(s string) (string, bool) {
	s = strings.Replace(s, ",", ".", 1)
	digits := strings.TrimLeft(s, "+-")
	if digits == "" || strings.Trim(digits, "0123456789.") != "" {
		return "", false
	}
	_, err := strconv.ParseFloat(s, 64)
	return s, err == nil
}

// readYesNo takes the usual ways to write yes and no.
func readYesNo(s string) (string, bool) {
	switch strings.ToLower(strings.TrimSpace(s)) {
	case "yes", "y", "true", "1":
		return "yes", true
	case "no", "n", "false", "0":
		return "no", true
	default:
		return "", false
	}
}

// factRows turns the facts of one entry into rows, in the order of their codes.
func factRows(at applied, kind, code string, from civil.Day, facts map[string]factValue) []any {
	var rows []any
	for _, k := range sortedKeys(facts) {
		rows = append(rows, store.FactRow{
			Line: at.line, Site: at.site, Kind: kind, Code: code, Fact: k, From: from, Value: facts[k].row(),
		})
	}
	return rows
}

func sortedKeys[V any](m map[string]V) []string {
	keys := make([]string, 0, len(m))
	for k := range m {
		keys = append(keys, k)
	}
	slices.Sort(keys)
	return keys
}
