package book

import (
	"context"
	"slices"
	"strings"
)

// Writer is who may stand behind an entry: ID is what EntryQuery.Actor takes.
type Writer struct{ ID, Name string }

// Writers lists the accounts that belong to the site by name, and after them the operator and the
// scheduled jobs, for choosing entries by who wrote them.
func (b *Book) Writers(ctx context.Context, actor Actor, site string) ([]Writer, error) {
	if err := actor.may(SeeBook, site); err != nil {
		return nil, err
	}
	var out []Writer
	err := b.read(ctx, func(m *model) error {
		for id := range m.accounts.all() {
			a, ok := m.account(id)
			if ok && a.Name != "" && (len(a.Sites) == 0 || slices.Contains(a.Sites, site)) {
				out = append(out, Writer{id, a.Name})
			}
		}
		return nil
	})
	slices.SortFunc(out, func(a, b Writer) int { return strings.Compare(a.Name, b.Name) })
	return append(out, Writer{SystemOperator("").id(), "operator"}, Writer{JobActor().id(), "scheduled jobs"}), err
}
