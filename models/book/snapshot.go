package book

import (
	"encoding/binary"
	"errors"
	"fmt"
	"hash/crc32"
	"io"
	"slices"
	"sync"
	"unsafe"

	"github.com/google/uuid"

	"lodebook/models/ledger"
	"lodebook/models/program"
	"lodebook/models/store"
)

// A snapshot is a model as a file: a head, the rows of all projections but the records, the records of
// planned sessions, and the evaluator. It is a copy that can be thrown away at any time; the book is the
// database. What does not fit is not read.

// snapshotForm changes whenever the form of the head or of the sections does.
const snapshotForm = 6

var snapshotMagic = [8]byte{'L', 'o', 'd', 'e', 's', 'n', 'a', 'p'}

var castagnoli = crc32.MakeTable(crc32.Castagnoli)

// snapshotHead says of which book a snapshot is, and up to where. Program is a sum of the program that wrote
// it: another may judge the same records otherwise, or lay them out otherwise.
type snapshotHead struct {
	Magic    [8]byte
	Form     uint32
	Program  uint32
	Schema   int64 // number of the last migration
	Book     uuid.UUID
	Size     int64 // number of entries taken in
	Root     ledger.Hash
	Sections [3]snapshotSection
	Sum      uint32 // CRC-32C of all before it
}

// snapshotSection is the length of a section in bytes, and its CRC-32C.
type snapshotSection struct {
	Length int64
	Sum    uint32
}

var snapshotHeadSize = binary.Size(snapshotHead{})

func (h *snapshotHead) bytes() ([]byte, error) {
	b, err := binary.Append(nil, binary.LittleEndian, h)
	if err != nil {
		return nil, err
	}
	last := len(b) - 4
	binary.LittleEndian.PutUint32(b[last:], crc32.Checksum(b[:last], castagnoli))
	return b, nil
}

// unfit says why a snapshot is not used.
type unfit struct{ why string }

func (u *unfit) Error() string { return "the snapshot " + u.why }

func unfitf(format string, args ...any) error { return &unfit{fmt.Sprintf(format, args...)} }

var errDamaged = &unfit{"is damaged"}

// writeSnapshot writes the model to the beginning of an empty file. The head comes with what it is of; the
// rest of it is filled in.
func writeSnapshot(w io.WriteSeeker, m *model, h snapshotHead) error {
	h.Magic, h.Form, h.Size = snapshotMagic, snapshotForm, m.head
	if _, err := w.Seek(int64(snapshotHeadSize), io.SeekStart); err != nil {
		return err
	}
	rows := m.rows()
	for i, write := range []func(io.Writer) error{
		func(w io.Writer) error { return store.WriteDelta(w, &rows) },
		m.writeSessions,
		m.engine.WriteSnapshot,
	} {
		s := &summing{w: w}
		if err := write(s); err != nil {
			return err
		}
		h.Sections[i] = s.snapshotSection
	}
	b, err := h.bytes()
	if err != nil {
		return err
	}
	if _, err := w.Seek(0, io.SeekStart); err != nil {
		return err
	}
	_, err = w.Write(b)
	return err
}

// summing passes bytes on and counts and sums them.
type summing struct {
	w io.Writer
	snapshotSection
}

// Write passes bytes on.
func (s *summing) Write(b []byte) (int, error) {
	n, err := s.w.Write(b)
	s.Length += int64(n)
	s.Sum = crc32.Update(s.Sum, castagnoli, b[:n])
	return n, err
}

// readSnapshotHead reads the head of a file of that size. What can be told from it is checked: an *unfit
// says what is wrong.
func readSnapshotHead(r io.Reader, size int64) (snapshotHead, error) {
	var h snapshotHead
	b := make([]byte, snapshotHeadSize)
	_, err := io.ReadFull(r, b)
	if errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF) {
		return h, errDamaged
	}
	if err != nil {
		return h, err
	}
	if _, err := binary.Decode(b, binary.LittleEndian, &h); err != nil {
		return h, err
	}
	switch {
	case h.Magic != snapshotMagic:
		return h, unfitf("is none")
	case h.Sum != crc32.Checksum(b[:len(b)-4], castagnoli):
		return h, errDamaged
	case h.Form != snapshotForm:
		return h, unfitf("is of form %d, and this program reads form %d", h.Form, snapshotForm)
	}
	left := size - int64(snapshotHeadSize)
	for _, s := range h.Sections {
		if s.Length < 0 || s.Length > left {
			return h, errDamaged
		}
		left -= s.Length
	}
	if left != 0 {
		return h, errDamaged
	}
	return h, nil
}

