package migrations

import (
	"database/sql"
	"fmt"
	"io/fs"
	"regexp"
	"slices"
	"strings"
	"testing"

	"github.com/pressly/goose/v3"

	"lodebook/migrations/scratch"
)

// types says which type of PostgreSQL stands for which of SQLite.
var types = map[string]string{"INTEGER": "bigint", "BIGINT": "bigint", "TEXT": "text", "BLOB": "bytea", "BOOLEAN": "boolean"}

// The two schemas are the same but for the types: by their text and, when a server is set, by what the
// two databases say of their tables once all migrations are done.
func TestTheTwoSchemasAreTheSame(t *testing.T) {
	file, server := texts(t, SQLite()), texts(t, Postgres())
	if len(file) != len(server) {
		t.Fatalf("SQLite has %d migrations and PostgreSQL %d", len(file), len(server))
	}
	for i := range file {
		if same(file[i]) != same(server[i]) {
			t.Errorf("migration %d differs by more than its types:\n%s\n%s", i+1, same(file[i]), same(server[i]))
		}
	}
	if !scratch.OnServer() {
		return
	}
	one, two := fileCatalog(t, migrated(t)), serverCatalog(t, migratedServer(t))
	if len(one) < 100 {
		t.Errorf("only %d facts are compared", len(one))
	}
	for _, fact := range one {
		if !slices.Contains(two, fact) {
			t.Errorf("only SQLite: %s", fact)
		}
	}
	for _, fact := range two {
		if !slices.Contains(one, fact) {
			t.Errorf("only PostgreSQL: %s", fact)
		}
	}
}

var (
	remark  = regexp.MustCompile(`(?m)--.*$`)
	typed   = regexp.MustCompile(`(?m)^(\s+\w+) (INTEGER|BIGINT|TEXT|BLOB|BYTEA|BOOLEAN)\b( COLLATE "C")?`)
	numbers = regexp.MustCompile(`bigint (NOT NULL )?PRIMARY KEY`) // SQLite's own row number is never null
)

// texts are the migrations of a folder in order.
func texts(t *testing.T, folder fs.FS) []string {
	t.Helper()
	names, err := fs.Glob(folder, "*")
	if err != nil {
		t.Fatal(err)
	}
	var all []string
	for _, n := range names {
		b, err := fs.ReadFile(folder, n)
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, string(b))
	}
	return all
}

// same is a migration with PostgreSQL's types and without remarks.
func same(text string) string {
	text = typed.ReplaceAllStringFunc(remark.ReplaceAllString(text, ""), func(column string) string {
		m := typed.FindStringSubmatch(column)
		if m[2] == "BYTEA" {
			return m[1] + " bytea"
		}
		return m[1] + " " + types[m[2]]
	})
	return strings.Join(strings.Fields(numbers.ReplaceAllString(text, "bigint PRIMARY KEY")), " ")
}

// Every text is compared byte by byte, whatever the locale of the database.
func TestTextOnServersIsComparedByteByByte(t *testing.T) {
	for _, text := range texts(t, Postgres()) {
		for line := range strings.Lines(remark.ReplaceAllString(text, "")) {
			if strings.Contains(line, " TEXT") && !strings.Contains(line, ` TEXT COLLATE "C"`) {
				t.Errorf("without COLLATE: %s", line)
			}
		}
	}
}

func migratedServer(t *testing.T) *sql.DB {
	t.Helper()
	db, err := sql.Open("pgx", scratch.Database(t))
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := db.Close(); err != nil {
			t.Error(err)
		}
	})
	p, err := goose.NewProvider(goose.DialectPostgres, db, Postgres(), goose.WithDisableGlobalRegistry(true))
	if err != nil {
		t.Fatal(err)
	}
	if _, err := p.Up(t.Context()); err != nil {
		t.Fatal(err)
	}
	return db
}

// ask gives the rows of a query, each as its cells with a blank between.
func ask(t *testing.T, db *sql.DB, query string, args ...any) [][]string {
	t.Helper()
	rows, err := db.Query(query, args...)
	if err != nil {
		t.Fatal(err)
	}
	defer func() {
		if err := rows.Close(); err != nil {
			t.Error(err)
		}
	}()
	columns, err := rows.Columns()
	if err != nil {
		t.Fatal(err)
	}
	var all [][]string
	for rows.Next() {
		cells := make([]sql.NullString, len(columns))
		into := make([]any, len(columns))
		for i := range cells {
			into[i] = &cells[i]
		}
		if err := rows.Scan(into...); err != nil {
			t.Fatal(err)
		}
		var row []string
		for _, c := range cells {
			row = append(row, c.String)
		}
		all = append(all, row)
	}
	if err := rows.Err(); err != nil {
		t.Fatal(err)
	}
	return all
}

// bare is a condition without what the two databases write otherwise: brackets, casts and blanks.
func bare(condition string) string {
	return strings.Join(strings.Fields(strings.NewReplacer("(", " ", ")", " ", "::text", "").Replace(condition)), " ")
}

