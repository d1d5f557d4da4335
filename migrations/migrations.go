// Package migrations holds the numbered SQL that makes a book's tables, embedded in the program.
// A file that has been released is never changed; a change is a new file with the next number.
package migrations

import (
	"embed"
	"io/fs"
)

//go:embed sqlite/*.sql
var files embed.FS

// SQLite is the folder of numbered files for SQLite, as goose reads them: 00001_name.sql and on.
func SQLite() fs.FS {
	sub, err := fs.Sub(files, "sqlite")
	if err != nil {
		panic(err) // the embedded folder is there or the program does not compile
	}
	return sub
}
