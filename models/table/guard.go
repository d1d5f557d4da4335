package table

import (
	"errors"
	"fmt"
	"io"
)

// guardedChars is where a cell stops the whole file. One that is only somewhat too long is a fault
// of its row.
const guardedChars = 2 * maxCellChars

// guard stands between a text and the CSV reader. It turns every line end into LF, so that lines
// count alike, and it stops a cell or row that grows beyond all measure, which the CSV reader
// would gather in memory: a quote that is never closed takes in the rest of the file.
type guard struct {
	src   io.Reader
	delim byte
	// sep: the first line only says which separator is used. It is passed on as a blank line.
	sep bool

	line      int  // of the byte being read, from 1
	afterCR   bool // the last byte was a CR, given as LF
	cellChars int
	rowBytes  int
	state     cellState
	quoteLine int  // the line on which the latest quoted cell opened
	ended     bool // the text is at its end
	fault     *Fault
}

type cellState uint8

const (
	atStart cellState = iota
	bare
	quoted
	quoteSeen // a quote inside a quoted cell: the first of two, or the closing one
)

// newGuard guards src, in UTF-8, whose cells are parted by delim.
func newGuard(src io.Reader, delim byte, sep bool) *guard {
	return &guard{src: src, delim: delim, sep: sep, line: 1}
}

// Read gives the text with LF for every line end. Its error is a *Fault where a cell or row is
// too long.
func (g *guard) Read(p []byte) (int, error) {
	for {
		if g.fault != nil {
			return 0, g.fault
		}
		n, err := g.src.Read(p)
		out := p[:0]
		for _, b := range p[:n] {
			if b, keep := g.endLine(b); keep {
				out = g.pass(out, b)
			}
			if g.fault != nil {
				return 0, g.fault
			}
		}
		g.ended = errors.Is(err, io.EOF)
		if len(out) > 0 || err != nil {
			return len(out), err
		}
	}
}

// endLine makes one LF of CR, LF and CR LF.
func (g *guard) endLine(b byte) (byte, bool) {
	after := g.afterCR
	g.afterCR = b == '\r'
	if b == '\n' && after {
		return b, false
	}
	if b == '\r' {
		b = '\n'
	}
	return b, true
}

func (g *guard) pass(out []byte, b byte) []byte {
	if g.sep {
		if b != '\n' {
			return out
		}
		g.sep = false
	}
	g.follow(b)
	if b == '\n' {
		g.line++
	}
	return append(out, b)
}

// follow keeps track of which cell the byte belongs to, by the rules of RFC 4180 §2.
func (g *guard) follow(b byte) {
	g.rowBytes++
	if b&0xc0 != 0x80 { // not a later byte of a character
		g.cellChars++
	}
	open := g.state == quoted || g.state == quoteSeen && b == '"'
	switch {
	case !open && b == g.delim:
		g.state, g.cellChars = atStart, 0
	case !open && b == '\n':
		g.state, g.cellChars, g.rowBytes = atStart, 0, 0
	case b == '"':
		g.quote()
	case g.state == quoteSeen, g.state == atStart && (b != ' ' || g.delim == '\t'):
		g.state = bare
	}
	if g.cellChars > guardedChars || g.rowBytes > maxRowBytes {
		g.refuse()
	}
}

func (g *guard) quote() {
	switch g.state {
	case atStart:
		g.state, g.quoteLine = quoted, g.line
	case quoted:
		g.state = quoteSeen
	case quoteSeen: // two quotes stand for one
		g.state = quoted
		g.cellChars--
	}
}

func (g *guard) refuse() {
	switch {
	case g.state == quoted:
		g.fault = &Fault{
			Line:     g.quoteLine,
			Problem:  fmt.Sprintf("a cell opens here with a quote (\") and has no closing one within %d characters", guardedChars),
			Accepted: "a closing quote at the cell's end; a quote inside it written twice",
		}
	case g.rowBytes > maxRowBytes:
		g.fault = &Fault{Line: g.line, Problem: "the row is longer than a table's row can be", Accepted: fmt.Sprintf("at most %d bytes in a row", maxRowBytes)}
	default:
		g.fault = &Fault{Line: g.line, Problem: "a cell " + longCell, Accepted: fmt.Sprintf("at most %d characters", maxCellChars)}
	}
}

// unclosed tells whether the text ended inside a quoted cell that opened on or before the line.
func (g *guard) unclosed(line int) bool {
	return g.ended && g.state == quoted && g.quoteLine <= line
}
