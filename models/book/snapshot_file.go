package book

import (
	"bufio"
	"context"
	"encoding/hex"
	"errors"
	"fmt"
	"hash/crc32"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"sync"

	"github.com/google/uuid"

	"lodebook/models/ledger"
	"lodebook/models/store"
)

// snapshots is where the snapshots of a book are, and what is known of the newest.
type snapshots struct {
	path string // of the file; empty: none are kept
	tell func(string)
	keep sync.Mutex // guards size; one at a time is written
	size int64      // number of entries that the snapshot has; 0: there is none
}

const snapshotEnd = ".snapshot"

// placeSnapshots finds out where the snapshots of a book are.
func (b *Book) placeSnapshots(ctx context.Context, o Options) error {
	b.snapshots.tell = o.Tell
	if b.snapshots.tell == nil {
		b.snapshots.tell = func(string) {}
	}
	if o.Snapshots == "" {
		if strings.Contains(b.st.Path(), "://") {
			return nil
		}
		// Whoever erases somebody by another name of the same file looks in the same place.
		path, err := filepath.EvalSymlinks(b.st.Path())
		b.snapshots.path = path + snapshotEnd
		return err
	}
	return b.st.Read(ctx, func(tx *store.Tx) error {
		id, err := bookID(tx)
		b.snapshots.path = filepath.Join(o.Snapshots, id.String()+snapshotEnd)
		return err
	})
}

func bookID(tx *store.Tx) (uuid.UUID, error) {
	text, _, err := tx.Meta(store.MetaBookID)
	if err != nil {
		return uuid.UUID{}, err
	}
	id, err := uuid.Parse(text)
	if err != nil {
		return id, fmt.Errorf("the book's identity %q is no UUID", text)
	}
	return id, nil
}

// headNow is the head of a snapshot of the first size entries that this program would write now.
func headNow(tx *store.Tx, size int64) (snapshotHead, error) {
	h := snapshotHead{Magic: snapshotMagic, Form: snapshotForm, Size: size}
	var err error
	if h.Program, err = programSum(); err != nil {
		return h, err
	}
	if h.Schema, err = tx.Schema(); err != nil {
		return h, err
	}
	if h.Book, err = bookID(tx); err != nil {
		return h, err
	}
	h.Root, err = ledger.Root(size, tx)
	return h, err
}

// programSum is the CRC-32C of the program that runs.
var programSum = sync.OnceValues(func() (uint32, error) {
	path, err := os.Executable()
	if runtime.GOOS == "linux" {
		// It stays the program that runs, also when another was put in its place.
		path, err = "/proc/self/exe", nil
	}
	if err != nil {
		return 0, err
	}
	f, err := os.Open(path)
	if err != nil {
		return 0, err
	}
	sum := crc32.New(castagnoli)
	_, err = io.Copy(sum, bufio.NewReaderSize(f, 1<<18))
	return sum.Sum32(), errors.Join(err, f.Close())
})

// fromSnapshot gives a model made from the snapshot and the entries after it; nil if there is no snapshot, or
// none that fits, of which the reason is told.
func (b *Book) fromSnapshot(ctx context.Context) (*model, error) {
	// A snapshot is of all sites: whoever asks about one reads the rows of that one.
	if b.snapshots.path == "" || b.site != "" {
		return nil, nil
	}
	f, err := os.Open(b.snapshots.path)
	if errors.Is(err, fs.ErrNotExist) {
		return nil, nil
	}
	if err != nil {
		b.snapshots.tell(fmt.Sprintf("The book is read from its rows: %v.", err))
		return nil, nil
	}
	m := b.emptyModel()
	erased := false
	size := int64(0) // of the snapshot
	err = b.st.Read(ctx, func(tx *store.Tx) error {
		if err := readSnapshotFile(f, tx, m); err != nil {
			return err
		}
		size = m.head
		now, err := tx.Size()
		if err != nil || now == size {
			return err
		}
		kinds, err := tx.KindVersions(size - 1)
		if err != nil {
			return err
		}
		_, erased = kinds[kindErasure]
		return m.takeAfter(tx, now)
	})
	_ = f.Close() // it was only read
	if why := (*unfit)(nil); errors.As(err, &why) {
		b.snapshots.tell(fmt.Sprintf("The book is read from its rows: %v.", why))
		return nil, nil
	}
	if err != nil {
		return nil, err
	}
	b.snapshots.size = size
	if erased {
		err = b.removeSnapshots() // it has the names of somebody who was erased since
	}
	return m, err
}

// readSnapshotFile reads a snapshot into an empty model if it fits the book that the transaction sees.
func readSnapshotFile(f *os.File, tx *store.Tx, m *model) error {
	info, err := f.Stat()
	if err != nil {
		return unfitf("cannot be read: %v", err)
	}
	h, err := readSnapshotHead(f, info.Size())
	if err != nil {
		return asUnfit(err)
	}
	size, err := tx.Size()
	if err != nil {
		return err
	}
	if h.Size < 1 || h.Size > size {
		return unfitf("has %d entries and the book has %d", h.Size, size)
	}
	want, err := headNow(tx, h.Size)
	if err != nil {
		return err
	}
	switch {
	case h.Book != want.Book:
		return unfitf("is of another book")
	case h.Root != want.Root:
		return unfitf("is of other entries than the book has")
	case h.Schema != want.Schema:
		return unfitf("is of schema %d and the book of schema %d", h.Schema, want.Schema)
	case h.Program != want.Program:
		return unfitf("was written by another version of this program")
	}
	return asUnfit(readSnapshot(f, h, m))
}

