package store

import (
	"context"
	"database/sql"
	"database/sql/driver"
	"errors"
	"fmt"
	"io"
	"net/url"
	"path/filepath"
	"strconv"
	"strings"
	"time"

	"github.com/mattn/go-sqlite3"
	"gorm.io/driver/sqlite"
	"gorm.io/gorm"
	"gorm.io/gorm/logger"
)

// applicationID marks a SQLite file as a book (the bytes "Lodb", in the header's field for it).
const applicationID = 0x4c6f6462

// pool says how the connections of one pool are opened and what must hold on each of them.
type pool struct {
	options url.Values
	pragmas map[string]string // read back on every new connection
	most    int               // connections at most; 0: no limit
}

// writing is the pool of the one connection that writes; its transactions take the write lock at
// once, so that none fails half-way because another program wrote in between.
func writing(busy time.Duration) pool {
	return pool{
		most: 1,
		options: url.Values{
			"mode": {"rw"}, "_journal_mode": {"WAL"}, "_synchronous": {"FULL"}, "_foreign_keys": {"on"},
			"_busy_timeout": {milliseconds(busy)}, "_txlock": {"immediate"}, "_secure_delete": {"on"},
			"_cache_size": {"-65536"}, "_stmt_cache_size": {"64"},
		},
		pragmas: map[string]string{
			"journal_mode": "wal", "synchronous": "2", "foreign_keys": "1", "secure_delete": "1",
			"busy_timeout": milliseconds(busy),
		},
	}
}

// reading is the pool of the connections that read; they take no lock that keeps a writer out.
func reading(busy time.Duration) pool {
	return pool{
		options: url.Values{
			"mode": {"rw"}, "_query_only": {"on"}, "_foreign_keys": {"on"}, "_synchronous": {"FULL"},
			"_busy_timeout": {milliseconds(busy)}, "_txlock": {"deferred"}, "_secure_delete": {"on"},
			"_stmt_cache_size": {"64"},
		},
		pragmas: map[string]string{
			"journal_mode": "wal", "synchronous": "2", "foreign_keys": "1", "query_only": "1",
			"busy_timeout": milliseconds(busy),
		},
	}
}

// plain is the pool that looks at a file without changing anything of it, its journal included.
func plain(busy time.Duration) pool {
	return pool{
		options: url.Values{"mode": {"ro"}, "_query_only": {"on"}, "_busy_timeout": {milliseconds(busy)}},
		pragmas: map[string]string{"query_only": "1"},
	}
}

// copying is the pool of the one connection that copies a file into another.
func copying(busy time.Duration) pool {
	return pool{most: 1, options: url.Values{"mode": {"ro"}, "_busy_timeout": {milliseconds(busy)}}}
}

func milliseconds(d time.Duration) string { return strconv.FormatInt(d.Milliseconds(), 10) }

// connect opens the pool over the file at path and makes its first connection.
func (p pool) connect(ctx context.Context, path string) (*gorm.DB, error) {
	full, err := filepath.Abs(path)
	if err != nil {
		return nil, err
	}
	file := url.URL{Scheme: "file", Path: full, RawQuery: p.options.Encode()}
	db := sql.OpenDB(connector{file.String(), &sqlite3.SQLiteDriver{ConnectHook: p.check}})
	db.SetMaxOpenConns(p.most)
	db.SetMaxIdleConns(max(p.most, 8))
	err = db.PingContext(ctx)
	if err != nil {
		return nil, errors.Join(explain(path, err), db.Close())
	}
	g, err := gorm.Open(sqlite.New(sqlite.Config{Conn: db}), &gorm.Config{
		SkipDefaultTransaction: true, Logger: logger.Discard, DisableAutomaticPing: true,
	})
	if err != nil {
		return nil, errors.Join(explain(path, err), db.Close())
	}
	return g, nil
}

// check reads the pragmas back: they are a matter of each connection, and SQLite does not say when
// one of them did not take.
func (p pool) check(c *sqlite3.SQLiteConn) error {
	for name, want := range p.pragmas {
		got, err := pragma(c, name)
		if err != nil {
			return err
		}
		if got != want {
			return refuse(fmt.Errorf("PRAGMA %s is %s, not %s", name, got, want),
				"The book cannot be kept safely here: SQLite's %s is %q and must be %q. A book belongs on a local disk.", name, got, want)
		}
	}
	return nil
}

func pragma(c *sqlite3.SQLiteConn, name string) (string, error) {
	rows, err := c.Query("PRAGMA "+name, nil)
	if err != nil {
		return "", err
	}
	value := make([]driver.Value, 1)
	err = rows.Next(value)
	if errors.Is(err, io.EOF) {
		value[0], err = "", nil
	}
	err = errors.Join(err, rows.Close())
	return strings.ToLower(fmt.Sprint(value[0])), err
}

// connector opens connections of a driver of our own making, so that no driver is registered by
// name for the whole program.
type connector struct {
	dsn    string
	driver *sqlite3.SQLiteDriver
}

// Connect opens one connection.
func (c connector) Connect(context.Context) (driver.Conn, error) { return c.driver.Open(c.dsn) }

// Driver is the driver behind it.
func (c connector) Driver() driver.Driver { return c.driver }

func disconnect(g *gorm.DB) error {
	if g == nil {
		return nil
	}
	db, err := g.DB()
	if err != nil {
		return err
	}
	return db.Close()
}
