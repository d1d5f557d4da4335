package book

import (
	"maps"
	"slices"

	"lodebook/models/program"
	"lodebook/models/store"
)

// overlay is a copy of what rows about people and fixtures are checked against, so that the rows of
// one import see each other before anything is committed. It has no evaluator.
func (m *model) overlay() *model {
	o := *m
	o.engine = nil
	o.people, o.fixtures = clipped(m.people), clipped(m.fixtures)
	o.stints, o.facts = clipped(m.stints), clipped(m.facts)
	return &o
}

// clipped copies a map of lists so that adding to a list leaves the original's untouched.
func clipped[K comparable, V any](m map[K][]V) map[K][]V {
	c := maps.Clone(m)
	for k, list := range c {
		c[k] = slices.Clip(list)
	}
	return c
}

// takeRows adds rows that are about to be committed.
func (m *model) takeRows(rows []any) error {
	var d store.Delta
	for _, r := range rows {
		switch r := r.(type) {
		case store.PersonRow:
			d.People = append(d.People, r)
		case store.FixtureRow:
			d.Fixtures = append(d.Fixtures, r)
		case store.StintRow:
			d.Stints = append(d.Stints, r)
		case store.FactRow:
			d.Facts = append(d.Facts, r)
		}
	}
	return m.take(d)
}

// factAt is the row of a fact that counts on a day: of those from on or before it the latest, and of
// one day the last recorded.
func (m *model) factAt(key store.SubjectKey, fact string, on func(store.FactRow) bool) (store.FactRow, bool) {
	var best store.FactRow
	found := false
	for _, r := range m.facts[key] {
		if r.Ended == 0 && r.Fact == fact && on(r) && (!found || r.From >= best.From) {
			best, found = r, true
		}
	}
	return best, found
}

// factKey is the key under which the facts of a site's subject are kept: facts are the site's, also
// those about people.
func factKey(site string, asks program.Asks, code string) store.SubjectKey {
	return store.SubjectKey{Site: site, Kind: string(asks), Code: code}
}
