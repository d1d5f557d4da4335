package web

import (
	"slices"

	"lodebook/models/civil"
)

// asOf is the date box of a page of standings, and the notice on another day than today.
type asOf struct {
	Day    string // in the box
	Words  string // the day as a person reads it
	Past   bool
	Future bool
	Path   string   // where the box leads
	Keep   []hidden // what else the address says
	Back   string   // the same page today
}

// hidden is a field that a form carries along.
type hidden struct{ Name, Value string }

// asOf makes the date box of the page that is shown.
func (v *visit) asOf() *asOf {
	a := &asOf{Day: v.day().String(), Words: longDay(v.day(), v.today()), Past: v.day() < v.today(), Future: v.day() > v.today(), Path: v.c.Request.URL.EscapedPath()}
	pairs := []string{}
	for _, k := range v.keys("on", "page") {
		for _, value := range v.c.Request.URL.Query()[k] {
			a.Keep = append(a.Keep, hidden{k, value})
			pairs = append(pairs, k, value)
		}
	}
	a.Back = with(a.Path, pairs...)
	return a
}

// keys are the names of the address's query but those given, in order.
func (v *visit) keys(but ...string) []string {
	var out []string
	for k := range v.c.Request.URL.Query() {
		if !slices.Contains(but, k) {
			out = append(out, k)
		}
	}
	slices.Sort(out)
	return out
}

// onQuery is the day as a link carries it: empty for today.
func onQuery(on *civil.Day) string {
	if on == nil {
		return ""
	}
	return on.String()
}
