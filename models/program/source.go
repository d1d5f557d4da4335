package program

import (
	"bytes"
	"fmt"
	"strings"
	"unicode/utf8"
)

// maxSource bounds a program file: a site of a thousand items stays far below it.
const maxSource = 1 << 20

var (
	utf8Mark    = []byte("\xef\xbb\xbf")
	utf16Little = []byte("\xff\xfe")
	utf16Big    = []byte("\xfe\xff")
)

// cleaned gives the text of a file for the YAML parser: without a byte-order mark, its line ends
// made one character, so that lines and columns are those of an editor. Text that cannot be YAML
// is told as faults.
func cleaned(src []byte) (string, Faults) {
	whole := func(problem, accepted string) Faults {
		return Faults{{Line: 1, Column: 1, Problem: problem, Accepted: accepted}}
	}
	switch {
	case len(src) > maxSource:
		return "", whole(fmt.Sprintf("the file has %d bytes, more than any program needs", len(src)), fmt.Sprintf("give a file of at most %d bytes", maxSource))
	case bytes.HasPrefix(src, utf16Little), bytes.HasPrefix(src, utf16Big):
		return "", whole("the file is UTF-16", "save it as UTF-8")
	}
	src = bytes.TrimPrefix(src, utf8Mark)
	text := strings.ReplaceAll(strings.ReplaceAll(string(src), "\r\n", "\n"), "\r", "\n")
	if faults := unprintable(text); len(faults) > 0 {
		return "", faults
	}
	if strings.TrimSpace(text) == "" {
		return "", whole("the file is empty", "write a program that begins with lodebook: 1")
	}
	return withoutVersionLine(text), nil
}

// withoutVersionLine turns a first line of %YAML 1.x into a comment: the YAML parser would take it
// for a document of its own.
func withoutVersionLine(text string) string {
	if rest, ok := strings.CutPrefix(text, "%YAML 1."); ok {
		return "#YAML 1." + rest
	}
	return text
}

// unprintable finds bytes that are not UTF-8 and characters that YAML 1.2 (section 5.1) does not
// allow, the first of each line.
func unprintable(text string) Faults {
	var faults Faults
	for i, line := range strings.Split(text, "\n") {
		column := 0
		for pos, c := range line {
			column++
			found, problem := "", ""
			switch {
			case c == utf8.RuneError && !strings.HasPrefix(line[pos:], "\uFFFD"):
				found, problem = fmt.Sprintf("byte 0x%02X", line[pos]), "not UTF-8"
			case c < ' ' && c != '\t', c >= 0x7F && c < 0xA0 && c != 0x85, c == 0xFFFE, c == 0xFFFF:
				found, problem = fmt.Sprintf("character U+%04X", c), "not a printable character"
			default:
				continue
			}
			faults = append(faults, Fault{Line: i + 1, Column: column, Found: found, Problem: problem, Accepted: "save the file as plain UTF-8 text"})
			break
		}
	}
	return faults
}
