package ledger

import (
	"bytes"
	"encoding/hex"
	"strings"
	"testing"
)

// RFC 4231 sections 4.2 and 4.3: test cases 1 and 2 of HMAC-SHA256, written from memory.
func TestCommitIsHMAC(t *testing.T) {
	for _, c := range []struct{ key, data, want string }{
		{strings.Repeat("\x0b", 20), "Hi There", "b0344c61d8db38535ca8afceaf0bf12b881dc200c9833da726e9376c2e32cff7"},
		{"Jefe", "what do ya want for nothing?", "5bdcc146bf60754e6a042426089575c75a003f089d2739839dec58b964ec3843"},
	} {
		if got := Commit([]byte(c.key), []byte(c.data)); got != c.want {
			t.Errorf("%x: %s, want %s", c.key, got, c.want)
		}
	}
}

func TestCommitmentsOpenOnlyWithTheirOwn(t *testing.T) {
	salt := bytes.Repeat([]byte{7}, SaltSize)
	other := bytes.Repeat([]byte{8}, SaltSize)
	c := Commit(salt, []byte("Ada Example"))
	if raw, err := hex.DecodeString(c); err != nil || len(raw) != HashSize {
		t.Errorf("a commitment is %q", c)
	}
	for _, w := range []struct {
		name        string
		commitment  string
		salt, value []byte
		opens       bool
	}{
		{"its own", c, salt, []byte("Ada Example"), true},
		{"another value", c, salt, []byte("Ada Exemple"), false},
		{"another salt", c, other, []byte("Ada Example"), false},
		{"a short salt", Commit(salt[:8], []byte("x")), salt[:8], []byte("x"), false},
		{"no salt", Commit(nil, nil), nil, nil, false},
		{"an empty commitment", "", salt, []byte("Ada Example"), false},
		{"an empty value", Commit(salt, nil), salt, []byte{}, true},
	} {
		if Opens(w.commitment, w.salt, w.value) != w.opens {
			t.Errorf("%s: opens is not %v", w.name, w.opens)
		}
	}
}
