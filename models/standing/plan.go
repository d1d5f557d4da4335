package standing

import (
	"slices"

	"lodebook/models/program"
)

// plan says which items of a site hang on what, over all its versions. Items go by number, in order of
// code. It never changes.
type plan struct {
	items   []string
	number  map[string]int32
	ofKind  map[program.Asks][]int32
	records [][]int32 // by number of the kind and code of the records that answer
	events  map[string][]int32
	fields  map[string][]int32 // by field that the selector or the condition reads
	other   []int32            // reads what is no field that we know
	confers []bool
	plain   []bool // whether it is asked hangs on facts and stints only
}

// newPlan makes the plan of versions; kinds numbers the records that they ask for.
func newPlan(reigns []reign, kinds map[string]int32) *plan {
	p := &plan{
		number: map[string]int32{}, ofKind: map[program.Asks][]int32{},
		events: map[string][]int32{}, fields: map[string][]int32{},
	}
	for _, r := range reigns {
		for _, item := range r.items {
			p.items = append(p.items, item.Code)
		}
	}
	slices.Sort(p.items)
	p.items = slices.Compact(p.items)
	for i, code := range p.items {
		p.number[code] = int32(i)
	}
	p.confers, p.plain = make([]bool, len(p.items)), make([]bool, len(p.items))
	for i := range p.plain {
		p.plain[i] = true
	}
	for _, r := range reigns {
		for _, item := range r.items {
			p.add(p.number[item.Code], item, kinds)
		}
	}
	return p
}

func (p *plan) add(i int32, item *program.Item, kinds map[string]int32) {
	note := func(list []int32) []int32 {
		if slices.Contains(list, i) {
			return list
		}
		return append(list, i)
	}
	p.ofKind[item.Asks] = note(p.ofKind[item.Asks])
	for _, what := range item.Records {
		kind := kinds[what] // numbered when the version was put
		for int(kind) >= len(p.records) {
			p.records = append(p.records, nil)
		}
		p.records[kind] = note(p.records[kind])
	}
	for _, code := range item.Cadence.After {
		p.events[code] = note(p.events[code])
	}
	for _, sel := range [2]*program.Selector{item.When, item.Cadence.Holds} {
		if sel == nil {
			continue
		}
		for _, field := range sel.Reads() {
			if isField(field) {
				p.fields[field] = note(p.fields[field])
			} else {
				p.other = note(p.other)
			}
		}
	}
	p.confers[i] = p.confers[i] || item.Confers != ""
	if item.Cadence.Holds != nil || item.When != nil && slices.ContainsFunc(item.When.Reads(), followsRecords) {
		p.plain[i] = false
	}
}

// followsRecords tells whether a field that a selector reads may change with a record.
func followsRecords(field string) bool {
	return field == "held" || field == "posts" || field == "holders" || field == "deputies" || !isField(field)
}

// change is what a line put on record changes of one subject; one of its fields is set.
type change struct {
	stint, pause bool
	right        bool
	fact         string
	event        string
	item         string // of an excusal
	done         bool   // a record was put
	kind         int32  // kind and code of the record
	post         string // of an appointment of a person
	record       record
	behind       bool // no record of that kind and code is later
}

// touched appends the numbers of the items that the change may bear on, each once.
func (p *plan) touched(c *change, l *local, to []int32) []int32 {
	from := len(to)
	switch {
	case c.stint || c.pause:
		return append(to, p.ofKind[l.subject.Asks]...) // nothing is left to be added
	case c.fact != "":
		to = append(to, p.fields[factField(l.subject.Asks, c.fact)]...)
		to = addAll(to, from, p.other)
		if c.fact == factLevel {
			to = addAll(to, from, p.fields["held"]) // the assigned level bounds it
		}
	case c.right:
		to = append(to, p.fields["zones"]...)
		to = addAll(to, from, p.other)
	case c.event != "":
		to = append(to, p.events[c.event]...)
	case c.item != "":
		if i, ok := p.number[c.item]; ok {
			to = append(to, i)
		}
	default:
		if int(c.kind) < len(p.records) {
			to = append(to, p.records[c.kind]...)
		}
		if c.post != "" {
			to = addAll(to, from, p.fields["posts"])
			to = addAll(to, from, p.other)
		}
	}
	if l.subject.Asks == program.AsksPerson && slices.ContainsFunc(to[from:], func(i int32) bool { return p.confers[i] }) {
		to = addAll(to, from, p.fields["held"])
		to = addAll(to, from, p.other)
	}
	return to
}

// factField is the field by which a selector reads a fact of such a subject.
func factField(asks program.Asks, code string) string {
	if asks == program.AsksSite && code == program.FactDoorListOf {
		return program.FactDoorListAge
	}
	if builtIn(asks, code) || asks == program.AsksSite && isField(code) {
		return code
	}
	return factsPrefix + code
}

// addAll appends what the list from a place on does not hold yet.
func addAll(to []int32, from int, more []int32) []int32 {
	for _, i := range more {
		if !slices.Contains(to[from:], i) {
			to = append(to, i)
		}
	}
	return to
}
