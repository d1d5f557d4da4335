// Package migrations holds the numbered SQL that makes a book's tables, embedded in the program.
// A file that has been released is never changed; a change is a new file with the next number.
package migrations

import (
	"embed"
	"io/fs"
)

//go:embed sqlite/*.sql postgres/*.sql
var files embed.FS

// SQLite is the folder of numbered files for SQLite, as goose reads them: 00001_name.sql and on.
func SQLite() fs.FS { return folder("sqlite") }

// Postgres is the folder of numbered files for PostgreSQL. Its files have the numbers of SQLite's and
// make the same tables.
func Postgres() fs.FS { return folder("postgres") }

func folder(name string) fs.FS {
	sub, err := fs.Sub(files, name)
	if err != nil {
		panic(err) // the embedded folder is there or the program does not compile
	}
	return sub
}
