package program

import (
	"fmt"
	"regexp"
	"slices"
	"strings"

	"github.com/goccy/go-yaml/lexer"
	"github.com/goccy/go-yaml/token"

	"lodebook/models/civil"
)

// Editor changes the text of a program file and leaves everything else in it as it stands:
// comments, order, quotes and line ends.
type Editor struct {
	mark  string // a byte-order mark, or empty
	eol   string // of the first line
	lines []textLine
}

// textLine is one line and what ends it.
type textLine struct{ text, end string }

var lineEnds = regexp.MustCompile("\r\n|\r|\n")

// NewEditor opens the text of a program file. The error is a Faults where it cannot be read as
// YAML; whether it is a program without faults is for Parse to say.
func NewEditor(src []byte) (*Editor, error) {
	e := &Editor{eol: "\n"}
	text, marked := strings.CutPrefix(string(src), string(utf8Mark))
	if marked {
		e.mark = string(utf8Mark)
	}
	from := 0
	for _, at := range lineEnds.FindAllStringIndex(text, -1) {
		e.lines = append(e.lines, textLine{text[from:at[0]], text[at[0]:at[1]]})
		from = at[1]
	}
	if from < len(text) {
		e.lines = append(e.lines, textLine{text[from:], ""})
	}
	if len(e.lines) > 0 && e.lines[0].end != "" {
		e.eol = e.lines[0].end
	}
	_, err := e.root()
	return e, err
}

// Bytes is the text as it stands now.
func (e *Editor) Bytes() []byte {
	var b strings.Builder
	b.WriteString(e.mark)
	for _, l := range e.lines {
		b.WriteString(l.text + l.end)
	}
	return []byte(b.String())
}

// root reads the text as it stands now.
func (e *Editor) root() (*node, error) {
	text, faults := cleaned(e.Bytes())
	if len(faults) > 0 {
		return nil, faults.sorted()
	}
	root, faults := grow(text)
	if len(faults) > 0 {
		return nil, faults.sorted()
	}
	if root.kind != mapping {
		return nil, Faults{{Line: root.line, Column: root.col, Found: root.describe(), Problem: "not a program", Accepted: "write a program that begins with lodebook: 1"}}
	}
	if e.opens(root, '{') {
		return nil, Faults{{Line: root.line, Column: root.col, Found: "{", Problem: "a program in braces cannot be added to", Accepted: "write its keys on lines of their own"}}
	}
	return root, nil
}

// opens tells whether the text at a node begins with the bracket.
func (e *Editor) opens(n *node, bracket rune) bool {
	line := []rune(e.lines[n.line-1].text)
	return n.col <= len(line) && line[n.col-1] == bracket
}

func (n *node) entry(key string) (entry, bool) {
	i := slices.IndexFunc(n.entries, func(x entry) bool { return x.key.text == key })
	if i < 0 {
		return entry{}, false
	}
	return n.entries[i], true
}

// insert puts text into a line, before the column (from 1).
func (e *Editor) insert(line, col int, text string) {
	r := []rune(e.lines[line-1].text)
	at := min(col-1, len(r))
	e.lines[line-1].text = string(r[:at]) + text + string(r[at:])
}

// insertLines puts whole lines behind a line (from 1; 0 is the top), indented.
func (e *Editor) insertLines(behind, indent int, text string) {
	var added []textLine
	for line := range strings.SplitSeq(strings.TrimSuffix(text, "\n"), "\n") {
		if line != "" {
			line = strings.Repeat(" ", indent) + line
		}
		added = append(added, textLine{line, e.eol})
	}
	if behind > 0 && e.lines[behind-1].end == "" {
		e.lines[behind-1].end = e.eol
	}
	e.lines = slices.Insert(e.lines, behind, added...)
}

// closing finds the bracket that closes the one at a node.
func (e *Editor) closing(n *node) (line, col int, err error) {
	text, _ := cleaned(e.Bytes())
	depth := 0
	for _, t := range lexer.Tokenize(text) {
		if t.Position.Line < n.line || t.Position.Line == n.line && t.Position.Column < n.col {
			continue
		}
		switch t.Type {
		case token.SequenceStartType, token.MappingStartType:
			depth++
		case token.SequenceEndType, token.MappingEndType:
			depth--
		}
		if depth == 0 {
			return t.Position.Line, t.Position.Column, nil
		}
	}
	return 0, 0, fmt.Errorf("line %d, column %d: the bracket is never closed", n.line, n.col)
}

// lastLine is the last line of a top-level section that says anything: blank lines, comments at the
// margin and document ends after it belong to what follows.
func (e *Editor) lastLine(root *node, of entry) int {
	last := len(e.lines)
	for _, x := range root.entries {
		if x.key.line > of.key.line {
			last = min(last, x.key.line-1)
		}
	}
	for last > of.key.line {
		t := e.lines[last-1].text
		if strings.TrimSpace(t) != "" && !strings.HasPrefix(t, "#") && !strings.HasPrefix(t, "...") && !strings.HasPrefix(t, "---") {
			break
		}
		last--
	}
	return last
}

// Piece is one element of a top-level list, to be added to another file: as lines that begin with
// "- ", and in braces on one line.
type Piece struct{ Code, Block, Flow string }

