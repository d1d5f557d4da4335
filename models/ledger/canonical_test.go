package ledger

import (
	"encoding/hex"
	"encoding/json"
	"math"
	"strings"
	"testing"

	"github.com/gowebpki/jcs"
)

// The test data of RFC 8785: cyberphone/json-canonicalization, folder testdata, which the RFC's
// appendix F names. The values of the file "weird" are written from memory, its keys and their
// order are not.
var rfc8785 = map[string]struct {
	in, out  string
	integers bool // it has no number that an entry may not hold
}{
	"arrays": {
		`[56, {"d": true, "10": null, "1": []}]`,
		`[56,{"1":[],"10":null,"d":true}]`, true,
	},
	"structures": {
		`{"1": {"f": {"f": "hi", "F": 5}, "\n": 56.0}, "10": {}, "": "empty", "a": {}, "111": [{"e": "yes", "E": "no"}], "A": {}}`,
		`{"":"empty","1":{"\n":56,"f":{"F":5,"f":"hi"}},"10":{},"111":[{"E":"no","e":"yes"}],"A":{},"a":{}}`, false,
	},
	"values": {
		`{"numbers": [333333333.33333329, 1E30, 4.50, 2e-3, 0.000000000000000000000000001], "string": "\u20ac$\u000F\u000aA'\u0042\u0022\u005c\\\"\/", "literals": [null, true, false]}`,
		`{"literals":[null,true,false],"numbers":[333333333.3333333,1e+30,4.5,0.002,1e-27],"string":"€$\u000f\nA'B\"\\\\\"/"}`, false,
	},
	"string": {
		`"\u20ac$\u000F\u000aA'\u0042\u0022\u005c\\\"\/"`,
		`"€$\u000f\nA'B\"\\\\\"/"`, true,
	},
	"unicode": {
		`{"Unnormalized Unicode": "A\u030a"}`,
		"{\"Unnormalized Unicode\":\"A\u030a\"}", true,
	},
	"french": {
		`{"peach": "This sorting order", "péché": "is wrong according to French", "pêche": "but canonicalization MUST", "sin": "ignore locale"}`,
		`{"peach":"This sorting order","péché":"is wrong according to French","pêche":"but canonicalization MUST","sin":"ignore locale"}`, true,
	},
	"weird": {
		`{"\u20ac": "Euro Sign", "\r": "Carriage Return", "\u000a": "Newline", "1": "One", "\u0080": "Control\u007f", "\ud83d\ude02": "Smiley", "\u00f6": "Latin Small Letter O With Diaeresis", "\ufb33": "Hebrew Letter Dalet With Dagesh", "</script>": "Browser Challenge"}`,
		"{\"\\n\":\"Newline\",\"\\r\":\"Carriage Return\",\"1\":\"One\",\"</script>\":\"Browser Challenge\",\"\u0080\":\"Control\u007f\",\"\u00f6\":\"Latin Small Letter O With Diaeresis\",\"\u20ac\":\"Euro Sign\",\"\U0001f602\":\"Smiley\",\"\ufb33\":\"Hebrew Letter Dalet With Dagesh\"}", true,
	},
}

func TestDataOfRFC8785(t *testing.T) {
	for name, c := range rfc8785 {
		got, err := jcs.Transform([]byte(c.in))
		if err != nil || string(got) != c.out {
			t.Errorf("%s: %s (%v), want %s", name, got, err, c.out)
		}
		got, err = Canonical(json.RawMessage(c.in))
		if c.integers && (err != nil || string(got) != c.out) {
			t.Errorf("%s through Canonical: %s (%v), want %s", name, got, err, c.out)
		}
		if !c.integers && err == nil {
			t.Errorf("%s has numbers that are no integers and Canonical took it", name)
		}
	}
}

// The beginning and the end of the file "values" as the same test data give them in bytes.
func TestBytesOfRFC8785(t *testing.T) {
	got, err := jcs.Transform([]byte(rfc8785["values"].in))
	if err != nil {
		t.Fatal(err)
	}
	h := hex.EncodeToString(got)
	if !strings.HasPrefix(h, "7b226c69746572616c73223a5b") || !strings.HasSuffix(h, "5c222f227d") {
		t.Errorf("bytes are %s", h)
	}
}

// RFC 8785 appendix B: double precision as text.
func TestNumbersOfRFC8785(t *testing.T) {
	for bits, want := range map[uint64]string{
		0x4340000000000001: "9007199254740994",
		0x4340000000000002: "9007199254740996",
		0x444b1ae4d6e2ef50: "1e+21",
		0x3eb0c6f7a0b5ed8d: "0.000001",
		0x3eb0c6f7a0b5ed8c: "9.999999999999997e-7",
		0x8000000000000000: "0",
	} {
		got, err := jcs.NumberToJSON(math.Float64frombits(bits))
		if err != nil || got != want {
			t.Errorf("%x: %s (%v), want %s", bits, got, err, want)
		}
	}
}

func TestCanonicalTakes(t *testing.T) {
	for _, c := range []struct {
		v    any
		want string
	}{
		{map[string]any{"b": 1, "a": nil}, `{"a":null,"b":1}`},
		{int64(1) << 53, "9007199254740992"},
		{-(int64(1) << 53), "-9007199254740992"},
		{[]int{0, -1, 10}, "[0,-1,10]"},
		{json.RawMessage("-0"), "0"},
		{"19.50", `"19.50"`},
		{"<a> & \u2028 \\ 1.5", "\"<a> & \u2028 \\\\ 1.5\""},
		{"\ufffd", "\"\ufffd\""},
		{`\ufffd`, `"\\ufffd"`},
		{struct {
			Z string `json:"z"`
			A bool   `json:"a"`
		}{"x", true}, `{"a":true,"z":"x"}`},
	} {
		got, err := Canonical(c.v)
		if err != nil || string(got) != c.want {
			t.Errorf("%#v: %s (%v), want %s", c.v, got, err, c.want)
		}
	}
}

func TestCanonicalRefuses(t *testing.T) {
	for name, c := range map[string]struct {
		v    any
		says string
	}{
		"a fraction":           {19.5, "19.5 may not stand as a number"},
		"beyond 2^53":          {int64(1)<<53 + 1, "9007199254740993 may not"},
		"beyond -2^53":         {-(int64(1) << 53) - 1, "-9007199254740993 may not"},
		"beyond 64 bits":       {json.RawMessage("[18446744073709551616]"), "18446744073709551616 may not"},
		"an exponent":          {json.RawMessage(`{"a":1e2}`), "1e2 may not"},
		"text that is no text": {"abc\xffdef", "not UTF-8"},
		"a key twice":          {json.RawMessage(`{"a":1,"a":2}`), "Duplicate"},
		"what JSON cannot say": {func() {}, "unsupported type"},
	} {
		got, err := Canonical(c.v)
		if err == nil || !strings.Contains(err.Error(), c.says) {
			t.Errorf("%s: %s (%v), want an error that says %q", name, got, err, c.says)
		}
	}
}
