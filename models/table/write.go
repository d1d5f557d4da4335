package table

import (
	"encoding/csv"
	"fmt"
	"io"
	"iter"
	"regexp"
	"strings"
	"unicode/utf8"
)

// Write writes a table as CSV (RFC 4180, UTF-8, lines ended by CR LF) that a spreadsheet opens as
// text and numbers and never as formulas: see Harmless. Every row must have as many cells as the
// header.
func Write(w io.Writer, header []string, rows iter.Seq[[]string]) error {
	out := csv.NewWriter(w)
	out.UseCRLF = true
	if err := writeRow(out, header); err != nil {
		return err
	}
	n := 0
	for row := range rows {
		n++
		if len(row) != len(header) {
			return fmt.Errorf("row %d has %s, the header has %d", n, count(len(row), "cell"), len(header))
		}
		if err := writeRow(out, row); err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}

func writeRow(out *csv.Writer, row []string) error {
	cells := make([]string, len(row))
	for i, c := range row {
		cells[i] = Harmless(c)
	}
	return out.Write(cells)
}

var plainNumber = regexp.MustCompile(`^[+-]?(\d+(\.\d+)?|\.\d+)$`)

// Harmless puts an apostrophe before a cell that a spreadsheet would take for a formula: one that
// starts, after blanks, with =, +, - or @ or their full-width forms, or with a tab or line break.
// Plain numbers stay as they are. After OWASP, "CSV Injection".
func Harmless(cell string) string {
	rest := strings.TrimLeftFunc(cell, func(c rune) bool {
		return invisible(c) && !strings.ContainsRune("\t\r\n", c)
	})
	first, _ := utf8.DecodeRuneInString(rest)
	if rest == "" || !strings.ContainsRune("=+-@\t\r\n＝＋－＠", first) || plainNumber.MatchString(rest) {
		return cell
	}
	return "'" + cell
}
