package store

// Schema is the number of the last migration that the book has had.
func (t *Tx) Schema() (int64, error) {
	var n int64
	err := t.db.Raw("SELECT MAX(version_id) FROM goose_db_version WHERE is_applied").Scan(&n).Error
	return n, err
}
