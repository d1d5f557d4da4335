package store

import (
	"database/sql"
	"errors"
	"fmt"
	"reflect"
	"strings"
	"sync"

	"gorm.io/gorm/schema"
)

// streamRows is how many rows Stream hands on at once.
const streamRows = 20000

// Stream hands on every projected row, some of one table at a time: those of a table in order of their
// entry, and tables so that what a row names comes before it. With a site, only what the standings, the
// people and the fixtures of that site need: its own rows, and of the people who were ever on its staff all
// that happened to them anywhere. What fn is given is good until it returns.
func (t *Tx) Stream(site string, fn func(*Delta) error) error {
	err := t.settle()
	if err != nil {
		return err
	}
	for _, p := range projections {
		if p.title() != "records" {
			err = errors.Join(err, p.stream(t, site, fn))
		}
	}
	if err != nil {
		return err
	}
	for _, p := range projections {
		if p.title() == "records" {
			err = p.stream(t, site, fn)
		}
	}
	return err
}

const staff = "(SELECT code FROM stints WHERE site = @site AND kind = 'person')"

// ofSite are the conditions for what a site needs of each table; of the others it needs all.
var ofSite = map[string]string{
	"sites":        "code = @site",
	"versions":     "site = @site",
	"people":       "code IN " + staff,
	"fixtures":     "site = @site",
	"stints":       "site = @site",
	"facts":        "site = @site",
	"records":      "site = @site OR (subject_kind = 'person' AND subject_code IN " + staff + ")",
	"events":       "site = @site OR (subject_kind = 'person' AND subject_code IN " + staff + ")",
	"excusals":     "site = @site OR (subject_kind = 'person' AND subject_code IN " + staff + ")",
	"rights":       "site = @site",
	"duties":       "site = @site",
	"stocks":       "site = @site",
	"incidents":    "site = @site",
	"reports":      "site = @site",
	"remedies":     "site = @site",
	"remedy_steps": "site = @site",
	"outages":      "site = @site",
	"returns":      "site = @site",
	"marks":        "site = @site",
	"visits":       "site = @site",
	"visit_steps":  "site = @site",
	"plans":        "site = @site",
}

func (p table[T, R]) stream(t *Tx, site string, fn func(*Delta) error) (err error) {
	var row R
	columns, into, err := places(&row)
	if err != nil {
		return err
	}
	q := t.db.Table(p.name).Select(columns).Order("seq, n")
	if where := ofSite[p.name]; site != "" && where != "" {
		q = q.Where(where, sql.Named("site", site))
	}
	rows, err := q.Rows()
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, rows.Close()) }()
	var d Delta
	list := p.of(&d)
	for rows.Next() {
		if err := rows.Scan(into...); err != nil {
			return err
		}
		*list = append(*list, p.out(row))
		if len(*list) == streamRows {
			if err := fn(&d); err != nil {
				return err
			}
			*list = (*list)[:0]
		}
	}
	if len(*list) > 0 {
		err = fn(&d)
	}
	return errors.Join(err, rows.Err())
}

// places gives the columns of a stored row and where in it each is scanned to, so that a row costs no
// look at its type.
func places[R any](row *R) (columns string, into []any, err error) {
	s, err := schema.Parse(row, &schemas, schema.NamingStrategy{})
	if err != nil {
		return "", nil, fmt.Errorf("%T: %w", row, err)
	}
	v := reflect.ValueOf(row).Elem()
	var names []string
	for _, f := range s.Fields {
		names = append(names, f.DBName)
		into = append(into, v.FieldByIndex(f.StructField.Index).Addr().Interface())
	}
	return strings.Join(names, ", "), into, nil
}

var schemas sync.Map
