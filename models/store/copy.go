package store

import (
	"context"
	"errors"
	"os"
	"path/filepath"

	"lodebook/models/ledger"
)

// Backup writes a copy of the book, as it is at one moment, to a new file at out. Others may go on
// writing meanwhile. The copy is written under another name, read back whole, held against the head
// of this book's tree, and only then gets its name. It refuses a path where there is something. Of a book
// in a PostgreSQL database the copy is what Move makes: a file, without sessions and links.
func (s *Store) Backup(ctx context.Context, out string) error {
	if OnServer(out) {
		return refuse(nil, "A copy is a file; to put a book into a PostgreSQL database, move it there.")
	}
	if s.set.address != "" {
		_, err := s.moveTo(ctx, out, nil)
		return err
	}
	return withCopy(out, func(temporary string) error {
		err := s.copyTo(ctx, temporary)
		if err != nil {
			return err
		}
		report, err := verifyCopy(ctx, temporary, s.set)
		if err != nil {
			return err
		}
		return s.agrees(ctx, out, report)
	})
}

// agrees says whether a copy of this book has the head that this book had at the copy's size.
func (s *Store) agrees(ctx context.Context, out string, copied Report) error {
	return s.Read(ctx, func(t *Tx) error {
		head, err := ledger.Root(copied.Entries, t)
		if err != nil {
			return err
		}
		if head != copied.Head {
			return refuse(nil, "The copy at %s does not have the head of the book; it was thrown away.", out)
		}
		return nil
	})
}

// copyTo copies the book into an empty file. The copy is one file: it has no journal beside it
// until it is opened as a book.
func (s *Store) copyTo(ctx context.Context, out string) error {
	return copyBook(ctx, s.path, out, s.set)
}

func copyBook(ctx context.Context, from, to string, set settings) error {
	g, err := set.pool(copying(set.busy)).connect(ctx, from)
	if err != nil {
		return err
	}
	err = g.WithContext(ctx).Exec("VACUUM INTO ?", to).Error
	return errors.Join(explain(from, err), disconnect(g))
}

// Restore puts the book in the backup file from at the address to, where there must be nothing. It is
// read whole first; a backup with a fault is refused. A backup of an older schema is brought up to
// date.
func Restore(ctx context.Context, from, to string) error { return restore(ctx, from, to, usual()) }

func restore(ctx context.Context, from, to string, set settings) error {
	err := lookAtCopy(from)
	if err != nil {
		return err
	}
	err = recognise(ctx, from, set)
	if err != nil {
		return err
	}
	if OnServer(to) {
		return restoreToServer(ctx, from, to, set)
	}
	return withCopy(to, func(temporary string) error {
		s, err := openCopied(ctx, from, temporary, set)
		if err != nil {
			return err
		}
		_, err = verifyAndClose(ctx, s)
		return err
	})
}

// openCopied copies a backup into an empty file and opens that.
func openCopied(ctx context.Context, from, temporary string, set settings) (*Store, error) {
	err := copyBook(ctx, from, temporary, set)
	if err != nil {
		return nil, err
	}
	return open(ctx, temporary, set)
}

// restoreToServer moves a copy of the backup into a database, since the backup itself may be of an older
// schema and where nothing can be written.
func restoreToServer(ctx context.Context, from, to string, set settings) error {
	folder, err := os.MkdirTemp("", "lodebook-restore-")
	if err != nil {
		return err
	}
	s, err := openCopied(ctx, from, filepath.Join(folder, "copy"), set)
	if err == nil {
		_, err = s.moveTo(ctx, to, nil)
		err = errors.Join(err, s.Close())
	}
	return errors.Join(err, os.RemoveAll(folder))
}

// verifyCopy verifies a copy as it is, without giving it a journal.
func verifyCopy(ctx context.Context, path string, set settings) (Report, error) {
	g, err := set.pool(plain(set.busy)).connect(ctx, path)
	if err != nil {
		return Report{}, err
	}
	return verifyAndClose(ctx, &Store{path: path, r: g, set: set})
}

// verifyAndClose verifies a book that nobody else has; a fault is a refusal.
func verifyAndClose(ctx context.Context, s *Store) (Report, error) {
	report, err := s.Verify(ctx, nil)
	if err == nil && report.FirstFault != "" {
		err = refuse(ErrCorrupt, "The copy is not whole and is not kept. %s", report.FirstFault)
	}
	return report, errors.Join(err, s.Close())
}

// withCopy lets make fill an empty file beside out and then gives it that name. If anything fails,
// nothing is left.
func withCopy(out string, make func(temporary string) error) error {
	err := vacant(out)
	if err != nil {
		return err
	}
	f, err := os.CreateTemp(filepath.Dir(out), "."+filepath.Base(out)+".*")
	if err != nil {
		return refuse(err, "%s cannot be made: %s.", out, plainly(err))
	}
	temporary := f.Name()
	err = f.Close()
	if err == nil {
		err = make(temporary)
	}
	if err == nil {
		err = place(temporary, out)
	}
	if err != nil {
		return errors.Join(err, removeBook(temporary))
	}
	return nil
}

// place gives a finished file its name for good: its bytes are on the disk before the name is, and
// a file that somebody else made there meanwhile is not overwritten.
func place(temporary, out string) error {
	err := vacant(temporary + "-wal")
	if err != nil {
		return err // the copy is not all in its file
	}
	err = flush(temporary)
	if err != nil {
		return err
	}
	err = reserve(out)
	if err != nil {
		return err
	}
	err = os.Rename(temporary, out)
	if err != nil {
		return errors.Join(err, os.Remove(out))
	}
	return flush(filepath.Dir(out))
}

// flush makes sure that a file, or the names in a folder, are on the disk.
func flush(path string) error {
	f, err := os.Open(path)
	if err != nil {
		return err
	}
	return errors.Join(f.Sync(), f.Close())
}

// Scrub makes sure that no byte of what was erased is left in the book's files: it writes the file
// anew and empties the journal. It needs the book to itself for a moment and is refused with
// ErrBusy while another program reads or writes on and on. In a PostgreSQL database it writes the tables
// anew that held values; it cannot reach what the server keeps elsewhere: its write-ahead log until that
// has been used again, archives of it, standbys, backups of the server, and freed blocks of its disk.
func (s *Store) Scrub(ctx context.Context) error {
	if s.set.address != "" {
		return s.scrubServer(ctx)
	}
	err := s.emptyJournal(ctx)
	if err != nil {
		return err
	}
	err = s.w.WithContext(ctx).Exec("VACUUM").Error
	if err != nil {
		return explain(s.path, err)
	}
	return s.emptyJournal(ctx)
}

// emptyJournal moves everything from the journal into the file and cuts the journal to nothing.
func (s *Store) emptyJournal(ctx context.Context) error {
	var busy, frames, moved int64
	err := s.w.WithContext(ctx).Raw("PRAGMA wal_checkpoint(TRUNCATE)").Row().Scan(&busy, &frames, &moved)
	if err != nil {
		return explain(s.path, err)
	}
	if busy != 0 {
		return refuse(ErrBusy, "%s is being read by another program, so what was erased may still be in its journal; try again when that has finished.", s.path)
	}
	return nil
}
