// Package scratch gives tests a place for a book: a file of their own or, when LODEBOOK_POSTGRES is set to
// the address of a PostgreSQL server in which databases may be made, a database of their own.
package scratch

import (
	"context"
	"crypto/rand"
	"database/sql"
	"encoding/hex"
	"net/url"
	"os"
	"path/filepath"
	"sync"
	"testing"

	_ "github.com/jackc/pgx/v5/stdlib" // the driver "pgx"
)

// Variable is the environment variable with the address of the server.
const Variable = "LODEBOOK_POSTGRES"

// OnServer tells whether books are made on a server.
func OnServer() bool { return os.Getenv(Variable) != "" }

// Book is the address of a place where no book is yet. It goes when the test ends.
func Book(t testing.TB) string {
	t.Helper()
	if OnServer() {
		return Database(t)
	}
	return filepath.Join(t.TempDir(), "site.book")
}

// admin is the connection over which databases are made and dropped.
var admin = sync.OnceValues(func() (*sql.DB, error) {
	db, err := sql.Open("pgx", os.Getenv(Variable))
	if err == nil {
		db.SetMaxOpenConns(2)
	}
	return db, err
})

// Database is the address of a new, empty database on the server, which must be set.
func Database(t testing.TB) string {
	t.Helper()
	place, err := url.Parse(os.Getenv(Variable))
	if err != nil || place.Host == "" {
		t.Fatalf("%s is not the address of a server, such as postgres://user@localhost:5432/postgres", Variable)
	}
	mark := make([]byte, 8)
	_, _ = rand.Read(mark) // it never fails
	name := "lodebook_test_" + hex.EncodeToString(mark)
	command(t, "CREATE DATABASE "+name+" TEMPLATE template0")
	t.Cleanup(func() { command(t, "DROP DATABASE "+name+" WITH (FORCE)") })
	place.Path = "/" + name
	return place.String()
}

func command(t testing.TB, text string) {
	t.Helper()
	db, err := admin()
	if err == nil {
		_, err = db.ExecContext(context.Background(), text)
	}
	if err != nil {
		t.Fatal(err)
	}
}
