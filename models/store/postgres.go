package store

import (
	"context"
	"errors"
	"fmt"
	"net"
	"strconv"
	"strings"
	"time"
	"unicode/utf8"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgconn"
	"github.com/jackc/pgx/v5/stdlib"
	"gorm.io/driver/postgres"
	"gorm.io/gorm"
	"gorm.io/gorm/logger"
)

// oldestServer is the first release of PostgreSQL that a book may be kept in.
const oldestServer = 15

// OnServer tells whether a book's address is that of a PostgreSQL database, and not a path.
func OnServer(address string) bool {
	return strings.HasPrefix(address, "postgres://") || strings.HasPrefix(address, "postgresql://")
}

// server is one pool of connections to a PostgreSQL database.
type server struct {
	address string
	busy    time.Duration
	most    int
	params  map[string]string // settings of every connection
}

// serverWriting is the pool of the one connection of this program that writes.
func serverWriting(set settings) server {
	return server{set.address, set.busy, 1, map[string]string{"default_transaction_isolation": "read committed"}}
}

// serverReading is the pool of the connections that read: each transaction sees one moment.
func serverReading(set settings) server {
	return server{set.address, set.busy, 32, map[string]string{
		"default_transaction_isolation": "repeatable read", "default_transaction_read_only": "on",
	}}
}

// serverKeeps are the settings without which a written book could be lost, or read as other text.
var serverKeeps = map[string]string{
	"synchronous_commit": "on", "fsync": "on", "full_page_writes": "on", "server_encoding": "UTF8",
}

// config reads the address and adds our settings to it. What is wrong with an address is told without
// repeating it, since a password may stand in it.
func (p server) config() (*pgx.ConnConfig, error) {
	c, err := pgx.ParseConfig(p.address)
	if err != nil {
		return nil, refuse(nil, "The address of the PostgreSQL database cannot be read; write it as postgres://user@host:5432/database.")
	}
	if c.Database == "" {
		return nil, refuse(nil, "The address of the PostgreSQL database names no database; write it as postgres://user@host:5432/database.")
	}
	for name, value := range map[string]string{
		"synchronous_commit": "on", "search_path": "public", "standard_conforming_strings": "on",
		"lock_timeout": milliseconds(p.busy), "statement_timeout": "0", "idle_in_transaction_session_timeout": "0",
		// A writer whose machine has gone lets go of its lock after a minute.
		"tcp_keepalives_idle": "30", "tcp_keepalives_interval": "10", "tcp_keepalives_count": "3",
	} {
		c.RuntimeParams[name] = value
	}
	for name, value := range p.params {
		c.RuntimeParams[name] = value
	}
	if c.RuntimeParams["application_name"] == "" {
		c.RuntimeParams["application_name"] = "lodebook"
	}
	if c.ConnectTimeout == 0 {
		c.ConnectTimeout = waits
	}
	c.ValidateConnect = pgconn.ValidateConnectTargetSessionAttrsPrimary
	return c, nil
}

// label is how an address is shown: without the password, and whatever else may be secret in it.
func label(c *pgx.ConnConfig) string {
	host := net.JoinHostPort(c.Host, strconv.Itoa(int(c.Port)))
	if strings.HasPrefix(c.Host, "/") {
		host = "" // a socket of this machine
	}
	return "postgres://" + host + "/" + c.Database
}

// connect opens the pool and makes its first connection.
func (p server) connect(ctx context.Context) (*gorm.DB, error) {
	c, err := p.config()
	if err != nil {
		return nil, err
	}
	name := label(c)
	db := stdlib.OpenDB(*c, stdlib.OptionAfterConnect(func(ctx context.Context, conn *pgx.Conn) error {
		return checkServer(ctx, name, conn)
	}))
	db.SetMaxOpenConns(p.most)
	db.SetMaxIdleConns(min(p.most, 8))
	err = db.PingContext(ctx)
	if err != nil {
		return nil, errors.Join(explain(name, err), db.Close())
	}
	g, err := gorm.Open(postgres.New(postgres.Config{Conn: db}), &gorm.Config{
		SkipDefaultTransaction: true, Logger: logger.Discard, DisableAutomaticPing: true,
	})
	if err != nil {
		return nil, errors.Join(explain(name, err), db.Close())
	}
	return g, nil
}

