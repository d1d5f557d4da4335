package standing

import (
	"cmp"
	"encoding/hex"
	"fmt"
	"math"
	"time"

	"github.com/google/uuid"

	"lodebook/models/civil"
)

// record is a Record as it is kept: what the rules read and no more, since there are many.
type record struct {
	at         int64 // microseconds since 1970 in UTC, or untimed
	seq, ended uint32
	day        civil.Day
	until      civil.Day // noDay where it has none
	site       uint16
	limit      uint16 // see limits
	passed     bool
}

// untimed is before every time, which puts what has only a day first.
const untimed = math.MinInt64

// noDay stands for a day that there is not.
const noDay = civil.LastDay + 1

func newRecord(r *Record, site int32) record {
	kept := record{
		at: untimed, seq: small(r.Seq), ended: small(r.Ended), day: r.Day,
		until: noDay, site: uint16(site), passed: r.Passed,
	}
	if site > math.MaxUint16 {
		panic(fmt.Sprintf("a book of more than %d sites", math.MaxUint16))
	}
	if r.Time != nil {
		kept.at = r.Time.UnixMicro()
	}
	if r.Until != nil {
		kept.until = *r.Until
	}
	return kept
}

// small is a sequence number as it is kept. A book that has come to its limit would judge wrongly, so
// it stops.
func small(seq int64) uint32 {
	if seq < 0 || seq > math.MaxUint32 {
		panic(fmt.Sprintf("entry %d is past what the evaluator can count", seq))
	}
	return uint32(seq)
}

func (r *record) knownAt(k int64) bool {
	return int64(r.seq) <= k && (r.ended == 0 || int64(r.ended) > k)
}

// in is the day that the zone gives the record.
func (r *record) in(loc *time.Location) civil.Day {
	if r.at == untimed {
		return r.day
	}
	return civil.DayOf(time.UnixMicro(r.at), loc)
}

// time is when it was done, nil where only the day is known.
func (r *record) time() *time.Time {
	if r.at == untimed {
		return nil
	}
	at := time.UnixMicro(r.at).UTC()
	return &at
}

// compareRecords orders records as the design does, with the days of those that have a time
// counted in UTC: a site's own zone moves them by a day at most.
func compareRecords(a, b *record) int {
	if a.at == untimed && b.at == untimed {
		return cmp.Or(cmp.Compare(a.day, b.day), cmp.Compare(a.seq, b.seq))
	}
	return compareDeeds(deed{a.in(time.UTC), a}, deed{b.in(time.UTC), b})
}

// mark is an entry's identifier in 16 bytes: a UUID, or any text of up to 14 bytes. No UUID in use
// has the version 15, which marks such a text.
type mark [16]byte

const (
	markVersion = 6 // the byte that holds a UUID's version
	markText    = 0xf0
)

func markOf(id string) mark {
	if u, err := uuid.Parse(id); err == nil && len(id) == 36 && u[markVersion]&0xf0 != markText {
		return mark(u)
	}
	if len(id) > 14 {
		panic("the identifier " + id + " is no UUID")
	}
	var m mark
	n := copy(m[:markVersion], id)
	copy(m[markVersion+1:], id[n:])
	m[markVersion] = markText | byte(len(id))
	return m
}

// String is the identifier.
func (m mark) String() string {
	if m[markVersion]&0xf0 == markText {
		n := int(m[markVersion] & 0x0f)
		text := string(m[:markVersion]) + string(m[markVersion+1:])
		return text[:n]
	}
	var out [36]byte
	hex.Encode(out[:8], m[:4])
	hex.Encode(out[9:13], m[4:6])
	hex.Encode(out[14:18], m[6:8])
	hex.Encode(out[19:23], m[8:10])
	hex.Encode(out[24:], m[10:])
	out[8], out[13], out[18], out[23] = '-', '-', '-', '-'
	return string(out[:])
}
