package program

import (
	"fmt"
	"slices"
	"strconv"
	"strings"
)

// Cut takes the elements of a top-level list out of a file, to be added to another one. Comments
// directly above an element go with it. The error is a Faults where the file is not YAML.
func Cut(src []byte, name string) ([]Piece, error) {
	e, err := NewEditor(src)
	if err != nil {
		return nil, err
	}
	root, err := e.root()
	if err != nil {
		return nil, err
	}
	of, ok := root.entry(name)
	if !ok || of.value.kind != list {
		return nil, nil
	}
	var pieces []Piece
	for i, item := range of.value.items {
		p := Piece{Flow: flow(item)}
		if code, ok := item.entry("code"); ok {
			p.Code = code.value.text
		}
		p.Block = "- " + p.Flow + "\n"
		if !e.opens(of.value, '[') {
			last := e.lastLine(root, of)
			if i+1 < len(of.value.items) {
				last = of.value.items[i+1].line - 1
			}
			p.Block = e.block(item.line, last, of.value.col-1)
		}
		pieces = append(pieces, p)
	}
	return pieces, nil
}

// block copies the lines of a list's element, moved to the margin. Blank lines and comments behind
// it belong to the next element.
func (e *Editor) block(first, last, indent int) string {
	comment := func(line int) bool {
		t := strings.TrimSpace(e.lines[line-1].text)
		return t == "" || strings.HasPrefix(t, "#")
	}
	for last > first && comment(last) {
		last--
	}
	for first > 1 && strings.HasPrefix(strings.TrimSpace(e.lines[first-2].text), "#") {
		first--
	}
	var b strings.Builder
	for _, l := range e.lines[first-1 : last] {
		b.WriteString(strings.TrimPrefix(l.text, strings.Repeat(" ", indent)) + "\n")
	}
	return b.String()
}

// flow writes a tree in braces on one line.
func flow(n *node) string {
	var parts []string
	switch n.kind {
	case mapping:
		for _, e := range n.entries {
			parts = append(parts, flow(e.key)+": "+flow(e.value))
		}
		return "{" + strings.Join(parts, ", ") + "}"
	case list:
		for _, item := range n.items {
			parts = append(parts, flow(item))
		}
		return "[" + strings.Join(parts, ", ") + "]"
	case nothing, refused:
		return "null"
	}
	if n.style == plain && !strings.ContainsAny(n.text, ",[]{}#:\n\"'") && len(n.glued) == 0 {
		return n.text
	}
	return strconv.Quote(n.text)
}

// NewFact is a fact to be declared in a file.
type NewFact struct {
	Code   string
	Source string // its type, or what it is in braces
}

// CutFacts takes the declared facts out of a file: those of a fixture kind, or of people where
// kind is empty.
func CutFacts(src []byte, kind string) ([]NewFact, error) {
	e, err := NewEditor(src)
	if err != nil {
		return nil, err
	}
	root, err := e.root()
	if err != nil {
		return nil, err
	}
	_, of, ok := factsOf(root, kind)
	if !ok {
		return nil, nil
	}
	var facts []NewFact
	for _, x := range of.value.entries {
		facts = append(facts, NewFact{x.key.text, flow(x.value)})
	}
	return facts, nil
}

// factsOf finds where the facts of a fixture kind, or of people, are declared.
func factsOf(root *node, kind string) (parent *node, of entry, ok bool) {
	if kind == "" {
		of, ok = root.entry("person_facts")
		return root, of, ok
	}
	kinds, has := root.entry("fixture_kinds")
	if !has {
		return nil, entry{}, false
	}
	i := slices.IndexFunc(kinds.value.items, func(n *node) bool {
		code, ok := n.entry("code")
		return ok && code.value.text == kind
	})
	if i < 0 {
		return nil, entry{}, false
	}
	parent = kinds.value.items[i]
	of, ok = parent.entry("facts")
	return parent, of, ok
}

// AddFacts declares facts of a fixture kind that the file has, or of people where kind is empty.
func (e *Editor) AddFacts(kind string, facts ...NewFact) error {
	if len(facts) == 0 {
		return nil
	}
	root, err := e.root()
	if err != nil {
		return err
	}
	parent, of, ok := factsOf(root, kind)
	flows := make([]string, len(facts))
	for i, f := range facts {
		flows[i] = f.Code + ": " + f.Source
	}
	body := "{" + strings.Join(flows, ", ") + "}"
	switch {
	case parent == nil:
		return fmt.Errorf("no fixture kind %s is declared", kind)
	case !ok && kind == "":
		e.section(root, "person_facts", strings.Join(flows, "\n"))
	case !ok:
		return e.newFacts(parent, body)
	case of.value.kind == mapping && e.opens(of.value, '{'):
		line, col, err := e.closing(of.value)
		if err != nil {
			return err
		}
		e.insertFlow(line, col, len(of.value.entries) > 0, flows)
	case of.value.kind == mapping:
		e.insertLines(e.lastOf(of.value), of.value.col-1, strings.Join(flows, "\n"))
	case of.value.kind == nothing && !e.opens(parent, '{'):
		e.clearNull(of)
		e.insert(of.key.line, e.behindColon(of), " "+body)
	default:
		return fmt.Errorf("line %d: the facts of %s cannot be added to; write them as facts: {code: type}", of.key.line, kind)
	}
	return nil
}

// newFacts gives a fixture kind its first facts, behind its code.
func (e *Editor) newFacts(kind *node, body string) error {
	if e.opens(kind, '{') {
		line, col, err := e.closing(kind)
		if err != nil {
			return err
		}
		e.insertFlow(line, col, true, []string{"facts: " + body})
		return nil
	}
	code, _ := kind.entry("code")
	e.insertLines(code.value.line, kind.col-1, "facts: "+body)
	return nil
}

// lastOf is the last line of a block mapping: what follows it is indented less.
func (e *Editor) lastOf(m *node) int {
	last := m.entries[len(m.entries)-1].key.line
	for line := last + 1; line <= len(e.lines); line++ {
		t := e.lines[line-1].text
		if strings.TrimSpace(t) == "" {
			continue
		}
		if indent := len(t) - len(strings.TrimLeft(t, " ")); indent < m.col {
			break
		}
		last = line
	}
	return last
}