// readSnapshot takes what follows the head into an empty model. After an error the model is of no use.
func readSnapshot(r io.Reader, h snapshotHead, m *model) error {
	var sections [len(h.Sections)][]byte
	for i := range sections {
		var err error
		if sections[i], err = section(r, h.Sections[i]); err != nil {
			return err
		}
	}
	// The texts of the rows are parts of the section: nothing writes into it any more.
	rows := sections[0]
	d, err := store.ReadDelta(unsafe.String(unsafe.SliceData(rows), len(rows)))
	if err == nil {
		err = m.takeListed(&d)
	}
	if err == nil {
		err = m.readSessions(sections[1])
	}
	if err == nil {
		err = m.engine.ReadSnapshot(sections[2])
	}
	if err != nil {
		return unfitf("does not fit: %v", err)
	}
	m.head = h.Size
	return nil
}

// takeListed takes in what rows listed. Programs are read, the evaluator is told and the rows are put up at the
// same time: each has its own part of the model.
func (m *model) takeListed(d *store.Delta) error {
	var programs []*program.Program
	var unread, untold error
	var others sync.WaitGroup
	others.Go(func() { programs, unread = parseAll(d.Versions) })
	others.Go(func() { untold = m.putListed(d) })
	m.shelveListed(d)
	others.Wait()
	if err := errors.Join(unread, untold); err != nil {
		return err
	}
	for i, v := range d.Versions {
		m.putVersion(v, programs[i])
	}
	return nil
}

// putListed tells the evaluator of all rows but the versions.
func (m *model) putListed(d *store.Delta) error {
	for _, r := range d.Fixtures {
		m.putFixture(r)
	}
	for _, r := range d.Stints {
		m.putStint(r)
	}
	for _, r := range d.Facts {
		if err := m.putFact(r); err != nil {
			return err
		}
	}
	for _, r := range d.Events {
		m.putEvent(r)
	}
	for _, r := range d.Excusals {
		m.putExcusal(r)
	}
	for _, r := range d.Rights {
		m.putRight(r)
	}
	return nil
}

// shelveListed puts the rows up for looking up.
func (m *model) shelveListed(d *store.Delta) {
	shelve(&m.people, d.People, func(r *store.PersonRow) string { return r.Code })
	for _, r := range d.People {
		m.putName(r)
		m.putBadge(r)
	}
	shelve(&m.fixtures, d.Fixtures, func(r *store.FixtureRow) siteCode { return siteCode{r.Site, r.Code} })
	shelve(&m.stints, d.Stints, func(r *store.StintRow) store.SubjectKey {
		return store.SubjectKey{Site: r.Site, Kind: r.Kind, Code: r.Code}
	})
	shelve(&m.facts, d.Facts, func(r *store.FactRow) store.SubjectKey {
		return store.SubjectKey{Site: r.Site, Kind: r.Kind, Code: r.Code}
	})
	shelve(&m.events, d.Events, func(r *store.EventRow) store.SubjectKey { return r.Subject })
	shelve(&m.excusals, d.Excusals, func(r *store.ExcusalRow) store.SubjectKey { return r.Subject })
	shelve(&m.visits, d.Visits, func(r *store.VisitRow) string { return r.Site })
	shelve(&m.visitSteps, d.VisitSteps, func(r *store.VisitStepRow) string { return r.Visit })
	shelve(&m.marks, d.Marks, func(r *store.MarkRow) markKey { return keyOfMark(*r) })
	shelve(&m.rights, d.Rights, func(r *store.RightRow) store.SubjectKey { return personAt(r.Site, r.Person) })
	m.shelveRemedies(d)
	m.shelveCover(d)
	shelve(&m.accounts, d.Accounts, func(r *store.AccountRow) string { return r.ID })
	m.plans, m.batches = d.Plans, d.Batches
}

