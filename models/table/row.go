package table

import (
	"regexp"
	"strings"
	"time"
	"unicode"

	"lodebook/models/civil"
)

// Row is one row of a table. Its methods take a column's name as Open was given it; a column that
// the file does not have reads as blank.
type Row struct {
	Line   int // of the file: the line on which the row starts (CSV), the row's number (XLSX)
	cells  []string
	reader *Reader
}

// Has tells whether the file has the column, blank or not.
func (r Row) Has(col string) bool { return r.reader != nil && r.reader.Has(col) }

// Text is the cell without blanks around it, in Unicode normalisation form C; "" if it is blank.
func (r Row) Text(col string) string {
	if r.reader == nil {
		return ""
	}
	if i, ok := r.reader.header.index[col]; ok && i < len(r.cells) {
		return r.cells[i]
	}
	return ""
}

// Fault is a fault of the row's cell in the column, with the cell's value.
func (r Row) Fault(col, problem, accepted string) *Fault {
	return &Fault{Line: r.Line, Column: col, Value: shorten(r.Text(col)), Problem: problem, Accepted: accepted}
}

// Day reads a day: YYYY-MM-DD, a spreadsheet's serial, or another way to write a date if only one
// reading is possible. A time of day without an offset is passed over, since the day is not in
// doubt; an instant is refused. false: the cell is blank.
func (r Row) Day(col string) (civil.Day, bool, *Fault) {
	w, ok, f := r.when(col)
	if !ok || f != nil {
		return 0, false, f
	}
	if w.zoned {
		return 0, false, r.Fault(col, "is an instant where a day is asked; its day depends on the time zone", "a day, as YYYY-MM-DD")
	}
	r.counted(w)
	return w.day, true, nil
}

// Moment reads a day as Day does, or a point in time: an RFC 3339 instant, or a date and a time
// of day in the zone loc. A time of day that the zone's clocks pass twice or never is refused,
// since only an offset can say which is meant. false: the cell is blank.
func (r Row) Moment(col string, loc *time.Location) (Moment, bool, *Fault) {
	w, ok, f := r.when(col)
	if !ok || f != nil {
		return Moment{}, false, f
	}
	m, problem, accepted := w.moment(loc)
	if problem != "" {
		return Moment{}, false, r.Fault(col, problem, accepted)
	}
	r.counted(w)
	return m, true, nil
}

func (r Row) when(col string) (when, bool, *Fault) {
	s := r.Text(col)
	if s == "" {
		return when{}, false, nil
	}
	w, problem, accepted := dateRules{r.reader.order, r.reader.traits}.read(s)
	if problem != "" {
		return w, false, r.Fault(col, problem, accepted)
	}
	return w, true, nil
}

// counted keeps the tally of serials, by which a command can tell how it understood the file.
func (r Row) counted(w when) {
	if w.serial {
		r.reader.serials++
	}
}

// YesNo reads yes or no, y or n, true or false, 1 or 0, whatever the case. present is false if
// the cell is blank.
func (r Row) YesNo(col string) (yes, present bool, f *Fault) {
	switch strings.ToLower(r.Text(col)) {
	case "":
		return false, false, nil
	case "yes", "y", "true", "1":
		return true, true, nil
	case "no", "n", "false", "0":
		return false, true, nil
	}
	return false, false, r.Fault(col, "is neither yes nor no", "yes or no")
}

var numberForm = regexp.MustCompile(`^([+-]?)(\d*)(?:[.,](\d+))?$`)

// Number reads a decimal number and gives it as typed, the decimal mark a point, without a plus
// sign and without idle zeros before the first digit; zeros at its end stay. A decimal comma is
// read in files separated by semicolons. false: the cell is blank.
func (r Row) Number(col string) (string, bool, *Fault) {
	s := r.Text(col)
	if s == "" {
		return "", false, nil
	}
	m := numberForm.FindStringSubmatch(strings.ReplaceAll(s, "\u2212", "-"))
	if m == nil || m[2]+m[3] == "" {
		return "", false, r.Fault(col, "is not a number", r.plainNumber())
	}
	if strings.Contains(s, ",") && !r.reader.traits.decimalComma {
		return "", false, r.Fault(col, "has a comma, which may part thousands or decimals", r.plainNumber())
	}
	return canonical(m[1], m[2], m[3]), true, nil
}

func (r Row) plainNumber() string {
	if r.reader.traits.decimalComma {
		return "digits and at most one decimal point or comma, as 19.5 or 19,5; no thousands, no unit"
	}
	return "digits and at most one decimal point, as 19.5; no thousands, no unit"
}

func canonical(sign, whole, decimals string) string {
	whole = strings.TrimLeft(whole, "0")
	if whole == "" {
		whole = "0"
	}
	if decimals != "" {
		whole += "." + decimals
	}
	if sign == "-" && strings.Trim(whole, "0.") != "" {
		return "-" + whole
	}
	return whole
}

// Words are the cell's words, parted by blanks, commas or semicolons; none if it is blank.
func (r Row) Words(col string) []string {
	return strings.FieldsFunc(r.Text(col), func(c rune) bool { return c == ',' || c == ';' || unicode.IsSpace(c) })
}
