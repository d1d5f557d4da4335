package table

import (
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"
)

// csvSource is a text file as a sequence of rows.
type csvSource struct {
	guard  *guard
	csv    *csv.Reader
	in     *counted
	total  int64
	manner traits
}

// counted counts the bytes read from a file.
type counted struct {
	r io.Reader
	n int64
}

// Read reads on and counts.
func (c *counted) Read(p []byte) (int, error) {
	n, err := c.r.Read(p)
	c.n += int64(n)
	return n, err
}

// openText opens a CSV file as a stream: only the row being read is in memory.
func openText(r io.ReaderAt, size int64, want wanted, o Options) (source, error) {
	enc, skip, err := encodingOf(r, size)
	if err != nil {
		return nil, err
	}
	top, err := topOf(enc.decoder(io.NewSectionReader(r, skip, size-skip)))
	if err != nil {
		return nil, err
	}
	delim, sep := delimiter(top, want)
	s := &csvSource{
		in:     &counted{r: io.NewSectionReader(r, skip, size-skip), n: skip},
		total:  size,
		manner: traits{decimalComma: delim == ';', rectangular: true, epoch: o.Serials},
	}
	s.guard = newGuard(enc.decoder(s.in), delim, sep)
	s.csv = newCSV(s.guard, delim)
	return s, nil
}

// topOf is the start of a text, enough to hold any header row, with LF for every line end.
func topOf(r io.Reader) ([]byte, error) {
	top, err := io.ReadAll(io.LimitReader(r, 64<<10))
	if err != nil {
		return nil, fmt.Errorf("reading the file: %w", err)
	}
	top = bytes.ReplaceAll(top, []byte("\r\n"), []byte("\n"))
	return bytes.ReplaceAll(top, []byte("\r"), []byte("\n")), nil
}

func newCSV(r io.Reader, delim byte) *csv.Reader {
	c := csv.NewReader(r)
	c.Comma = rune(delim)
	c.FieldsPerRecord = -1
	// Blanks between a separator and a quote are dirt; a tab that separates is not.
	c.TrimLeadingSpace = delim != '\t'
	return c
}

var delimiters = []byte{',', ';', '\t'}

// delimiter tells what separates the cells: what a first line such as sep=; says, else what
// makes the most columns of the table out of the header row, else what parts it into most cells.
// sep: there is such a first line.
func delimiter(top []byte, want wanted) (delim byte, sep bool) {
	first, _, _ := bytes.Cut(top, []byte("\n"))
	if said, ok := bytes.CutPrefix(bytes.ToLower(bytes.Trim(first, "\" ")), []byte("sep=")); ok && len(said) == 1 && slices.Contains(delimiters, said[0]) {
		return said[0], true
	}
	delim = ','
	bestKnown, bestCells := 0, 1
	for _, d := range delimiters {
		known, cells := headerScore(top, d, want)
		if known > bestKnown || known == bestKnown && cells > bestCells {
			delim, bestKnown, bestCells = d, known, cells
		}
	}
	return delim, false
}

// headerScore counts the table's columns and the cells in the first row that is not blank.
func headerScore(top []byte, delim byte, want wanted) (known, cells int) {
	c := newCSV(bytes.NewReader(top), delim)
	c.LazyQuotes = true
	for {
		row, err := c.Read()
		if err != nil {
			return 0, 0
		}
		if blank(row) {
			continue
		}
		for _, name := range row {
			if _, ok := want.find(clean(name)); ok {
				known++
			}
		}
		return known, len(row)
	}
}

func (s *csvSource) next() (record, error) {
	cells, err := s.csv.Read()
	if err != nil {
		return record{}, s.refused(cells, err)
	}
	line, _ := s.csv.FieldPos(0)
	if len(cells) > maxColumns && !blank(cells[maxColumns:]) {
		return record{}, &rowFault{tooManyColumns(line)}
	}
	return record{line: line, cells: cells}, nil
}

func tooManyColumns(line int) Fault {
	return Fault{Line: line, Problem: "the row has more columns than a table can have", Accepted: fmt.Sprintf("at most %d columns", maxColumns)}
}

// refused turns an error of the CSV reader into a fault of the file or of one row.
func (s *csvSource) refused(cells []string, err error) error {
	if s.guard.fault != nil {
		return s.guard.fault
	}
	var pe *csv.ParseError
	if !errors.As(err, &pe) {
		return err
	}
	const inside = "a cell with a quote (\") in it put between quotes, and that quote written twice"
	if errors.Is(pe.Err, csv.ErrQuote) && s.guard.unclosed(pe.Line) {
		return &Fault{Line: s.guard.quoteLine, Problem: "a cell opens here with a quote (\") that is never closed", Accepted: "a closing quote at the cell's end; a quote inside it written twice"}
	}
	at := Fault{Line: pe.StartLine, Column: fmt.Sprintf("column %d", len(cells)+1), Value: shorten(strings.Join(cells, " | ")), Accepted: inside}
	at.Problem = "a quote (\") stands inside a cell without quotes around it"
	if errors.Is(pe.Err, csv.ErrQuote) {
		at.Problem = "a quoted cell goes on after its closing quote (\")"
	}
	return &rowFault{at}
}

func (s *csvSource) progress() (done, total int64) { return s.in.n, s.total }

func (s *csvSource) close() error { return nil }

func (s *csvSource) traits() traits { return s.manner }
