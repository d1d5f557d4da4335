package migrations

import (
	"context"
	"database/sql"
	"flag"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	_ "github.com/mattn/go-sqlite3"
	"github.com/pressly/goose/v3"
)

var update = flag.Bool("update", false, "write the schema that was found to testdata/schema.sql")

const golden = "testdata/schema.sql"

// The schema after all migrations stands in a file, so that a change of it is seen when it is read
// before it is taken.
func TestSchemaIsTheOneInReview(t *testing.T) {
	got := dump(t, migrated(t))
	if *update {
		err := os.WriteFile(golden, []byte(got), 0o644)
		if err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(golden)
	if err != nil {
		t.Fatal(err)
	}
	if got != string(want) {
		t.Errorf("the schema is not that of %s; look at the difference and run this test with -update:\n%s", golden, got)
	}
}

func migrated(t *testing.T) *sql.DB {
	t.Helper()
	db, err := sql.Open("sqlite3", filepath.Join(t.TempDir(), "empty.db"))
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		err := db.Close()
		if err != nil {
			t.Error(err)
		}
	})
	p, err := goose.NewProvider(goose.DialectSQLite3, db, SQLite(), goose.WithDisableGlobalRegistry(true))
	if err != nil {
		t.Fatal(err)
	}
	done, err := p.Up(context.Background())
	if err != nil || len(done) != len(p.ListSources()) {
		t.Fatalf("%d of %d migrations went up: %v", len(done), len(p.ListSources()), err)
	}
	return db
}

// dump writes every table and index as it was made, in order of name, without goose's own.
func dump(t *testing.T, db *sql.DB) string {
	t.Helper()
	rows, err := db.Query(`SELECT sql FROM sqlite_master
		WHERE sql IS NOT NULL AND name NOT LIKE 'sqlite_%' AND name NOT LIKE 'goose_%' ORDER BY name`)
	if err != nil {
		t.Fatal(err)
	}
	var all strings.Builder
	for rows.Next() {
		var s string
		err = rows.Scan(&s)
		if err != nil {
			t.Fatal(err)
		}
		all.WriteString(s + ";\n\n")
	}
	err = rows.Err()
	if err != nil {
		t.Fatal(err)
	}
	return all.String()
}

// Files are numbered from 1 without a hole, so that no two branches add the same number unseen.
func TestFilesAreNumberedInARow(t *testing.T) {
	form := regexp.MustCompile(`^(\d{5})_[a-z0-9_]+\.sql$`)
	for home, folder := range map[string]fs.FS{"SQLite": SQLite(), "PostgreSQL": Postgres()} {
		files, err := fs.Glob(folder, "*")
		if err != nil {
			t.Fatal(err)
		}
		for i, f := range files {
			m := form.FindStringSubmatch(f)
			if m == nil || m[1] != fmt.Sprintf("%05d", i+1) {
				t.Errorf("file %d of %s is named %s", i+1, home, f)
			}
		}
		if len(files) == 0 {
			t.Errorf("%s has no migration", home)
		}
	}
}

// Another database shall be able to take the same SQL with its own types: nothing is used that only
// SQLite has, but the two types that the first file names.
func TestSQLIsCommon(t *testing.T) {
	only := regexp.MustCompile(`(?i)\b(autoincrement|without\s+rowid|strict|glob|ifnull|datetime|strftime|julianday|randomblob|pragma|insert\s+or|replace\s+into|collate\s+nocase|rowid)\b`)
	comment := regexp.MustCompile(`(?m)--.*$`)
	files, err := fs.Glob(SQLite(), "*")
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range files {
		b, err := fs.ReadFile(SQLite(), f)
		if err != nil {
			t.Fatal(err)
		}
		if found := only.FindString(comment.ReplaceAllString(string(b), "")); found != "" {
			t.Errorf("%s uses %q", f, found)
		}
	}
}
