package store

import (
	"errors"
	"fmt"

	"github.com/mattn/go-sqlite3"
)

// Refusal says in a sentence for its reader why a book cannot be opened, made, read or written.
// Err is what lay behind it, for the log.
type Refusal struct {
	Reason string
	Err    error
}

// Error is the sentence.
func (r *Refusal) Error() string { return r.Reason }

// Unwrap gives what lay behind the refusal.
func (r *Refusal) Unwrap() error { return r.Err }

// What callers tell apart. Each is found with errors.Is, inside a Refusal or wrapped.
var (
	// ErrBusy says that another program held the book for longer than we wait.
	ErrBusy = errors.New("the book is busy")
	// ErrExists says that the book already has an entry of that identifier.
	ErrExists = errors.New("the book already has an entry of this identifier")
	// ErrSuperseded says that the entry to supersede has been superseded or withdrawn before.
	ErrSuperseded = errors.New("the entry has been superseded or withdrawn before")
	// ErrCorrupt says that the file is damaged.
	ErrCorrupt = errors.New("the book's file is damaged")
	// ErrMissing says that a row that was to be changed is not there.
	ErrMissing = errors.New("no such row")
)

func refuse(err error, format string, args ...any) *Refusal {
	return &Refusal{Reason: fmt.Sprintf(format, args...), Err: err}
}

// explain turns what the database says of the book into a refusal; any other error passes as it is.
func explain(path string, err error) error {
	var done *Refusal
	if err == nil || errors.As(err, &done) {
		return err
	}
	var e sqlite3.Error
	if !errors.As(err, &e) {
		return explainServer(path, err)
	}
	switch e.Code {
	case sqlite3.ErrBusy, sqlite3.ErrLocked:
		return refuse(errors.Join(ErrBusy, err), "%s is in use by another program; try again when it has finished.", path)
	case sqlite3.ErrReadonly, sqlite3.ErrPerm:
		return refuse(err, "%s, or the folder it is in, is read-only; a book needs both to be writable.", path)
	case sqlite3.ErrCantOpen:
		return refuse(err, "%s cannot be opened; a book's file and its folder must be readable and writable by the program's user.", path)
	case sqlite3.ErrCorrupt:
		return refuse(errors.Join(ErrCorrupt, err), "%s is damaged; restore it from a backup.", path)
	case sqlite3.ErrNotADB:
		return refuse(err, "%s is not a book.", path)
	case sqlite3.ErrFull:
		return refuse(err, "There is no room left on the disk of %s; nothing was written.", path)
	case sqlite3.ErrIoErr:
		return refuse(err, "The disk of %s gave an error; nothing was written.", path)
	}
	return err
}

// clash names the rule of the entries table that an insert ran into.
func clash(err error) error {
	var e sqlite3.Error
	if !errors.As(err, &e) || e.ExtendedCode != sqlite3.ErrConstraintUnique {
		return serverClash(err)
	}
	switch e.Error() {
	case "UNIQUE constraint failed: entries.id":
		return errors.Join(ErrExists, err)
	case "UNIQUE constraint failed: entries.supersedes":
		return errors.Join(ErrSuperseded, err)
	}
	return err
}
