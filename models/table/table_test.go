package table

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"
	"testing"
	"unicode/utf16"
)

var people = []string{"code", "name", "email", "level", "joined", "left"}

// opened opens content as a table of people, of which only code must be there.
func opened(content []byte, o Options, facts ...string) (*Reader, []Fault, error) {
	return Open(bytes.NewReader(content), int64(len(content)), people, []string{"code"}, facts, o)
}

// read gives every row of a table as its cells in the order of cols, the lines they start on, and
// all faults.
func read(t *testing.T, content []byte, o Options, cols ...string) (rows [][]string, lines []int, faults []Fault) {
	t.Helper()
	r, faults, err := opened(content, o, "employer", "height_m")
	if err != nil {
		t.Fatal(err)
	}
	if r == nil {
		if len(faults) == 0 {
			t.Fatal("neither a reader nor faults")
		}
		return nil, nil, faults
	}
	defer closed(t, r)
	for {
		row, fs, err := r.Next()
		if errors.Is(err, io.EOF) {
			return rows, lines, faults
		}
		if err != nil {
			t.Fatal(err)
		}
		if faults = append(faults, fs...); len(fs) > 0 {
			continue
		}
		var cells []string
		for _, c := range cols {
			cells = append(cells, row.Text(c))
		}
		rows, lines = append(rows, cells), append(lines, row.Line)
	}
}

func closed(t *testing.T, r *Reader) {
	t.Helper()
	if err := r.Close(); err != nil {
		t.Errorf("close: %v", err)
	}
}

// only demands exactly one fault and checks what it says.
func only(t *testing.T, faults []Fault, line int, column, says string) Fault {
	t.Helper()
	if len(faults) != 1 {
		t.Fatalf("%d faults, want 1 that says %q: %+v", len(faults), says, faults)
	}
	f := faults[0]
	if f.Line != line || f.Column != column || !strings.Contains(f.Error(), says) {
		t.Errorf("fault %+v, want line %d, column %q, saying %q", f, line, column, says)
	}
	if f.Accepted == "" {
		t.Errorf("fault %+v does not say what would be accepted", f)
	}
	return f
}

// in16 writes a text as UTF-16 by package unicode/utf16, which the reader does not use.
func in16(s string, big bool) []byte {
	var b []byte
	for _, u := range utf16.Encode([]rune(s)) {
		if big {
			b = append(b, byte(u>>8), byte(u))
		} else {
			b = append(b, byte(u), byte(u>>8))
		}
	}
	return b
}

// in1252 writes a text as Windows-1252 by hand, for the letters used here (Unicode Consortium,
// mapping table CP1252.TXT).
func in1252(s string) []byte {
	var b []byte
	for _, c := range s {
		switch {
		case c == '€':
			b = append(b, 0x80)
		case c == 'š':
			b = append(b, 0x9a)
		case c < 0x100:
			b = append(b, byte(c))
		default:
			panic(string(c))
		}
	}
	return b
}

// TestEncodingsAndDelimiters reads the same dirty table in every encoding, with every delimiter and
// every line end, with blank rows and an old end-of-file mark (Ctrl-Z) below it.
func TestEncodingsAndDelimiters(t *testing.T) {
	encodings := map[string]func(string) []byte{
		"UTF-8":                func(s string) []byte { return []byte(s) },
		"UTF-8, BOM":           func(s string) []byte { return append([]byte{0xef, 0xbb, 0xbf}, s...) },
		"UTF-16LE, BOM":        func(s string) []byte { return append([]byte{0xff, 0xfe}, in16(s, false)...) },
		"UTF-16BE, BOM":        func(s string) []byte { return append([]byte{0xfe, 0xff}, in16(s, true)...) },
		"UTF-16LE without BOM": func(s string) []byte { return in16(s, false) },
		"UTF-16BE without BOM": func(s string) []byte { return in16(s, true) },
		"Windows-1252":         in1252,
	}
	lines := []string{
		"Code|NAME | email|employer",
		"P1|Zoë Tomaš|zoe@example.org|\"Nörd & Sons|Ltd\"",
		"|||",
		"010|\u00a0Åse \"\"|\u00a0|  5 € a day ",
		"P3|\"a \"\"quoted\"\" name\"|\"two",
		"lines\"|",
		"|||", "", "|||", "\x1a",
	}
	lines[3] = "010|\u00a0Åse\u00a0||  5 € a day "
	want := [][]string{
		{"P1", "Zoë Tomaš", "zoe@example.org", "Nörd & Sons|Ltd"},
		{"010", "Åse", "", "5 € a day"},
		{"P3", `a "quoted" name`, "two\nlines", ""},
	}
	for name, encode := range encodings {
		for _, delim := range []string{",", ";", "\t"} {
			for _, end := range []string{"\n", "\r\n", "\r"} {
				t.Run(fmt.Sprintf("%s %q %q", name, delim, end), func(t *testing.T) {
					text := strings.ReplaceAll(strings.Join(lines, end), "|", delim)
					rows, at, faults := read(t, encode(text), Options{}, "code", "name", "email", "employer")
					if len(faults) > 0 {
						t.Fatal(faults)
					}
					for i, w := range want {
						w = slices.Clone(w)
						w[3] = strings.ReplaceAll(w[3], "|", delim)
						if i >= len(rows) || !slices.Equal(rows[i], w) {
							t.Fatalf("rows %q, want %q at %d", rows, w, i)
						}
					}
					if !slices.Equal(at, []int{2, 4, 5}) {
						t.Errorf("lines %v, want 2, 4, 5", at)
					}
				})
			}
		}
	}
}

