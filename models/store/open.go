package store

import (
	"context"
	"database/sql"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"strings"
	"syscall"
	"time"

	"github.com/pressly/goose/v3"
	"gorm.io/gorm"

	"lodebook/migrations"
	"lodebook/models/ledger"
)

// waits is how long a statement waits for another program to let go of the book.
const waits = 15 * time.Second

// settings are what tests vary.
type settings struct {
	busy     time.Duration
	schema   fs.FS             // of a file
	onServer fs.FS             // of a database
	options  map[string]string // added to the options of every connection to a file
	address  string            // of the database, with its password; empty: the book is a file
}

func usual() settings {
	return settings{busy: waits, schema: migrations.SQLite(), onServer: migrations.Postgres()}
}

// Create makes a new book at an address: a path, where it is for its user's eyes only, or in the
// PostgreSQL database of an address that begins with postgres:// or postgresql://. It refuses a path where
// there is something already, and a database that has a table.
func Create(ctx context.Context, address string) (*Store, error) {
	return create(ctx, address, usual())
}

func create(ctx context.Context, path string, set settings) (*Store, error) {
	if OnServer(path) {
		set.address = path
		return createServer(ctx, set)
	}
	err := reserve(path)
	if err != nil {
		return nil, err
	}
	s, err := begin(ctx, path, set)
	if err != nil {
		return nil, errors.Join(err, removeBook(path))
	}
	return s, nil
}

// vacant refuses a path where there is a file, or where a journal was left behind: SQLite would play
// that into whatever book is put beside it.
func vacant(path string) error {
	for _, end := range []string{"", "-wal", "-journal"} {
		_, err := os.Lstat(path + end)
		if err == nil {
			return refuse(fs.ErrExist, "%s exists already and is left as it is; name another file.", path+end)
		}
	}
	return nil
}

// reserve makes an empty file where there must be none.
func reserve(path string) error {
	err := vacant(path)
	if err != nil {
		return err
	}
	f, err := os.OpenFile(path, os.O_RDWR|os.O_CREATE|os.O_EXCL, 0o600)
	if errors.Is(err, fs.ErrExist) {
		return refuse(err, "%s exists already and is left as it is; name another file.", path)
	}
	if err != nil {
		return refuse(err, "%s cannot be made: %s.", path, plainly(err))
	}
	return f.Close()
}

func begin(ctx context.Context, path string, set settings) (*Store, error) {
	return connectFile(ctx, path, set, func(w *gorm.DB) error {
		err := w.WithContext(ctx).Exec(fmt.Sprintf("PRAGMA application_id = %d", applicationID)).Error
		if err != nil {
			return err
		}
		return migrate(ctx, path, w, set.schema)
	})
}

// removeBook removes a book's file and what SQLite may have laid beside it.
func removeBook(path string) error {
	var errs []error
	for _, end := range []string{"", "-wal", "-shm", "-journal"} {
		err := os.Remove(path + end)
		if !errors.Is(err, fs.ErrNotExist) {
			errs = append(errs, err)
		}
	}
	return errors.Join(errs...)
}

// Open opens the book at an address, as Create takes it, and brings an older known schema up to date.
// Whatever stands in the way is told as a *Refusal.
func Open(ctx context.Context, address string) (*Store, error) { return open(ctx, address, usual()) }

func open(ctx context.Context, path string, set settings) (*Store, error) {
	s, err := connectBook(ctx, path, set)
	if err != nil {
		return nil, err
	}
	err = s.Read(ctx, whole)
	if err != nil {
		return nil, errors.Join(s.doubt(ctx, err), s.Close())
	}
	return s, nil
}

// connectBook recognises a book and connects to it.
func connectBook(ctx context.Context, path string, set settings) (*Store, error) {
	if OnServer(path) {
		set.address = path
		return openServer(ctx, set)
	}
	err := lookAt(path)
	if err != nil {
		return nil, err
	}
	err = recognise(ctx, path, set)
	if err != nil {
		return nil, err
	}
	return connectFile(ctx, path, set, func(w *gorm.DB) error { return migrate(ctx, path, w, set.schema) })
}

