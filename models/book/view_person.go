package book

import (
	"slices"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// heldUntil is the last day through which the person goes on holding the level if nothing more goes
// on record; nil where no day is in sight, and where no level is held. The days on which it can end
// are those on which what confers it runs out, a stint or an excusal ends, or a fact or a version
// begins; the evaluator is asked on each of them.
func (v *siteOn) heldUntil(person standing.Subject, held string, rows []Row) *civil.Day {
	if held == "" {
		return nil
	}
	for _, d := range v.heldEnds(person, held, rows) {
		if level, _ := v.m.engine.Held(v.Code, person.Code, d+1, v.k); level != held {
			return &d
		}
	}
	return nil
}

// heldEnds are the days, in order, after which the level may be lost.
func (v *siteOn) heldEnds(person standing.Subject, held string, rows []Row) []civil.Day {
	var out []civil.Day
	add := func(d *civil.Day) {
		if d != nil && *d >= v.on {
			out = append(out, *d)
		}
	}
	for _, r := range rows {
		item, ok := v.Program.Item(r.Item)
		if !ok || item.Confers != held {
			continue
		}
		add(r.ExcusedUntil)
		if r.Due != nil {
			add(dayPtr(r.Due.Add(item.Grace)))
		}
	}
	for _, s := range v.m.stintsAt(v.Code, string(program.AsksPerson), person.Code) {
		add(s.Last)
	}
	for _, f := range v.m.facts.get(factKey(v.Code, person.Asks, person.Code)) {
		add(dayPtr(f.From - 1))
	}
	for _, ver := range v.m.site(v.Code).versions {
		add(dayPtr(ver.row.InForceFrom - 1))
	}
	slices.Sort(out)
	return slices.Compact(out)
}
