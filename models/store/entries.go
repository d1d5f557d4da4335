package store

import (
	"cmp"
	"fmt"
	"slices"
	"sort"
	"time"

	"gorm.io/gorm"

	"lodebook/models/ledger"
)

// batchRows is how many rows one INSERT or SELECT of many takes: few enough for the parameters
// that a statement may have, enough that more would not be faster.
const batchRows = 400

type entryRow struct {
	Seq        int64 `gorm:"primaryKey;autoIncrement:false"`
	ID         string
	Kind       string
	V          int
	Site       string
	Batch      string
	Supersedes string
	Actor      string
	RecordedAt instant
	Bytes      []byte
}

func (r entryRow) entry() Entry {
	e := Entry{
		Seq: r.Seq, ID: r.ID, Kind: r.Kind, V: r.V, Site: r.Site, Batch: r.Batch,
		Supersedes: r.Supersedes, Actor: r.Actor, RecordedAt: time.Time(r.RecordedAt), Bytes: r.Bytes,
	}
	return e
}

type treeRow struct {
	Idx  int64 `gorm:"primaryKey;autoIncrement:false"`
	Hash []byte
}

// Size is the number of entries that the transaction sees.
func (t *Tx) Size() (int64, error) {
	if t.builder != nil {
		return t.builder.Size(), nil
	}
	var n int64
	err := t.db.Raw("SELECT COALESCE(MAX(seq) + 1, 0) FROM entries").Scan(&n).Error
	return n, err
}

// Append writes entries at the end of the book, with the hashes that they add to the tree and
// their erasable values (veils may be nil, or holds those of entries[i] at i). It numbers the entries
// and sets Seq in both slices; first is the number of the first. RecordedAt must not be before
// the entry in front; it is kept to the microsecond. An identifier that is in the book already is
// refused with ErrExists, a supersession of what was superseded before with ErrSuperseded. After an
// error the transaction cannot be kept.
func (t *Tx) Append(entries []Entry, veils [][]Veil) (first int64, err error) {
	err = t.startTree()
	if err == nil {
		first, err = t.append(entries, veils)
	}
	return first, t.fail(err)
}

func (t *Tx) append(entries []Entry, veils [][]Veil) (first int64, err error) {
	first = t.builder.Size()
	rows := make([]entryRow, len(entries))
	hashes := make([]treeRow, 0, 2*len(entries)+64)
	var hidden []veilRow
	for i := range entries {
		e := &entries[i]
		e.Seq = first + int64(i)
		rows[i], err = t.entryRow(e)
		if err != nil {
			return 0, err
		}
		hashes, err = t.grow(hashes, e)
		if err != nil {
			return 0, err
		}
		if veils != nil {
			hidden, err = appendVeils(hidden, e.Seq, veils[i])
			if err != nil {
				return 0, err
			}
		}
	}
	return first, t.insertEntries(rows, hashes, hidden)
}

func (t *Tx) insertEntries(rows []entryRow, hashes []treeRow, veils []veilRow) error {
	if t.part != nil && !t.flushing {
		t.pending.entries = append(t.pending.entries, rows...)
		t.pending.tree = append(t.pending.tree, hashes...)
		t.pending.veils = append(t.pending.veils, veils...)
		return nil
	}
	err := clash(insert(t, "entries", rows))
	if err != nil {
		return err
	}
	err = insert(t, "tree", hashes)
	if err != nil {
		return err
	}
	return insert(t, "veils", veils)
}

// startTree gets ready to go on from the tree that is there.
func (t *Tx) startTree() error {
	if t.builder != nil {
		return nil
	}
	size, err := t.Size()
	if err != nil {
		return err
	}
	if size > 0 {
		last, err := t.EntryAt(size - 1)
		if err != nil {
			return err
		}
		t.last = moment(last.RecordedAt)
	}
	t.builder = ledger.NewBuilder(size, t)
	return nil
}

func (t *Tx) entryRow(e *Entry) (entryRow, error) {
	at := moment(e.RecordedAt)
	if at < t.last {
		return entryRow{}, fmt.Errorf("entry %s is recorded at %s, before the entry in front of it (%s)", e.ID, at, t.last)
	}
	t.last = at
	if e.ID == "" || e.Kind == "" || len(e.Bytes) == 0 {
		return entryRow{}, fmt.Errorf("entry %d lacks an identifier, a kind or its bytes", e.Seq)
	}
	if hasZero(e.Bytes) {
		return entryRow{}, zeroByte(e)
	}
	return entryRow{
		Seq: e.Seq, ID: e.ID, Kind: e.Kind, V: e.V, Site: e.Site, Batch: e.Batch,
		Supersedes: e.Supersedes, Actor: e.Actor, RecordedAt: instant(e.RecordedAt), Bytes: e.Bytes,
	}, nil
}

