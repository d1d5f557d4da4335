package table

import (
	"fmt"
	"regexp"
	"slices"
	"strings"
	"unicode/utf8"
)

// wanted is what Open was told about the table's columns.
type wanted struct{ known, required, facts []string }

// all lists the columns that a header may have.
func (w wanted) all() []string { return slices.Concat(w.known, w.facts) }

// find gives the column's own spelling for a name as it stands in a file. The table's columns go
// before facts.
func (w wanted) find(name string) (string, bool) {
	for _, c := range w.all() {
		if strings.EqualFold(clean(c), name) {
			return c, true
		}
	}
	return "", false
}

// header is a header row understood.
type header struct {
	names []string       // by position; "" for a column without a name
	index map[string]int // by name
}

// label names a column in a fault.
func (h header) label(i int) string {
	if i < len(h.names) && h.names[i] != "" {
		return h.names[i]
	}
	return fmt.Sprintf("column %d", i+1)
}

// matchHeader finds each cell of a header row among the wanted columns.
func matchHeader(rec record, want wanted) (header, []Fault) {
	h := header{names: make([]string, len(rec.cells)), index: map[string]int{}}
	var faults []Fault
	add := func(column, value, problem, accepted string) {
		faults = append(faults, Fault{rec.line, column, shorten(value), problem, accepted})
	}
	for _, cf := range rec.faults {
		add("", cf.value, cf.problem, cf.accepted)
	}
	for i, cell := range rec.cells {
		cell = clean(cell)
		name, known := want.find(cell)
		at, twice := h.index[name]
		switch {
		case cell == "":
		case !known:
			add(shorten(cell), cell, "is not a column of this table", suggest(cell, want, rec.cells))
		case twice:
			add(name, cell, fmt.Sprintf("stands twice in the header, in columns %d and %d", at+1, i+1), "each column once")
		default:
			h.names[i], h.index[name] = name, i
		}
	}
	if len(h.index) == 0 && len(rec.faults) == 0 {
		return h, []Fault{noHeader(rec, want)}
	}
	for _, c := range want.required {
		if _, ok := h.index[c]; !ok {
			add(c, "", "this column is missing", "a header row with "+strings.Join(want.required, ", "))
		}
	}
	return h, faults
}

// noHeader is the one fault of a first row in which no column was recognised.
func noHeader(rec record, want wanted) Fault {
	return Fault{
		Line:     rec.line,
		Value:    shorten(strings.Join(rec.cells, " | ")),
		Problem:  "the first row names no column of this table",
		Accepted: "a header row with some of " + strings.Join(want.all(), ", ") + "; separated by commas, semicolons or tabs",
	}
}

// suggest says what would do in place of an unknown column: the nearest one that the header does
// not have yet, and all of them.
func suggest(cell string, want wanted, cells []string) string {
	best, bestAt := "", 4
	for _, c := range want.all() {
		if slices.ContainsFunc(cells, func(x string) bool { return strings.EqualFold(clean(x), c) }) {
			continue
		}
		a, b := letters(cell), letters(c)
		if d := editDistance(a, b); d < bestAt && d*3 <= max(len(a), len(b)) {
			best, bestAt = c, d
		}
	}
	list := "one of " + strings.Join(want.all(), ", ")
	if best == "" {
		return list
	}
	return fmt.Sprintf("did you mean %q? %s", best, list)
}

// letters keeps what two spellings of a name are compared by.
func letters(s string) []rune {
	return []rune(strings.Map(func(c rune) rune {
		if strings.ContainsRune(" _-.\u00a0", c) {
			return -1
		}
		return c
	}, strings.ToLower(s)))
}

// editDistance counts the insertions, deletions, replacements and swaps of neighbours that turn a
// into b (the optimal string alignment distance).
func editDistance(a, b []rune) int {
	before, last := make([]int, len(b)+1), make([]int, len(b)+1)
	for j := range last {
		last[j] = j
	}
	for i := 1; i <= len(a); i++ {
		row := make([]int, len(b)+1)
		row[0] = i
		for j := 1; j <= len(b); j++ {
			cost := 1
			if a[i-1] == b[j-1] {
				cost = 0
			}
			row[j] = min(last[j]+1, row[j-1]+1, last[j-1]+cost)
			if i > 1 && j > 1 && a[i-1] == b[j-2] && a[i-2] == b[j-1] {
				row[j] = min(row[j], before[j-2]+1)
			}
		}
		before, last = last, row
	}
	return last[len(b)]
}

// shortForm is how a spreadsheet writes a long number that it has cut: 1.23457E+11.
var shortForm = regexp.MustCompile(`^-?\d([.,]\d+)?E\+\d{2,3}$`)

// errorValues are what a spreadsheet leaves in a cell that it could not work out
// (ECMA-376 part 1, §18.17.3, and the later ones that start with #SPILL!).
var errorValues = map[string]bool{
	"#NULL!": true, "#DIV/0!": true, "#VALUE!": true, "#REF!": true, "#NAME?": true, "#NUM!": true,
	"#N/A": true, "#GETTING_DATA": true, "#SPILL!": true, "#CALC!": true, "#FIELD!": true, "#BLOCKED!": true,
}

// unfit finds what makes a cell unusable in whatever column it stands.
func (h header) unfit(i int, cell string) (problem, accepted string) {
	switch {
	case cell == "":
	case i >= len(h.names) || h.names[i] == "":
		return "stands in a column that has no name", "a name for the column in the header row, or an empty cell"
	case len(cell) > maxCellChars && utf8.RuneCountInString(cell) > maxCellChars:
		return longCell, fmt.Sprintf("at most %d characters", maxCellChars)
	case errorValues[cell]:
		return "is a spreadsheet's error, not a value", "the value itself, or an empty cell"
	case shortForm.MatchString(cell):
		return "is a number that a spreadsheet has shortened: its last digits are gone", "the number with all its digits"
	}
	return "", ""
}

const longCell = "is longer than a cell can be"
