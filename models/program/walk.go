package program

import (
	"fmt"
	"math"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"lodebook/models/civil"
)

// reader walks the tree into a Program and gathers every fault on the way. It never stops early.
type reader struct {
	lines  [][]rune // the text, for places inside scalars
	faults Faults
	p      *Program
	scopes map[Asks]*scope
	asked  map[string]map[string]bool // object -> keys that were asked for
	kindOf map[string]kindFact        // fact of fixtures -> where it was declared first
}

func newReader(text string) *reader {
	r := &reader{p: &Program{}, scopes: map[Asks]*scope{}, asked: map[string]map[string]bool{}, kindOf: map[string]kindFact{}}
	for line := range strings.SplitSeq(text, "\n") {
		r.lines = append(r.lines, []rune(line))
	}
	return r
}

func (r *reader) fault(n *node, path, found, problem, accepted string) {
	if n.kind == refused {
		return
	}
	r.faults = append(r.faults, Fault{Line: n.line, Column: n.col, Path: path, Found: found, Problem: problem, Accepted: accepted})
}

// wrong tells that what stands at the node is not what is wanted.
func (r *reader) wrong(n *node, path, problem, accepted string) {
	r.fault(n, path, n.describe(), problem, accepted)
}

// object is a mapping whose keys are known. Every key is asked for by get; close then tells of
// those that nobody asked for.
type object struct {
	r      *reader
	n      *node
	path   string
	name   string // the object's name in the schema
	values map[string]entry
}

// object opens the mapping at n; ok is false where there is none.
func (r *reader) object(n *node, path, name string) (object, bool) {
	o := object{r: r, n: n, path: path, name: name, values: map[string]entry{}}
	if r.asked[name] == nil {
		r.asked[name] = map[string]bool{}
	}
	if n.kind != mapping {
		r.wrong(n, path, "not a mapping", "write keys and values, as in {code: A}")
		return o, false
	}
	r.gather(n, path, func(e entry) { o.values[e.key.text] = e })
	return o, true
}

// gather hands on each entry of a mapping whose key stands there for the first time, and tells of
// the others.
func (r *reader) gather(n *node, path string, each func(entry)) {
	if r.tooMany(n, path, len(n.entries)) {
		return
	}
	first := map[string]int{}
	for _, e := range n.entries {
		if line, twice := first[e.key.text]; twice {
			r.fault(e.key, join(path, e.key.text), shown(e.key.text), fmt.Sprintf("the key stands on line %d already", line), "keep one of the two")
			continue
		}
		first[e.key.text] = e.key.line
		each(e)
	}
}

func join(path, key string) string {
	const most = 60
	if r := []rune(key); len(r) > most {
		key = string(r[:most]) + "…"
	}
	if path == "" {
		return key
	}
	return path + "." + key
}

// get gives the value of a key, or nil where the file has none.
func (o object) get(key string) *node {
	o.r.asked[o.name][key] = true
	e, ok := o.values[key]
	if !ok {
		return nil
	}
	return e.value
}

// need is get for a key that must be there.
func (o object) need(key, accepted string) *node {
	n := o.get(key)
	if n == nil {
		o.r.fault(o.n, o.at(key), "", "not given", accepted)
	}
	return n
}

func (o object) at(key string) string { return join(o.path, key) }

// place is the node of a key's name, for faults about the key and not its value.
func (o object) place(key string) *node { return o.values[key].key }

// close tells of keys that mean nothing here.
func (o object) close() {
	known := make([]string, 0, len(o.r.asked[o.name]))
	for k := range o.r.asked[o.name] {
		known = append(known, k)
	}
	slices.Sort(known)
	for _, e := range o.n.entries {
		key := e.key.text
		if o.values[key].key != e.key {
			continue // told as a key that stands there twice
		}
		if !o.r.asked[o.name][key] {
			o.r.fault(e.key, o.at(key), shown(key), "no such key here", suggest(key, known))
		}
		o.r.commas(e.value, o.at(key), known)
	}
}

