package store

// KindVersions gives the kinds of the entries after a sequence number, each with its highest version.
func (t *Tx) KindVersions(after int64) (map[string]int, error) {
	var rows []struct {
		Kind string
		V    int
	}
	err := t.db.Raw("SELECT kind, MAX(v) AS v FROM entries WHERE seq > ? GROUP BY kind", after).Scan(&rows).Error
	if err != nil {
		return nil, err
	}
	out := make(map[string]int, len(rows))
	for _, r := range rows {
		out[r.Kind] = r.V
	}
	return out, nil
}