// checkServer reads back on a new connection what must hold on it.
func checkServer(ctx context.Context, name string, conn *pgx.Conn) error {
	number, err := show(ctx, conn, "server_version_num")
	if err != nil {
		return err
	}
	if v, err := strconv.Atoi(number); err != nil || v/10000 < oldestServer {
		return refuse(err, "The server of %s is PostgreSQL of version number %s; a book needs PostgreSQL %d or newer.", name, number, oldestServer)
	}
	for setting, want := range serverKeeps {
		got, err := show(ctx, conn, setting)
		if err != nil {
			return err
		}
		if got != want {
			return refuse(fmt.Errorf("%s is %s", setting, got),
				"The book cannot be kept safely in %s: the server's %s is %q and must be %q.", name, setting, got, want)
		}
	}
	return nil
}

func show(ctx context.Context, conn *pgx.Conn, setting string) (string, error) {
	var value string
	err := conn.QueryRow(ctx, "SELECT current_setting($1)", setting).Scan(&value)
	return value, err
}

// The keys of the locks that programs with the same database agree on: the bytes "Lodb" and a number.
const (
	lockWrite  = applicationID<<8 | 1 // to write
	lockCreate = applicationID<<8 | 2 // to make the book
)

// lock makes a transaction of a server the only one that writes, over all programs; a file's
// transactions begin so. It waits for another no longer than the connection's lock_timeout.
func lock(db *gorm.DB) error {
	if db.Name() != "postgres" {
		return nil
	}
	return db.Exec("SELECT pg_advisory_xact_lock(?)", lockWrite).Error
}

// sendable refuses text that a server would refuse: after that nothing more could be done in the
// transaction, which may be others' too.
func (t *Tx) sendable(args []any) error {
	if t.db.Name() != "postgres" {
		return nil
	}
	for _, a := range args {
		if s, ok := a.(string); ok && (strings.Contains(s, "\x00") || !utf8.ValidString(s)) {
			return refuse(nil, "A text holds a zero byte or is not UTF-8, which no book keeps; leave it out.")
		}
	}
	return nil
}

// createServer makes a new book in a database that has no table.
func createServer(ctx context.Context, set settings) (*Store, error) {
	g, err := server{set.address, set.busy, 1, nil}.connect(ctx)
	if err != nil {
		return nil, err
	}
	name := serverName(set)
	s, err := createLocked(ctx, g, set, name)
	// The lock goes with the connection.
	err = errors.Join(explain(name, err), disconnect(g))
	if err != nil && s != nil {
		err = errors.Join(err, s.Close())
		s = nil
	}
	return s, err
}

// createLocked makes the book while no other program can make one in the same database.
func createLocked(ctx context.Context, g *gorm.DB, set settings, name string) (*Store, error) {
	var mine bool
	err := g.WithContext(ctx).Raw("SELECT pg_try_advisory_lock(?)", lockCreate).Scan(&mine).Error
	if err != nil {
		return nil, err
	}
	if !mine {
		return nil, refuse(ErrBusy, "Another program is making a book in %s just now.", name)
	}
	tables, err := serverTables(ctx, g)
	if err != nil {
		return nil, err
	}
	if len(tables) > 0 {
		return nil, refuse(nil, "The database %s has tables already (%s) and is left as it is; make an empty database and name that.", name, tables[0])
	}
	s, err := connectServer(ctx, set, func(w *gorm.DB) error { return migrate(ctx, name, w, set.onServer) })
	if err != nil {
		return nil, errors.Join(err, emptyServer(context.WithoutCancel(ctx), g))
	}
	return s, nil
}

