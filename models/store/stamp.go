package store

import (
	"context"
	"database/sql"
	"strconv"
	"sync"
)

// stamps asks one connection, which never writes, whether any other has.
type stamps struct {
	mu   sync.Mutex
	conn *sql.Conn
	stmt *sql.Stmt
}

// Stamp is a text that is another after any transaction of any program has changed the book or what runs
// beside it. It costs microseconds. Read before a look at the book, it tells later whether the look is
// still good.
func (s *Store) Stamp(ctx context.Context) (string, error) {
	if s.set.address != "" {
		return s.serverStamp(ctx)
	}
	s.stamps.mu.Lock()
	defer s.stamps.mu.Unlock()
	if s.stamps.conn == nil {
		if err := s.openStamps(context.WithoutCancel(ctx)); err != nil {
			return "", explain(s.path, err)
		}
	}
	// SQLite counts the changes that other connections than this one have committed (its PRAGMA
	// data_version); this one only asks.
	var n int64
	if err := s.stamps.stmt.QueryRowContext(context.WithoutCancel(ctx)).Scan(&n); err != nil {
		return "", explain(s.path, err)
	}
	return strconv.FormatInt(n, 10), nil
}

func (s *Store) openStamps(ctx context.Context) error {
	db, err := s.r.DB()
	if err != nil {
		return err
	}
	conn, err := db.Conn(ctx)
	if err != nil {
		return err
	}
	stmt, err := conn.PrepareContext(ctx, "PRAGMA data_version")
	if err != nil {
		return err
	}
	s.stamps.conn, s.stamps.stmt = conn, stmt
	return nil
}

// closeStamps gives the connection back.
func (s *Store) closeStamps() {
	s.stamps.mu.Lock()
	defer s.stamps.mu.Unlock()
	if s.stamps.conn != nil {
		_ = s.stamps.stmt.Close() // the connection goes with it
		_ = s.stamps.conn.Close()
		s.stamps.conn = nil
	}
}
