package store

import (
	"database/sql/driver"
	"encoding/json"
	"errors"
	"fmt"
	"time"

	"gorm.io/gorm/clause"

	"lodebook/models/civil"
)

// day is a civil day as stored: YYYY-MM-DD.
type day civil.Day

// Value writes the day for the database.
func (d day) Value() (driver.Value, error) { return civil.Day(d).String(), nil }

// Scan reads what Value wrote.
func (d *day) Scan(v any) error {
	s, err := text(v)
	if err != nil {
		return err
	}
	got, err := civil.ParseDay(s)
	*d = day(got)
	return err
}

// instantLayout has a fixed number of decimals and no zone but UTC, so that instants sort as text.
const instantLayout = "2006-01-02T15:04:05.000000Z"

// instant is a moment as stored.
type instant time.Time

// Value writes the moment for the database, cut to the microsecond.
func (i instant) Value() (driver.Value, error) { return moment(time.Time(i)), nil }

// Scan reads what Value wrote.
func (i *instant) Scan(v any) error {
	s, err := text(v)
	if err != nil {
		return err
	}
	got, err := time.Parse(instantLayout, s)
	*i = instant(got)
	return err
}

func moment(t time.Time) string { return t.UTC().Format(instantLayout) }

// codes is a list of codes as stored: a JSON array.
type codes []string

// Value writes the list for the database.
func (c codes) Value() (driver.Value, error) {
	if len(c) == 0 {
		return "[]", nil
	}
	b, err := json.Marshal([]string(c))
	return string(b), err
}

// Scan reads what Value wrote; an empty list is nil.
func (c *codes) Scan(v any) error {
	s, err := text(v)
	if err != nil {
		return err
	}
	var list []string
	err = json.Unmarshal([]byte(s), &list)
	if len(list) == 0 {
		list = nil
	}
	*c = list
	return err
}

func text(v any) (string, error) {
	switch s := v.(type) {
	case string:
		return s, nil
	case []byte:
		return string(s), nil
	}
	return "", fmt.Errorf("a stored value is %T where text was expected", v)
}

// upsert writes a row whose key columns say which row it is, in place of the one that was there.
func upsert[R any](t *Tx, table string, row R, key ...string) error {
	columns := make([]clause.Column, len(key))
	for i, k := range key {
		columns[i].Name = k
	}
	return t.db.Table(table).Clauses(clause.OnConflict{Columns: columns, UpdateAll: true}).Create(&row).Error
}

// one says that exactly one row was to be changed.
func one(changed int64, err error, what string, args ...any) error {
	if err != nil {
		return err
	}
	if changed != 1 {
		return errors.Join(ErrMissing, fmt.Errorf(what, args...))
	}
	return nil
}
