package ledger

import (
	"crypto/hmac"
	"crypto/sha256"
	"encoding/hex"
)

// SaltSize is the number of random bytes of a salt.
const SaltSize = 32

// Commit binds a value without showing it: HMAC-SHA256 of the value, keyed by the salt, as 64
// hexadecimal digits. Whoever has neither salt nor value learns nothing from it, however few
// values are likely; once both are destroyed, nobody does. The salt has SaltSize random bytes and
// is used for one value only.
func Commit(salt, value []byte) string {
	m := hmac.New(sha256.New, salt)
	m.Write(value) // a hash never gives an error
	return hex.EncodeToString(m.Sum(nil))
}

// Opens tells whether the salt and the value are those of the commitment.
func Opens(commitment string, salt, value []byte) bool {
	return len(salt) == SaltSize && hmac.Equal([]byte(commitment), []byte(Commit(salt, value)))
}
