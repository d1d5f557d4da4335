package ledger

import (
	"encoding/json"
	"fmt"
	"strconv"

	"github.com/gowebpki/jcs"
)

// maxInteger is the largest magnitude up to which every integer is exact in the double precision
// that RFC 8785 section 3.2.2.3 prescribes.
const maxInteger = 1 << 53

// Canonical writes v as JSON and brings that into the one form of RFC 8785, over which hashes are
// taken. Its numbers are integers of magnitude up to 2^53 and nothing else: a measured value is a
// string, as it was typed, so that 19.50 stays 19.50. Text that is not UTF-8 is refused, not
// replaced.
func Canonical(v any) ([]byte, error) {
	plain, err := json.Marshal(v)
	if err != nil {
		return nil, err
	}
	err = checkPlain(plain)
	if err != nil {
		return nil, err
	}
	return jcs.Transform(plain)
}

// checkPlain walks JSON that encoding/json wrote (it is well-formed) and looks at every number and
// every escape.
func checkPlain(b []byte) error {
	for i := 0; i < len(b); {
		switch c := b[i]; {
		case c == '"':
			n, err := checkString(b[i:])
			if err != nil {
				return err
			}
			i += n
		case c == '-' || c >= '0' && c <= '9':
			n := numberLength(b[i:])
			err := checkNumber(string(b[i : i+n]))
			if err != nil {
				return err
			}
			i += n
		default:
			i++
		}
	}
	return nil
}

// checkString gives the length of the string that b begins with. In place of bytes that are not
// UTF-8 encoding/json writes the escape \ufffd; a replacement character that was there stays as
// its three bytes.
func checkString(b []byte) (int, error) {
	for i := 1; i < len(b); i++ {
		switch b[i] {
		case '"':
			return i + 1, nil
		case '\\':
			if i+6 <= len(b) && string(b[i:i+6]) == `\ufffd` {
				return 0, fmt.Errorf("text is not UTF-8 near %q", around(b, i))
			}
			i++
		}
	}
	return len(b), nil
}

func around(b []byte, i int) []byte { return b[max(0, i-20):min(len(b), i+20)] }

func numberLength(b []byte) int {
	n := 1
	for n < len(b) && (b[n] >= '0' && b[n] <= '9' || b[n] == '.' || b[n] == 'e' || b[n] == 'E' || b[n] == '+' || b[n] == '-') {
		n++
	}
	return n
}

func checkNumber(s string) error {
	n, err := strconv.ParseInt(s, 10, 64)
	if err != nil || n > maxInteger || n < -maxInteger {
		return fmt.Errorf("%s may not stand as a number in an entry: numbers are integers up to 2^53, a measured value is a string as it was typed", s)
	}
	return nil
}
