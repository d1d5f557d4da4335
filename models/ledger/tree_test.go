package ledger

import (
	"encoding/hex"
	"errors"
	"fmt"
	"slices"
	"testing"
)

// The leaves, roots and proofs are the reference values that the authors of RFC 6962 test their own
// tree with: google/certificate-transparency, python/ct/crypto/merkle_test.py. The leaf hashes and
// the inclusion proofs were also computed from the definition in RFC 6962 section 2.1.
var (
	rfcLeaves = unhex("", "00", "10", "2021", "3031", "40414243", "5051525354555657", "606162636465666768696a6b6c6d6e6f")
	rfcRoots  = []string{
		"e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855",
		"6e340b9cffb37a989ca544e6bb780a2c78901d3fb33738768511a30617afa01d",
		"fac54203e7cc696cf0dfcb42c92a1d9dbaf70ad9e621f4bd8d98662f00e3c125",
		"aeb6bcfe274b70a14fb067a5e5578264db0fa9b51af5e0ba159158f329e06e77",
		"d37ee418976dd95753c1c73862b9398fa2a2cf9b4ff0fdfe8b30cd95209614b7",
		"4e3bbb1f7b478dcfe71fb631631519a3bca12c9aefca1612bfce4c13a86264d4",
		"76e67dadbcdf1e10e1b74ddc608abd2f98dfb16fbce75277b5232a127f2087ef",
		"ddb89be403809e325750d3d263cd78929c2942b7942a34b77e122c9594a74c8c",
		"5dc9da79a70659a9ad559cb701ded9a2ab9d823aad2f4960cfe370eff4604328",
	}
	rfcLeafHashes = []string{
		"6e340b9cffb37a989ca544e6bb780a2c78901d3fb33738768511a30617afa01d",
		"96a296d224f285c67bee93c30f8a309157f0daa35dc5b87e410b78630a09cfc7",
		"0298d122906dcfc10892cb53a73992fc5b9f493ea4c9badb27b791b4127a7fe7",
		"07506a85fd9dd2f120eb694f86011e5bb4662e5c415a62917033d4a9624487e7",
		"bc1a0643b12e4d2d7c77918f44e0f4f79a838b6cf9ec5b5c283e1f4d88599e6b",
		"4271a26be0d8a84f0bd54c8c302e7cb3a3b5d1fa6780a40bcce2873477dab658",
		"b08693ec2e721597130641e8211e7eedccb4c26413963eee6c1e2ed16ffb1a5f",
		"46f6ffadd3d06a09ff3c5860d2755c8b9819db7df44251788c7d8e3180de8eb1",
	}
)

const (
	node01   = "fac54203e7cc696cf0dfcb42c92a1d9dbaf70ad9e621f4bd8d98662f00e3c125"
	node23   = "5f083f0a1a33ca076a95279832580db3e0ef4584bdff1f54c8a360f50de3031e"
	node45   = "0ebc5d3437fbe2db158b9f126a1d118e308181031d0a949f8dededebc558ef6a"
	node67   = "ca854ea128ed050b41b35ffc1b87b8eb2bde461e9e3b5596ece6b9d5975a0ae0"
	node0123 = "d37ee418976dd95753c1c73862b9398fa2a2cf9b4ff0fdfe8b30cd95209614b7"
	node4567 = "6b47aaf29ee3c2af9af889bc1fb9254dabd31177f16232dd6aab035ca39bf6e4"
)

func unhex(all ...string) [][]byte {
	out := make([][]byte, len(all))
	for i, s := range all {
		b, err := hex.DecodeString(s)
		if err != nil {
			panic(err)
		}
		out[i] = b
	}
	return out
}

func hashes(t *testing.T, all ...string) []Hash {
	t.Helper()
	out := make([]Hash, len(all))
	for i, s := range all {
		h, err := ParseHash(s)
		if err != nil {
			t.Fatal(err)
		}
		out[i] = h
	}
	return out
}

// kept is a storage of hashes in memory.
type kept []Hash

func (k *kept) ReadHashes(indexes []int64) ([]Hash, error) {
	out := make([]Hash, len(indexes))
	for i, x := range indexes {
		if x >= int64(len(*k)) {
			return nil, fmt.Errorf("hash %d is not stored", x)
		}
		out[i] = (*k)[x]
	}
	return out, nil
}

func grown(t *testing.T, b *Builder, into *kept, leaves [][]byte) {
	t.Helper()
	for _, l := range leaves {
		if want := StoredCount(b.Size()); int64(len(*into)) != want {
			t.Fatalf("%d hashes are stored before entry %d, want %d", len(*into), b.Size(), want)
		}
		h, err := b.Add(LeafHash(l))
		if err != nil {
			t.Fatal(err)
		}
		*into = append(*into, h...)
	}
}

