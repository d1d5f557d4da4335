package program

import (
	"fmt"
	"slices"
	"strings"

	"lodebook/models/civil"
)

// ownerRoles are the roles that may own an item's gaps, beside posts.
var ownerRoles = recorderRoles

func (r *reader) items(root object) {
	taken := map[string]int{}
	root.objects("items", "item", "write a list of items, each with code, title, asks and a cadence", func(o object) {
		it := r.item(o)
		r.register(o.get("code"), o.at("code"), it.Code, taken)
		r.p.Items = append(r.p.Items, it)
	})
}

var askWords = codes(AllAsks, func(a Asks) string { return string(a) })

// item reads one item. What depends on several of its keys is checked once all are read.
func (r *reader) item(o object) Item {
	it := Item{Line: o.n.line, Code: o.ownCode(), Help: o.text("help"), Group: o.text("group"), Basis: o.text("basis")}
	o.need("title", "write the demand as a sentence")
	it.Title = o.text("title")
	o.need("asks", "write one of "+anyOf(askWords))
	it.Asks = Asks(o.word("asks", askWords))
	it.When = r.selector(o, "when", it.Asks)
	it.Cadence = r.cadence(o, it.Asks)
	if c := it.Cadence.Cover; c != nil && it.Cadence.Rule == Cover {
		it.Cadence.Holds = covered(it.Code, c)
	}
	it.Records = r.records(o, it)
	it.First = r.first(o, it.Cadence)
	it.Notice = r.notice(o, it.Cadence)
	if grace := o.duration("grace", true); grace != nil {
		it.Grace = *grace
	}
	it.Since = o.day("since")
	it.Guards = o.distinct("guards", "write a list of zones such as [III, IV]", func(n *node, path string) string {
		return r.one(n, path, "a zone", r.p.zoneCodes())
	})
	if n := o.get("confers"); n != nil {
		it.Confers = r.one(n, o.at("confers"), "a level", r.p.levelCodes())
	}
	it.Local = o.yesNo("local", false)
	if n := o.get("owner"); n != nil {
		it.Owner = r.one(n, o.at("owner"), "a role or post", slices.Concat(ownerRoles, r.p.postCodes()))
	}
	r.guarding(o, it)
	r.answerable(o, it)
	return it
}

func (r *reader) selector(o object, key string, asks Asks) *Selector {
	n := o.get(key)
	if n == nil {
		return nil
	}
	if s, ok := r.plainText(n, o.at(key), "write a CEL expression in quotes"); !ok || asks == "" {
		return nil
	} else if strings.TrimSpace(s) == "" {
		r.wrong(n, o.at(key), "the expression is blank", "write a CEL expression, or leave the key out")
		return nil
	}
	return r.compile(n, o.at(key), asks)
}

// records reads one kind/code or a list of them.
func (r *reader) records(o object, it Item) []string {
	const accepted = "write the records that answer it as kind/code, such as training/level-2"
	n := o.get("record")
	if it.Cadence.Rule == Cover {
		if n != nil {
			r.fault(o.place("record"), o.at("record"), shown("record"), "no record answers for who was there", "leave it out")
		}
		return nil
	}
	if n == nil {
		// An item that holds is met by what is on record and needs no record of its own.
		if it.Cadence.Rule != Holds {
			o.need("record", accepted)
		}
		return nil
	}
	if n.kind == list && len(n.items) == 0 {
		r.wrong(n, o.at("record"), "nothing could answer it", accepted)
	}
	if n.kind == list {
		return o.distinct("record", accepted, r.record)
	}
	return []string{r.record(n, o.at("record"))}
}