// commas looks at what was glued to a text: the name of a key is a key without a value, and the
// rest is worth a warning, since other readers of YAML see a key in it.
func (r *reader) commas(n *node, path string, known []string) {
	for _, part := range n.glued {
		if slices.Contains(known, part.text) {
			r.fault(part, path, shown(part.text), "a key without a value", "write "+part.text+": and its value, or put the text before it in quotes")
		}
	}
	if len(n.glued) > 0 {
		r.p.notes = append(r.p.notes, fmt.Sprintf("%s (line %d) is a text with a comma and no quotes inside braces; put it in quotes, since other programs read it otherwise.", path, n.line))
	}
}

// plainText gives the text of a scalar, whatever YAML would see in it.
func (r *reader) plainText(n *node, path, accepted string) (string, bool) {
	if n.kind != scalar {
		r.wrong(n, path, "not a text", accepted)
		return "", false
	}
	return n.text, true
}

// text reads an optional text; absent is empty.
func (o object) text(key string) string {
	n := o.get(key)
	if n == nil {
		return ""
	}
	return o.r.line(n, o.at(key))
}

// line reads a text that is not blank.
func (r *reader) line(n *node, path string) string {
	const accepted = "write a text"
	s, ok := r.plainText(n, path, accepted)
	if ok && strings.TrimSpace(s) == "" {
		r.wrong(n, path, "the text is blank", accepted)
	}
	return strings.TrimSpace(s)
}

var codePattern = regexp.MustCompile(`^[A-Za-z0-9][A-Za-z0-9._-]{0,63}$`)

const acceptedCode = "write a code of letters, digits, - _ and . that begins with a letter or a digit, at most 64 long"

// code reads a code as it is written.
func (r *reader) code(n *node, path string) (string, bool) {
	s, ok := r.plainText(n, path, acceptedCode)
	if ok && !codePattern.MatchString(s) {
		r.wrong(n, path, "not a code", acceptedCode)
		return s, false
	}
	return s, ok
}

// ownCode reads the code that an object must have.
func (o object) ownCode() string {
	n := o.need("code", acceptedCode)
	if n == nil {
		return ""
	}
	s, _ := o.r.code(n, o.at("code"))
	return s
}

// named gives the object's name, or its code where it has none.
func (o object) named(key, code string) string {
	if s := o.text(key); s != "" {
		return s
	}
	return code
}

func (o object) yesNo(key string, unless bool) bool {
	n := o.get(key)
	if n == nil {
		return unless
	}
	if n.kind == scalar && n.style == plain && (n.text == "true" || n.text == "false") {
		return n.text == "true"
	}
	o.r.wrong(n, o.at(key), "not true or false", "write true or false, without quotes")
	return unless
}

func (o object) day(key string) *civil.Day {
	n := o.get(key)
	if n == nil {
		return nil
	}
	return o.r.day(n, o.at(key))
}

func (r *reader) day(n *node, path string) *civil.Day {
	d, err := civil.ParseDay(n.text)
	if n.kind != scalar || err != nil {
		r.wrong(n, path, "not a day of the calendar", "write a day as YYYY-MM-DD, such as 2025-01-31")
		return nil
	}
	return &d
}

const acceptedDuration = "write an ISO 8601 duration such as P1Y or P6M"

// duration reads a length of time; one of no days is refused where it would mean nothing.
func (o object) duration(key string, zeroMeans bool) *civil.Duration {
	n := o.get(key)
	if n == nil {
		return nil
	}
	d, err := civil.ParseDuration(n.text)
	switch {
	case n.kind != scalar || err != nil:
		o.r.wrong(n, o.at(key), "not a duration", acceptedDuration)
		return nil
	case d.IsZero() && !zeroMeans:
		o.r.wrong(n, o.at(key), "a duration of no days means nothing here", "write at least P1D")
		return nil
	}
	return &d
}

var numberPattern = regexp.MustCompile(`^-?(0|[1-9][0-9]{0,17})(\.[0-9]{1,18})?([eE][+-]?[0-9]{1,2})?$`)