// TestNotATable checks that every file that is no table is told in one sentence what it is.
func TestNotATable(t *testing.T) {
	const ole = "\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" // [MS-CFB] §2.2, Header Signature
	for _, c := range []struct{ name, content, says string }{
		{"empty", "", "the file is empty"},
		{"blank lines only", "\n\n  \n", "nothing in the file"},
		{"blank cells only", ",,\n,,\n", "nothing in the file"},
		{"PDF", "%PDF-1.7\n...", "is a PDF"},
		{"old workbook", ole + strings.Repeat("\x00", 600), "old kind (.xls)"},
		{"web page", "\ufeff\r\n <!DOCTYPE html><table><tr><td>code", "a web page or XML"},
		{"web page that calls itself .xls", "<html xmlns:x=\"urn:schemas-microsoft-com:office:excel\">", "a web page or XML"},
		{"gzip", "\x1f\x8b\x08code,name", "is compressed"},
		{"RTF", `{\rtf1\ansi code}`, "word processor"},
		{"zero bytes", "code,name\nP1,\x00\x00\n", "zero bytes"},
		{"zero bytes in UTF-16", "\xff\xfe" + string(in16("code\nP\x001\n", false)), "zero bytes"},
		{"half a UTF-16 character", "\xff\xfe" + string(in16("code\nP1", false)) + "x", "cut short"},
		{"no Windows-1252 byte", "code,name\nP1,\x81\xff\n", "neither UTF-8"},
		{"zip", "PK\x03\x04 and no more", "damaged"},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, _, faults := read(t, []byte(c.content), Options{})
			if len(faults) != 1 || !strings.Contains(faults[0].Problem, c.says) || faults[0].Accepted == "" {
				t.Errorf("faults %+v, want one that says %q", faults, c.says)
			}
		})
	}
	_, _, faults := read(t, []byte("\n Code ; NAME\n;;\n"), Options{})
	only(t, faults, 2, "", "nothing below it")
}

// TestMixedEncodings checks that a file is read as Windows-1252 only if that spoils nothing.
func TestMixedEncodings(t *testing.T) {
	mixed := []byte("code,name\nP1,Müller\nP2,J\xf8rn\n") // ü in UTF-8, ø in Windows-1252
	_, _, faults := read(t, mixed, Options{})
	only(t, faults, 3, "", "mixes UTF-8")

	cut := []byte("code,name\nP1,Müller\nP2,Zo\xc3")
	_, _, faults = read(t, cut, Options{})
	only(t, faults, 3, "", "mixes UTF-8")

	// É and a closing quotation mark of Windows-1252 are, together, proper UTF-8; among many
	// other letters that are not, they are no sign of it.
	accident := []byte("code,name\nP1,CAF\xc9\x94\nP2,\xf8\xe5\xe6 \xf8\xe5\xe6\n")
	rows, _, faults := read(t, accident, Options{}, "name")
	if len(faults) > 0 || rows[0][0] != "CAFÉ”" || rows[1][0] != "øåæ øåæ" {
		t.Errorf("rows %q, faults %v", rows, faults)
	}

	// One such letter at the end of a large file decides for all of it.
	late := []byte("code,name\n" + strings.Repeat("P1,Plain\n", 100000) + "P2,S\xf8ren\n")
	rows, _, faults = read(t, late, Options{}, "name")
	if len(faults) > 0 || rows[len(rows)-1][0] != "Søren" {
		t.Errorf("last row %q, faults %v", rows[len(rows)-1], faults)
	}
}