// shelve puts up rows of which those of one key stand together, as one list.
func shelve[K comparable, T any](s *shelf[K, []T], rows []T, key func(*T) K) {
	for first := 0; first < len(rows); {
		k, end := key(&rows[first]), first+1
		for end < len(rows) && key(&rows[end]) == k {
			end++
		}
		s.set(k, rows[first:end:end])
		first = end
	}
}

// section reads a section and checks its sum. Its bytes begin at a multiple of eight.
func section(r io.Reader, s snapshotSection) ([]byte, error) {
	words := make([]uint64, s.Length/8+1)
	b := unsafe.Slice((*byte)(unsafe.Pointer(&words[0])), s.Length)
	sum := uint32(0)
	for done := 0; done < len(b); {
		// In pieces, so that they are summed while they are in the cache.
		piece := b[done:min(len(b), done+1<<18)]
		_, err := io.ReadFull(r, piece)
		if errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF) {
			return nil, errDamaged
		}
		if err != nil {
			return nil, err
		}
		sum = crc32.Update(sum, castagnoli, piece)
		done += len(piece)
	}
	if sum != s.Sum {
		return nil, errDamaged
	}
	return b, nil
}

// rows are all rows that the model was fed with, but the records; those that are looked up together stand
// together, in order of their entries.
func (m *model) rows() store.Delta {
	d := store.Delta{
		People: listed(m.people), Fixtures: listed(m.fixtures), Stints: listed(m.stints), Facts: listed(m.facts),
		Events: listed(m.events), Excusals: listed(m.excusals), Rights: listed(m.rights), Marks: listed(m.marks), Visits: listed(m.visits), VisitSteps: listed(m.visitSteps), Plans: m.plans, Accounts: listed(m.accounts), Batches: m.batches,
	}
	m.listRemedies(&d)
	m.listCover(&d)
	for _, code := range m.siteCodes() {
		for _, v := range m.sites[code].versions {
			d.Versions = append(d.Versions, v.row)
		}
	}
	return d
}

func listed[K comparable, T any](s shelf[K, []T]) []T {
	var all []T
	for _, rows := range s.all() {
		all = append(all, rows...)
	}
	return all
}

// writeSessions writes the records that stand of each planned session: how many sessions there are, and of
// each its identifier and its records.
func (m *model) writeSessions(w io.Writer) error {
	var b []byte
	var codes []string
	for code := range m.done.all() {
		codes = append(codes, code)
	}
	slices.Sort(codes)
	b = binary.AppendUvarint(b, uint64(len(codes)))
	for _, code := range codes {
		b = append(binary.AppendUvarint(b, uint64(len(code))), code...)
		list := m.done.get(code)
		b = binary.AppendUvarint(b, uint64(len(list)))
		for _, seq := range list {
			b = binary.AppendVarint(b, seq)
		}
	}
	_, err := w.Write(b)
	return err
}

// readSessions takes in what writeSessions wrote.
func (m *model) readSessions(b []byte) error {
	r := &sessionReader{rest: b}
	for range r.count() {
		n := r.count()
		code := string(r.rest[:n])
		r.rest = r.rest[n:]
		list := make([]int64, r.count())
		for i := range list {
			seq, n := binary.Varint(r.rest)
			if n <= 0 {
				return errDamaged
			}
			list[i], r.rest = seq, r.rest[n:]
		}
		if r.broken {
			return errDamaged
		}
		m.done.set(code, list)
	}
	if r.broken || len(r.rest) > 0 {
		return errDamaged
	}
	return nil
}

type sessionReader struct {
	rest   []byte
	broken bool
}

// count reads a number of things of which each takes a byte at least.
func (r *sessionReader) count() int {
	v, n := binary.Uvarint(r.rest)
	if n <= 0 || v > uint64(len(r.rest)-n) {
		r.broken, r.rest = true, nil
		return 0
	}
	r.rest = r.rest[n:]
	return int(v)
}