func rfcTree(t *testing.T) *kept {
	t.Helper()
	var k kept
	grown(t, NewBuilder(0, nil), &k, rfcLeaves)
	return &k
}

func TestHashesOfRFC6962(t *testing.T) {
	for i, l := range rfcLeaves {
		if got := Hex(LeafHash(l)); got != rfcLeafHashes[i] {
			t.Errorf("leaf %d: %s, want %s", i, got, rfcLeafHashes[i])
		}
	}
	// A leaf and a node of the same reference tests.
	leaf := unhex("101112131415161718191a1b1c1d1e1f")[0]
	if got := Hex(LeafHash(leaf)); got != "3bfb960453ebaebf33727da7a1f4db38acc051d381b6da20d6d4e88f0eabfd7a" {
		t.Errorf("leaf: %s", got)
	}
	sides := hashes(t, "000102030405060708090a0b0c0d0e0f101112131415161718191a1b1c1d1e1f",
		"202122232425262728292a2b2c2d2e2f303132333435363738393a3b3c3d3e3f")
	root, err := Root(2, ReaderFunc(func(x []int64) ([]Hash, error) { return sides[:1], nil }))
	if err != nil || root != sides[0] {
		t.Errorf("a whole subtree is its own root: %s, %v", Hex(root), err)
	}
	b := NewBuilder(1, ReaderFunc(func([]int64) ([]Hash, error) { return sides[:1], nil }))
	node, err := b.Add(sides[1])
	if err != nil {
		t.Fatal(err)
	}
	if got := Hex(node[1]); got != "1a378704c17da31e2d05b6d121c2bb2c7d76f6ee6fa8f983e596c2d034963c57" {
		t.Errorf("node: %s", got)
	}
}

func TestRootsOfRFC6962(t *testing.T) {
	tree := rfcTree(t)
	for size, want := range rfcRoots {
		root, err := Root(int64(size), tree)
		if err != nil {
			t.Fatal(err)
		}
		if Hex(root) != want {
			t.Errorf("root of %d: %s, want %s", size, Hex(root), want)
		}
	}
	_, err := Root(-1, tree)
	if err == nil {
		t.Error("a tree of size -1 has a root")
	}
}

// A builder that goes on from any size stores the same hashes as one that began at nothing.
func TestBuilderGoesOn(t *testing.T) {
	whole := *rfcTree(t)
	for size := range len(rfcLeaves) + 1 {
		part := slices.Clone(whole[:StoredCount(int64(size))])
		grown(t, NewBuilder(int64(size), &part), &part, rfcLeaves[size:])
		if !slices.Equal(part, whole) {
			t.Errorf("going on from %d gives other hashes", size)
		}
	}
}

func TestBuilderTellsOfAFailingReader(t *testing.T) {
	broken := errors.New("the disk is gone")
	for _, r := range []Reader{
		nil,
		ReaderFunc(func([]int64) ([]Hash, error) { return nil, broken }),
		ReaderFunc(func([]int64) ([]Hash, error) { return nil, nil }),
	} {
		b := NewBuilder(1, r)
		_, err := b.Add(Hash{})
		if err == nil || b.Size() != 1 {
			t.Errorf("entry 1 was added without the hash of entry 0 (%v, size %d)", err, b.Size())
		}
	}
}

func TestLeafIndexIsWhereTheLeafIs(t *testing.T) {
	tree := *rfcTree(t)
	for seq := range rfcLeaves {
		if got := Hex(tree[LeafIndex(int64(seq))]); got != rfcLeafHashes[seq] {
			t.Errorf("at the index of leaf %d is %s", seq, got)
		}
	}
}

func TestInclusionProofsOfRFC6962(t *testing.T) {
	tree := rfcTree(t)
	for _, c := range []struct {
		seq, size int64
		want      []string
	}{
		{0, 1, nil},
		{0, 8, []string{rfcLeafHashes[1], node23, node4567}},
		{5, 8, []string{rfcLeafHashes[4], node67, node0123}},
		{2, 3, []string{node01}},
		{1, 5, []string{rfcLeafHashes[0], node23, rfcLeafHashes[4]}},
	} {
		proof, err := ProveInclusion(c.size, c.seq, tree)
		if err != nil {
			t.Fatal(err)
		}
		if want := hashes(t, c.want...); !slices.Equal(proof, want) {
			t.Errorf("%d in %d: %v", c.seq, c.size, proof)
		}
	}
}

