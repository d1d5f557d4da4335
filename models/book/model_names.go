package book

import (
	"hash/maphash"
	"slices"
	"strings"
	"unicode"

	"lodebook/models/store"
)

// People by name, so that to ask who is meant does not cost a walk over everybody. Only hashes of the
// names are kept: a name that was erased is in no memory but that of the rows, which are made anew.

var nameSeed = maphash.MakeSeed()

// nameKey is the same for names that differ in upper and lower case only.
func nameKey(name string) uint64 {
	return maphash.String(nameSeed, strings.Map(folded, name))
}

// folded is one and the same of all letters that strings.EqualFold takes for each other.
func folded(r rune) rune {
	least := r
	for other := unicode.SimpleFold(r); other != r; other = unicode.SimpleFold(other) {
		least = min(least, other)
	}
	return least
}

// putName notes who bears the name of the row.
func (m *model) putName(r store.PersonRow) {
	if r.Name == "" {
		return
	}
	k := nameKey(r.Name)
	if codes := m.named.get(k); !slices.Contains(codes, r.Code) {
		m.named.set(k, append(codes, r.Code))
	}
}

// personNamed gives the code of the one person who bears the name, in whichever case; empty if it is none
// or more than one.
func (m *model) personNamed(name string) string {
	found := ""
	for _, code := range m.named.get(nameKey(name)) {
		if p, ok := m.person(code); ok && strings.EqualFold(p.Name, name) {
			if found != "" {
				return ""
			}
			found = code
		}
	}
	return found
}