// Append adds pieces to the end of a top-level list, which is made where the file has none.
func (e *Editor) Append(name string, pieces ...Piece) error {
	if len(pieces) == 0 {
		return nil
	}
	root, err := e.root()
	if err != nil {
		return err
	}
	of, ok := root.entry(name)
	if !ok {
		e.section(root, name, blocks(pieces))
		return nil
	}
	switch {
	case of.value.kind == nothing:
		e.clearNull(of)
		e.insertLines(e.lastLine(root, of), 2, blocks(pieces))
	case of.value.kind != list:
		return fmt.Errorf("%s is %s; write a list to add to it", name, of.value.describe())
	case e.opens(of.value, '['):
		return e.appendFlow(of.value, pieces)
	default:
		e.insertLines(e.lastLine(root, of), of.value.col-1, blocks(pieces))
	}
	return nil
}

func blocks(pieces []Piece) string {
	var b strings.Builder
	for _, p := range pieces {
		b.WriteString(strings.TrimSuffix(p.Block, "\n") + "\n")
	}
	return b.String()
}

// appendFlow adds to a list in brackets; an empty one on a single line becomes a list of lines.
func (e *Editor) appendFlow(of *node, pieces []Piece) error {
	line, col, err := e.closing(of)
	if err != nil {
		return err
	}
	if len(of.items) == 0 && line == of.line {
		r := []rune(e.lines[line-1].text)
		e.lines[line-1].text = strings.TrimRight(string(r[:of.col-1]), " ") + string(r[col:])
		e.insertLines(line, 2, blocks(pieces))
		return nil
	}
	flows := make([]string, len(pieces))
	for i, p := range pieces {
		flows[i] = p.Flow
	}
	e.insertFlow(line, col, len(of.items) > 0, flows)
	return nil
}

// insertFlow puts elements before a closing bracket.
func (e *Editor) insertFlow(line, col int, follows bool, flows []string) {
	text := strings.Join(flows, ", ")
	before := strings.TrimSpace(string([]rune(e.lines[line-1].text)[:col-1]))
	switch {
	case strings.HasSuffix(before, ","):
		text = " " + text
	case follows:
		text = ", " + text
	}
	e.insert(line, col, text)
}

// clearNull takes away a null that stands as a section's value.
func (e *Editor) clearNull(of entry) {
	line := &e.lines[of.key.line-1]
	head, rest, _ := strings.Cut(line.text, ":")
	for _, word := range []string{"~", "null", "Null", "NULL"} {
		if after, ok := strings.CutPrefix(strings.TrimLeft(rest, " "), word); ok {
			line.text = head + ":" + after
			return
		}
	}
}

// section adds a top-level section: before the items, which stay last, with the comments that
// stand directly above them.
func (e *Editor) section(root *node, key, body string) {
	behind := len(e.lines)
	if items, ok := root.entry("items"); ok {
		behind = items.key.line - 1
		for behind > 0 && strings.HasPrefix(e.lines[behind-1].text, "#") {
			behind--
		}
	} else {
		for behind > 0 && (strings.HasPrefix(e.lines[behind-1].text, "...") || strings.TrimSpace(e.lines[behind-1].text) == "") {
			behind--
		}
	}
	text := key + ":\n" + indented(body)
	if behind > 0 && behind < len(e.lines) && strings.TrimSpace(e.lines[behind-1].text) == "" {
		text += "\n" // sections of this file stand apart
	}
	e.insertLines(behind, 0, text)
}

func indented(body string) string {
	var b strings.Builder
	for line := range strings.SplitSeq(strings.TrimSuffix(body, "\n"), "\n") {
		if line != "" {
			line = "  " + line
		}
		b.WriteString(line + "\n")
	}
	return b.String()
}

// SetInForceFrom gives the file the day from which its version is judged, in place of one that it
// has. The error is a Faults where the file is not YAML.
func SetInForceFrom(src []byte, day civil.Day) ([]byte, error) {
	e, err := NewEditor(src)
	if err != nil {
		return nil, err
	}
	root, err := e.root()
	if err != nil {
		return nil, err
	}
	const key = "in_force_from"
	of, ok := root.entry(key)
	switch {
	case !ok:
		behind := root.line - 1
		if first, has := root.entry("lodebook"); has {
			behind = first.key.line
		}
		e.insertLines(behind, 0, key+": "+day.String())
	case of.value.kind == nothing:
		e.clearNull(of)
		e.insert(of.key.line, e.behindColon(of), " "+day.String())
	case !e.replace(of.value, day.String()):
		return nil, Faults{{Line: of.value.line, Column: of.value.col, Path: key, Found: of.value.describe(), Problem: "not a day on the line of its key", Accepted: "write a day as YYYY-MM-DD, such as 2025-01-31"}}
	}
	return e.Bytes(), nil
}

// behindColon is the column behind a key's colon.
func (e *Editor) behindColon(of entry) int {
	line := []rune(e.lines[of.key.line-1].text)
	return of.key.col + len([]rune(of.key.text)) + slices.Index(line[of.key.col-1+len([]rune(of.key.text)):], ':') + 1
}

// replace puts text in the place of a scalar; ok is false where the scalar does not stand there
// letter for letter.
func (e *Editor) replace(n *node, text string) (ok bool) {
	was := map[style]string{plain: n.text, singleQuoted: "'" + n.text + "'", doubleQuoted: `"` + n.text + `"`}[n.style]
	line := []rune(e.lines[n.line-1].text)
	rest, ok := strings.CutPrefix(string(line[min(n.col-1, len(line)):]), was)
	if n.kind != scalar || was == "" || !ok {
		return false
	}
	e.lines[n.line-1].text = string(line[:n.col-1]) + text + rest
	return true
}