func (o object) number(key string) *float64 {
	n := o.get(key)
	if n == nil {
		return nil
	}
	v, err := strconv.ParseFloat(n.text, 64)
	if n.kind != scalar || n.style != plain || !numberPattern.MatchString(n.text) || err != nil || math.IsInf(v, 0) {
		o.r.wrong(n, o.at(key), "not a number", "write a number such as 3 or 0.5, without quotes or a unit")
		return nil
	}
	return &v
}

func (o object) whole(key string, least, unless int) int {
	n := o.get(key)
	if n == nil {
		return unless
	}
	v, err := strconv.Atoi(n.text)
	if n.kind != scalar || n.style != plain || err != nil || v < least || strconv.Itoa(v) != n.text {
		o.r.wrong(n, o.at(key), "not a whole number", fmt.Sprintf("write a whole number from %d on", least))
		return unless
	}
	return v
}

// word reads one of a few words.
func (o object) word(key string, words []string) string {
	n := o.get(key)
	if n == nil {
		return ""
	}
	return o.r.word(n, o.at(key), words)
}

func (r *reader) word(n *node, path string, words []string) string {
	if n.kind == scalar && slices.Contains(words, n.text) {
		return n.text
	}
	r.wrong(n, path, "not one of the words that may stand here", suggest(n.text, words))
	return ""
}

// each walks a list. Nothing after the key counts as an empty one: its lines may all be comments.
func (o object) each(key, accepted string, read func(n *node, path string)) {
	n := o.get(key)
	if n == nil || n.kind == nothing {
		return
	}
	o.r.list(n, o.at(key), accepted, read)
}

func (r *reader) list(n *node, path, accepted string, read func(n *node, path string)) {
	if n.kind != list {
		r.wrong(n, path, "not a list", accepted)
		return
	}
	if r.tooMany(n, path, len(n.items)) {
		return
	}
	for i, item := range n.items {
		read(item, fmt.Sprintf("%s[%d]", path, i))
	}
}

// maxList bounds a list or mapping: what is compared with everything else in it must not take
// minutes.
const maxList = 2000

func (r *reader) tooMany(n *node, path string, count int) bool {
	if count > maxList {
		r.fault(n, path, fmt.Sprintf("%d entries", count), "more than any program needs", fmt.Sprintf("write at most %d", maxList))
	}
	return count > maxList
}

// objects walks a list of objects of one name.
func (o object) objects(key, name, accepted string, read func(object)) {
	o.each(key, accepted, func(n *node, path string) {
		if e, ok := o.r.object(n, path, name); ok {
			read(e)
			e.close()
		}
	})
}

// distinct reads a list of texts, none of which may stand there twice.
func (o object) distinct(key, accepted string, read func(n *node, path string) string) []string {
	n := o.get(key)
	if n == nil {
		return nil
	}
	var out []string
	taken := map[string]bool{}
	o.r.list(n, o.at(key), accepted, func(n *node, path string) {
		switch s := read(n, path); {
		case s == "":
		case taken[s]:
			o.r.wrong(n, path, "stands in the list twice", "keep one of the two")
		default:
			taken[s] = true
			out = append(out, s)
		}
	})
	return out
}

// one reads a reference to something that the program declares.
func (r *reader) one(n *node, path, what string, declared []string) string {
	if n.kind != scalar {
		r.wrong(n, path, "not "+what, suggest("", declared))
		return ""
	}
	if !slices.Contains(declared, n.text) {
		r.wrong(n, path, "there is no such "+strings.TrimPrefix(strings.TrimPrefix(what, "an "), "a "), suggest(n.text, declared))
		return ""
	}
	return n.text
}

// register tells of a code that the list has already.
func (r *reader) register(n *node, path, code string, taken map[string]int) {
	if n == nil || code == "" {
		return
	}
	if line, twice := taken[code]; twice {
		r.wrong(n, path, fmt.Sprintf("the code is taken on line %d", line), "give each its own code")
		return
	}
	taken[code] = n.line
}