func (t *Tx) grow(to []treeRow, e *Entry) ([]treeRow, error) {
	idx := ledger.StoredCount(e.Seq)
	hashes, err := t.builder.Add(ledger.LeafHash(e.Bytes))
	if err != nil {
		return nil, err
	}
	for i := range hashes {
		to = append(to, treeRow{idx + int64(i), hashes[i][:]})
	}
	return to, nil
}

// insert writes new rows in batches.
func insert[R any](t *Tx, table string, rows []R) error {
	if len(rows) == 0 {
		return nil
	}
	if t.bulk != nil {
		done, err := insertBulk(t.bulk, table, rows)
		if done || err != nil {
			return t.fail(err)
		}
	}
	return t.fail(t.db.Table(table).CreateInBatches(rows, batchRows).Error)
}

// fail notes that the transaction cannot be kept, and gives the error back.
func (t *Tx) fail(err error) error {
	if t.failed == nil {
		t.failed = err
	}
	return err
}

// ReadHashes reads stored hashes of the tree, which makes a transaction a ledger.Reader.
func (t *Tx) ReadHashes(indexes []int64) ([]ledger.Hash, error) {
	rows, err := find[treeRow](t.db.Table("tree").Where("idx IN ?", indexes))
	if err != nil {
		return nil, err
	}
	at := make(map[int64][]byte, len(rows))
	for _, r := range rows {
		at[r.Idx] = r.Hash
	}
	out := make([]ledger.Hash, len(indexes))
	for i, idx := range indexes {
		if len(at[idx]) != ledger.HashSize {
			return nil, fmt.Errorf("%w: stored hash %d is missing or has a wrong length", ErrCorrupt, idx)
		}
		out[i] = ledger.Hash(at[idx])
	}
	return out, nil
}

// EntryByID gives the entry of an identifier, and whether there is one.
func (t *Tx) EntryByID(id string) (Entry, bool, error) {
	if e, ok := t.pending.find(func(r *entryRow) bool { return r.ID == id }); ok {
		return e, true, nil
	}
	return only(t.entries().Where("id = ?", id))
}

// SupersededBy gives the entry that superseded or withdrew the one of that identifier, and whether
// there is one.
func (t *Tx) SupersededBy(id string) (Entry, bool, error) {
	if e, ok := t.pending.find(func(r *entryRow) bool { return r.Supersedes == id && id != "" }); ok {
		return e, true, nil
	}
	return only(t.entries().Where("supersedes = ? AND supersedes <> ''", id))
}

// EntryAt gives the entry of a sequence number; ErrMissing if there is none.
func (t *Tx) EntryAt(seq int64) (Entry, error) {
	if e, ok := t.pending.find(func(r *entryRow) bool { return r.Seq == seq }); ok {
		return e, nil
	}
	e, ok, err := only(t.entries().Where("seq = ?", seq))
	if err == nil && !ok {
		err = fmt.Errorf("%w: there is no entry %d", ErrMissing, seq)
	}
	return e, err
}

func (t *Tx) entries() *gorm.DB { return t.db.Table("entries") }

func only(q *gorm.DB) (Entry, bool, error) {
	rows, err := find[entryRow](q.Limit(1))
	if err != nil || len(rows) == 0 {
		return Entry{}, false, err
	}
	return rows[0].entry(), true, nil
}

// EntryIDs tells which of the identifiers are in the book, and at which sequence number.
func (t *Tx) EntryIDs(ids []string) (map[string]int64, error) {
	found := make(map[string]int64)
	for i := range t.pending.entries {
		if r := &t.pending.entries[i]; slices.Contains(ids, r.ID) {
			found[r.ID] = r.Seq
		}
	}
	for len(ids) > 0 {
		n := min(len(ids), batchRows)
		rows, err := find[entryRow](t.entries().Select("seq", "id").Where("id IN ?", ids[:n]))
		if err != nil {
			return nil, err
		}
		for _, r := range rows {
			found[r.ID] = r.Seq
		}
		ids = ids[n:]
	}
	return found, nil
}

// EntryFilter chooses entries; a zero field asks for nothing.
type EntryFilter struct {
	Kinds              []string
	Site, Batch, Actor string
	Before             int64     // only entries of a lower sequence number: the next page
	From, To           time.Time // recorded at From or later, and before To
	Limit              int       // at most so many
}

