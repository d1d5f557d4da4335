package program

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"go.yaml.in/yaml/v3"
)

// The tree against another reader of YAML: the same structure, the same texts, the same places.
// Files that the two would read differently do not belong in the starter.
func TestTreeAgainstAnotherReader(t *testing.T) {
	sources := map[string]string{
		"every key": everyKey,
		"example":   strings.Replace(string(example(t)), "Outlet free of nests, debris and water", "'Outlet free of nests, debris and water'", 1),
		"styles":    "a: plain\n  over lines\nb: \"dou\\tble\n\n  é\"\nc: 'sin''gle'\nd: |\n  lit\n    eral\n\ne: >-\n  fol\n  ded\n\n  text\nf: [x, {y: 1}, [ ], ]\ng: {k: }\nh:\n- i: j\n  k: l\n- - m\n",
	}
	files, err := filepath.Glob("starter/*.yaml")
	if err != nil || len(files) == 0 {
		t.Fatal("no files of the starter", err)
	}
	groups, err := filepath.Glob("starter/groups/*.yaml")
	if err != nil || len(groups) == 0 {
		t.Fatal("no groups of the starter", err)
	}
	for _, name := range append(files, groups...) {
		src, err := os.ReadFile(name)
		if err != nil {
			t.Fatal(err)
		}
		sources[name] = string(src)
	}
	for name, src := range sources {
		var other yaml.Node
		if err := yaml.Unmarshal([]byte(src), &other); err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		agree(t, name, treeOf(t, src), other.Content[0])
	}
}

func agree(t *testing.T, path string, n *node, other *yaml.Node) {
	t.Helper()
	if n.kind == nothing && other.Tag == "!!null" {
		return
	}
	if n.line != other.Line || n.col != other.Column {
		t.Errorf("%s: %d:%d, the other reader says %d:%d", path, n.line, n.col, other.Line, other.Column)
	}
	switch {
	case n.kind == scalar && other.Kind == yaml.ScalarNode:
		if n.text != other.Value {
			t.Errorf("%s: %q, the other reader says %q", path, n.text, other.Value)
		}
	case n.kind == list && other.Kind == yaml.SequenceNode && len(n.items) == len(other.Content):
		for i := range n.items {
			agree(t, path, n.items[i], other.Content[i])
		}
	case n.kind == mapping && other.Kind == yaml.MappingNode && 2*len(n.entries) == len(other.Content):
		for i, e := range n.entries {
			agree(t, path+"."+e.key.text, e.key, other.Content[2*i])
			agree(t, path+"."+e.key.text, e.value, other.Content[2*i+1])
		}
	default:
		t.Errorf("%s: %s, the other reader has another structure", path, n.describe())
	}
}
