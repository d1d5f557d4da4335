package starter

import (
	"bytes"
	"fmt"
	"maps"
	"regexp"
	"slices"
	"strings"

	"lodebook/models/program"
)

// Adopt adds the items of a group to a site's program file, with the sheets, fixture kinds, facts,
// events, documents and posts that they need and that the file does not have yet. Everything that
// stands in the file stays as it is, items of the same code too; the text is added to and not
// written anew. The result has no faults. The error is a program.Faults where the file has some,
// and otherwise says why the group does not fit the site.
func Adopt(src []byte, group string) ([]byte, error) {
	site, err := program.Parse(src)
	if err != nil {
		return nil, err
	}
	l, err := whole()
	if err != nil {
		return nil, err
	}
	i := slices.IndexFunc(groups, func(g Group) bool { return g.Code == group })
	if i < 0 {
		return nil, fmt.Errorf("there is no group %q; the groups are %s", group, strings.Join(groupCodes(), ", "))
	}
	n := l.needs(l.items(groups[i]), site)
	if len(n.items) == 0 {
		return bytes.Clone(src), nil
	}
	out, err := l.add(src, site, n)
	if err != nil {
		return nil, fmt.Errorf("the group %s does not fit this program: %w", groups[i].Title, err)
	}
	return out, nil
}

func groupCodes() []string {
	out := make([]string, len(groups))
	for i, g := range groups {
		out[i] = g.Code
	}
	return out
}

// need is what a site's file lacks for the items that it is to get.
type need struct {
	items, sheets, kinds, events, documents, posts []string
	facts                                          map[string][]string // fixture kind, or empty for people -> facts
}

// needs finds what the site lacks, in the order in which the starter has it.
func (l *library) needs(items []*program.Item, site *program.Program) need {
	n := need{facts: map[string][]string{}}
	for _, it := range items {
		if _, has := site.Item(it.Code); has {
			continue
		}
		n.items = append(n.items, it.Code)
		l.records(&n, it, site)
		l.subjects(&n, it, site)
		for _, code := range it.Cadence.After {
			e, _ := l.program.Event(code)
			l.kind(&n, e.Of, site)
			_, has := site.Event(code)
			want(&n.events, code, has)
		}
		if post, ok := l.program.Post(it.Owner); ok {
			_, has := site.Post(post.Code)
			want(&n.posts, post.Code, has)
		}
	}
	return n
}

func want(list *[]string, code string, has bool) {
	if !has && !slices.Contains(*list, code) {
		*list = append(*list, code)
	}
}

// records adds the sheets, documents and posts that an item's records name.
func (l *library) records(n *need, it *program.Item, site *program.Program) {
	for _, record := range it.Records {
		if s, ok := l.program.SheetFor(record); ok {
			_, has := site.Sheet(s.Code)
			want(&n.sheets, s.Code, has)
			l.kind(n, s.For, site)
		}
		_, code, _ := strings.Cut(record, "/")
		if _, ok := l.program.Document(code); ok {
			_, has := site.Document(code)
			want(&n.documents, code, has)
		}
		if _, ok := l.program.Post(code); ok {
			_, has := site.Post(code)
			want(&n.posts, code, has)
		}
	}
}

// subjects adds what an item is asked of: kinds with the facts that it reads, documents, posts.
func (l *library) subjects(n *need, it *program.Item, site *program.Program) {
	switch it.Asks {
	case program.AsksFixture:
		for _, kind := range it.When.Kinds() {
			l.kind(n, kind, site)
			k, _ := l.program.FixtureKind(kind)
			l.lacking(n, kind, k.Facts, it, site)
		}
	case program.AsksPerson:
		l.lacking(n, "", l.program.PersonFacts, it, site)
	case program.AsksDocument:
		for _, d := range l.program.Documents {
			_, has := site.Document(d.Code)
			if only := it.When.Codes(); only == nil || slices.Contains(only, d.Code) {
				want(&n.documents, d.Code, has)
			}
		}
	case program.AsksPost:
		for _, code := range it.When.Codes() {
			_, has := site.Post(code)
			want(&n.posts, code, has)
		}
	}
}

// kind adds a fixture kind.
func (l *library) kind(n *need, code string, site *program.Program) {
	if _, ok := l.program.FixtureKind(code); ok {
		_, has := site.FixtureKind(code)
		want(&n.kinds, code, has)
	}
}

// lacking adds the facts that an item reads and that a kind of the site's own, or its people, do
// not have. A kind that comes from the starter brings its facts along.
func (l *library) lacking(n *need, kind string, declared []program.Fact, it *program.Item, site *program.Program) {
	has := site.PersonFacts
	if kind != "" {
		k, ok := site.FixtureKind(kind)
		if !ok {
			return
		}
		has = k.Facts
	}
	for _, f := range declared {
		if !reads(it, f.Code) || slices.ContainsFunc(has, func(g program.Fact) bool { return g.Code == f.Code }) {
			continue
		}
		if !slices.Contains(n.facts[kind], f.Code) {
			n.facts[kind] = append(n.facts[kind], f.Code)
		}
	}
}

