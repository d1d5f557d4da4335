package table

import (
	"bufio"
	"bytes"
	"errors"
	"fmt"
	"io"
	"unicode/utf8"

	"golang.org/x/text/encoding/charmap"
	"golang.org/x/text/encoding/unicode"
)

// kind is what a file is, by its first bytes.
type kind uint8

const (
	plain  kind = iota // text, so far as can be seen
	zipped             // perhaps a workbook
)

// Sentences for files of other kinds.
const (
	aTable   = "a CSV or XLSX file"
	saveAs   = "the same table saved as XLSX or CSV"
	openSave = "the workbook opened in a spreadsheet program and saved again as XLSX"
)

var otherKinds = []struct{ starts, problem, accepted string }{
	{"%PDF-", "the file is a PDF, not a table", aTable},
	{"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1", "the file is a workbook of the old kind (.xls) or one locked by a password", "the same workbook saved as XLSX without a password"},
	{"{\\rtf", "the file is a word processor's document, not a table", aTable},
	{"\x1f\x8b", "the file is compressed", "the file unpacked, as CSV or XLSX"},
	{"7z\xbc\xaf\x27\x1c", "the file is compressed", "the file unpacked, as CSV or XLSX"},
}

// recognise tells what the file is, or gives a Fault for what is no table.
func recognise(r io.ReaderAt, size int64) (kind, error) {
	head, err := readHead(r, size, 1024)
	if err != nil {
		return plain, err
	}
	if len(head) == 0 {
		return plain, &Fault{Problem: "the file is empty", Accepted: "a header row and at least one row"}
	}
	for _, k := range otherKinds {
		if bytes.HasPrefix(head, []byte(k.starts)) {
			return plain, &Fault{Problem: k.problem, Accepted: k.accepted}
		}
	}
	if bytes.HasPrefix(head, []byte("PK\x03\x04")) || bytes.HasPrefix(head, []byte("PK\x05\x06")) {
		return zipped, nil
	}
	text := bytes.TrimLeft(bytes.TrimPrefix(head, []byte(utf8BOM)), " \t\r\n")
	if bytes.HasPrefix(text, []byte("<")) {
		return plain, &Fault{Problem: "the file is a web page or XML, whatever its name says", Accepted: saveAs}
	}
	return plain, nil
}

func readHead(r io.ReaderAt, size, most int64) ([]byte, error) {
	head, err := io.ReadAll(io.NewSectionReader(r, 0, min(size, most)))
	if err != nil {
		return nil, fmt.Errorf("reading the file: %w", err)
	}
	return head, nil
}

// charset is how a text file's characters are written as bytes.
type charset uint8

const (
	utf8Text charset = iota
	utf16LE
	utf16BE
	windows1252
)

const (
	utf8BOM    = "\xef\xbb\xbf"
	utf16LEBOM = "\xff\xfe"
	utf16BEBOM = "\xfe\xff"
)

// decoder gives the characters of r in UTF-8.
func (c charset) decoder(r io.Reader) io.Reader {
	switch c {
	case utf16LE:
		return unicode.UTF16(unicode.LittleEndian, unicode.IgnoreBOM).NewDecoder().Reader(r)
	case utf16BE:
		return unicode.UTF16(unicode.BigEndian, unicode.IgnoreBOM).NewDecoder().Reader(r)
	case windows1252:
		return charmap.Windows1252.NewDecoder().Reader(r)
	}
	return r
}

// encodingOf tells the file's charset and at which byte its text starts. It reads the whole file
// once, since one byte near its end can decide, and gives a Fault for what is not text.
func encodingOf(r io.ReaderAt, size int64) (charset, int64, error) {
	head, err := readHead(r, size, 1024)
	if err != nil {
		return utf8Text, 0, err
	}
	c, skip := byMark(head)
	body := io.NewSectionReader(r, skip, size-skip)
	if c != utf8Text && (size-skip)%2 != 0 {
		return c, skip, &Fault{Problem: "the file is cut short: it is UTF-16 and ends inside a character", Accepted: "the whole file"}
	}
	s, err := scan(c.decoder(body))
	if err != nil {
		return c, skip, err
	}
	if s.nulLine > 0 {
		return c, skip, &Fault{Line: s.nulLine, Problem: "the file is not a table: it holds zero bytes", Accepted: aTable}
	}
	if c == utf8Text && s.invalid > 0 {
		c, err = s.decide()
	}
	return c, skip, err
}

