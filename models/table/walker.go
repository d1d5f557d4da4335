package table

import (
	"bytes"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"strconv"
	"strings"

	"github.com/xuri/excelize/v2"
)

// Limits of the XML of a part, far above what any spreadsheet writes, against files made to
// exhaust memory.
const (
	maxDepth = 64
	maxRun   = 1 << 20 // bytes without a tag
)

// rawCell is a cell as it stands in a sheet's XML (ECMA-376 part 1, §18.3.1.4).
type rawCell struct {
	column  int // from 1
	kind    string
	style   int
	value   string
	formula bool
	text    int // bytes of text in it
}

// partReader reads the XML of one part to its end, which also checks it against its checksum.
type partReader struct {
	in    *counted
	rc    io.ReadCloser
	xml   *xml.Decoder
	depth int
}

func openPart(f part) (*partReader, error) {
	rc, err := f.Open()
	if err != nil {
		return nil, damaged(err)
	}
	in := &counted{r: rc}
	return &partReader{in: in, rc: rc, xml: xml.NewDecoder(&runLimiter{r: in})}, nil
}

// part is what of a zip's file is needed here.
type part interface{ Open() (io.ReadCloser, error) }

// token gives the next token, or io.EOF when the whole part has been well formed.
func (p *partReader) token() (xml.Token, error) {
	t, err := p.xml.Token()
	if err != nil {
		return nil, err
	}
	switch t.(type) {
	case xml.StartElement:
		if p.depth++; p.depth > maxDepth {
			return nil, errors.New("its parts are nested too deep")
		}
	case xml.EndElement:
		p.depth--
	}
	return t, nil
}

// runLimiter refuses XML that goes on for too long without a tag.
type runLimiter struct {
	r   io.Reader
	run int
}

// Read reads on as long as tags come often enough.
func (l *runLimiter) Read(p []byte) (int, error) {
	n, err := l.r.Read(p)
	if at := bytes.LastIndexByte(p[:n], '<'); at >= 0 {
		l.run = n - at
	} else {
		l.run += n
	}
	if l.run > maxRun {
		return 0, errors.New("a text in it is far too long")
	}
	return n, err
}

// sheetWalker goes through the rows of a sheet.
type sheetWalker struct {
	*partReader
	row     int // number of the row last given
	strings int // how many shared strings there are
	inData  bool
	done    bool
}

// next gives the number and the cells of the next row, blank cells left out, and io.EOF after the
// last byte of the sheet.
func (w *sheetWalker) next() (row int, cells []rawCell, err error) {
	for {
		t, err := w.token()
		if errors.Is(err, io.EOF) && !w.done {
			return 0, nil, damaged("it has a sheet without cells")
		}
		if errors.Is(err, io.EOF) {
			return 0, nil, io.EOF
		}
		if err != nil {
			return 0, nil, damaged(err)
		}
		switch el := t.(type) {
		case xml.StartElement:
			w.inData = w.inData || el.Name.Local == "sheetData" && !w.done
			if w.inData && el.Name.Local == "row" {
				cells, err := w.readRow(el)
				return w.row, cells, err
			}
		case xml.EndElement:
			if el.Name.Local == "sheetData" {
				w.inData, w.done = false, true
			}
		}
	}
}

func (w *sheetWalker) readRow(start xml.StartElement) ([]rawCell, error) {
	if err := w.enterRow(start); err != nil {
		return nil, err
	}
	row := w.row
	var cells []rawCell
	column, text := 0, 0
	for {
		t, err := w.token()
		if err != nil {
			return nil, damaged(unexpected(err))
		}
		switch el := t.(type) {
		case xml.StartElement:
			if el.Name.Local != "c" {
				continue
			}
			c, err := w.readCell(el, column)
			if err != nil {
				return nil, damaged(fmt.Sprintf("row %d: %v", row, err))
			}
			column = c.column
			if text += c.text; text > maxRowBytes {
				return nil, &Fault{Line: row, Problem: "the row is longer than a table's row can be", Accepted: fmt.Sprintf("at most %d bytes in a row", maxRowBytes)}
			}
			if c.text > 0 || c.formula {
				cells = append(cells, c)
			}
		case xml.EndElement:
			if el.Name.Local == "row" {
				return cells, nil
			}
		}
	}
}

// enterRow takes the row's number, which a row need not say if it follows the one before.
func (w *sheetWalker) enterRow(start xml.StartElement) error {
	next := w.row + 1
	if s := attr(start, "r"); s != "" {
		n, err := strconv.Atoi(s)
		if err != nil || n < next || n > excelize.TotalRows {
			return damaged(fmt.Sprintf("row %q comes after row %d", s, w.row))
		}
		next = n
	}
	w.row = next
	return nil
}

func (w *sheetWalker) readCell(start xml.StartElement, before int) (rawCell, error) {
	c := rawCell{column: before + 1, kind: attr(start, "t")}
	if ref := attr(start, "r"); ref != "" {
		column, _, err := excelize.CellNameToCoordinates(ref)
		if err != nil || column < c.column {
			return c, fmt.Errorf("cell %q is out of its place", ref)
		}
		c.column = column
	}
	if s := attr(start, "s"); s != "" {
		style, err := strconv.Atoi(s)
		if err != nil {
			return c, fmt.Errorf("style %q of a cell is no number", s)
		}
		c.style = style
	}
	if err := w.readContent(&c); err != nil {
		return c, err
	}
	if c.kind == "s" && c.value != "" {
		n, err := strconv.Atoi(strings.TrimSpace(c.value))
		if err != nil || n < 0 || n >= w.strings {
			return c, fmt.Errorf("there is no shared string %q", c.value)
		}
	}
	return c, nil
}

// readContent reads the cell's value, and learns whether it has a formula and how much text.
func (w *sheetWalker) readContent(c *rawCell) error {
	inside := "" // the element that a text belongs to
	for {
		t, err := w.token()
		if err != nil {
			return unexpected(err)
		}
		switch el := t.(type) {
		case xml.StartElement:
			inside = el.Name.Local
			c.formula = c.formula || inside == "f"
		case xml.CharData:
			switch inside {
			case "v":
				c.value += string(el)
				c.text += len(el)
			case "t":
				c.text += len(el)
			}
			if c.text > maxRun {
				return errors.New("a cell's text is far too long")
			}
		case xml.EndElement:
			inside = ""
			if el.Name.Local == "c" {
				return nil
			}
		}
	}
}

func attr(el xml.StartElement, name string) string {
	for _, a := range el.Attr {
		if a.Name.Local == name && a.Name.Space == "" {
			return a.Value
		}
	}
	return ""
}

func unexpected(err error) error {
	if errors.Is(err, io.EOF) {
		return io.ErrUnexpectedEOF
	}
	return err
}

// countStrings reads the shared strings to their end: it counts them, and vouches that they are
// well formed and that none is out of all measure.
func (wb *workbook) countStrings() (n int, err error) {
	f := wb.parts[stringsPart]
	if f == nil {
		return 0, nil
	}
	p, err := openPart(f)
	if err != nil {
		return 0, err
	}
	text := 0
	for {
		t, err := p.token()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			return 0, errors.Join(damaged(err), p.rc.Close())
		}
		switch el := t.(type) {
		case xml.StartElement:
			if el.Name.Local == "si" {
				n, text = n+1, 0
			}
		case xml.CharData:
			if text += len(el); text > maxRun {
				return 0, errors.Join(damaged("a shared string is far too long"), p.rc.Close())
			}
		}
	}
	return n, p.rc.Close()
}
