// Package ledger fixes what was written: canonical bytes, salted commitments and a Merkle tree
// over entries. It knows bytes and not what they mean. It is pure: no clock, no randomness, no
// storage of its own; whoever keeps the hashes hands in a Reader.
//
// The tree is that of RFC 6962 section 2.1 (SHA-256, 0x00 before a leaf and 0x01 before a node),
// kept by golang.org/x/mod/sumdb/tlog in its dense order of stored hashes: entry n adds the hashes
// from StoredCount(n) up to, not including, StoredCount(n+1), and none of them ever changes.
package ledger

import (
	"encoding/hex"
	"errors"
	"fmt"
	"slices"

	"golang.org/x/mod/sumdb/tlog"
)

// Hash is a SHA-256 hash of a leaf, a node or a whole tree. Write it with Hex.
type Hash = tlog.Hash

// HashSize is the number of bytes of a hash.
const HashSize = tlog.HashSize

// Reader hands out stored hashes by their index: one for each index, in the order asked, or an
// error. It is the only thing that the tree needs of a storage.
type Reader = tlog.HashReader

// ReaderFunc is a function as a Reader.
type ReaderFunc = tlog.HashReaderFunc

// ErrProof says that a proof does not show what it claims, or that its sizes make no sense.
var ErrProof = errors.New("the proof does not hold")

// Hex writes a hash as 64 lower-case hexadecimal digits.
func Hex(h Hash) string { return hex.EncodeToString(h[:]) }

// ParseHash reads what Hex wrote.
func ParseHash(s string) (Hash, error) {
	var h Hash
	if len(s) != hex.EncodedLen(len(h)) {
		return Hash{}, fmt.Errorf("%q is not a hash; a hash is 64 hexadecimal digits", s)
	}
	_, err := hex.Decode(h[:], []byte(s))
	if err != nil {
		return Hash{}, fmt.Errorf("%q is not a hash; a hash is 64 hexadecimal digits", s)
	}
	return h, nil
}

// LeafHash is the hash of an entry's bytes as a leaf.
func LeafHash(data []byte) Hash { return tlog.RecordHash(data) }

// StoredCount is the number of stored hashes of a tree of that many entries, and so the index of
// the first stored hash of the entry with that sequence number.
func StoredCount(size int64) int64 { return tlog.StoredHashCount(size) }

// LeafIndex is the index of the stored hash that is entry seq's leaf.
func LeafIndex(seq int64) int64 { return tlog.StoredHashIndex(0, seq) }

// Root is the hash of the tree of the first size entries; size 0 is the hash of nothing.
func Root(size int64, r Reader) (Hash, error) {
	if size < 0 {
		return Hash{}, fmt.Errorf("a tree has no size %d", size)
	}
	return tlog.TreeHash(size, r)
}

// ProveInclusion gives the hashes which show that entry seq is in the tree of that size, from the
// leaf upwards (RFC 6962 section 2.1.1).
func ProveInclusion(size, seq int64, r Reader) ([]Hash, error) {
	return tlog.ProveRecord(size, seq, r)
}

// CheckInclusion tells whether the proof shows that the leaf is entry seq of the tree of that size
// and root; if not, the error is ErrProof.
func CheckInclusion(proof []Hash, size int64, root Hash, seq int64, leaf Hash) error {
	err := tlog.CheckRecord(proof, size, root, seq, leaf)
	if err != nil {
		return ErrProof
	}
	return nil
}

// ProveConsistency gives the hashes which show that the tree of the first old entries is the
// beginning of the tree of size entries (RFC 6962 section 2.1.2). From an empty tree there is
// nothing to show and the proof is empty.
func ProveConsistency(size, old int64, r Reader) ([]Hash, error) {
	if old == 0 && size >= 0 {
		return nil, nil
	}
	return tlog.ProveTree(size, old, r)
}

// CheckConsistency tells whether the proof shows that the tree (old, oldRoot) is the beginning of
// the tree (size, root); if not, the error is ErrProof.
func CheckConsistency(proof []Hash, size int64, root Hash, old int64, oldRoot Hash) error {
	if old == 0 && size >= 0 {
		return checkFromNothing(proof, size, root, oldRoot)
	}
	err := tlog.CheckTree(proof, size, root, old, oldRoot)
	if err != nil {
		return ErrProof
	}
	return nil
}

func checkFromNothing(proof []Hash, size int64, root, oldRoot Hash) error {
	nothing, err := Root(0, nil)
	if err != nil {
		return err
	}
	if len(proof) != 0 || oldRoot != nothing || (size == 0 && root != nothing) {
		return ErrProof
	}
	return nil
}

// Builder grows a tree leaf by leaf. It reads a stored hash from its Reader only for what was
// there before it began, so a builder that began at size 0 needs no Reader.
type Builder struct {
	size   int64
	before Reader
	// latest holds the last hash that was made at each level: a new leaf completes subtrees only
	// with their left neighbours, and those are always the last of their level.
	latest []stored
}

type stored struct {
	index int64
	hash  Hash
}

// NewBuilder goes on from a tree of that size, whose stored hashes r can read.
func NewBuilder(size int64, r Reader) *Builder {
	return &Builder{size: size, before: r}
}

// Size is the number of leaves so far.
func (b *Builder) Size() int64 { return b.size }

// Clone is a builder that goes on from the same tree by itself.
func (b *Builder) Clone() *Builder {
	c := *b
	c.latest = slices.Clone(b.latest)
	return &c
}

// Add appends a leaf and gives the hashes to store, of which the first belongs at index
// StoredCount(Size() before) and the others follow it without a hole.
func (b *Builder) Add(leaf Hash) ([]Hash, error) {
	hashes, err := tlog.StoredHashesForRecordHash(b.size, leaf, ReaderFunc(b.read))
	if err != nil {
		return nil, fmt.Errorf("growing the tree past entry %d: %w", b.size, err)
	}
	first := StoredCount(b.size)
	for level, h := range hashes {
		if level == len(b.latest) {
			b.latest = append(b.latest, stored{index: -1})
		}
		b.latest[level] = stored{first + int64(level), h}
	}
	b.size++
	return hashes, nil
}

func (b *Builder) read(indexes []int64) ([]Hash, error) {
	out := make([]Hash, len(indexes))
	for i, index := range indexes {
		h, err := b.one(index)
		if err != nil {
			return nil, err
		}
		out[i] = h
	}
	return out, nil
}

func (b *Builder) one(index int64) (Hash, error) {
	level, _ := tlog.SplitStoredHashIndex(index)
	if level < len(b.latest) && b.latest[level].index == index {
		return b.latest[level].hash, nil
	}
	if b.before == nil {
		return Hash{}, fmt.Errorf("stored hash %d is not at hand", index)
	}
	h, err := b.before.ReadHashes([]int64{index})
	if err != nil {
		return Hash{}, err
	}
	if len(h) != 1 {
		return Hash{}, fmt.Errorf("stored hash %d was asked and %d hashes came", index, len(h))
	}
	return h[0], nil
}
