package main

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"net"
	"os"
	"os/exec"
	"os/user"
	"path/filepath"
	"strconv"
	"syscall"
	"time"

	"github.com/jackc/pgx/v5"
	_ "github.com/jackc/pgx/v5/stdlib" // the driver
)

// postgres is a PostgreSQL database with the world in it.
type postgres struct {
	*database
	absent  string // why there is none, in words
	cluster *cluster
}

// postgresRow is the row against PostgreSQL's best form; without PostgreSQL it says so.
func (b *bench) postgresRow(work string, asked float64, forms []form, at int, right answer, ours func() (float64, error)) (*contest, error) {
	if b.pg == nil {
		pg, err := b.openPostgres()
		if err != nil {
			return nil, err
		}
		b.pg = pg
	}
	if b.pg.absent != "" {
		return &contest{work: work, against: "PostgreSQL", asked: asked, absent: b.pg.absent}, nil
	}
	return b.versus(b.pg.database, work, asked, forms, at, right, ours)
}

func (b *bench) openPostgres() (*postgres, error) {
	w, err := b.load()
	if err != nil {
		return nil, err
	}
	pg := &postgres{}
	address := b.address
	if address == "" {
		pg.cluster, err = startCluster(b.ctx, filepath.Join(b.dir, "postgres"), b.clock)
		if errors.Is(err, exec.ErrNotFound) {
			pg.absent = "PostgreSQL not found"
			return pg, nil
		}
		if err != nil {
			return nil, err
		}
		address = pg.cluster.address
	}
	b.say("Filling PostgreSQL ...")
	err = fillPostgres(b.ctx, address, w)
	if err == nil {
		pg.database, err = openShards(b.ctx, address, w)
	}
	if err != nil && pg.cluster != nil {
		err = errors.Join(err, pg.cluster.stop())
	}
	return pg, err
}

func openShards(ctx context.Context, address string, w *world) (*database, error) {
	db, err := sql.Open("pgx", address)
	if err != nil {
		return nil, err
	}
	d := &database{name: "PostgreSQL", db: db}
	if err := d.share(ctx, w); err != nil {
		return nil, errors.Join(err, db.Close())
	}
	for _, s := range d.shards {
		for _, setting := range []string{"SET work_mem = '1GB'", "SET max_parallel_workers_per_gather = 0", "SET jit = off"} {
			if _, err := s.conn.ExecContext(ctx, setting); err != nil {
				return nil, errors.Join(err, d.close())
			}
		}
	}
	return d, nil
}

func (p *postgres) close() error {
	var errs []error
	if p.database != nil {
		errs = append(errs, p.database.close())
	}
	if p.cluster != nil {
		errs = append(errs, p.cluster.stop())
	}
	return errors.Join(errs...)
}

var postgresTables = []string{
	"CREATE TABLE ob (site INT NOT NULL, item INT NOT NULL, ob INT NOT NULL)",
	"CREATE TABLE change (ob INT NOT NULL, point INT NOT NULL)",
	`CREATE TABLE now (site INT NOT NULL, item INT NOT NULL, ob INT NOT NULL, d0 INT NOT NULL, w0 INT NOT NULL,
		d1 INT NOT NULL, w1 INT NOT NULL, d2 INT NOT NULL, w2 INT NOT NULL, d3 INT NOT NULL, w3 INT NOT NULL)`,
}

var postgresIndexes = []string{
	"CREATE UNIQUE INDEX ob_key ON ob (site, item, ob)",
	"CREATE UNIQUE INDEX ob_ob ON ob (ob) INCLUDE (site, item)",
	"CREATE UNIQUE INDEX change_key ON change (ob, point)",
	"CREATE INDEX now_site ON now (site)",
	"VACUUM (ANALYZE, FREEZE) ob", "VACUUM (ANALYZE, FREEZE) change", "VACUUM (ANALYZE, FREEZE) now",
}