// lookAt refuses what needs no database to refuse.
func lookAt(path string) error {
	err := mustBeFile(path)
	if err != nil {
		return err
	}
	return tryFile(path, os.O_RDWR)
}

// lookAtCopy is lookAt for a backup, which need not be writable.
func lookAtCopy(path string) error {
	err := mustBeFile(path)
	if err != nil {
		return err
	}
	return tryFile(path, os.O_RDONLY)
}

func mustBeFile(path string) error {
	info, err := os.Stat(path)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return refuse(err, "There is no book at %s.", path)
	case err != nil:
		return refuse(err, "%s cannot be read: %s.", path, plainly(err))
	case info.IsDir():
		return refuse(nil, "%s is a folder, not a book.", path)
	case info.Size() == 0:
		return refuse(nil, "%s is empty; it is not a book.", path)
	}
	return nil
}

// tryFile opens a file once and looks at how it begins.
func tryFile(path string, how int) error {
	f, err := os.OpenFile(path, how, 0)
	if errors.Is(err, fs.ErrPermission) || errors.Is(err, syscall.EROFS) {
		return refuse(err, "%s cannot be written by this user; a book must be writable.", path)
	}
	if err != nil {
		return refuse(err, "%s cannot be opened: %s.", path, plainly(err))
	}
	err = checkForm(path, f)
	return errors.Join(err, f.Close())
}

// magic is how every SQLite file begins. The page size stands at pageSizeAt, in two bytes, of which
// 1 means 65536 (SQLite's file format, section 1.3).
const (
	magic      = "SQLite format 3\x00"
	headerSize = 100
	pageSizeAt = 16
)

// checkForm looks at what SQLite itself takes no notice of: a file that another program wrote, and
// one whose last page was cut off, which it would fill up with zeros.
func checkForm(path string, f *os.File) error {
	head := make([]byte, headerSize)
	_, err := io.ReadFull(f, head)
	if err != nil || string(head[:len(magic)]) != magic {
		return refuse(err, "%s is not a book.", path)
	}
	size := int64(binary.BigEndian.Uint16(head[pageSizeAt:]))
	if size == 1 {
		size = 65536
	}
	info, err := f.Stat()
	if err != nil {
		return err
	}
	// What is still in the journal may mend a file that a crash left so.
	journal, err := os.Stat(path + "-wal")
	if info.Size()%max(size, 1) != 0 && (err != nil || journal.Size() == 0) {
		return refuse(ErrCorrupt, "%s is damaged: its end is missing; restore it from a backup.", path)
	}
	return nil
}

// recognise asks the file, without changing it, whether it is a book and of which schema. A file
// that is some other program's is not even switched to our kind of journal.
func recognise(ctx context.Context, path string, set settings) error {
	g, err := set.pool(plain(set.busy)).connect(ctx, path)
	if err != nil {
		return err
	}
	err = isBook(ctx, path, g, set.schema)
	return errors.Join(err, disconnect(g))
}

func isBook(ctx context.Context, path string, g *gorm.DB, schema fs.FS) error {
	var id int64
	err := g.WithContext(ctx).Raw("PRAGMA application_id").Scan(&id).Error
	if err != nil {
		return explain(path, err)
	}
	if id != applicationID {
		return refuse(nil, "%s is a database of another program, not a book.", path)
	}
	return knownSchema(ctx, path, g, schema)
}

// knownSchema refuses a book that a newer version of this program has written.
func knownSchema(ctx context.Context, path string, g *gorm.DB, schema fs.FS) error {
	have, err := schemaVersion(ctx, g)
	if err != nil {
		return explain(path, err)
	}
	newest, err := newestVersion(g, schema)
	if err != nil {
		return err
	}
	if have > newest {
		return refuse(nil, "%s was written by a newer version of this program (schema %d; this one knows up to %d); use that version.", path, have, newest)
	}
	return nil
}

func (s settings) pool(p pool) pool {
	for k, v := range s.options {
		p.options.Set(k, v)
	}
	return p
}