// Entries gives the entries that the filter chooses, newest first.
func (t *Tx) Entries(f EntryFilter) ([]Entry, error) {
	err := t.settle()
	if err != nil {
		return nil, err
	}
	q, err := t.chosen(f)
	if err != nil {
		return nil, err
	}
	if len(f.Kinds) == 0 {
		rows, err := find[entryRow](q)
		return entriesOf(rows), err
	}
	// Each kind is asked for by itself, which its index answers in order; several at once would be
	// sorted whole for the first page of them.
	var all []entryRow
	for _, kind := range f.Kinds {
		rows, err := find[entryRow](q.Where("kind = ?", kind))
		if err != nil {
			return nil, err
		}
		all = append(all, rows...)
	}
	slices.SortFunc(all, func(a, b entryRow) int { return cmp.Compare(b.Seq, a.Seq) })
	if f.Limit > 0 && len(all) > f.Limit {
		all = all[:f.Limit]
	}
	return entriesOf(all), nil
}

// chosen is the query of a filter without its kinds. It can be gone on from more than once.
func (t *Tx) chosen(f EntryFilter) (*gorm.DB, error) {
	q, err := t.span(t.entries(), f)
	if err != nil {
		return nil, err
	}
	if f.Site != "" {
		q = q.Where("site = ?", f.Site)
	}
	if f.Batch != "" {
		q = q.Where("batch = ? AND batch <> ''", f.Batch)
	}
	if f.Actor != "" {
		q = q.Where("actor = ?", f.Actor)
	}
	if f.Limit > 0 {
		q = q.Limit(f.Limit)
	}
	return q.Order("seq DESC").Session(&gorm.Session{}), nil
}

// span narrows a query to the sequence numbers that the filter's bounds come down to.
func (t *Tx) span(q *gorm.DB, f EntryFilter) (*gorm.DB, error) {
	if f.Before > 0 {
		q = q.Where("seq < ?", f.Before)
	}
	for bound, at := range map[string]time.Time{"seq >= ?": f.From, "seq < ?": f.To} {
		if at.IsZero() {
			continue
		}
		first, err := t.firstSince(moment(at))
		if err != nil {
			return nil, err
		}
		q = q.Where(bound, first)
	}
	return q, nil
}

func entriesOf(rows []entryRow) []Entry {
	out := make([]Entry, len(rows))
	for i, r := range rows {
		out[i] = r.entry()
	}
	return out
}

// EachEntry calls fn with every entry from a sequence number on, in order, and its erasable values
// in order of path. fn may read and write in the same transaction.
func (t *Tx) EachEntry(from int64, fn func(Entry, []Veil) error) error {
	err := t.settle()
	if err != nil {
		return err
	}
	for {
		rows, err := find[entryRow](t.entries().Where("seq >= ?", from).Order("seq").Limit(batchRows))
		if err != nil || len(rows) == 0 {
			return err
		}
		last := rows[len(rows)-1].Seq
		veils, err := t.veilsBetween(from, last)
		if err != nil {
			return err
		}
		for _, r := range rows {
			err = fn(r.entry(), veils[r.Seq])
			if err != nil {
				return err
			}
		}
		from = last + 1
	}
}

// LastRecordedAt is when the last entry was recorded, and whether there is an entry.
func (t *Tx) LastRecordedAt() (time.Time, bool, error) {
	size, err := t.Size()
	if err != nil || size == 0 {
		return time.Time{}, false, err
	}
	e, err := t.EntryAt(size - 1)
	return e.RecordedAt, err == nil, err
}

// SeqAt is the sequence number of the last entry that was recorded at that moment or before; -1 if
// there is none.
func (t *Tx) SeqAt(at time.Time) (int64, error) {
	// What is recorded is kept to the microsecond, so the first moment after at is one further.
	next, err := t.firstSince(moment(at.Add(time.Microsecond)))
	return next - 1, err
}

// firstSince is the sequence number of the first entry recorded at or after a moment, or the size
// of the book. Entries are recorded in order, so halving finds it and no index is needed.
func (t *Tx) firstSince(at string) (int64, error) {
	size, err := t.Size()
	if err != nil {
		return 0, err
	}
	n := sort.Search(int(size), func(seq int) bool {
		if err != nil {
			return true
		}
		var recorded string
		err = t.db.Raw("SELECT recorded_at FROM entries WHERE seq = ?", seq).Row().Scan(&recorded)
		return recorded >= at
	})
	return int64(n), err
}