// connectServer opens both pools; prepare has the writing one in between.
func connectServer(ctx context.Context, set settings, prepare func(*gorm.DB) error) (*Store, error) {
	return connectBoth(serverName(set), set,
		func() (*gorm.DB, error) { return serverWriting(set).connect(ctx) },
		func() (*gorm.DB, error) { return serverReading(set).connect(ctx) }, prepare)
}

func serverName(set settings) string {
	c, err := server{address: set.address}.config()
	if err != nil {
		return "the PostgreSQL database"
	}
	return label(c)
}

// Place is how the address of a book is shown: a path as it is, a database without its password.
func Place(address string) string {
	if !OnServer(address) {
		return address
	}
	return serverName(settings{address: address})
}

// serverTables names every table that is no part of the server itself.
func serverTables(ctx context.Context, g *gorm.DB) ([]string, error) {
	var names []string
	err := g.WithContext(ctx).Raw(`SELECT quote_ident(schemaname) || '.' || quote_ident(tablename) FROM pg_tables
		WHERE schemaname <> 'information_schema' AND schemaname NOT LIKE 'pg\_%' ORDER BY 1`).Scan(&names).Error
	return names, err
}

// emptyServer takes away what was made in a database that had no table before.
func emptyServer(ctx context.Context, g *gorm.DB) error {
	tables, err := serverTables(ctx, g)
	if err != nil || len(tables) == 0 {
		return err
	}
	return g.WithContext(ctx).Exec("DROP TABLE " + strings.Join(tables, ", ")).Error
}

// openServer opens the book in a database.
func openServer(ctx context.Context, set settings) (*Store, error) {
	g, err := serverReading(set).connect(ctx)
	if err != nil {
		return nil, err
	}
	name := serverName(set)
	err = errors.Join(explain(name, isServerBook(ctx, name, g, set)), disconnect(g))
	if err != nil {
		return nil, err
	}
	return connectServer(ctx, set, func(w *gorm.DB) error { return migrate(ctx, name, w, set.onServer) })
}

// isServerBook asks a database, without changing it, whether it is a book and of which schema.
func isServerBook(ctx context.Context, name string, g *gorm.DB, set settings) error {
	tables, err := serverTables(ctx, g)
	switch {
	case err != nil:
		return err
	case len(tables) == 0:
		return refuse(nil, "There is no book in %s: the database is empty.", name)
	case len(tables) == 1 && tables[0] == "public.goose_db_version":
		return refuse(nil, "The database %s was being made as a book when that was broken off; it holds nothing. Drop it and start again.", name)
	}
	var missing int
	err = g.WithContext(ctx).Raw(`SELECT COUNT(*) FROM unnest(ARRAY['goose_db_version', 'meta', 'entries', 'tree', 'veils']) AS t
		WHERE to_regclass('public.' || t) IS NULL`).Scan(&missing).Error
	if err != nil {
		return err
	}
	if missing > 0 {
		return refuse(nil, "%s is a database of another program, not a book.", name)
	}
	return knownSchema(ctx, name, g, set.onServer)
}

// serverStamp is which transactions of the server have ended, as a transaction that began now would
// know it. A commit takes its own out of those that are under way, and none is ever put back, so that the
// text never comes again after it. Transactions of other databases of the server change it too.
func (s *Store) serverStamp(ctx context.Context) (string, error) {
	db, err := s.r.DB()
	if err != nil {
		return "", err
	}
	var ended string
	err = db.QueryRowContext(context.WithoutCancel(ctx), "SELECT pg_current_snapshot()::text").Scan(&ended)
	return ended, explain(s.path, err)
}

