package web

import (
	"errors"
	"net/url"
	"slices"
	"strings"

	"lodebook/models/book"
)

// Form is what was typed into a form and what is wrong with it. Shown again it holds everything that
// was typed, with each fault at its field.
type Form struct {
	Values url.Values
	Faults []book.Fault
}

// Get is the first value of a field, without blanks at its ends.
func (f *Form) Get(name string) string { return strings.TrimSpace(f.Values.Get(name)) }

// All is every value of a field.
func (f *Form) All(name string) []string { return f.Values[name] }

// Has tells whether a field holds a value, for boxes that are ticked.
func (f *Form) Has(name, value string) bool { return slices.Contains(f.Values[name], value) }

// Set puts a value into a field, for forms that open with something filled in.
func (f *Form) Set(name, value string) *Form {
	if f.Values == nil {
		f.Values = url.Values{}
	}
	f.Values.Set(name, value)
	return f
}

// Default puts a value into a field that holds none.
func (f *Form) Default(name, value string) *Form {
	if f.Get(name) == "" {
		f.Set(name, value)
	}
	return f
}

// Forget empties fields that are never sent back, as passwords.
func (f *Form) Forget(names ...string) {
	for _, n := range names {
		f.Values.Del(n)
	}
}

// Take takes the faults of a *book.Invalid; false means that the error is none.
func (f *Form) Take(err error) bool {
	var invalid *book.Invalid
	if !errors.As(err, &invalid) {
		return false
	}
	f.Faults = append(f.Faults, invalid.Faults...)
	return true
}

// Rename says under which name the form has a field that the book calls otherwise.
func (f *Form) Rename(book, form string) *Form {
	for i := range f.Faults {
		if f.Faults[i].Field == book {
			f.Faults[i].Field = form
		}
	}
	return f
}

// Loose adds a fault that is one whole sentence.
func (f *Form) Loose(name, sentence string) {
	f.Faults = append(f.Faults, book.Fault{Field: name, Problem: sentence})
}

// Fault is what is wrong with a field, or empty.
func (f *Form) Fault(name string) string {
	var all []string
	for _, x := range f.Faults {
		if x.Field == name {
			all = append(all, faultWords(x))
		}
	}
	return strings.Join(all, " ")
}

// faultWords is a fault as it stands under its field.
func faultWords(x book.Fault) string {
	s := upperFirst(x.Problem)
	if x.Value != "" {
		s = "“" + x.Value + "” " + x.Problem
	}
	if x.Accepted != "" {
		s += ". Accepted: " + x.Accepted
	}
	return strings.TrimSuffix(s, ".") + "."
}

type faultLine struct{ Field, Words string }

// faultList is the faults as the top of a form lists them.
func faultList(faults []book.Fault) []faultLine {
	out := make([]faultLine, len(faults))
	for i, x := range faults {
		out[i] = faultLine{x.Field, faultWords(x)}
	}
	return out
}

// field is one line of a form, ready for its partial.
type field struct {
	ID, Name, Label, Value string
	HelpText, Fault        string
	Type, Unit             string // of an input; number only
	Mode                   string // inputmode
	Needed, Large          bool
	Max                    string // latest day
	Fill                   string // autocomplete
	Options                []option
	People                 []tick
	Folded                 bool // a list that few need, folded while nothing in it is ticked
}

// option is one choice.
type option struct {
	Value, Words string
	Chosen       bool
	Bad          bool // a choice that fails, so that it is marked when chosen
}

// tick is one person (or other subject) of a list to tick.
type tick struct {
	Value, Name, Note string
	Ticked            bool
}

func (f *Form) field(name, label, kind string) field {
	return field{ID: "f-" + name, Name: name, Label: label, Value: f.Values.Get(name), Fault: f.Fault(name), Type: kind}
}

// Text is a line of text.
func (f *Form) Text(name, label string) field { return f.field(name, label, "text") }

// Long is a text of several lines.
func (f *Form) Long(name, label string) field { return f.field(name, label, "long") }

// Secret is a password.
func (f *Form) Secret(name, label string) field { return f.field(name, label, "password") }

// Number is a number as typed, with its unit (may be empty).
func (f *Form) Number(name, label, unit string) field {
	x := f.field(name, label, "text")
	x.Unit, x.Mode = unit, "decimal"
	return x
}

// Date is a day.
func (f *Form) Date(name, label string) field { return f.field(name, label, "date") }

// Time is a time of day.
func (f *Form) Time(name, label string) field { return f.field(name, label, "time") }

// Choice is one of many, in a list that folds out.
func (f *Form) Choice(name, label string, options []option) field {
	x := f.field(name, label, "choice")
	x.Options = f.chosen(name, options)
	return x
}

// Picks is one of a few, side by side.
func (f *Form) Picks(name, label string, options []option) field {
	x := f.field(name, label, "picks")
	x.Options = f.chosen(name, options)
	return x
}

// YesNo is yes or no. Bad is the answer that fails, or empty.
func (f *Form) YesNo(name, label, bad string) field {
	return f.Picks(name, label, []option{{Value: "yes", Words: "Yes", Bad: bad == "yes"}, {Value: "no", Words: "No", Bad: bad == "no"}})
}

// Ticks is a list of people or other subjects, any number of them.
func (f *Form) Ticks(name, label string, people []tick) field {
	x := f.field(name, label, "ticks")
	x.People = slices.Clone(people)
	for i := range x.People {
		x.People[i].Ticked = f.Has(name, x.People[i].Value)
	}
	return x
}

func (f *Form) chosen(name string, options []option) []option {
	out := slices.Clone(options)
	for i := range out {
		out[i].Chosen = out[i].Value == f.Values.Get(name)
	}
	return out
}

// Need marks the field as one that must be filled in.
func (x field) Need() field { x.Needed = true; return x }

// Help is what stands under the field.
func (x field) Help(text string) field { x.HelpText = text; return x }

// Big is larger, for forms that are filled in standing up.
func (x field) Big() field { x.Large = true; return x }

// UpTo is the latest day that the box offers.
func (x field) UpTo(day string) field { x.Max = day; return x }

// Auto is what a browser may fill in by itself.
func (x field) Auto(what string) field { x.Fill = what; return x }

// Fold folds a list away while nothing in it is ticked.
func (x field) Fold() field {
	x.Folded = !slices.ContainsFunc(x.People, func(t tick) bool { return t.Ticked })
	return x
}

// Describes is the identifiers of what explains the field to a screen reader.
func (x field) Describes() string {
	var ids []string
	if x.Fault != "" {
		ids = append(ids, x.ID+"-fault")
	}
	if x.HelpText != "" {
		ids = append(ids, x.ID+"-help")
	}
	return strings.Join(ids, " ")
}
