// Package table reads the files that people really have, CSV and XLSX, into rows whose every
// cell has a place: encodings, delimiters, spreadsheet serials and stray blanks are put right
// where one reading is possible, and refused with the line and column where it is not. It also
// writes CSV that a spreadsheet opens without running anything in it.
//
// A Reader goes through its file once, row by row. It serves one goroutine.
package table

import (
	"errors"
	"fmt"
	"io"
	"strings"
	"unicode"

	"golang.org/x/text/unicode/norm"
)

// DateOrder says how a date such as 03/04/2025 is to be read. The zero value refuses it.
type DateOrder string

// The two orders that a file can be declared to be in.
const (
	DMY DateOrder = "dmy" // day, month, year
	MDY DateOrder = "mdy" // month, day, year
)

// Epoch is the day from which a spreadsheet counts its serial dates.
type Epoch uint8

// The two systems of spreadsheets (ECMA-376 part 1, §18.17.4.1).
const (
	Epoch1900 Epoch = iota // serial 1 is 1900-01-01, and a 1900-02-29 that never was is counted
	Epoch1904              // serial 0 is 1904-01-01
)

// DefaultMaxUnfolded is what a workbook's parts may unfold to, in bytes, if Options does not say.
const DefaultMaxUnfolded = 1 << 30

// Limits of one row. A cell's is the one that spreadsheets have themselves.
const (
	maxCellChars = 32767
	maxRowBytes  = 4 << 20
	maxColumns   = 1024
)

// Options tell how a file is to be read. The zero value refuses whatever is ambiguous.
type Options struct {
	Dates       DateOrder // how ambiguous dates are read; "" refuses them
	Serials     Epoch     // of serial dates in CSV; a workbook says its own
	MaxUnfolded int64     // bytes that a workbook may unfold to; 0: DefaultMaxUnfolded
	TempDir     string    // where a workbook's large parts are unfolded; "": the system's
}

// Fault is one thing in a file that a person must put right. It is an error, and it is the
// JSON of an import's fault.
type Fault struct {
	Line     int    `json:"line"`     // 0: the file as a whole
	Column   string `json:"column"`   // "": the whole row
	Value    string `json:"value"`    // what was found, shortened if very long
	Problem  string `json:"problem"`  // what is wrong with it
	Accepted string `json:"accepted"` // what would do instead
}

// Error says the fault in one sentence.
func (f *Fault) Error() string {
	var b strings.Builder
	if f.Line > 0 {
		fmt.Fprintf(&b, "line %d: ", f.Line)
	}
	if f.Column != "" {
		fmt.Fprintf(&b, "%s: ", f.Column)
	}
	if f.Value != "" {
		fmt.Fprintf(&b, "%q ", f.Value)
	}
	b.WriteString(f.Problem)
	if f.Accepted != "" {
		fmt.Fprintf(&b, "; accepted: %s", f.Accepted)
	}
	return b.String()
}

// record is one row as a source gives it: cells by position, and the faults that the source saw
// in single cells.
type record struct {
	line   int
	cells  []string
	faults []cellFault
}

type cellFault struct {
	column            int // from 0
	value             string
	problem, accepted string
}

// source is a file opened as a sequence of rows. next ends with io.EOF; a *Fault of kind
// rowFault leaves the source readable, every other error ends it.
type source interface {
	next() (record, error)
	progress() (done, total int64)
	close() error
	// traits tell how typed numbers and ragged rows are judged.
	traits() traits
}

type traits struct {
	decimalComma bool  // 1,5 is a number
	rectangular  bool  // every row must have as many cells as the header
	epoch        Epoch // of serial dates
}

// rowFault is a fault after which the next row can still be read.
type rowFault struct{ Fault }

// Reader gives the rows of an opened table.
type Reader struct {
	src     source
	traits  traits
	order   DateOrder
	header  header
	serials int
	held    *step // the first row, read ahead by Open
	ended   bool
	under   *workbook // that src is a sheet of, if any
}

type step struct {
	row    Row
	faults []Fault
	err    error
}

// Open recognises the file by its content and reads its header row. known are the columns of the
// table, required those among them that must be there, facts the declared facts that may stand as
// columns; Row answers by these spellings whatever the file's case. Whatever makes the file
// unreadable as a whole comes back as faults, with a nil Reader; an error is a failure to read
// from r. The Reader must be closed.
func Open(r io.ReaderAt, size int64, known, required, facts []string, o Options) (*Reader, []Fault, error) {
	want := wanted{known: known, required: required, facts: facts}
	if o.MaxUnfolded <= 0 {
		o.MaxUnfolded = DefaultMaxUnfolded
	}
	rd, faults, err := open(r, size, want, o)
	var f *Fault
	if errors.As(err, &f) {
		return nil, []Fault{*f}, nil
	}
	if err != nil || len(faults) > 0 {
		return nil, faults, err
	}
	return rd, nil, nil
}

func open(r io.ReaderAt, size int64, want wanted, o Options) (*Reader, []Fault, error) {
	kind, err := recognise(r, size)
	if err != nil {
		return nil, nil, err
	}
	if kind == zipped {
		return openWorkbook(r, size, want, o)
	}
	src, err := openText(r, size, want, o)
	if err != nil {
		return nil, nil, err
	}
	return start(src, want, o)
}

// start reads the header and, if it will do, the first row, so that a table without rows is
// refused before anything is done with it. It closes src unless it gives a Reader.
func start(src source, want wanted, o Options) (*Reader, []Fault, error) {
	rd := &Reader{src: src, traits: src.traits(), order: o.Dates}
	faults, err := rd.begin(want)
	if err == nil && len(faults) == 0 {
		return rd, nil, nil
	}
	return nil, faults, errors.Join(err, src.close())
}

