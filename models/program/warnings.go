package program

import (
	"errors"
	"fmt"
	"slices"
	"strings"
	"time"

	"lodebook/models/civil"
)

// Warnings says, in sentences, what is no fault and yet worth a look before the program is opened:
// above all every restricted zone for which some level has no guard, since nobody of that level
// can ever be entitled to it.
func (p *Program) Warnings() []string {
	var out []string
	for _, z := range p.Zones {
		out = append(out, p.unguarded(z)...)
	}
	out = append(out, p.unconferred()...)
	out = append(out, p.undeclaredKinds()...)
	out = append(out, p.unanswered()...)
	for i := range p.Items {
		out = append(out, p.oddities(&p.Items[i])...)
	}
	out = append(out, p.closedHours()...)
	out = append(out, p.oddSeverities()...)
	return append(out, p.notes...)
}

// guard is what is known of a level's guard from the level alone.
type guard uint8

const (
	noGuard guard = iota
	someGuard
	sureGuard
)

func (p *Program) unguarded(z Zone) []string {
	var items []*Item
	for i := range p.Items {
		if slices.Contains(p.Items[i].Guards, z.Code) {
			items = append(items, &p.Items[i])
		}
	}
	switch {
	case !z.Restricted && len(items) > 0:
		return []string{fmt.Sprintf("Zone %s is guarded by %s and is not marked restricted.", z.Code, itemCodes(items))}
	case !z.Restricted:
		return nil
	case len(items) == 0:
		return []string{fmt.Sprintf("Zone %s is restricted and no item guards it: nobody is ever entitled to it.", z.Code)}
	}
	var none, some []string
	for _, l := range p.Levels {
		switch guardOf(items, l.Code) {
		case noGuard:
			none = append(none, l.Code)
		case someGuard:
			some = append(some, l.Code)
		}
	}
	var out []string
	if len(none) > 0 {
		out = append(out, fmt.Sprintf("Zone %s is restricted and no item guards it for level %s: nobody of that level is ever entitled to it.", z.Code, anyOf(none)))
	}
	if len(some) > 0 {
		out = append(out, fmt.Sprintf("Zone %s is guarded for level %s only for some people, by more than their level: who is asked none of %s is never entitled to it.", z.Code, anyOf(some), itemCodes(items)))
	}
	return out
}

// guardOf asks the items of a person of whom nothing but the level is on record.
func guardOf(items []*Item, level string) guard {
	best := noGuard
	for _, it := range items {
		if it.When == nil {
			return sureGuard
		}
		asked, err := it.When.Match(Subject{Asks: AsksPerson, Level: level})
		var missing *MissingFact
		switch {
		case errors.As(err, &missing):
			best = someGuard
		case err == nil && asked:
			return sureGuard
		}
	}
	return best
}

func itemCodes(items []*Item) string {
	return anyOf(codes(items, func(it *Item) string { return it.Code }))
}

func (p *Program) unconferred() []string {
	var out []string
	for _, l := range p.Levels {
		if !slices.ContainsFunc(p.Items, func(it Item) bool { return it.Confers == l.Code }) {
			out = append(out, fmt.Sprintf("No item confers level %s: nobody is ever held to have it.", l.Code))
		}
	}
	return out
}

// undeclaredKinds lists fixture kinds that are named and not declared.
func (p *Program) undeclaredKinds() []string {
	var out []string
	told := map[string]bool{}
	tell := func(kind, where string) {
		if _, ok := p.FixtureKind(kind); !ok && !told[kind] {
			told[kind] = true
			out = append(out, fmt.Sprintf("Fixture kind %s, named by %s, is not declared: no fixture can be of it.", kind, where))
		}
	}
	for _, e := range p.Events {
		if !slices.Contains(AllAsks, Asks(e.Of)) {
			tell(e.Of, "event "+e.Code)
		}
	}
	for _, it := range p.Items {
		for _, s := range []*Selector{it.When, it.Cadence.Holds} {
			if s == nil {
				continue
			}
			for _, k := range s.undeclared {
				tell(k, "item "+it.Code)
			}
		}
	}
	return out
}

// unanswered lists events that ask for nothing and sheets that nothing is recorded on.
func (p *Program) unanswered() []string {
	var out []string
	for _, e := range p.Events {
		if !slices.ContainsFunc(p.Items, func(it Item) bool { return slices.Contains(it.Cadence.After, e.Code) }) {
			out = append(out, fmt.Sprintf("No item comes after the event %s: recording one asks for nothing.", e.Code))
		}
	}
	for i := range p.Sheets {
		s := &p.Sheets[i]
		used := slices.ContainsFunc(p.Items, func(it Item) bool {
			return slices.ContainsFunc(it.Records, func(record string) bool {
				found, ok := p.SheetFor(record)
				return ok && found.Code == s.Code
			})
		})
		if !used {
			out = append(out, fmt.Sprintf("No item is answered by the sheet %s.", s.Code))
		}
	}
	return out
}

// oddities lists what an item says to no effect.
func (p *Program) oddities(it *Item) []string {
	var out []string
	c := it.Cadence
	if (c.Rule == Holds || c.Rule == Cover) && (it.Notice.Given != nil || !it.Grace.IsZero()) {
		out = append(out, fmt.Sprintf("Item %s holds or does not: its notice and grace have no effect.", it.Code))
	}
	if n := it.Notice.Given; n != nil && c.Rule == Every && !shorter(*n, c.Every) {
		out = append(out, fmt.Sprintf("Item %s has a notice of %s and asks every %s: it is closing all the time.", it.Code, n, c.Every))
	}
	sheets := codes(p.Sheets, func(s Sheet) string { return s.Code })
	for _, record := range it.Records {
		kind, code, _ := strings.Cut(record, "/")
		if _, ok := p.SheetFor(record); ok || kind != "inspection" && kind != "check" {
			continue
		}
		if near, ok := nearest(code, sheets); ok {
			out = append(out, fmt.Sprintf("Item %s is answered by %s, for which there is no sheet; there is a sheet %s.", it.Code, record, near))
		}
	}
	return out
}

// closedHours lists weekdays that have operating hours and are not open.
func (p *Program) closedHours() []string {
	var out []string
	for d := range time.Saturday + 1 {
		has := slices.ContainsFunc(p.Hours, func(h OpenHours) bool { return h.Weekday == d })
		if open := p.Calendar.Open; has && !open[d] && open != (civil.Calendar{}).Open {
			out = append(out, fmt.Sprintf("%s has operating hours and is not an operating day.", d))
		}
	}
	return out
}
