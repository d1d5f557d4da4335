package store

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"regexp"
	"strconv"

	"lodebook/models/ledger"
)

// VeilPrefix begins the string that stands in an entry's bytes for an erasable value; 64
// hexadecimal digits of its commitment follow.
const VeilPrefix = "veil:"

// BodyKey is the member of an entry's JSON in which its erasable values are named by their path.
const BodyKey = "body"

// Report is what Verify found.
type Report struct {
	Entries    int64       // how many entries there are
	Checked    int64       // how many were found whole before the first fault
	Erased     int64       // how many erasable values have been erased
	Head       ledger.Hash // the root of the tree over the entries as their bytes are now
	FirstFault string      // a sentence, or empty: nothing is wrong
}

// fault is a finding, as opposed to an error in finding.
type fault struct{ sentence string }

func (f *fault) Error() string { return f.sentence }

func faulty(format string, args ...any) error { return &fault{fmt.Sprintf(format, args...)} }

// Verify goes over the whole book as it is at this moment: the file's own structure, every
// entry's number, hash and time, every stored hash of the tree, every erasable value against its
// commitment. More checks are called with every entry and its values, in order; an error of theirs
// is a fault. It stops at the first fault, which is in the report and no error; an error means that
// the book could not be read. Progress, if not nil, is told after every few hundred entries.
func (s *Store) Verify(ctx context.Context, progress func(done, total int64), checks ...func(Entry, []Veil) error) (Report, error) {
	var report Report
	err := s.Read(ctx, func(t *Tx) error {
		v := verifier{t: t, report: &report, tree: ledger.NewBuilder(0, nil), progress: progress, checks: checks}
		return v.run()
	})
	var f *fault
	switch {
	case errors.As(err, &f):
		report.FirstFault = f.sentence
		err = nil
	case errors.Is(err, ErrCorrupt):
		report.FirstFault = err.Error()
		err = nil
	}
	return report, err
}

type verifier struct {
	t        *Tx
	report   *Report
	tree     *ledger.Builder
	pending  []ledger.Hash // hashes of the entries since the last comparison
	from     int64         // index of the first of them
	last     string        // recorded-at of the entry in front
	progress func(done, total int64)
	checks   []func(Entry, []Veil) error
}

func (v *verifier) run() error {
	size, err := v.t.Size()
	if err != nil {
		return err
	}
	v.report.Entries = size
	err = v.structure()
	if err != nil {
		return err
	}
	err = v.t.EachEntry(0, v.entry)
	if err != nil {
		return err
	}
	err = v.compare()
	if err != nil {
		return err
	}
	return v.finish(size)
}

// structure lets SQLite look at the file itself: pages, indexes and references. Of a database it
// asks for rows without their entry; the pages are the server's, which reads every entry after this.
func (v *verifier) structure() error {
	if v.t.db.Name() == "postgres" {
		return v.references()
	}
	var found string
	err := v.t.db.Raw("PRAGMA integrity_check(1)").Scan(&found).Error
	if err != nil {
		return err
	}
	if found != "ok" {
		return faulty("The book's file is damaged: %s.", found)
	}
	var dangling []string
	err = v.t.db.Raw(`SELECT DISTINCT "table" FROM pragma_foreign_key_check ORDER BY 1`).Scan(&dangling).Error
	if err != nil {
		return err
	}
	if len(dangling) > 0 {
		return faulty("A row of %s belongs to an entry that is not in the book.", dangling[0])
	}
	return nil
}

// references looks for rows that belong to no entry.
func (v *verifier) references() error {
	tables := []string{"veils"}
	for _, p := range projections {
		tables = append(tables, p.title())
	}
	for _, name := range tables {
		var dangling bool
		err := v.t.db.Raw("SELECT EXISTS (SELECT 1 FROM " + name + " AS r WHERE NOT EXISTS (SELECT 1 FROM entries WHERE entries.seq = r.seq))").Scan(&dangling).Error
		if err != nil {
			return err
		}
		if dangling {
			return faulty("A row of %s belongs to an entry that is not in the book.", name)
		}
	}
	return nil
}