func (r *reader) record(n *node, path string) string {
	const accepted = "write kind/code, such as training/level-2"
	s, ok := r.plainText(n, path, accepted)
	if !ok {
		return ""
	}
	kind, code, cut := strings.Cut(s, "/")
	switch {
	case !cut:
		r.wrong(n, path, "not a kind of record and a code", accepted)
	case !slices.Contains(RecordKinds, kind):
		r.wrong(n, path, "no kind of record is called "+shown(kind), suggest(kind, RecordKinds))
	case !codePattern.MatchString(code):
		r.wrong(n, path, "no code stands behind the stroke", acceptedCode)
	case kind == "appointment" && !slices.Contains(r.p.postCodes(), code):
		r.wrong(n, path, "no post has the code "+shown(code), suggest(code, r.p.postCodes()))
	}
	return s
}

// ruleKeys are the keys of the cadences, within last: it is one of them only where after is not.
var ruleKeys = []CadenceRule{Every, Once, Each, After, Holds, Cover, Within}

func (r *reader) cadence(o object, asks Asks) Cadence {
	c := Cadence{Rule: r.rule(o), Count: o.whole("count", 1, 1)}
	if d := o.duration("every", false); d != nil {
		c.Every = *d
	}
	if d := o.duration("within", false); d != nil {
		c.Within = *d
	}
	c.MonthEnd = o.word("to", []string{"month-end"}) != ""
	c.Early = o.duration("early", true)
	if n := o.get("once"); n != nil && !o.yesNo("once", true) {
		r.wrong(n, o.at("once"), "an item is either done once or has another cadence", "write once: true, or another cadence")
	}
	c.Each = r.period(o)
	c.Operating = o.word("days", []string{"all", "operating"}) == "operating"
	c.After = r.after(o, asks)
	c.Holds = r.selector(o, "holds", asks)
	c.Cover = r.cover(o, asks)
	r.belongs(o, c)
	r.possible(o, c)
	return c
}

// rule finds which of the cadences the item has.
func (r *reader) rule(o object) CadenceRule {
	var rule CadenceRule
	for _, key := range ruleKeys {
		if o.get(string(key)) == nil || key == Within && rule == After {
			continue
		}
		if rule == "" {
			rule = key
			continue
		}
		r.fault(o.place(string(key)), o.at(string(key)), shown(string(key)), "a second cadence beside "+string(rule), "keep one of the two")
	}
	if rule == "" {
		r.fault(o.n, o.path, "", "no cadence is given", "write one of every, within, once, each, after (with within), holds or cover")
	}
	if rule == After {
		o.need("within", "write how soon after the event, such as P2D")
	}
	return rule
}

func (r *reader) period(o object) civil.Unit {
	units := []string{"day", "week", "month", "quarter", "year"}
	w := o.word("each", units)
	if w == "" {
		return 0
	}
	u, err := civil.ParseUnit(w)
	if err != nil {
		r.wrong(o.get("each"), o.at("each"), err.Error(), suggest(w, units))
	}
	return u
}

// after reads the events, which must be able to happen to what the item asks.
func (r *reader) after(o object, asks Asks) []string {
	const accepted = "write a list of events such as [roof-work]"
	if n := o.get("after"); n != nil && n.kind == list && len(n.items) == 0 {
		r.wrong(n, o.at("after"), "no event would ever ask for it", accepted)
	}
	return o.distinct("after", accepted, func(n *node, path string) string {
		code := r.one(n, path, "an event", r.p.eventCodes())
		if e, ok := r.p.Event(code); ok && asks != "" && e.Of != "" && e.asks() != asks {
			r.wrong(n, path, fmt.Sprintf("the event happens to a %s, and the item asks a %s", e.Of, asks), "write an event that happens to what the item asks")
		}
		return code
	})
}

// asks is the kind of subject that the event happens to.
func (e Event) asks() Asks {
	if slices.Contains(AllAsks, Asks(e.Of)) {
		return Asks(e.Of)
	}
	return AsksFixture
}

