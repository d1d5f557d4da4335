package table

import (
	"regexp"
	"strings"

	"github.com/xuri/excelize/v2"
)

// format is what a cell's number format tells about the number in it.
type format struct {
	date   bool // it shows a day
	clock  bool // it shows a time of day
	digits int  // it fills up with zeros to so many digits: 00000
}

// pad puts back the zeros that a format such as 00000 shows before a whole number, which is how
// codes and staff numbers keep theirs.
func (f format) pad(s string) string {
	if missing := f.digits - len(s); missing > 0 && !strings.ContainsAny(s, "-.") {
		return strings.Repeat("0", missing) + s
	}
	return s
}

// formatsOf reads the formats of a workbook's cell styles.
func formatsOf(file *excelize.File) []format {
	styles := file.Styles
	if styles == nil || styles.CellXfs == nil {
		return nil
	}
	codes := map[int]string{}
	if styles.NumFmts != nil {
		for _, n := range styles.NumFmts.NumFmt {
			codes[n.NumFmtID] = n.FormatCode
		}
	}
	formats := make([]format, len(styles.CellXfs.Xf))
	for i, xf := range styles.CellXfs.Xf {
		if xf.NumFmtID == nil {
			continue
		}
		if code, ok := codes[*xf.NumFmtID]; ok {
			formats[i] = formatOfCode(code)
		} else {
			formats[i] = builtIn(*xf.NumFmtID)
		}
	}
	return formats
}

func (wb *workbook) formatOf(style int) format {
	if style < 0 || style >= len(wb.formats) {
		return format{}
	}
	return wb.formats[style]
}

// builtIn knows the formats that have a number instead of a code (ECMA-376 part 1, §18.8.30); those
// of 27 to 36 and 50 to 58 are dates of East Asian locales.
func builtIn(id int) format {
	switch {
	case id >= 14 && id <= 17, id >= 27 && id <= 36, id >= 50 && id <= 58:
		return format{date: true}
	case id >= 18 && id <= 21, id >= 45 && id <= 47:
		return format{clock: true}
	case id == 22:
		return format{date: true, clock: true}
	}
	return format{}
}

var (
	// literals are the parts of a format code that only stand for themselves: quoted text, an
	// escaped character, one to fill or skip with, and colours, conditions and locales in brackets.
	literals = regexp.MustCompile(`"[^"]*"|\\.|[_*].|\[[^\]]*\]`)
	elapsed  = regexp.MustCompile(`(?i)\[(h+|m+|s+)\]`)
	zeros    = regexp.MustCompile(`^0{2,}$`)
)

// formatOfCode reads a number format's code (ECMA-376 part 1, §18.8.31): years and days make it a
// date, hours and seconds a time; months alone are a date too.
func formatOfCode(code string) format {
	code, _, _ = strings.Cut(code, ";")
	f := format{clock: elapsed.MatchString(code)}
	code = strings.ToLower(literals.ReplaceAllString(code, ""))
	if zeros.MatchString(code) {
		f.digits = len(code)
	}
	if strings.Contains(code, "general") {
		return f
	}
	f.clock = f.clock || strings.ContainsAny(code, "hs")
	f.date = strings.ContainsAny(code, "yd") || strings.Contains(code, "m") && !f.clock
	return f
}