// asUnfit makes of an error of reading a file a reason not to use it.
func asUnfit(err error) error {
	if why := (*unfit)(nil); err == nil || errors.As(err, &why) {
		return err
	}
	return unfitf("cannot be read: %v", err)
}

// KeepSnapshot writes a snapshot beside the book, if there is none or if as many entries as behind have come
// since it. It gives the number of entries in what it wrote; 0 if it wrote none. Of a book of which only a site is
// read there is nothing to write.
func (b *Book) KeepSnapshot(ctx context.Context, behind int64) (int64, error) {
	s := &b.snapshots
	s.keep.Lock()
	defer s.keep.Unlock()
	size, err := b.st.Size(ctx)
	if err != nil || s.path == "" || b.site != "" || size == 0 || s.size > 0 && size-s.size < behind {
		return 0, err
	}
	// Whoever starts from it finds all that standings are counted from.
	if err := b.Turn(ctx); err != nil {
		return 0, err
	}
	s.size, err = b.writeSnapshotFile(ctx)
	return s.size, err
}

// writeSnapshotFile writes a file beside, and puts it in the place of the snapshot once all of it is on the
// disk. The model is looked at after the file is there: somebody who is erased before that is not in it,
// and an erasure after that removes the file, whereupon it cannot be put in place.
func (b *Book) writeSnapshotFile(ctx context.Context) (int64, error) {
	if err := b.removeSnapshotFiles(true); err != nil {
		return 0, err
	}
	mark := make([]byte, 8)
	if _, err := io.ReadFull(b.random, mark); err != nil {
		return 0, err
	}
	beside := b.snapshots.path + "." + hex.EncodeToString(mark)
	f, err := os.OpenFile(beside, os.O_RDWR|os.O_CREATE|os.O_EXCL, 0o600)
	if err != nil {
		return 0, fmt.Errorf("the snapshot cannot be written: %w", err)
	}
	size, err := b.fillSnapshot(ctx, f)
	if err == nil {
		err = f.Sync()
	}
	err = errors.Join(err, f.Close())
	if err == nil {
		err = os.Rename(beside, b.snapshots.path)
		if errors.Is(err, fs.ErrNotExist) {
			return 0, nil // an erasure, or another program that writes one, has removed it
		}
	}
	if err != nil {
		if gone := os.Remove(beside); !errors.Is(gone, fs.ErrNotExist) {
			err = errors.Join(err, gone)
		}
		return 0, fmt.Errorf("the snapshot was not written: %w", err)
	}
	return size, syncFolder(filepath.Dir(b.snapshots.path))
}

func (b *Book) fillSnapshot(ctx context.Context, f *os.File) (int64, error) {
	m, err := b.current(ctx)
	if err != nil {
		return 0, err
	}
	var h snapshotHead
	err = b.st.Read(ctx, func(tx *store.Tx) error {
		var err error
		h, err = headNow(tx, m.head)
		return err
	})
	if err != nil {
		return 0, err
	}
	return m.head, writeSnapshot(f, m, h)
}

// removeSnapshots removes the snapshot of the book, and what is being written of one.
func (b *Book) removeSnapshots() error {
	s := &b.snapshots
	s.keep.Lock()
	defer s.keep.Unlock()
	s.size = 0
	if s.path == "" {
		return nil
	}
	return b.removeSnapshotFiles(false)
}

// forgetErased removes the snapshot if somebody was erased by an entry from that one on: another program, which
// did it, may not know where this one keeps its snapshots. It waits for no snapshot that is being written: of
// that one too the file is gone before it can be put in place.
func (b *Book) forgetErased(tx *store.Tx, from int64) error {
	if b.snapshots.path == "" {
		return nil
	}
	kinds, err := tx.KindVersions(from - 1)
	if err != nil {
		return err
	}
	if _, erased := kinds[kindErasure]; !erased {
		return nil
	}
	if err := b.removeSnapshotFiles(false); err != nil {
		// What is read is right all the same.
		b.snapshots.tell(fmt.Sprintf("Somebody was erased, and the snapshot that has their name could not be removed: %v.", err))
	}
	return nil
}

// removeSnapshotFiles removes the files that begin like the snapshot's, or only those beside it. The snapshot is
// the last: until those beside it are gone, another program may put one of them in its place.
func (b *Book) removeSnapshotFiles(beside bool) error {
	folder, name := filepath.Split(b.snapshots.path)
	if folder == "" {
		folder = "."
	}
	files, err := os.ReadDir(folder)
	if errors.Is(err, fs.ErrNotExist) {
		return nil // no folder, no snapshot
	}
	if err != nil {
		return err
	}
	var paths []string
	for _, f := range files {
		if strings.HasPrefix(f.Name(), name+".") {
			paths = append(paths, filepath.Join(folder, f.Name()))
		}
	}
	if !beside {
		paths = append(paths, b.snapshots.path)
	}
	gone := false
	for _, path := range paths {
		err := os.Remove(path)
		if err != nil && !errors.Is(err, fs.ErrNotExist) {
			return err
		}
		gone = gone || err == nil
	}
	if !gone {
		return nil
	}
	return syncFolder(folder)
}

// syncFolder makes the names in a folder durable.
func syncFolder(folder string) error {
	d, err := os.Open(folder)
	if err != nil {
		return err
	}
	return errors.Join(d.Sync(), d.Close())
}