func TestInclusionProofsHoldOnlyForWhatTheyProve(t *testing.T) {
	tree := rfcTree(t)
	for size := int64(1); size <= 8; size++ {
		for seq := range size {
			proof, err := ProveInclusion(size, seq, tree)
			if err != nil {
				t.Fatal(err)
			}
			root, leaf := hashes(t, rfcRoots[size])[0], LeafHash(rfcLeaves[seq])
			if err := CheckInclusion(proof, size, root, seq, leaf); err != nil {
				t.Errorf("%d in %d: %v", seq, size, err)
			}
			refuseInclusion(t, proof, size, root, seq, leaf)
		}
	}
	_, err := ProveInclusion(8, 8, tree)
	if err == nil {
		t.Error("entry 8 was proved to be in a tree of 8")
	}
}

func refuseInclusion(t *testing.T, proof []Hash, size int64, root Hash, seq int64, leaf Hash) {
	t.Helper()
	wrong := []error{
		CheckInclusion(append(slices.Clone(proof), Hash{}), size, root, seq, leaf),
		CheckInclusion(proof, size, Hash{1}, seq, leaf),
		CheckInclusion(proof, size, root, seq, Hash{1}),
		CheckInclusion(proof, size, root, size, leaf),
		CheckInclusion(proof, size, root, -1, leaf),
		CheckInclusion(proof, seq, root, seq, leaf),
	}
	for i := range proof {
		bent := slices.Clone(proof)
		bent[i][0] ^= 1
		wrong = append(wrong, CheckInclusion(bent, size, root, seq, leaf),
			CheckInclusion(proof[:i], size, root, seq, leaf))
	}
	for i, err := range wrong {
		if !errors.Is(err, ErrProof) {
			t.Errorf("%d in %d: wrong proof %d was taken (%v)", seq, size, i, err)
		}
	}
}

func TestConsistencyProofsOfRFC6962(t *testing.T) {
	tree := rfcTree(t)
	for _, c := range []struct {
		old, size int64
		want      []string
	}{
		{1, 1, nil},
		{1, 8, []string{rfcLeafHashes[1], node23, node4567}},
		{6, 8, []string{node45, node67, node0123}},
		{2, 5, []string{node23, rfcLeafHashes[4]}},
	} {
		proof, err := ProveConsistency(c.size, c.old, tree)
		if err != nil {
			t.Fatal(err)
		}
		if want := hashes(t, c.want...); !slices.Equal(proof, want) {
			t.Errorf("%d to %d: %v", c.old, c.size, proof)
		}
	}
}

func TestConsistencyProofsHoldOnlyForWhatTheyProve(t *testing.T) {
	tree := rfcTree(t)
	roots := hashes(t, rfcRoots...)
	for size := int64(0); size <= 8; size++ {
		for old := range size + 1 {
			proof, err := ProveConsistency(size, old, tree)
			if err != nil {
				t.Fatal(err)
			}
			if err := CheckConsistency(proof, size, roots[size], old, roots[old]); err != nil {
				t.Errorf("%d to %d: %v", old, size, err)
			}
			bent := append(slices.Clone(proof), Hash{})
			for _, err := range []error{
				CheckConsistency(bent, size, roots[size], old, roots[old]),
				CheckConsistency(proof, size, roots[size], old, Hash{1}),
			} {
				if !errors.Is(err, ErrProof) {
					t.Errorf("%d to %d: a wrong proof was taken (%v)", old, size, err)
				}
			}
		}
	}
}

// The three that the reference tests of RFC 6962 (merkle_test.py) refuse.
func TestConsistencyProofsToRefuse(t *testing.T) {
	tree := rfcTree(t)
	roots := hashes(t, rfcRoots...)
	proof, err := ProveConsistency(8, 6, tree)
	if err != nil {
		t.Fatal(err)
	}
	for name, err := range map[string]error{
		"the last hash is missing":          CheckConsistency(proof[:2], 8, roots[8], 6, roots[6]),
		"equal sizes with different roots":  CheckConsistency(nil, 8, roots[8], 8, roots[7]),
		"the new tree is smaller":           CheckConsistency(proof, 6, roots[6], 8, roots[8]),
		"nothing grew into another nothing": CheckConsistency(nil, 0, roots[1], 0, roots[0]),
		"a tree of a negative size":         CheckConsistency(nil, -1, roots[0], 0, roots[0]),
	} {
		if !errors.Is(err, ErrProof) {
			t.Errorf("%s: %v", name, err)
		}
	}
}

func TestHashesAreWrittenInHex(t *testing.T) {
	h := LeafHash(nil)
	got, err := ParseHash(Hex(h))
	if err != nil || got != h {
		t.Errorf("%s was read back as %s (%v)", Hex(h), Hex(got), err)
	}
	for _, s := range []string{"", "00", Hex(h) + "00", "zz" + Hex(h)[2:]} {
		_, err := ParseHash(s)
		if err == nil {
			t.Errorf("%q was read as a hash", s)
		}
	}
}