// connectFile opens both pools over a file; prepare has the writing one in between.
func connectFile(ctx context.Context, path string, set settings, prepare func(*gorm.DB) error) (*Store, error) {
	return connectBoth(path, set,
		func() (*gorm.DB, error) { return set.pool(writing(set.busy)).connect(ctx, path) },
		func() (*gorm.DB, error) { return set.pool(reading(set.busy)).connect(ctx, path) }, prepare)
}

// connectBoth opens the writing pool, lets prepare have it, and then opens the reading one.
func connectBoth(path string, set settings, writing, reading func() (*gorm.DB, error), prepare func(*gorm.DB) error) (*Store, error) {
	w, err := writing()
	if err != nil {
		return nil, err
	}
	err = prepare(w)
	if err != nil {
		return nil, errors.Join(explain(path, err), disconnect(w))
	}
	r, err := reading()
	if err != nil {
		return nil, errors.Join(err, disconnect(w))
	}
	return &Store{path: path, w: w, r: r, set: set}, nil
}

// schemaVersion is the number of the last migration that a book has had.
func schemaVersion(ctx context.Context, g *gorm.DB) (int64, error) {
	var v sql.NullInt64
	err := g.WithContext(ctx).Raw("SELECT MAX(version_id) FROM goose_db_version WHERE is_applied").Row().Scan(&v)
	if err != nil && strings.Contains(err.Error(), "no such table") {
		return 0, refuse(err, "The file was being made as a book when that was broken off; it holds nothing. Delete it and start again.")
	}
	return v.Int64, err
}

func provider(g *gorm.DB, schema fs.FS) (*goose.Provider, error) {
	db, err := g.DB()
	if err != nil {
		return nil, err
	}
	dialect := goose.DialectSQLite3
	if g.Name() == "postgres" {
		dialect = goose.DialectPostgres
	}
	return goose.NewProvider(dialect, db, schema, goose.WithDisableGlobalRegistry(true))
}

func newestVersion(g *gorm.DB, schema fs.FS) (int64, error) {
	p, err := provider(g, schema)
	if err != nil {
		return 0, err
	}
	sources := p.ListSources()
	return sources[len(sources)-1].Version, nil
}

// migrate applies the migrations that the book has not had. If it fails because another program
// did the same at the same moment, that is as good.
func migrate(ctx context.Context, path string, w *gorm.DB, schema fs.FS) error {
	p, err := provider(w, schema)
	if err != nil {
		return err
	}
	_, err = p.Up(ctx)
	if err == nil {
		return nil
	}
	pending, later := p.HasPending(ctx)
	if later == nil && !pending {
		return nil
	}
	return explain(path, fmt.Errorf("bringing the schema up to date: %w", err))
}

// whole is the quick check of every opening: there is a tree, and it is as long as the entries say.
func whole(t *Tx) error {
	size, err := t.Size()
	if err != nil {
		return err
	}
	var hashes int64
	err = t.db.Raw("SELECT COALESCE(MAX(idx) + 1, 0) FROM tree").Scan(&hashes).Error
	if err != nil {
		return err
	}
	if hashes != ledger.StoredCount(size) {
		return fmt.Errorf("%w: %d entries need %d hashes and there are %d", ErrCorrupt, size, ledger.StoredCount(size), hashes)
	}
	_, err = ledger.Root(size, t)
	return err
}

// doubt looks closer at a file that gave an error on opening, to tell damage from anything else.
func (s *Store) doubt(ctx context.Context, err error) error {
	err = explain(s.path, err)
	if !errors.Is(err, ErrCorrupt) {
		return err
	}
	if s.set.address != "" {
		return refuse(err, "%s is damaged; restore it from a backup.", s.path)
	}
	var found string
	worse := s.r.WithContext(ctx).Raw("PRAGMA quick_check(1)").Scan(&found).Error
	return refuse(errors.Join(err, worse, fmt.Errorf("quick check: %s", found)), "%s is damaged; restore it from a backup.", s.path)
}

// plainly is the bare reason of a file error, without the name of the call and the path.
func plainly(err error) string {
	var e *fs.PathError
	if errors.As(err, &e) {
		return e.Err.Error()
	}
	return err.Error()
}
