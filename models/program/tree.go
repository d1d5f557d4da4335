package program

import (
	"errors"
	"fmt"
	"strings"

	"github.com/goccy/go-yaml/ast"
	"github.com/goccy/go-yaml/lexer"
	"github.com/goccy/go-yaml/parser"
	"github.com/goccy/go-yaml/token"
)

// The tree is what the rest of the room reads: the YAML parser's syntax tree, reduced to lists,
// mappings and scalars whose text is the one that stands in the file.

type nodeKind uint8

const (
	scalar  nodeKind = iota
	list             // items
	mapping          // entries
	nothing          // a key without a value, or null
	refused          // already told as a fault: whoever reads it keeps still
)

type style uint8

const (
	plain style = iota
	singleQuoted
	doubleQuoted
	block
)

type node struct {
	kind      nodeKind
	style     style
	text      string // scalars: without quotes and escapes, otherwise as written
	line, col int    // from 1; columns count characters
	items     []*node
	entries   []entry
	glued     []*node // what follows a comma in a text without quotes inside braces
}

type entry struct{ key, value *node }

// Bounds for the YAML parser, which recurses: nothing in a program nests deeper than six.
const (
	maxDepth     = 40
	maxEntryCol  = 200
	maxRefusals  = 100
	maxGlued     = 50
	maxTokens    = 150_000 // some three thousand items; the parser's time grows faster than they do
	problemDepth = "nested deeper than anything in a program"
)

// grow parses the text into a tree. Faults without a tree mean that nothing could be read.
func grow(text string) (root *node, faults Faults) {
	// The parser is not ours: should it panic on some text, that text is refused like any other.
	defer func() {
		if cause := recover(); cause != nil {
			root, faults = nil, Faults{{Line: 1, Column: 1, Problem: "the file is not YAML that can be read", Accepted: "write YAML 1.2"}}
		}
	}()
	tokens := lexer.Tokenize(text)
	faults, readable := screen(tokens)
	if !readable {
		return nil, faults
	}
	file, err := parser.Parse(tokens, 0, parser.AllowDuplicateMapKey())
	if err != nil && len(faults) > 0 {
		return nil, faults // the parser stumbles over what was refused
	}
	if err != nil {
		return nil, Faults{syntaxFault(err)}
	}
	body, more := oneDocument(file)
	faults = append(faults, more...)
	if body == nil {
		return nil, faults
	}
	g := grower{}
	root = g.node(body)
	return root, append(faults, g.faults...)
}

// refusals are the parts of YAML that a program does without.
var refusals = map[token.Type][2]string{
	token.AnchorType:     {"an anchor", "write the value out; put a text that begins with & in quotes"},
	token.AliasType:      {"an alias", "write the value out; put a text that begins with * in quotes"},
	token.MergeKeyType:   {"a merge key", "write the keys out"},
	token.TagType:        {"a tag", "leave it out; put a text that begins with ! in quotes"},
	token.DirectiveType:  {"a directive", "leave it out"},
	token.MappingKeyType: {"an explicit key", "write key: value"},
}

// screen looks for what is refused before the parser sees it. readable is false where the parser
// had better not.
func screen(tokens token.Tokens) (faults Faults, readable bool) {
	if len(tokens) > maxTokens {
		return Faults{{Line: 1, Column: 1, Found: fmt.Sprintf("%d pieces of YAML", len(tokens)), Problem: "more than any program needs", Accepted: fmt.Sprintf("write at most %d", maxTokens)}}, false
	}
	depth, readable := 0, true
	for _, t := range tokens {
		if t.Type == token.DirectiveType || t.Type == token.MappingKeyType {
			readable = false
		}
		if words, ok := refusals[t.Type]; ok {
			faults = append(faults, Fault{Line: t.Position.Line, Column: t.Position.Column, Found: words[0], Problem: "a program does without it", Accepted: words[1]})
		}
		switch t.Type {
		case token.SequenceStartType, token.MappingStartType:
			depth++
		case token.SequenceEndType, token.MappingEndType:
			depth--
		}
		if depth > maxDepth || t.Type == token.SequenceEntryType && t.Position.Column > maxEntryCol {
			return append(faults, Fault{Line: t.Position.Line, Column: t.Position.Column, Found: shown(t.Value), Problem: problemDepth, Accepted: "write it flatter"}), false
		}
	}
	return faults, readable && len(faults) <= maxRefusals
}

// syntaxFault places the parser's one error.
func syntaxFault(err error) Fault {
	f := Fault{Line: 1, Column: 1, Problem: "this is not YAML", Accepted: "write YAML 1.2"}
	var placed interface {
		GetMessage() string
		GetToken() *token.Token
	}
	if !errors.As(err, &placed) {
		return f
	}
	f.Problem = "this is not YAML: " + placed.GetMessage()
	t := placed.GetToken()
	if t == nil || t.Position == nil {
		return f
	}
	f.Line, f.Column = max(t.Position.Line, 1), max(t.Position.Column, 1)
	if first, _, _ := strings.Cut(strings.TrimSpace(t.Origin), "\n"); first != "" {
		f.Found = shown(first)
	}
	if strings.Contains(placed.GetMessage(), "\t") || strings.Contains(placed.GetMessage(), "tab character") {
		f.Found, f.Problem, f.Accepted = "a tab", "YAML is indented with spaces only", "put spaces in its place"
	}
	return f
}

