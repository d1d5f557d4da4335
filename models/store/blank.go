package store

// BlankAccounts empties the names of the accounts that belong to a person, in every row. Seq is the
// erasing entry, as in BlankPerson.
func (t *Tx) BlankAccounts(person string, seq int64) error {
	err := t.settle()
	if err != nil {
		return err
	}
	return t.db.Exec("UPDATE accounts SET name = '' WHERE person = ? AND person <> ''", person).Error
}
