package program

import (
	"fmt"
	"slices"
	"strconv"
	"strings"
)

// Sentence says what is wrong and what would do, as in `items[3].every: found "1 year"; write an
// ISO 8601 duration such as P1Y or P6M`. A problem of the form "not a …" goes without saying where
// what was found and what would be accepted stand beside each other.
func (f Fault) Sentence() string {
	var parts []string
	if f.Found != "" {
		parts = append(parts, "found "+f.Found)
	}
	implied := f.Found != "" && f.Accepted != "" && strings.HasPrefix(f.Problem, "not ")
	if f.Problem != "" && !implied {
		parts = append(parts, f.Problem)
	}
	if f.Accepted != "" {
		parts = append(parts, f.Accepted)
	}
	text := strings.Join(parts, "; ")
	if f.Path == "" {
		return text
	}
	return f.Path + ": " + text
}

// Error lists every fault, one a line, each with its line and column.
func (fs Faults) Error() string {
	lines := make([]string, len(fs))
	for i, f := range fs {
		lines[i] = fmt.Sprintf("line %d, column %d: %s", f.Line, f.Column, f.Sentence())
	}
	return strings.Join(lines, "\n")
}

// sorted gives the faults in order of line and column; those of one place keep their order.
func (fs Faults) sorted() Faults {
	slices.SortStableFunc(fs, func(a, b Fault) int {
		if a.Line != b.Line {
			return a.Line - b.Line
		}
		return a.Column - b.Column
	})
	return fs
}

// shown quotes what stands in the file, cut to a readable length.
func shown(s string) string {
	const most = 60
	if r := []rune(s); len(r) > most {
		s = string(r[:most]) + "…"
	}
	return strconv.Quote(s)
}

// anyOf writes the alternatives as "a, b or c"; a long list is cut.
func anyOf(names []string) string {
	const most = 24
	if len(names) > most {
		return strings.Join(names[:most], ", ") + " …"
	}
	if len(names) < 2 {
		return strings.Join(names, "")
	}
	last := len(names) - 1
	return strings.Join(names[:last], ", ") + " or " + names[last]
}

// suggest says what to write in place of a name that is none of those known: the one that is
// probably meant, and all of them.
func suggest(name string, known []string) string {
	if len(known) == 0 {
		return "none is declared"
	}
	all := "write " + anyOf(known)
	if near, ok := nearest(name, known); ok && len(known) > 1 {
		return "did you mean " + near + "? " + all
	}
	return all
}

// nearest finds the known name that a slip of the fingers would turn into name.
func nearest(name string, known []string) (string, bool) {
	if name == "" || len(name) > 100 {
		return "", false
	}
	best, least := "", max(1, len([]rune(name))/3)+1
	for _, k := range known {
		if d := distance(strings.ToLower(name), strings.ToLower(k)); d < least {
			best, least = k, d
		}
	}
	return best, best != ""
}

// distance is the optimal string alignment distance: the least number of letters put in, left
// out, changed or swapped with their neighbour that turns a into b (Damerau 1964).
func distance(a, b string) int {
	s, t := []rune(a), []rune(b)
	rows := make([][]int, len(s)+1)
	for i := range rows {
		rows[i] = make([]int, len(t)+1)
		rows[i][0] = i
	}
	for j := range t {
		rows[0][j+1] = j + 1
	}
	for i := range s {
		for j := range t {
			cost := 1
			if s[i] == t[j] {
				cost = 0
			}
			d := min(rows[i][j+1]+1, rows[i+1][j]+1, rows[i][j]+cost)
			if i > 0 && j > 0 && s[i] == t[j-1] && s[i-1] == t[j] {
				d = min(d, rows[i-1][j-1]+1)
			}
			rows[i+1][j+1] = d
		}
	}
	return rows[len(s)][len(t)]
}
