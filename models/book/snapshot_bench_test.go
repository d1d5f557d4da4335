package book_test

import (
	"context"
	"crypto/rand"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"testing"
	"time"

	"lodebook/models/book"
)

// BenchmarkStart compares the two ways to start with the same book.
func BenchmarkStart(b *testing.B) {
	const people, each = 1000, 50
	path := startBook(b, people, each)
	for _, way := range []string{"rows", "snapshot"} {
		b.Run(way, func(b *testing.B) {
			o := startOptions()
			o.Tell = func(s string) { b.Error(s) }
			if way == "rows" {
				o.Snapshots = b.TempDir() // there is none
			}
			for b.Loop() {
				k, err := book.Open(context.Background(), path, o)
				if err != nil {
					b.Fatal(err)
				}
				if err := k.Close(); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(people*each*float64(b.N)/b.Elapsed().Seconds()/1e6, "Mrecords/s")
		})
	}
}

func startOptions() book.Options {
	now := time.Date(2026, 3, 2, 8, 0, 0, 0, time.UTC)
	return book.Options{Clock: func() time.Time { return now }, Random: rand.Reader}
}

// startBook makes a book with a snapshot: of so many people with so many records each.
func startBook(b *testing.B, people, each int) string {
	ok := func(err error) {
		if err != nil {
			b.Fatal(err)
		}
	}
	ctx := context.Background()
	path := filepath.Join(b.TempDir(), "site.book")
	k, err := book.Create(ctx, path, startOptions())
	ok(err)
	source, err := os.ReadFile("testdata/site.yaml")
	ok(err)
	op := book.SystemOperator("ops")
	_, err = k.OpenProgram(ctx, op, source, "")
	ok(err)
	var staff, records []book.BulkRow
	day := time.Date(2021, 1, 4, 0, 0, 0, 0, time.UTC)
	for p := range people {
		code := fmt.Sprintf("P%05d", p)
		staff = append(staff, book.PersonForm{Code: code, Name: "Person " + code, Level: "L2", Crew: "early", Joined: "2021-01-01"})
		for r := range each {
			records = append(records, book.RecordForm{Record: []string{"training/level-2", "screening/staff"}[r%2], Subject: "person:" + code, On: day.AddDate(0, 0, p%30+r*35).Format(time.DateOnly)})
		}
	}
	_, err = k.Bulk(ctx, op, slices.Values([]book.BulkTable{
		{Table: "people", Site: site, FileName: "people.csv", Rows: slices.Values(staff)},
		{Table: "records", Site: site, FileName: "records.csv", Rows: slices.Values(records)},
	}))
	ok(err)
	n, err := k.KeepSnapshot(ctx, 1)
	ok(err)
	if n < int64(people*each) {
		b.Fatalf("the snapshot has %d entries", n)
	}
	ok(k.Close())
	return path
}