// fileCatalog is what SQLite says of its tables, a fact a line.
func fileCatalog(t *testing.T, db *sql.DB) []string {
	t.Helper()
	check := regexp.MustCompile(`(?m)^\s+CHECK (.*)$`)
	var facts []string
	for _, table := range ask(t, db, "SELECT name, sql FROM sqlite_master WHERE type = 'table' AND name NOT LIKE 'sqlite_%' AND name NOT LIKE 'goose_%'") {
		name := table[0]
		keys := map[string]string{}
		for _, c := range ask(t, db, "SELECT name, type, \"notnull\", pk FROM pragma_table_info(?)", name) {
			null := c[2] == "0" && c[3] == "0"
			facts = append(facts, fmt.Sprintf("%s.%s is %s, null %t", name, c[0], types[c[1]], null))
			if c[3] != "0" {
				keys[c[3]] = c[0]
			}
		}
		var key []string
		for i := range len(keys) {
			key = append(key, keys[fmt.Sprint(i+1)])
		}
		facts = append(facts, fmt.Sprintf("%s has the key %s", name, strings.Join(key, ",")))
		facts = append(facts, fileIndexes(t, db, name)...)
		for _, f := range ask(t, db, `SELECT "from", "table", "to" FROM pragma_foreign_key_list(?)`, name) {
			facts = append(facts, fmt.Sprintf("%s.%s is one of %s.%s", name, f[0], f[1], f[2]))
		}
		for _, m := range check.FindAllStringSubmatch(table[1], -1) {
			facts = append(facts, fmt.Sprintf("%s checks %s", name, bare(m[1])))
		}
	}
	return facts
}

func fileIndexes(t *testing.T, db *sql.DB, table string) []string {
	t.Helper()
	var facts []string
	for _, x := range ask(t, db, `SELECT l.name, l."unique", l.origin, COALESCE(m.sql, '') FROM pragma_index_list(?) AS l
		LEFT JOIN sqlite_master AS m ON m.name = l.name WHERE l.origin <> 'pk'`, table) {
		var columns []string
		for _, c := range ask(t, db, "SELECT name FROM pragma_index_info(?) ORDER BY seqno", x[0]) {
			columns = append(columns, c[0])
		}
		name := x[0]
		if x[2] == "u" {
			name = "unique" // the two databases name it otherwise
		}
		_, where, _ := strings.Cut(x[3], " WHERE ")
		facts = append(facts, fmt.Sprintf("%s has the index %s on %s, unique %t, where %q", table, name, strings.Join(columns, ","), x[1] == "1", bare(where)))
	}
	return facts
}

// serverCatalog is the same of PostgreSQL.
func serverCatalog(t *testing.T, db *sql.DB) []string {
	t.Helper()
	var facts []string
	for _, c := range ask(t, db, `SELECT table_name, column_name, data_type, is_nullable = 'YES', COALESCE(collation_name, 'C') = 'C' FROM information_schema.columns
		WHERE table_schema = 'public' AND table_name NOT LIKE 'goose_%'`) {
		facts = append(facts, fmt.Sprintf("%s.%s is %s, null %s", c[0], c[1], c[2], c[3]))
		if c[4] != "true" {
			t.Errorf("%s.%s is not compared byte by byte", c[0], c[1])
		}
	}
	key := regexp.MustCompile(`^PRIMARY KEY \((.*)\)$`)
	other := regexp.MustCompile(`^FOREIGN KEY \((\w+)\) REFERENCES (\w+)\((\w+)\)$`)
	for _, c := range ask(t, db, `SELECT conrelid::regclass::text, contype::text, pg_get_constraintdef(oid) FROM pg_constraint
		WHERE connamespace = 'public'::regnamespace AND conrelid::regclass::text NOT LIKE 'goose_%' AND contype IN ('p', 'c', 'f')`) {
		switch c[1] {
		case "p":
			facts = append(facts, fmt.Sprintf("%s has the key %s", c[0], strings.ReplaceAll(key.FindStringSubmatch(c[2])[1], " ", "")))
		case "f":
			m := other.FindStringSubmatch(c[2])
			facts = append(facts, fmt.Sprintf("%s.%s is one of %s.%s", c[0], m[1], m[2], m[3]))
		case "c":
			facts = append(facts, fmt.Sprintf("%s checks %s", c[0], bare(strings.TrimPrefix(c[2], "CHECK "))))
		}
	}
	for _, x := range ask(t, db, `SELECT i.indrelid::regclass::text, CASE WHEN c.contype = 'u' THEN 'unique' ELSE i.indexrelid::regclass::text END,
		(SELECT string_agg(pg_get_indexdef(i.indexrelid, k, true), ',' ORDER BY k) FROM generate_series(1, i.indnkeyatts) AS k),
		i.indisunique, COALESCE(pg_get_expr(i.indpred, i.indrelid), '')
		FROM pg_index AS i LEFT JOIN pg_constraint AS c ON c.conindid = i.indexrelid AND c.contype IN ('p', 'u')
		WHERE i.indrelid::regclass::text NOT LIKE 'goose_%' AND i.indrelid::regclass::text NOT LIKE 'pg_%' AND NOT i.indisprimary`) {
		facts = append(facts, fmt.Sprintf("%s has the index %s on %s, unique %s, where %q", x[0], x[1], x[2], x[3], bare(x[4])))
	}
	return facts
}
