package table

import (
	"errors"
	"math"
	"strconv"
	"strings"

	"github.com/xuri/excelize/v2"
)

// sheetSource is a sheet of a workbook as a sequence of rows.
type sheetSource struct {
	wb     *workbook
	rows   *excelize.Rows
	walker *sheetWalker
	at     int // the row that rows stands at
	total  uint64
}

func (wb *workbook) openSheet(s sheet) (src source, err error) {
	defer guardPanic(&err)
	f := wb.parts[s.part]
	p, err := openPart(f)
	if err != nil {
		return nil, err
	}
	rows, err := wb.file.Rows(s.name)
	if err != nil {
		return nil, errors.Join(damaged(err), p.rc.Close())
	}
	return &sheetSource{
		wb: wb, rows: rows, total: f.UncompressedSize64,
		walker: &sheetWalker{partReader: p, strings: wb.strings},
	}, nil
}

func (s *sheetSource) next() (rec record, err error) {
	defer guardPanic(&err)
	row, raw, err := s.walker.next()
	if err != nil {
		return record{}, err
	}
	texts, err := s.texts(row)
	if err != nil {
		return record{}, err
	}
	if n := len(raw); n > 0 && raw[n-1].column > maxColumns {
		return record{}, &rowFault{tooManyColumns(row)}
	}
	return s.wb.assemble(row, raw, texts), nil
}

// assemble puts a row's cells at their places. texts are their values as excelize knows them.
func (wb *workbook) assemble(row int, raw []rawCell, texts []string) record {
	rec := record{line: row}
	if n := len(raw); n > 0 {
		rec.cells = make([]string, raw[n-1].column)
	}
	for _, c := range raw {
		text := ""
		if c.column <= len(texts) {
			text = texts[c.column-1]
		}
		value, problem, accepted := wb.cell(c, text)
		if problem != "" {
			rec.faults = append(rec.faults, cellFault{c.column - 1, value, problem, accepted})
			continue
		}
		rec.cells[c.column-1] = value
	}
	return rec
}

// texts brings excelize to the row and gives its values.
func (s *sheetSource) texts(row int) ([]string, error) {
	var texts []string
	for s.at < row {
		if !s.rows.Next() {
			return nil, damaged("it breaks off")
		}
		s.at++
		var err error
		if texts, err = s.rows.Columns(); err != nil {
			return nil, damaged(err)
		}
	}
	return texts, nil
}

// cell gives a cell's value as it would be typed into a CSV file. text is its value as excelize
// knows it, with shared strings resolved.
func (wb *workbook) cell(c rawCell, text string) (value, problem, accepted string) {
	switch c.kind {
	case "e":
		return c.value, "is a spreadsheet's error, not a value", "the value itself, or an empty cell"
	case "b":
		return map[bool]string{true: "TRUE", false: "FALSE"}[strings.TrimSpace(c.value) == "1"], "", ""
	case "", "n":
		return wb.number(c)
	case "d": // a day has a time of day too, which means nothing if the format does not show it
		value = strings.TrimSpace(c.value)
		if !wb.formatOf(c.style).clock {
			value = strings.TrimSuffix(value, "T00:00:00")
		}
		return value, "", ""
	}
	return text, "", ""
}

// number gives a numeric cell's value: a date if its format is one, else plain digits.
func (wb *workbook) number(c rawCell) (value, problem, accepted string) {
	s := strings.TrimSpace(c.value)
	if s == "" && c.formula {
		return "", "is a formula whose result is not in the file", "the workbook opened in a spreadsheet program and saved again, or the value itself"
	}
	n, err := strconv.ParseFloat(s, 64)
	if err != nil || math.IsNaN(n) || math.IsInf(n, 0) {
		return s, "is not a number, though the workbook says so", "the value typed again"
	}
	const exact = 1e15 // a spreadsheet keeps fifteen digits
	if math.Abs(n) >= exact {
		return plainDigits(n), "has more digits than a spreadsheet keeps in a number: its last ones are gone", "the cell formatted as text, with all its digits"
	}
	f := wb.formatOf(c.style)
	if f.date || f.clock {
		if value, ok := dateText(n, f, wb.epoch); ok {
			return value, "", ""
		}
	}
	return f.pad(plainDigits(n)), "", ""
}

// plainDigits writes a number with the fifteen digits that a spreadsheet shows at most, without an
// exponent.
func plainDigits(n float64) string {
	rounded, err := strconv.ParseFloat(strconv.FormatFloat(n, 'g', 15, 64), 64)
	if err != nil {
		return strconv.FormatFloat(n, 'f', -1, 64)
	}
	return strconv.FormatFloat(rounded, 'f', -1, 64)
}

// dateText writes a date cell as a day, with a time of day if it has one or its format shows one;
// a time of day alone if it is of no day. False: it is no date in the workbook's epoch.
func dateText(n float64, f format, e Epoch) (string, bool) {
	if f.clock && !f.date && n >= 0 && n < 1 {
		w, _ := fromSerial(n+1, Epoch1904)
		return clockText(w.clock), true
	}
	w, ok := fromSerial(n, e)
	w.timed = w.timed || f.clock
	return w.String(), ok
}

func (s *sheetSource) progress() (done, total int64) {
	if s.total == 0 {
		return s.wb.size, s.wb.size
	}
	return int64(float64(s.walker.in.n) / float64(s.total) * float64(s.wb.size)), s.wb.size
}

// close lets go of the sheet; the workbook is closed after it by whoever opened it.
func (s *sheetSource) close() error {
	err := s.rows.Close()
	if errors.Is(err, s.rows.Error()) { // it repeats what is wrong with the sheet, which next has told
		err = nil
	}
	return errors.Join(err, s.walker.rc.Close())
}

func (s *sheetSource) traits() traits { return traits{epoch: s.wb.epoch} }