func (v *verifier) entry(e Entry, veils []Veil) error {
	if e.Seq != v.tree.Size() {
		return faulty("Entry %d is missing.", v.tree.Size())
	}
	at := moment(e.RecordedAt)
	if at < v.last {
		return faulty("Entry %d is recorded at %s, before the entry in front of it (%s).", e.Seq, at, v.last)
	}
	v.last = at
	hashes, err := v.tree.Add(ledger.LeafHash(e.Bytes))
	if err != nil {
		return err
	}
	v.pending = append(v.pending, hashes...)
	err = v.values(e, veils)
	if err != nil {
		return err
	}
	for _, check := range v.checks {
		err = check(e, veils)
		if err != nil {
			return faulty("Entry %d: %s.", e.Seq, err)
		}
	}
	if v.tree.Size()%batchRows != 0 {
		return nil
	}
	return v.compare()
}

// compare holds the hashes that were computed against those that are stored.
func (v *verifier) compare() error {
	rows, err := find[treeRow](v.t.db.Table("tree").
		Where("idx >= ? AND idx < ?", v.from, v.from+int64(len(v.pending))).Order("idx"))
	if err != nil {
		return err
	}
	for i, h := range v.pending {
		if i >= len(rows) || rows[i].Idx != v.from+int64(i) {
			return faulty("Hash %d of the tree is missing; it belongs to entry %d.", v.from+int64(i), ownerOf(v.from+int64(i)))
		}
		if string(rows[i].Hash) != string(h[:]) {
			return faulty("Entry %d is not what was written: its bytes do not give hash %d of the tree.", ownerOf(rows[i].Idx), rows[i].Idx)
		}
	}
	v.from += int64(len(v.pending))
	v.pending = v.pending[:0]
	v.report.Checked = v.tree.Size()
	if v.progress != nil {
		v.progress(v.report.Checked, v.report.Entries)
	}
	return nil
}

// ownerOf is the entry that a stored hash was stored with.
func ownerOf(idx int64) int64 {
	seq := idx / 2
	for ledger.StoredCount(seq+1) <= idx {
		seq++
	}
	return seq
}

// finish looks for what is too much, and takes the head.
func (v *verifier) finish(size int64) error {
	var more int64
	err := v.t.db.Raw("SELECT COUNT(*) FROM tree WHERE idx < 0 OR idx >= ?", ledger.StoredCount(size)).Scan(&more).Error
	if err != nil {
		return err
	}
	if more > 0 {
		return faulty("The tree has %d hashes more than %d entries need: entries are missing at the end.", more, size)
	}
	head, err := ledger.Root(size, v.t)
	v.report.Head = head
	return err
}

// values holds the erasable values of an entry against the commitments in its bytes, both ways.
func (v *verifier) values(e Entry, veils []Veil) error {
	commitments, err := commitmentsOf(e.Bytes)
	if err != nil {
		return faulty("Entry %d is not JSON.", e.Seq)
	}
	for _, veil := range veils {
		c, ok := commitments[veil.Path]
		if !ok {
			return faulty("Entry %d has a value at %q that it did not commit to.", e.Seq, veil.Path)
		}
		delete(commitments, veil.Path)
		if veil.Erased {
			v.report.Erased++
			continue
		}
		if !ledger.Opens(c, veil.Salt, veil.Value) {
			return faulty("The value at %q of entry %d is not the one that was written.", veil.Path, e.Seq)
		}
	}
	for path := range commitments {
		return faulty("The value at %q of entry %d is missing; it was not erased in the book's own way.", path, e.Seq)
	}
	return nil
}

var commitment = regexp.MustCompile(`^` + VeilPrefix + `([0-9a-f]{64})$`)

// commitmentsOf finds the commitments in an entry's body by their path: member names and places in
// lists, joined by dots.
func commitmentsOf(b []byte) (map[string]string, error) {
	var entry map[string]any
	err := json.Unmarshal(b, &entry)
	if err != nil {
		return nil, err
	}
	found := make(map[string]string)
	collectCommitments(found, "", entry[BodyKey])
	return found, nil
}

func collectCommitments(to map[string]string, path string, v any) {
	below := path
	if path != "" {
		below += "."
	}
	switch x := v.(type) {
	case string:
		if m := commitment.FindStringSubmatch(x); m != nil {
			to[path] = m[1]
		}
	case []any:
		for i, e := range x {
			collectCommitments(to, below+strconv.Itoa(i), e)
		}
	case map[string]any:
		for k, e := range x {
			collectCommitments(to, below+k, e)
		}
	}
}