// TestHeader checks how header names are found, and what is said of those that are not.
func TestHeader(t *testing.T) {
	r, faults, err := opened([]byte("\ufeff\n,,,\n \u200bLEFT\u00a0, Height_M,cOdE\n2025-01-01,2,P1\n"), Options{}, "height_m")
	if err != nil || len(faults) > 0 {
		t.Fatal(faults, err)
	}
	defer closed(t, r)
	if got := r.Columns(); !slices.Equal(got, []string{"left", "height_m", "code"}) {
		t.Errorf("columns %q", got)
	}
	row, fs, err := r.Next()
	if err != nil || len(fs) > 0 || row.Line != 4 || row.Text("code") != "P1" {
		t.Errorf("row %+v, faults %v, %v", row, fs, err)
	}
	if !row.Has("left") || row.Has("joined") || row.Text("joined") != "" {
		t.Error("left is in the file and joined is not")
	}

	for _, c := range []struct{ name, head, column, says string }{
		{"unknown", "code,shoe size", "shoe size", "is not a column of this table; accepted: one of code, name, email, level, joined, left"},
		{"misspelt", "code,joind", "joind", `did you mean "joined"?`},
		{"swapped letters", "code,levle", "levle", `did you mean "level"?`},
		{"spelt apart", "code,E-Mail", "E-Mail", `did you mean "email"?`},
		{"twice", "code,name,Name ", "name", "stands twice in the header, in columns 2 and 3"},
		{"missing", "name,email", "code", "this column is missing"},
		{"no header", "P1;Ada;2025-01-01", "", "names no column of this table"},
		{"separated by something else", "code|name", "", "separated by commas, semicolons or tabs"},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, _, faults := read(t, []byte(c.head+"\nP1,x\n"), Options{})
			only(t, faults, 1, c.column, c.says)
		})
	}
	// Nothing is suggested that the header already has.
	_, _, faults = read(t, []byte("code,joined,joind\nP1,,\n"), Options{})
	if f := only(t, faults, 1, "joind", "one of"); strings.Contains(f.Accepted, "did you mean") {
		t.Error(f.Accepted)
	}
	_, _, faults = read(t, []byte("nam,shoe size,email\nP1,,\n"), Options{})
	if len(faults) != 3 {
		t.Errorf("%d faults, want all three at once: %v", len(faults), faults)
	}
}

// TestFaultJSON pins the names that scripts read.
func TestFaultJSON(t *testing.T) {
	b, err := json.Marshal(Fault{3, "joined", "x", "is not a day", "a day"})
	if err != nil {
		t.Fatal(err)
	}
	if want := `{"line":3,"column":"joined","value":"x","problem":"is not a day","accepted":"a day"}`; string(b) != want {
		t.Errorf("%s, want %s", b, want)
	}
}

// TestCells checks that what a spreadsheet has spoilt is not taken for a value.
func TestCells(t *testing.T) {
	for _, c := range []struct{ name, row, column, says string }{
		{"error value", "#N/A,Ada", "code", "a spreadsheet's error"},
		{"shortened number", "1.23457E+11,Ada", "code", "its last digits are gone"},
		{"unnamed column", "P1,Ada,x", "column 3", "a column that has no name"},
	} {
		t.Run(c.name, func(t *testing.T) {
			rows, _, faults := read(t, []byte("code,name,\n"+c.row+strings.Repeat(",", 2-strings.Count(c.row, ","))+"\nP2,Bo,\n"), Options{}, "code")
			only(t, faults, 2, c.column, c.says)
			if len(rows) != 1 || rows[0][0] != "P2" {
				t.Errorf("rows %q, want the one that is sound", rows)
			}
		})
	}
	long := strings.Repeat("é", 40000)
	_, _, faults := read(t, []byte("code,name\nP1,"+long+"\n"), Options{})
	if f := only(t, faults, 2, "name", "longer than a cell can be"); len(f.Value) > 400 {
		t.Errorf("the fault repeats %d bytes", len(f.Value))
	}
	_, _, faults = read(t, []byte("code,name\nP1,"+long+long+"\nP2,Bo\n"), Options{})
	only(t, faults, 2, "", "longer than a cell can be")
	rows, _, faults := read(t, []byte("code,name\nP1,\""+long[:2*32767]+"\"\n"), Options{}, "name")
	if len(faults) > 0 || len([]rune(rows[0][0])) != 32767 {
		t.Errorf("a cell of 32,767 characters is a cell: %v", faults)
	}
}

// TestNormalForm checks that a letter and its accent, written apart, equal the one letter
// (Unicode Standard Annex 15, figure 4: U+0065 U+0301 composes to U+00E9).
func TestNormalForm(t *testing.T) {
	rows, _, _ := read(t, []byte("code,name\n\u200bP1\ufeff,Rene\u0301\n"), Options{}, "code", "name")
	if !slices.Equal(rows[0], []string{"P1", "Ren\u00e9"}) {
		t.Errorf("%q", rows[0])
	}
}

// TestProgress checks that progress grows to the size of the file.
func TestProgress(t *testing.T) {
	content := []byte("code,name\n" + strings.Repeat("P1,Ada\n", 50000))
	r, _, err := opened(content, Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer closed(t, r)
	var last int64
	for n := 0; ; n++ {
		_, _, err := r.Next()
		done, total := r.Progress()
		if total != int64(len(content)) || done < last || done > total {
			t.Fatalf("progress %d of %d after %d", done, total, last)
		}
		last = done
		if errors.Is(err, io.EOF) {
			break
		}
		if n == 25000 && (done < total/3 || done > 2*total/3) {
			t.Errorf("half-way through, progress is %d of %d", done, total)
		}
	}
	if last != int64(len(content)) {
		t.Errorf("at the end, progress is %d of %d", last, len(content))
	}
}

// TestReadError checks that a disk that fails is an error and no fault of the file.
func TestReadError(t *testing.T) {
	_, faults, err := Open(failing{}, 100, people, nil, nil, Options{})
	if err == nil || len(faults) > 0 {
		t.Errorf("faults %v, error %v", faults, err)
	}
}

type failing struct{}

func (failing) ReadAt([]byte, int64) (int, error) { return 0, io.ErrClosedPipe }
