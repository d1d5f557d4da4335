package book

import (
	"lodebook/models/program"
	"lodebook/models/store"
)

// takeRows takes in the rows of new entries that are about to be committed.
func (m *model) takeRows(rows []any) error {
	var d store.Delta
	for _, r := range rows {
		if err := d.Add(r); err != nil {
			return err
		}
	}
	return m.take(d)
}

// factAt is the row of a fact that counts on a day: of those from on or before it the latest, and of
// one day the last recorded.
func (m *model) factAt(key store.SubjectKey, fact string, on func(store.FactRow) bool) (store.FactRow, bool) {
	var best store.FactRow
	found := false
	for _, r := range m.facts.get(key) {
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