// byMark tells UTF-16 from the byte-order mark, or from zeros in every other byte of the header's
// letters; all else is UTF-8 until shown otherwise.
func byMark(head []byte) (c charset, skip int64) {
	switch {
	case bytes.HasPrefix(head, []byte(utf8BOM)):
		return utf8Text, 3
	case bytes.HasPrefix(head, []byte(utf16LEBOM)):
		return utf16LE, 2
	case bytes.HasPrefix(head, []byte(utf16BEBOM)):
		return utf16BE, 2
	}
	var zeros [2]int
	for i, b := range head {
		if b == 0 {
			zeros[i%2]++
		}
	}
	switch most := len(head) / 2 * 3 / 4; {
	case zeros[1] > most && zeros[0] == 0:
		return utf16LE, 0
	case zeros[0] > most && zeros[1] == 0:
		return utf16BE, 0
	}
	return utf8Text, 0
}

// textScan is what one pass over a file's bytes tells about them.
type textScan struct {
	nulLine       int // the first line with a zero byte; 0: none
	multi         int // characters that are proper UTF-8 of several bytes
	invalid       int // bytes that are not UTF-8
	invalidLine   int // the first line with one
	undefinedLine int // the first line with one that Windows-1252 does not have either
}

// decide tells whether bytes that are not UTF-8 are Windows-1252. Where proper UTF-8 stands beside
// them in any number the file is a mixture, and either reading would spoil some of its names.
func (s textScan) decide() (charset, error) {
	const accidental = 4 // a few pairs of Windows-1252 letters happen to be proper UTF-8
	if s.undefinedLine > 0 {
		return utf8Text, &Fault{Line: s.undefinedLine, Problem: "the file's characters are neither UTF-8, UTF-16 nor Windows-1252", Accepted: "the file saved as CSV UTF-8"}
	}
	if s.multi*accidental > s.invalid {
		return utf8Text, &Fault{Line: s.invalidLine, Problem: "the file mixes UTF-8 with another way to write characters, which starts here", Accepted: "the file saved as CSV UTF-8"}
	}
	return windows1252, nil
}

// scan reads a text to its end.
func scan(r io.Reader) (textScan, error) {
	var s textScan
	in := bufio.NewReaderSize(r, 64<<10)
	lines := lineCounter{line: 1}
	for {
		c, n, err := in.ReadRune()
		if errors.Is(err, io.EOF) {
			return s, nil
		}
		if err != nil {
			return s, fmt.Errorf("reading the file: %w", err)
		}
		switch {
		case c == utf8.RuneError && n == 1:
			if err := s.note(in, lines.line); err != nil {
				return s, err
			}
		case n > 1:
			s.multi++
		case c == 0 && s.nulLine == 0:
			s.nulLine = lines.line
		}
		lines.pass(c)
	}
}

// note counts the byte that was just read and is not UTF-8.
func (s *textScan) note(in *bufio.Reader, line int) error {
	if err := in.UnreadRune(); err != nil {
		return err
	}
	b, err := in.ReadByte()
	if err != nil {
		return err
	}
	if s.invalid++; s.invalid == 1 {
		s.invalidLine = line
	}
	if bytes.IndexByte([]byte{0x81, 0x8d, 0x8f, 0x90, 0x9d}, b) >= 0 && s.undefinedLine == 0 {
		s.undefinedLine = line
	}
	return nil
}

// lineCounter counts lines that end in LF, CR LF or CR.
type lineCounter struct {
	line    int
	afterCR bool
}

func (l *lineCounter) pass(c rune) {
	if c == '\r' || c == '\n' && !l.afterCR {
		l.line++
	}
	l.afterCR = c == '\r'
}