// fillPostgres copies the three tables in and makes their indexes.
func fillPostgres(ctx context.Context, address string, w *world) (err error) {
	conn, err := pgx.Connect(ctx, address)
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, conn.Close(ctx)) }()
	for _, s := range postgresTables {
		if _, err := conn.Exec(ctx, s); err != nil {
			return err
		}
	}
	today, i := w.today(), -1
	err = copyIn(ctx, conn, "ob", []string{"site", "item", "ob"}, len(w.obligations), func(i int) []any {
		o := w.obligations[i]
		return []any{int32(o.site), int32(o.item), int32(i)}
	})
	if err != nil {
		return err
	}
	err = copyIn(ctx, conn, "now", []string{"site", "item", "ob", "d0", "w0", "d1", "w1", "d2", "w2", "d3", "w3"}, len(w.obligations), func(i int) []any {
		o := w.obligations[i]
		row := []any{int32(o.site), int32(o.item), int32(i)}
		for _, x := range nowRow(w.course(i), today) {
			row = append(row, int32(x))
		}
		return row
	})
	if err != nil {
		return err
	}
	err = copyIn(ctx, conn, "change", []string{"ob", "point"}, len(w.points), func(n int) []any {
		for i+1 < len(w.obligations) && int(w.obligations[i+1].first) <= n {
			i++
		}
		return []any{int32(i), int32(w.points[n])}
	})
	if err != nil {
		return err
	}
	for _, s := range postgresIndexes {
		if _, err := conn.Exec(ctx, s); err != nil {
			return err
		}
	}
	return nil
}

func copyIn(ctx context.Context, conn *pgx.Conn, table string, columns []string, rows int, row func(i int) []any) error {
	_, err := conn.CopyFrom(ctx, pgx.Identifier{table}, columns, pgx.CopyFromSlice(rows, func(i int) ([]any, error) { return row(i), nil }))
	return err
}

// postgresAsOf are the forms of the question for all standings as of a day; see sqliteAsOf.
var postgresAsOf = []form{
	{"lateral", `SELECT o.site, o.item, c.word, count(*) FROM ob o CROSS JOIN LATERAL (
			SELECT point & 15 AS word FROM change WHERE ob = o.ob AND point <= $1::int ORDER BY point DESC LIMIT 1) c
		WHERE o.site BETWEEN $2 AND $3 GROUP BY o.site, o.item, c.word`, "123"},
	{"distinct on", `SELECT o.site, o.item, g.word, count(*) FROM (
			SELECT DISTINCT ON (ob) ob, point & 15 AS word FROM change WHERE point <= $1::int AND ob BETWEEN $2 AND $3 ORDER BY ob, point DESC) g
		JOIN ob o ON o.ob = g.ob GROUP BY o.site, o.item, g.word`, "145"},
	{"grouped maximum", `SELECT o.site, o.item, g.word, count(*) FROM (
			SELECT ob, max(point) & 15 AS word FROM change WHERE point <= $1::int AND ob BETWEEN $2 AND $3 GROUP BY ob) g
		JOIN ob o ON o.ob = g.ob GROUP BY o.site, o.item, g.word`, "145"},
}

// postgresToday are the forms of the question for all standings today.
var postgresToday = []form{
	{"maintained column", `SELECT site, item, CASE WHEN $1::int >= d3 THEN w3 WHEN $1::int >= d2 THEN w2 WHEN $1::int >= d1 THEN w1 WHEN $1::int >= d0 THEN w0 ELSE 8 END AS word, count(*)
		FROM now WHERE site BETWEEN $2 AND $3 GROUP BY 1, 2, 3`, "123"},
}

// cluster is a PostgreSQL server of the bench's own.
type cluster struct {
	address string
	server  *exec.Cmd
}

// serverProgram finds a program of PostgreSQL's server.
func serverProgram(name string) (string, error) {
	if path, err := exec.LookPath(name); err == nil {
		return path, nil
	}
	found, err := filepath.Glob("/usr/lib/postgresql/*/bin/" + name)
	if err != nil || len(found) == 0 {
		return "", exec.ErrNotFound
	}
	return found[len(found)-1], nil
}