// scrubServer writes the tables that held erased values anew, once no transaction is left that could
// still see the old rows: PostgreSQL would keep those for it.
func (s *Store) scrubServer(ctx context.Context) error {
	w := s.w.WithContext(ctx)
	var now string
	err := w.Raw("SELECT pg_snapshot_xmax(pg_current_snapshot())::text").Row().Scan(&now)
	if err != nil {
		return explain(s.path, err)
	}
	const pause = 50 * time.Millisecond
	for waited := time.Duration(0); ; waited += pause {
		var older int64
		err = w.Raw(`SELECT COUNT(*) FROM pg_stat_activity WHERE datname = current_database() AND pid <> pg_backend_pid()
			AND age(backend_xmin) > age(CAST(CAST(? AS text) AS xid8)::xid)`, now).Scan(&older).Error
		if err != nil {
			return explain(s.path, err)
		}
		if older == 0 {
			break
		}
		if waited >= s.set.busy {
			return refuse(ErrBusy, "%s is being read by another program, so what was erased may still be in its tables; try again when that has finished.", s.path)
		}
		err = w.Exec("SELECT pg_sleep(?)", pause.Seconds()).Error
		if err != nil {
			return explain(s.path, err)
		}
	}
	return explain(s.path, w.Exec("VACUUM (FULL) veils, people, accounts, facts").Error)
}

// explainServer turns what PostgreSQL says, or that it cannot be reached, into a refusal; any other
// error passes as it is.
func explainServer(name string, err error) error {
	var e *pgconn.PgError
	if errors.As(err, &e) {
		return explainCode(name, e, err)
	}
	var broken *pgconn.ConnectError
	var lost net.Error
	switch {
	case errors.Is(err, context.Canceled):
		return err
	case errors.As(err, &broken):
		return refuse(err, "%s cannot be reached; see that the server runs, that its host and port are right, and that this machine may connect to it.", name)
	case errors.As(err, &lost) || pgconn.Timeout(err) || errors.Is(err, pgconn.ErrConnClosed):
		return refuse(err, "The connection to %s was lost; look whether what was being written is there, and try again.", name)
	}
	return err
}

// explainCode tells by the five characters of PostgreSQL's error codes (its manual, appendix A).
func explainCode(name string, e *pgconn.PgError, err error) error {
	switch e.Code {
	case "55P03", "40P01":
		return refuse(errors.Join(ErrBusy, err), "%s is in use by another program; try again when it has finished.", name)
	case "53300":
		return refuse(errors.Join(ErrBusy, err), "The server of %s has no connection left; try again later, or raise its max_connections.", name)
	case "28P01", "28000":
		return refuse(err, "The server does not let this user into %s; see to the user and the password of the address, or to the server's pg_hba.conf.", name)
	case "3D000":
		return refuse(err, "There is no database %s; make it with createdb first.", name)
	case "42501":
		return refuse(err, "This user may not do that in %s; the book's user must own its database.", name)
	case "25006":
		return refuse(err, "%s is read-only; a book must be writable.", name)
	case "53100":
		return refuse(err, "There is no room left on the disk of %s; nothing was written.", name)
	case "58030":
		return refuse(err, "The disk of %s gave an error; nothing was written.", name)
	case "XX001", "XX002":
		return refuse(errors.Join(ErrCorrupt, err), "%s is damaged; restore it from a backup.", name)
	case "57P01", "57P02", "57P03", "08006", "08003":
		return refuse(err, "The server of %s is stopping or starting; try again when it runs.", name)
	case "22021", "22P05":
		return refuse(err, "A text holds a zero byte or is not UTF-8, which PostgreSQL cannot keep; nothing was written to %s.", name)
	}
	return err
}

// serverClash names the rule of the entries table that an insert ran into.
func serverClash(err error) error {
	var e *pgconn.PgError
	if !errors.As(err, &e) || e.Code != "23505" {
		return err
	}
	switch e.ConstraintName {
	case "entries_id_key":
		return errors.Join(ErrExists, err)
	case "entries_supersedes":
		return errors.Join(ErrSuperseded, err)
	}
	return err
}
