package book

import (
	"context"

	"lodebook/models/store"
)

// TookPart gives, for the entries of drills of crews, the names of those who took part as far as the
// entries name them. An entry that names nobody, or is no drill of a crew, is left out.
func (b *Book) TookPart(ctx context.Context, actor Actor, site string, entries []string) (map[string][]string, error) {
	if err := actor.may(SeeSite, site); err != nil {
		return nil, err
	}
	out := map[string][]string{}
	err := b.withEntries(ctx, func(tx *store.Tx, m *model) error {
		for _, id := range entries {
			e, ok, err := tx.EntryByID(id)
			if err != nil {
				return err
			}
			if !ok || e.Site != site {
				continue
			}
			bd, err := decode(e, nil)
			if err != nil {
				return err
			}
			if r, ok := bd.(*recordBody); ok {
				for _, code := range r.Takers {
					out[id] = append(out[id], m.subjectWords(site, subjectBody{"person", code}))
				}
			}
		}
		return nil
	})
	return out, err
}