// startCluster makes a cluster in a new folder and starts it on a free port of this machine. PostgreSQL does not
// run as root: then it runs as the user nobody.
func startCluster(ctx context.Context, dir string, clock func() time.Time) (*cluster, error) {
	initdb, err := serverProgram("initdb")
	if err != nil {
		return nil, err
	}
	server, err := serverProgram("postgres")
	if err != nil {
		return nil, err
	}
	if err := os.MkdirAll(dir, 0o700); err != nil {
		return nil, err
	}
	as, err := unprivileged(dir)
	if err != nil {
		return nil, err
	}
	data := filepath.Join(dir, "data")
	made := exec.CommandContext(ctx, initdb, "-D", data, "-U", "bench", "-A", "trust", "-E", "UTF8", "--locale=C", "--no-sync")
	made.SysProcAttr, made.Dir = as, dir
	if out, err := made.CombinedOutput(); err != nil {
		return nil, fmt.Errorf("initdb: %w: %s", err, out)
	}
	port, err := freePort()
	if err != nil {
		return nil, err
	}
	c := &cluster{address: fmt.Sprintf("postgres://bench@127.0.0.1:%d/postgres?sslmode=disable", port)}
	c.server = exec.Command(server, "-D", data, "-p", strconv.Itoa(port), "-k", dir, "-h", "127.0.0.1",
		"-c", "shared_buffers=2GB", "-c", "maintenance_work_mem=1GB", "-c", "fsync=off", "-c", "max_wal_size=8GB", "-c", "wal_level=minimal", "-c", "max_wal_senders=0")
	c.server.SysProcAttr, c.server.Dir = as, dir
	if err := c.server.Start(); err != nil {
		return nil, err
	}
	for end := clock().Add(30 * time.Second); ; {
		conn, err := pgx.Connect(ctx, c.address)
		if err == nil {
			return c, conn.Close(ctx)
		}
		if clock().After(end) || ctx.Err() != nil {
			return nil, errors.Join(err, c.stop())
		}
		if err := wait(ctx, 100*time.Millisecond); err != nil {
			return nil, errors.Join(err, c.stop())
		}
	}
}

// wait waits a little, or until the context ends.
func wait(ctx context.Context, a time.Duration) error {
	t, stop := context.WithTimeout(ctx, a)
	defer stop()
	<-t.Done()
	return ctx.Err()
}

// unprivileged makes the folder nobody's if this is root, with whose rights PostgreSQL does not start.
func unprivileged(dir string) (*syscall.SysProcAttr, error) {
	if os.Geteuid() != 0 {
		return nil, nil
	}
	nobody, err := user.Lookup("nobody")
	if err != nil {
		return nil, err
	}
	uid, err := strconv.Atoi(nobody.Uid)
	if err != nil {
		return nil, err
	}
	gid, err := strconv.Atoi(nobody.Gid)
	if err != nil {
		return nil, err
	}
	// The folders above it must let nobody through.
	for d := filepath.Dir(dir); d != os.TempDir() && d != "/"; d = filepath.Dir(d) {
		if info, err := os.Stat(d); err == nil && info.Mode().Perm()&0o011 == 0 {
			if err := os.Chmod(d, info.Mode().Perm()|0o011); err != nil {
				break
			}
		}
	}
	return &syscall.SysProcAttr{Credential: &syscall.Credential{Uid: uint32(uid), Gid: uint32(gid)}}, os.Chown(dir, uid, gid)
}

func freePort() (int, error) {
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		return 0, err
	}
	port := l.Addr().(*net.TCPAddr).Port
	return port, l.Close()
}

// stop shuts the server down fast and waits for it.
func (c *cluster) stop() error {
	if err := c.server.Process.Signal(syscall.SIGINT); err != nil {
		return err
	}
	err := c.server.Wait()
	var left *exec.ExitError
	if errors.As(err, &left) {
		return nil // it was told to
	}
	return err
}
