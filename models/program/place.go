package program

import "strings"

// inside finds the place in the file of a character of a scalar's text. Quotes, escapes and folded
// lines make the two differ; where they cannot be matched, the scalar's own place is given.
func (r *reader) inside(n *node, offset int) (line, col int) {
	a := aligner{lines: r.lines, text: []rune(n.text), style: n.style, line: n.line - 1, col: n.col - 1}
	places, ok := a.align()
	if !ok || offset > len(places) {
		return n.line, n.col
	}
	if offset == len(places) {
		return a.line + 1, a.col + 1
	}
	return places[offset].line + 1, places[offset].col + 1
}

type place struct{ line, col int } // from 0

// aligner walks a scalar's text and the file side by side.
type aligner struct {
	lines     [][]rune
	text      []rune
	style     style
	line, col int // the place in the file, from 0
	places    []place
}

// align gives the place of each character of the text; ok is false where the two do not match.
func (a *aligner) align() (places []place, ok bool) {
	switch a.style {
	case block:
		a.line, a.col = a.line+1, 0
		a.skipBlanks()
	case singleQuoted, doubleQuoted:
		a.col++
	}
	for len(a.places) < len(a.text) {
		if !a.step() {
			return nil, false
		}
	}
	return a.places, true
}

// step matches one character, or one line break with the blanks around it.
func (a *aligner) step() bool {
	if a.line >= len(a.lines) {
		// A block's last line break may be the end of the file.
		a.take()
		return a.style == block
	}
	rest := a.lines[a.line][min(a.col, len(a.lines[a.line])):]
	if strings.TrimSpace(string(rest)) == "" {
		return a.skipBlanks()
	}
	width := 1
	switch c := a.text[len(a.places)]; {
	case a.style == doubleQuoted && rest[0] == '\\':
		if width = escapeWidth(rest); width == len(rest) && width == 1 {
			a.col++ // an escaped line break: nothing of it is in the text
			return true
		}
	case a.style == singleQuoted && rest[0] == '\'':
		width = 2
	case rest[0] != c:
		return false
	}
	if width > len(rest) {
		return false
	}
	a.take()
	a.col += width
	return true
}

func (a *aligner) take() { a.places = append(a.places, place{a.line, a.col}) }

// skipBlanks passes over a line break and every blank around it, in the file and in the text: how
// many of them YAML keeps depends on the style.
func (a *aligner) skipBlanks() bool {
	for len(a.places) < len(a.text) && (a.text[len(a.places)] == ' ' || a.text[len(a.places)] == '\n') {
		a.take()
	}
	for ; a.line < len(a.lines); a.line, a.col = a.line+1, 0 {
		line := a.lines[a.line]
		for a.col < len(line) && (line[a.col] == ' ' || line[a.col] == '\t') {
			a.col++
		}
		if a.col < len(line) {
			return true
		}
	}
	return true
}

// escapeWidth is the length of an escape of a double-quoted scalar (YAML 1.2, section 5.7).
func escapeWidth(rest []rune) int {
	if len(rest) < 2 {
		return 1
	}
	switch rest[1] {
	case 'x':
		return 4
	case 'u':
		return 6
	case 'U':
		return 10
	}
	return 2
}
