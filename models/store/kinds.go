package store

// KindVersions gives the kinds of the entries after a sequence number, each with its highest version.
func (t *Tx) KindVersions(after int64) (map[string]int, error) {
	var rows []struct {
		Kind string
		V    int
	}
	// Grouped by what is no column, so that the few entries after it are looked at and not the whole index
	// of kinds.
	err := t.db.Raw("SELECT MIN(kind) AS kind, MAX(v) AS v FROM entries WHERE seq > ? GROUP BY kind || ''", after).Scan(&rows).Error
	if after < 0 {
		// From kind to kind along the index, as a plain grouping would look at each of millions of entries.
		err = t.db.Raw(`WITH RECURSIVE kinds (kind) AS (
			SELECT MIN(kind) FROM entries
			UNION ALL
			SELECT (SELECT MIN(e.kind) FROM entries e WHERE e.kind > kinds.kind) FROM kinds WHERE kinds.kind IS NOT NULL
		) SELECT kind, (SELECT MAX(e.v) FROM entries e WHERE e.kind = kinds.kind) AS v FROM kinds WHERE kind IS NOT NULL`).Scan(&rows).Error
	}
	if err != nil {
		return nil, err
	}
	out := make(map[string]int, len(rows))
	for _, r := range rows {
		out[r.Kind] = r.V
	}
	return out, nil
}