// oneDocument gives the body of the only document, and a fault for each further one.
func oneDocument(file *ast.File) (ast.Node, Faults) {
	var body ast.Node
	var faults Faults
	for _, doc := range file.Docs {
		switch {
		case doc.Body == nil || doc.Body.Type() == ast.CommentGroupType:
		case body == nil:
			body = doc.Body
		default:
			t := doc.Body.GetToken()
			if doc.Start != nil {
				t = doc.Start
			}
			faults = append(faults, Fault{Line: t.Position.Line, Column: t.Position.Column, Found: "another document", Problem: "a file holds one document, the program of one site", Accepted: "give each site a file of its own"})
		}
	}
	if body == nil {
		faults = append(faults, Fault{Line: 1, Column: 1, Problem: "the file holds nothing but comments", Accepted: "write a program that begins with lodebook: 1"})
	}
	return body, faults
}

type grower struct{ faults Faults }

func (g *grower) node(n ast.Node) *node {
	switch n := n.(type) {
	case *ast.MappingNode:
		return g.mapping(n)
	case *ast.MappingValueNode:
		one := &node{kind: mapping, entries: g.entry(n)}
		return placedAtFirst(one, n.GetToken())
	case *ast.SequenceNode:
		seq := at(n.Start, &node{kind: list})
		for _, v := range n.Values {
			item := g.node(v)
			// Behind a dash with nothing behind it, at the margin, the parser reads on into the
			// keys that follow the list.
			if !n.IsFlowStyle && item.kind == mapping && item.col <= seq.col {
				g.faults = append(g.faults, Fault{Line: item.line, Column: item.col, Found: item.describe(), Problem: "the dash before it has nothing behind it", Accepted: "write an entry behind the dash, or take it away"})
				item.kind = refused
			}
			seq.items = append(seq.items, item)
		}
		return seq
	case *ast.LiteralNode:
		return at(n.Start, &node{kind: scalar, style: block, text: n.Value.Value})
	case *ast.NullNode:
		return at(n.GetToken(), &node{kind: nothing})
	case *ast.AnchorNode:
		return g.node(n.Value)
	case *ast.TagNode:
		return g.node(n.Value)
	case nil:
		return &node{kind: refused, line: 1, col: 1}
	case *ast.AliasNode, *ast.MergeKeyNode, *ast.MappingKeyNode:
		return at(n.GetToken(), &node{kind: refused})
	}
	return g.scalar(n.GetToken())
}

func (g *grower) mapping(n *ast.MappingNode) *node {
	m := &node{kind: mapping}
	for _, v := range n.Values {
		if !n.IsFlowStyle || !glue(m, v) {
			m.entries = append(m.entries, g.entry(v)...)
		}
	}
	if n.IsFlowStyle || len(m.entries) == 0 {
		return at(n.Start, m)
	}
	return placedAtFirst(m, n.GetToken())
}

// glue takes back a comma that stands in a text without quotes: in {label: Free of nests, water and
// ice, type: yesno} YAML sees a key "water and ice" without a colon or a value. No key here is
// ever written so, and the text is what was meant.
func glue(m *node, v *ast.MappingValueNode) bool {
	if v.Start == nil || v.Start.Type == token.MappingValueType || len(m.entries) == 0 {
		return false
	}
	last, key := m.entries[len(m.entries)-1].value, v.Key.GetToken()
	if len(last.glued) == maxGlued || last.kind != scalar || last.style != plain || key.Type == token.SingleQuoteType || key.Type == token.DoubleQuoteType {
		return false
	}
	last.text += ", " + key.Value
	last.glued = append(last.glued, at(key, &node{kind: scalar, text: key.Value}))
	return true
}

// entry is one key and its value; none where the key was refused before.
func (g *grower) entry(v *ast.MappingValueNode) []entry {
	key := g.node(v.Key)
	if key.kind == refused {
		return nil
	}
	if key.kind != scalar {
		key = &node{kind: scalar, text: v.Key.GetToken().Value, line: key.line, col: key.col}
	}
	return []entry{{key, g.node(v.Value)}}
}

// scalar takes the token's own text, whatever number, date or truth value YAML sees in it.
func (g *grower) scalar(t *token.Token) *node {
	n := at(t, &node{kind: scalar, text: t.Value})
	switch t.Type {
	case token.SingleQuoteType:
		n.style = singleQuoted
	case token.DoubleQuoteType:
		n.style = doubleQuoted
	default:
		if strings.Contains(n.text, ": ") || strings.HasSuffix(n.text, ":") {
			g.faults = append(g.faults, Fault{Line: n.line, Column: n.col, Found: shown(n.text), Problem: "a colon in a text without quotes", Accepted: "put the text in quotes, or a comma between two keys"})
			n.kind = refused
		}
	}
	return n
}

// at places a node where its token stands.
func at(t *token.Token, n *node) *node {
	n.line, n.col = 1, 1
	if t != nil && t.Position != nil {
		n.line, n.col = max(t.Position.Line, 1), max(t.Position.Column, 1)
	}
	return n
}

// placedAtFirst places a block mapping at its first key; the parser has it at the first colon.
func placedAtFirst(m *node, t *token.Token) *node {
	if len(m.entries) == 0 {
		return at(t, m)
	}
	m.line, m.col = m.entries[0].key.line, m.entries[0].key.col
	return m
}

// describe says what stands at a node, for a fault.
func (n *node) describe() string {
	switch n.kind {
	case list:
		return "a list"
	case mapping:
		return "a mapping"
	case nothing:
		return "nothing"
	}
	return shown(n.text)
}