func (r *Reader) begin(want wanted) ([]Fault, error) {
	rec, err := firstRow(r.src)
	if err != nil {
		return nil, err
	}
	h, faults := matchHeader(rec, want)
	if len(faults) > 0 {
		return faults, nil
	}
	r.header = h
	var s step
	s.row, s.faults, s.err = r.Next()
	if errors.Is(s.err, io.EOF) {
		return nil, &Fault{Line: rec.line, Problem: "the header row has nothing below it", Accepted: "a header row and at least one row"}
	}
	r.held = &s
	return nil, nil
}

// firstRow gives the first row that is not blank.
func firstRow(src source) (record, error) {
	for {
		rec, err := src.next()
		var rf *rowFault
		switch {
		case errors.Is(err, io.EOF):
			return rec, &Fault{Problem: "there is nothing in the file", Accepted: "a header row and at least one row"}
		case errors.As(err, &rf):
			return rec, &rf.Fault
		case err != nil:
			return rec, err
		case !blank(rec.cells) || len(rec.faults) > 0:
			return rec, nil
		}
	}
}

// Next gives the next row that is not blank. A row with faults is not to be used, but the rows
// after it can be read. It ends with io.EOF; any other error is a failure to read.
func (r *Reader) Next() (Row, []Fault, error) {
	if h := r.held; h != nil {
		r.held = nil
		return h.row, h.faults, h.err
	}
	for !r.ended {
		rec, err := r.src.next()
		var rf *rowFault
		var f *Fault
		switch {
		case errors.As(err, &rf):
			return Row{Line: rf.Line}, []Fault{rf.Fault}, nil
		case errors.As(err, &f):
			r.ended = true
			return Row{Line: f.Line}, []Fault{*f}, nil
		case err != nil:
			r.ended = true
			return Row{}, nil, err
		}
		if row, faults := r.judge(rec); row.cells != nil || len(faults) > 0 {
			return row, faults, nil
		}
	}
	return Row{}, nil, io.EOF
}

// judge cleans a record's cells and finds what is wrong with the row as such. A blank row gives
// neither cells nor faults.
func (r *Reader) judge(rec record) (Row, []Fault) {
	for i, c := range rec.cells {
		rec.cells[i] = clean(c)
	}
	row := Row{Line: rec.line}
	if blank(rec.cells) && len(rec.faults) == 0 {
		return row, nil
	}
	if f := r.ragged(rec); f != nil {
		return row, []Fault{*f}
	}
	var faults []Fault
	for _, cf := range rec.faults {
		faults = append(faults, Fault{rec.line, r.header.label(cf.column), shorten(cf.value), cf.problem, cf.accepted})
	}
	for i, c := range rec.cells {
		if problem, accepted := r.header.unfit(i, c); problem != "" {
			faults = append(faults, Fault{rec.line, r.header.label(i), shorten(c), problem, accepted})
		}
	}
	row.cells, row.reader = rec.cells, r
	return row, faults
}

// ragged finds a row of a rectangular file that has too few cells, or more that hold something.
func (r *Reader) ragged(rec record) *Fault {
	n, want := len(rec.cells), len(r.header.names)
	if !r.traits.rectangular || n == want || n > want && blank(rec.cells[want:]) {
		return nil
	}
	return &Fault{
		Line:     rec.line,
		Value:    shorten(strings.Join(rec.cells, " | ")),
		Problem:  fmt.Sprintf("the row has %s, the header has %d", count(n, "cell"), want),
		Accepted: fmt.Sprintf("%s, those without a value left empty between their separators", count(want, "cell")),
	}
}

// Progress tells how many bytes of the file have been read, of how many.
func (r *Reader) Progress() (done, total int64) { return r.src.progress() }

// Serials counts the dates read so far that stood in the file as bare serial numbers.
func (r *Reader) Serials() int { return r.serials }

// Has tells whether the file has the column.
func (r *Reader) Has(col string) bool { _, ok := r.header.index[col]; return ok }

// Columns lists the file's columns in its order, as Open was given their names.
func (r *Reader) Columns() []string {
	var cols []string
	for _, n := range r.header.names {
		if n != "" {
			cols = append(cols, n)
		}
	}
	return cols
}

// Close lets go of what the reader holds, temporary files among it.
func (r *Reader) Close() error {
	r.held, r.ended = nil, true
	err := r.src.close()
	if r.under != nil {
		err = errors.Join(err, r.under.close())
	}
	return err
}

// clean takes blanks of every kind and marks without a width off both ends and composes accents
// (Unicode normalisation form C), so that what looks equal is equal.
func clean(s string) string {
	return norm.NFC.String(strings.TrimFunc(s, invisible))
}

func invisible(c rune) bool {
	switch c {
	case '\x1a': // the end of a file, as old systems wrote it
		return true
	case '\u00ad', '\u200b', '\u200c', '\u200d', '\u200e', '\u200f', '\u2060', '\ufeff':
		return true
	}
	return unicode.IsSpace(c)
}

func blank(cells []string) bool {
	for _, c := range cells {
		if strings.TrimFunc(c, invisible) != "" {
			return false
		}
	}
	return true
}

// shorten keeps a fault's value fit to be shown in a list.
func shorten(s string) string {
	const most = 80
	if n := []rune(s); len(n) > most {
		return string(n[:most-1]) + "…"
	}
	return s
}

func count(n int, what string) string {
	if n == 1 {
		return "1 " + what
	}
	return fmt.Sprintf("%d %ss", n, what)
}