func reads(it *program.Item, fact string) bool {
	return it.When != nil && slices.Contains(it.When.Reads(), "facts."+fact) ||
		it.Cadence.Holds != nil && slices.Contains(it.Cadence.Holds.Reads(), "facts."+fact)
}

// add writes what is needed into the file and reads the result.
func (l *library) add(src []byte, site *program.Program, n need) ([]byte, error) {
	e, err := program.NewEditor(src)
	if err != nil {
		return nil, err
	}
	for _, kind := range slices.Sorted(maps.Keys(n.facts)) {
		if err := l.addFacts(e, kind, n.facts[kind]); err != nil {
			return nil, err
		}
	}
	fit := fitting{site: site}
	for _, list := range []struct {
		name  string
		codes []string
	}{
		{"posts", n.posts}, {"fixture_kinds", n.kinds}, {"events", n.events},
		{"documents", n.documents}, {"sheets", n.sheets}, {"items", n.items},
	} {
		pieces := make([]program.Piece, len(list.codes))
		for i, code := range list.codes {
			p, err := fit.piece(l.pieces[list.name][code])
			if err != nil {
				return nil, err
			}
			pieces[i] = p
		}
		if err := e.Append(list.name, pieces...); err != nil {
			return nil, err
		}
	}
	out := e.Bytes()
	after, err := program.Parse(out)
	if err != nil {
		return nil, err
	}
	return out, kept(site, after)
}

func (l *library) addFacts(e *program.Editor, kind string, codes []string) error {
	declared, err := program.CutFacts(l.text, kind)
	if err != nil {
		return err
	}
	declared = slices.DeleteFunc(declared, func(f program.NewFact) bool { return !slices.Contains(codes, f.Code) })
	return e.AddFacts(kind, declared...)
}

// kept makes sure that what stood in the file still stands there, in its order.
func kept(before, after *program.Program) error {
	for i := range before.Items {
		if i >= len(after.Items) || after.Items[i].Code != before.Items[i].Code || after.Items[i].Title != before.Items[i].Title {
			return fmt.Errorf("item %s could not be kept in its place; add the items by hand", before.Items[i].Code)
		}
	}
	for i := range before.Sheets {
		if i >= len(after.Sheets) || after.Sheets[i].Code != before.Sheets[i].Code || len(after.Sheets[i].Fields) != len(before.Sheets[i].Fields) {
			return fmt.Errorf("sheet %s could not be kept in its place; add the items by hand", before.Sheets[i].Code)
		}
	}
	return nil
}

// fitting turns the starter's levels and zones into the site's own.
type fitting struct{ site *program.Program }

var (
	levelCode  = regexp.MustCompile(`\bL[12]\b`)
	guardsLine = regexp.MustCompile(`(?m)^ *guards: \[III, IV\]\n`)
)

const guards = "guards: [III, IV]"

func (f fitting) piece(p program.Piece) (program.Piece, error) {
	if levelCode.MatchString(p.Block) {
		names, err := f.levels()
		if err != nil {
			return p, err
		}
		rename := func(s string) string {
			return levelCode.ReplaceAllStringFunc(s, func(l string) string { return names[l] })
		}
		p.Block, p.Flow = rename(p.Block), rename(p.Flow)
	}
	if strings.Contains(p.Block, guards) {
		p.Block, p.Flow = f.guard(p.Block, p.Flow)
	}
	return p, nil
}

// levels gives the site's code for each of the starter's two levels: its own of that name, or its
// lower and higher where it has two.
func (f fitting) levels() (map[string]string, error) {
	_, one := f.site.Level("L1")
	_, two := f.site.Level("L2")
	switch {
	case one && two:
		return map[string]string{"L1": "L1", "L2": "L2"}, nil
	case len(f.site.Levels) == 2:
		return map[string]string{"L1": f.site.Levels[0].Code, "L2": f.site.Levels[1].Code}, nil
	}
	return nil, fmt.Errorf("it speaks of a lower and a higher level, and the program declares %d levels; declare two, or L1 and L2 among them", len(f.site.Levels))
}

// guard makes the items guard the site's restricted zones where they are not III and IV.
func (f fitting) guard(block, flow string) (string, string) {
	_, three := f.site.Zone("III")
	_, four := f.site.Zone("IV")
	if three && four {
		return block, flow
	}
	var zones []string
	for _, z := range f.site.Zones {
		if z.Restricted {
			zones = append(zones, z.Code)
		}
	}
	if len(zones) == 0 {
		return guardsLine.ReplaceAllString(block, ""), strings.Replace(flow, ", "+guards, "", 1)
	}
	own := "guards: [" + strings.Join(zones, ", ") + "]"
	return strings.Replace(block, guards, own, 1), strings.Replace(flow, guards, own, 1)
}
