package main

import (
	"database/sql"
	"errors"
	"fmt"
	"iter"
	"maps"
	"slices"
	"strings"
	"testing"

	"lodebook/cmd/lodeload/network"
	"lodebook/models/book"
	"lodebook/models/table"
)

// filled are the tables that a network writes into.
var filled = []string{"accounts", "batches", "entries", "events", "excusals", "facts", "fixtures", "head", "meta", "people", "records", "sites", "stints", "tree", "veils", "versions"}

// TestBulkEndsAsImportDoes holds that the bulk path ends in the same book as the public import path: every
// byte of every table that belongs to the book, and the head of its tree.
func TestBulkEndsAsImportDoes(t *testing.T) {
	for _, operator := range []bool{false, true} {
		n := networkOf(t, network.Size{Seed: 11, Sites: 6, People: 120, Fixtures: 72, Days: 200})
		one, onePath := bookOf(t, n, importNetwork, operator)
		two, twoPath := bookOf(t, n, bulkNetwork, operator)
		entries, err := one.Size(t.Context())
		if err != nil {
			t.Fatal(err)
		}
		if entries < 2000 {
			t.Fatalf("only %d entries", entries)
		}
		dumps := make([]map[string][]string, 2)
		for i, b := range []*book.Book{one, two} {
			r, err := b.Verify(t.Context(), nil)
			if err != nil || r.FirstFault != "" {
				t.Fatal(r.FirstFault, err)
			}
			if dumps[i], err = b.Dump(t.Context()); err != nil {
				t.Fatal(err)
			}
			dumps[i]["head"] = []string{fmt.Sprintf("%x", r.Head)}
		}
		for i, path := range []string{onePath, twoPath} {
			for _, table := range []string{"meta", "entries", "tree", "veils"} {
				dumps[i][table] = rawRows(t, path, table)
			}
		}
		for _, table := range slices.Sorted(maps.Keys(dumps[0])) {
			a, b := dumps[0][table], dumps[1][table]
			if len(a) == 0 && slices.Contains(filled, table) {
				t.Errorf("%s is empty: there is nothing to compare", table)
			}
			if !slices.Equal(a, b) {
				t.Errorf("%s: %d rows by import, %d in bulk, and they differ", table, len(a), len(b))
			}
		}
		if len(dumps[0]["veils"]) < 200 || operator != (len(dumps[0]["veils"]) > int(entries)) {
			t.Errorf("%d veils", len(dumps[0]["veils"]))
		}
	}
}

// rawRows is a whole table as text, with the types of its values.
func rawRows(t *testing.T, path, table string) []string {
	t.Helper()
	db, err := sql.Open("sqlite3", "file:"+path+"?mode=ro")
	if err != nil {
		t.Fatal(err)
	}
	defer func() { _ = db.Close() }()
	rows, err := db.QueryContext(t.Context(), "SELECT * FROM "+table+" ORDER BY 1, 2")
	if err != nil {
		t.Fatal(err)
	}
	defer func() { _ = rows.Close() }()
	columns, err := rows.Columns()
	if err != nil {
		t.Fatal(err)
	}
	values, into := make([]any, len(columns)), make([]any, len(columns))
	for i := range values {
		into[i] = &values[i]
	}
	var out []string
	for rows.Next() {
		if err := rows.Scan(into...); err != nil {
			t.Fatal(err)
		}
		line := ""
		for _, v := range values {
			if b, ok := v.([]byte); ok {
				v = string(b)
				line += "bytes of "
			}
			line += fmt.Sprintf("%T %v, ", v, v)
		}
		out = append(out, line)
	}
	if err := rows.Err(); err != nil {
		t.Fatal(err)
	}
	return out
}

// TestBulkRefuses holds that a bulk with one fault in it leaves nothing behind.
func TestBulkRefuses(t *testing.T) {
	n := networkOf(t, network.Size{Seed: 2, Sites: 1, People: 10, Fixtures: 14, Days: 100})
	onlyPeople := func(a *app, b *book.Book, n *network.Network, actor book.Actor, _ func(*network.Site) error) error {
		return importTable(a, b, n.Site(0), actor, "people")
	}
	b, _ := bookOf(t, n, onlyPeople, false)
	site := network.SiteCode(0)
	size, err := b.Size(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	good := book.RecordForm{Record: "training/fire", Subject: "person:P0000001", On: "2021-02-03"}
	with := func(change func(*book.RecordForm)) book.BulkRow {
		f := good
		change(&f)
		return f
	}
	for _, x := range []struct {
		name  string
		table book.BulkTable
		says  string
	}{
		{"a site that has rows", book.BulkTable{Table: "people", Site: site, Rows: rowsOf(book.PersonForm{Code: "P1", Name: "Ann Onym"})}, "has entries of the kind person already"},
		{"another table", book.BulkTable{Table: "passages", Site: site, Rows: rowsOf(good)}, "is no table that can be imported"},
		{"another site", book.BulkTable{Table: "records", Site: "NOWHERE", Rows: rowsOf(good)}, "NOWHERE"},
		{"a row of another table", book.BulkTable{Table: "events", Site: site, Rows: rowsOf(good)}, "a row of records was given among events"},
		{"an identifier", book.BulkTable{Table: "records", Site: site, Rows: rowsOf(with(func(f *book.RecordForm) { f.ID = "018f0000-0000-7000-8000-000000000000" }))}, "line 1: id"},
		{"no such subject", book.BulkTable{Table: "records", Site: site, Rows: rowsOf(good, with(func(f *book.RecordForm) { f.Subject = "person:NOBODY" }))}, "line 2: subject"},
		{"no day", book.BulkTable{Table: "records", Site: site, Rows: rowsOf(with(func(f *book.RecordForm) { f.On = "soon" }))}, "line 1: on"},
	} {
		_, err := b.Bulk(t.Context(), maker, tables(x.table))
		if err == nil || !strings.Contains(err.Error(), x.says) {
			t.Errorf("%s: %v; expected %q", x.name, err, x.says)
		}
		var fault *table.Fault
		if strings.HasPrefix(x.says, "line") && !errors.As(err, &fault) {
			t.Errorf("%s: %T is no fault of a row", x.name, err)
		}
		if after, err := b.Size(t.Context()); err != nil || after != size {
			t.Errorf("%s: %d entries, %d before (%v)", x.name, after, size, err)
		}
	}
	if _, err := b.Bulk(t.Context(), book.Actor{Role: book.Reader}, tables(book.BulkTable{Table: "records", Site: site, Rows: rowsOf(good)})); err == nil {
		t.Error("a reader brought rows in")
	}
}

func rowsOf(rows ...book.BulkRow) iter.Seq[book.BulkRow] { return slices.Values(rows) }

func tables(all ...book.BulkTable) iter.Seq[book.BulkTable] { return slices.Values(all) }
