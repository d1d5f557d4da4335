package book

import (
	"bytes"
	"crypto/rand"
	"encoding/binary"
	"hash/crc32"
	"os"
	"path/filepath"
	"slices"
	"testing"
	"time"
)

// smallSnapshot is the file of a small book that has planned a drill and held it.
func smallSnapshot(f *testing.F) []byte {
	ok := func(err error) {
		if err != nil {
			f.Fatal(err)
		}
	}
	ctx := f.Context()
	now := time.Date(2026, 3, 2, 8, 0, 0, 0, time.UTC)
	b, err := Create(ctx, filepath.Join(f.TempDir(), "site.book"), Options{Clock: func() time.Time { return now }, Random: rand.Reader})
	ok(err)
	source, err := os.ReadFile("testdata/site.yaml")
	ok(err)
	_, err = b.OpenProgram(ctx, SystemOperator("ops"), source, "")
	ok(err)
	_, err = b.AddAccount(ctx, SystemOperator("ops"), AccountForm{Name: "olga", Role: SafetyOfficer, Sites: []string{"QUAY"}})
	ok(err)
	olga, err := b.ActorNamed(ctx, "olga")
	ok(err)
	_, err = b.KeepPerson(ctx, olga, "QUAY", PersonForm{Code: "P1", Name: "Runa Sandoy", Level: "L2", Crew: "early", Joined: "2025-02-01"}, Correction{})
	ok(err)
	plan, err := b.PlanDrill(ctx, olga, "QUAY", PlanForm{Record: "drill/quench", Crew: "early", Day: "2026-03-02"}, Correction{})
	ok(err)
	_, err = b.RecordDrill(ctx, olga, "QUAY", DrillForm{Plan: plan.ID(), Record: "drill/quench", Crew: "early", On: "2026-03-02", People: []string{"P1"}})
	ok(err)
	_, err = b.KeepSnapshot(ctx, 1)
	ok(err)
	whole, err := os.ReadFile(b.snapshots.path)
	ok(err)
	ok(b.Close())
	return whole
}

// summed makes the sums of a damaged file right again, so that what is behind them is looked at.
func summed(b []byte) {
	var h snapshotHead
	if _, err := binary.Decode(b, binary.LittleEndian, &h); err != nil {
		return
	}
	rest := b[snapshotHeadSize:]
	for i := range h.Sections {
		n := min(max(h.Sections[i].Length, 0), int64(len(rest)))
		h.Sections[i].Sum = crc32.Checksum(rest[:n], castagnoli)
		rest = rest[n:]
	}
	if head, err := h.bytes(); err == nil {
		copy(b, head)
	}
}

// However a file is damaged, and even if its sums are right, it is read or refused and nothing worse.
func FuzzSnapshotFile(f *testing.F) {
	whole := smallSnapshot(f)
	for at := 0; at < len(whole); at += 1 + at/16 {
		f.Add(at, byte(0xff), len(whole))
		f.Add(at, byte(0x01), len(whole))
		f.Add(0, byte(0), at)
	}
	f.Add(0, byte(0), len(whole))
	f.Fuzz(func(t *testing.T, at int, flip byte, length int) {
		damaged := slices.Clone(whole[:min(max(length, 0), len(whole))])
		if at >= 0 && at < len(damaged) {
			damaged[at] ^= flip
		}
		if len(damaged) >= snapshotHeadSize {
			summed(damaged)
		}
		r := bytes.NewReader(damaged)
		h, err := readSnapshotHead(r, int64(len(damaged)))
		if err == nil {
			err = readSnapshot(r, h, newModel())
		}
		if err != nil && bytes.Equal(damaged, whole) {
			t.Fatalf("the whole file is refused: %v", err)
		}
	})
}

// A list of sessions is read as it was written, and never past its end.
func FuzzReadSessions(f *testing.F) {
	m := newModel()
	m.done.set("01890a5d-ac96-774b-bcce-b302099a8057", []int64{3, 300, 1 << 40})
	m.done.set("01890a5d-ac96-774b-bcce-b302099a8058", []int64{})
	var w bytes.Buffer
	if err := m.writeSessions(&w); err != nil {
		f.Fatal(err)
	}
	f.Add(w.Bytes())
	for i := range w.Len() {
		f.Add(w.Bytes()[:i])
	}
	f.Add(bytes.Repeat([]byte{0xff}, 20))
	f.Fuzz(func(t *testing.T, b []byte) {
		m := newModel()
		if m.readSessions(b) != nil {
			return
		}
		var first, second bytes.Buffer
		again := newModel()
		if err := m.writeSessions(&first); err != nil {
			t.Fatal(err)
		}
		if err := again.readSessions(first.Bytes()); err != nil {
			t.Fatal(err)
		}
		if err := again.writeSessions(&second); err != nil || !bytes.Equal(first.Bytes(), second.Bytes()) {
			t.Fatalf("read again: %x, first %x (%v)", second.Bytes(), first.Bytes(), err)
		}
	})
}
