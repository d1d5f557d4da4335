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
	if err != nil {
		return nil, err
	}
	out := make(map[string]int, len(rows))
	for _, r := range rows {
		out[r.Kind] = r.V
	}
	return out, nil
}