// belongs tells of keys that mean nothing beside the item's cadence.
func (r *reader) belongs(o object, c Cadence) {
	for _, k := range []struct {
		key string
		ok  bool
		of  string
	}{
		{"to", c.Rule == Every, "goes only with every"},
		{"early", c.Rule == Every, "goes only with every"},
		{"count", c.Rule == Within, "goes only with within"},
		{"days", c.Rule == Each, "goes only with each"},
		{"first", c.Rule != After && c.Rule != Holds && c.Rule != Cover, "does not go with after, holds or cover"},
	} {
		if o.get(k.key) != nil && !k.ok && c.Rule != "" {
			r.fault(o.place(k.key), o.at(k.key), shown(k.key), "it "+k.of, "leave it out")
		}
	}
}

// possible tells of cadences that no record could ever meet.
func (r *reader) possible(o object, c Cadence) {
	if c.Rule == Each && c.Operating && r.p.Calendar.Open == [7]bool{} {
		r.wrong(o.get("days"), o.at("days"), "the calendar has no open weekday, so it is never asked", "open a weekday in calendar.open, or write days: all")
	}
	if c.Rule == Every && c.Early != nil && !c.Every.IsZero() && !shorter(*c.Early, c.Every) {
		r.wrong(o.get("early"), o.at("early"), "it is not shorter than every on every day of the calendar", "write a duration shorter than "+c.Every.String())
	}
	if c.Rule != Within || c.Within.IsZero() || c.Count <= max(1, atLeast(c.Within)) {
		return
	}
	if most := longest(c.Within) + 1; c.Count > most {
		r.wrong(o.get("count"), o.at("count"), fmt.Sprintf("%s has at most %d days, and records of one day count once", c.Within, most), fmt.Sprintf("write at most %d", most))
	}
}

// guarding checks what an item that guards zones or confers a level must be.
func (r *reader) guarding(o object, it Item) {
	for _, key := range []string{"guards", "confers"} {
		if o.get(key) != nil && it.Asks != AsksPerson && it.Asks != "" {
			r.fault(o.place(key), o.at(key), shown(key), "only an item that asks a person can do so", "leave it out, or write asks: person")
		}
	}
	if rule := it.Cadence.Rule; len(it.Guards) > 0 && rule != "" && rule != Every && rule != Once && rule != After {
		r.fault(o.place("guards"), o.at("guards"), shown("guards"), "only an item with every, once or after can guard", "leave it out, or give the item one of these cadences")
	}
	if (len(it.Guards) > 0 || it.Confers != "") && it.When != nil && slices.Contains(it.When.Reads(), "held") {
		r.wrong(o.get("when"), o.at("when"), "the held level follows from what guards and confers, which therefore cannot read it", "read subject.level in its place")
	}
}

// answerable checks the item's kinds of fixture against its events and sheets: a vent is never
// looked at after an event that only happens to magnets.
func (r *reader) answerable(o object, it Item) {
	if it.Asks == "" {
		return
	}
	kinds := it.When.Kinds()
	if n := o.get("after"); n != nil && it.Asks == AsksFixture && kinds != nil {
		for i, ref := range n.items {
			e, ok := r.p.Event(ref.text)
			if ok && e.asks() == AsksFixture && e.Of != string(AsksFixture) && !slices.Contains(kinds, e.Of) {
				r.wrong(ref, fmt.Sprintf("%s[%d]", o.at("after"), i), fmt.Sprintf("the event happens to a %s, and the item asks a %s", e.Of, anyOf(kinds)), "write an event that happens to what the item asks")
			}
		}
	}
	for _, record := range it.Records {
		s, ok := r.p.SheetFor(record)
		if !ok || s.For == "" || it.Asks == AsksFixture && (kinds == nil || slices.Contains(kinds, s.For)) {
			continue
		}
		asked := string(it.Asks)
		if kinds != nil {
			asked = anyOf(kinds)
		}
		r.fault(o.get("record"), o.at("record"), shown(record), fmt.Sprintf("the sheet is for a %s, and the item asks a %s", s.For, asked), "write the sheet of what the item asks")
	}
}
