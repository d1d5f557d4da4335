package table

import (
	"archive/zip"
	"bytes"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"reflect"
	"regexp"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/xuri/excelize/v2"
)

// TestWorkbookCells reads every kind of cell.
func TestWorkbookCells(t *testing.T) {
	b := single(data(3,
		[]string{"code", "name", "email", "joined"},
		[]string{` t="s"><v>0</v>`, ` t="s"><v>1</v>`, ` t="s"><v> 2 </v>`, ` s="1"><v>43831</v>`},
		[]string{`><v>1001</v>`, ` t="str"><f>A1&amp;"x"</f><v>worked out</v>`, ` t="b"><v>1</v>`, ` s="2"><v>43831.25</v>`},
		[]string{` s="3"><v>123</v>`, `><f>1+1</f><v>2</v>`, ` t="b"><v>0</v>`, ` s="4"><v>43831</v>`},
		[]string{` s="3"><v>1234567</v>`, `><v>4.2000000000000002</v>`, ` t="str"><f>""</f><v></v>`, ` t="d"><v>2020-01-01</v>`},
		[]string{`><v>1.5E-3</v>`, `><v>-12</v>`, ` s="5"><v>12345</v>`, ` s="6"><v>0.354166666666666</v>`},
		[]string{`><v>123456789012</v>`, ` t="inlineStr"><is><r><t>in </t></r><r><t>runs</t></r></is>`, "", `><v>43831</v>`},
	))
	b.strings = []string{"<t>P1</t>", "<r><rPr><b/></rPr><t xml:space=\"preserve\">Zoë </t></r><r><t>Tomaš</t></r><rPh sb=\"0\" eb=\"1\"><t>ZO</t></rPh>", "<t>a&lt;b@example.org</t>"}
	b.formats = []string{"dd/mm/yyyy", `yyyy\-mm\-dd hh:mm`, "00000", "[$-809]d mmmm yyyy h:mm;@", "#,##0", "h:mm"}
	rows, lines, faults := read(t, b.bytes(t), Options{}, "code", "name", "email", "joined")
	if len(faults) > 0 {
		t.Fatal(faults)
	}
	want := [][]string{
		{"P1", "Zoë Tomaš", "a<b@example.org", "2020-01-01"},
		{"1001", "worked out", "TRUE", "2020-01-01 06:00:00"},
		{"00123", "2", "FALSE", "2020-01-01 00:00:00"},
		{"1234567", "4.2", "", "2020-01-01"},
		{"0.0015", "-12", "12345", "08:30:00"},
		{"123456789012", "in runs", "", "43831"},
	}
	if !reflect.DeepEqual(rows, want) || !slices.Equal(lines, []int{4, 5, 6, 7, 8, 9}) {
		t.Errorf("rows %q\nwant %q\nlines %v", rows, want, lines)
	}
}

// TestWorkbookEpochs reads one serial in both systems (Microsoft Support, Date systems in Excel:
// 2011-07-05 is 40729 in the 1900 system and 39267 in the 1904 system).
func TestWorkbookEpochs(t *testing.T) {
	for serial, date1904 := range map[string]bool{"40729": false, "39267": true} {
		b := single(data(1, []string{"code", "joined", "left"}, []string{"P1", ` s="1"><v>` + serial + `</v>`, `><v>` + serial + `</v>`}))
		b.date1904, b.formats = date1904, []string{"m/d/yy"}
		r, faults, err := opened(b.bytes(t), Options{Serials: Epoch1900})
		if err != nil || len(faults) > 0 {
			t.Fatal(faults, err)
		}
		row, _, err := r.Next()
		if err != nil {
			t.Fatal(err)
		}
		for _, col := range []string{"joined", "left"} {
			if day, ok, f := row.Day(col); !ok || f != nil || day.String() != "2011-07-05" {
				t.Errorf("%s: %s is %s, %v", col, serial, day, f)
			}
		}
		if r.Serials() != 1 {
			t.Errorf("%d serials, want the one whose cell is not formatted as a date", r.Serials())
		}
		closed(t, r)
	}
}

// TestWorkbookMoment checks that a cell that shows a time of day has one, midnight too.
func TestWorkbookMoment(t *testing.T) {
	b := single(data(1, []string{"code", "joined", "left"}, []string{"P1", ` s="1"><v>45717</v>`, ` s="2"><v>45717</v>`}))
	b.formats = []string{"dd.mm.yyyy hh:mm", "dd.mm.yyyy"}
	r, _, err := opened(b.bytes(t), Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer closed(t, r)
	row, _, err := r.Next()
	if err != nil {
		t.Fatal(err)
	}
	m, _, f := row.Moment("joined", time.UTC)
	if f != nil || m.Time == nil || !m.Time.Equal(time.Date(2025, 3, 1, 0, 0, 0, 0, time.UTC)) {
		t.Errorf("%+v, %v", m, f)
	}
	if m, _, f := row.Moment("left", time.UTC); f != nil || m.Time != nil || m.Day.String() != "2025-03-01" {
		t.Errorf("%+v, %v", m, f)
	}
}

// TestWorkbookFaults checks that cells without a sound value are faults of their place.
func TestWorkbookFaults(t *testing.T) {
	for _, c := range []struct{ name, cell, column, says string }{
		{"error", ` t="e"><f>VLOOKUP(1,A:A,1)</f><v>#N/A</v>`, "name", `"#N/A" is a spreadsheet's error`},
		{"error typed", `#REF!`, "name", "is a spreadsheet's error"},
		{"formula not worked out", `><f>A1</f>`, "name", "is a formula whose result is not in the file"},
		{"too many digits", `><v>1.2345678901234567E+16</v>`, "name", `"12345678901234600" has more digits`},
		{"not a number", `><v>12x</v>`, "name", "is not a number, though"},
	} {
		t.Run(c.name, func(t *testing.T) {
			b := single(data(1, []string{"code", "name"}, []string{"P1", "Ada"}, []string{"P2", c.cell}, nil, []string{"P3", "Cy"}))
			rows, lines, faults := read(t, b.bytes(t), Options{}, "code")
			only(t, faults, 3, c.column, c.says)
			if len(rows) != 2 || !slices.Equal(lines, []int{2, 5}) {
				t.Errorf("rows %q at %v, want the two that are sound", rows, lines)
			}
		})
	}
	long := single(data(1, []string{"code", "name"}, []string{"P1", strings.Repeat("x", 32768)}))
	_, _, faults := read(t, long.bytes(t), Options{})
	only(t, faults, 2, "name", "longer than a cell can be")

	b := single(data(1, []string{"code", "name"}, []string{"P1", "Ada"}) + `<row r="9"><c r="AMK9"><v>1</v></c></row><row r="12"><c r="A12" t="inlineStr"><is><t>P2</t></is></c></row>`)
	_, lines, faults := read(t, b.bytes(t), Options{})
	only(t, faults, 9, "", "more columns")
	if !slices.Equal(lines, []int{2, 12}) {
		t.Errorf("lines %v", lines)
	}
}

// TestWorkbookSheets checks which sheet is read.
func TestWorkbookSheets(t *testing.T) {
	table := data(1, []string{"code", "name"}, []string{"P1", "Ada"})
	cover := data(1, []string{"Staff of the site"}, []string{"", "printed 2025"})
	near := data(1, []string{"code", "nmae"}, []string{"P1", "Ada"})

	b := written{sheets: []writtenSheet{
		{"Cover", "", cover}, {"Empty", "", ""}, {"Old", "hidden", data(1, []string{"code"}, []string{"P9"})}, {"Staff", "", table},
	}}
	rows, _, faults := read(t, b.bytes(t), Options{}, "code")
	if len(faults) > 0 || len(rows) != 1 || rows[0][0] != "P1" {
		t.Errorf("rows %q, faults %v", rows, faults)
	}

	b = written{sheets: []writtenSheet{{"Cover", "", cover}, {"Empty", "", ""}, {"Staff", "", near}, {"Other", "", cover}}}
	_, _, faults = read(t, b.bytes(t), Options{})
	if len(faults) != 2 {
		t.Fatal(faults)
	}
	only(t, faults[:1], 0, "", `"Cover, Empty, Staff, Other" none of the workbook's visible sheets has the table; the faults of "Staff" follow`)
	only(t, faults[1:], 1, "nmae", `did you mean "name"?`)

	farther := data(1, []string{"code", "nmae", "shoe size"})
	b = written{sheets: []writtenSheet{{"Draft", "", farther}, {"Staff", "", near}, {"Older", "", farther}}}
	_, _, faults = read(t, b.bytes(t), Options{})
	if len(faults) != 2 || !strings.Contains(faults[0].Problem, `"Staff"`) {
		t.Error(faults)
	}
	_, _, faults = read(t, single(near).bytes(t), Options{})
	only(t, faults, 1, "nmae", "did you mean")
	_, _, faults = read(t, single("").bytes(t), Options{})
	only(t, faults, 0, "", "nothing in the file")
	_, _, faults = read(t, single(data(5, []string{"code"}, []string{""})).bytes(t), Options{})
	only(t, faults, 5, "", "nothing below it")
	_, _, faults = read(t, written{sheets: []writtenSheet{{"Staff", "veryHidden", table}}}.bytes(t), Options{})
	only(t, faults, 0, "", "no visible sheet")
}

// TestDamagedWorkbook checks that a workbook that has lost something is refused or said to have,
// never read as if the rest were all.
func TestDamagedWorkbook(t *testing.T) {
	row := func(n int, code string) string {
		return fmt.Sprintf(`<row r="%d"><c r="A%d" t="inlineStr"><is><t>%s</t></is></c></row>`, n, n, code)
	}
	sound := row(1, "code") + row(2, "P1")
	for _, c := range []struct {
		name string
		book written
		says string
	}{
		{"a control character", single(sound + row(3, "P\x0b2") + row(4, "P3")), "illegal character"},
		{"breaks off", single(sound + "<row>"), "damaged"},
		{"row twice", single(sound + row(2, "P2")), `row "2" comes after row 2`},
		{"row out of place", single(sound + row(7, "P2") + row(5, "P3")), `row "5" comes after row 7`},
		{"row beyond the last", single(sound + row(1048577, "P2")), "damaged"},
		{"cell out of place", single(sound + `<row><c r="B3"><v>1</v></c><c r="A3"><v>2</v></c></row>`), `cell "A3" is out of its place`},
		{"cell without a column", single(sound + `<row><c r="3"><v>1</v></c></row>`), "out of its place"},
		{"no such shared string", single(sound + `<row><c t="s"><v>7</v></c></row>`), "no shared string"},
		{"style that is no number", single(sound + `<row><c s="x"><v>7</v></c></row>`), "style"},
		{"nested without end", single(sound + strings.Repeat("<x>", 100) + strings.Repeat("</x>", 100)), "nested too deep"},
		{"text without end", single(sound + `<row><c t="str"><v>` + strings.Repeat("x", 3<<20) + `</v></c></row>`), "far too long"},
		{"rich text without end", single(sound + `<row><c t="inlineStr"><is>` + strings.Repeat("<r><t>"+strings.Repeat("x", 9<<10)+"</t></r>", 200) + `</is></c></row>`), "far too long"},
		{"row without end", single(sound + `<row>` + strings.Repeat(`<c t="inlineStr"><is><t>`+strings.Repeat("x", 900<<10)+`</t></is></c>`, 6) + `</row>`), "longer than a table's row"},
		{"shared string without end", written{sheets: []writtenSheet{{"S", "", sound}}, strings: []string{strings.Repeat("<r><t>"+strings.Repeat("x", 9<<10)+"</t></r>", 200)}}, "shared string is far too long"},
		{"shared strings broken", written{sheets: []writtenSheet{{"S", "", sound}}, strings: []string{"<t>x</i>"}}, "damaged"},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, _, faults := read(t, c.book.bytes(t), Options{})
			if len(faults) != 1 || !strings.Contains(faults[0].Problem, c.says) {
				t.Errorf("faults %+v, want one that says %q", faults, c.says)
			}
		})
	}
	// A part cut inside its compressed bytes, and one whose bytes have changed.
	whole := single(data(1, []string{"code", "name"}, []string{"P1", "Ada"})).bytes(t)
	_, _, faults := read(t, whole[:len(whole)/2], Options{})
	only(t, faults, 0, "", "damaged")
	changed := stored(t, single(sound+row(3, "P2")))
	at := bytes.Index(changed, []byte("P2"))
	changed[at+1] = '9'
	_, _, faults = read(t, changed, Options{})
	only(t, faults, 0, "", "checksum")
}

// TestPanicOfALibrary checks that a library that gives up over a workbook takes nothing with it.
func TestPanicOfALibrary(t *testing.T) {
	err := func() (err error) {
		defer guardPanic(&err)
		var rows []string
		return errors.New(rows[3])
	}()
	var f *Fault
	if !errors.As(err, &f) || !strings.Contains(f.Problem, "damaged") {
		t.Errorf("%v", err)
	}
}

// stored is a workbook whose parts are not compressed.
func stored(t testing.TB, b written) []byte {
	var buf bytes.Buffer
	z := zip.NewWriter(&buf)
	for name, content := range b.parts() {
		w, err := z.CreateHeader(&zip.FileHeader{Name: name, Method: zip.Store})
		if err != nil {
			t.Fatal(err)
		}
		if _, err := io.WriteString(w, content); err != nil {
			t.Fatal(err)
		}
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	return buf.Bytes()
}

// TestOtherZips checks that zips that are no workbook are told what they are.
func TestOtherZips(t *testing.T) {
	for name, says := range map[string]string{
		"xl/workbook.bin": "binary workbook", "mimetype": "OpenDocument", "word/document.xml": "word processor", "photo.jpg": "without a workbook",
	} {
		b := written{without: "xl/workbook.xml", extra: map[string]string{name: "x"}}
		_, _, faults := read(t, b.bytes(t), Options{})
		only(t, faults, 0, "", says)
	}
	twice := single(data(1, []string{"code"}, []string{"P1"}))
	twice.extra = map[string]string{`xl\sharedStrings.XML`: "", "xl/sharedStrings.xml": ""}
	_, _, faults := read(t, twice.bytes(t), Options{})
	only(t, faults, 0, "", "two parts named xl/sharedStrings.xml")
}

// TestZipBomb checks that a workbook that unfolds to far more than it is, is refused, whatever size
// it declares, and that parts that are not needed are never unfolded.
func TestZipBomb(t *testing.T) {
	b := single(data(1, []string{"code"}, []string{"P1"}))
	b.extra = map[string]string{"xl/worksheets/sheet2.xml": strings.Repeat(" ", 20<<20)}
	_, _, faults := read(t, b.bytes(t), Options{MaxUnfolded: 10 << 20})
	only(t, faults, 0, "", "unfolds to more than 10 MB")

	b.extra = map[string]string{"xl/styles.xml": strings.Repeat(" ", 9<<20)}
	_, _, faults = read(t, b.bytes(t), Options{})
	only(t, faults, 0, "", "xl/styles.xml is far too big")

	b.extra = map[string]string{"xl/media/image1.png": strings.Repeat(" ", 20<<20), "xl/pivotCache/pivotCacheRecords1.xml": strings.Repeat(" ", 20<<20)}
	rows, _, faults := read(t, b.bytes(t), Options{MaxUnfolded: 10 << 20}, "code")
	if len(faults) > 0 || len(rows) != 1 {
		t.Errorf("rows %q, faults %v", rows, faults)
	}

	// The size in the zip's directory made smaller than what is there: nothing beyond it is given.
	lie := stored(t, single(data(1, []string{"code"}, []string{"P1"}, []string{"P2"})))
	z, err := zip.NewReader(bytes.NewReader(lie), int64(len(lie)))
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range z.File {
		if f.Name == "xl/worksheets/sheet1.xml" {
			lied := lying(t, z, f)
			_, _, faults := read(t, lied, Options{})
			only(t, faults, 0, "", "damaged")
		}
	}
}

// lying copies a zip with one part's declared size halved.
func lying(t *testing.T, z *zip.Reader, victim *zip.File) []byte {
	var buf bytes.Buffer
	out := zip.NewWriter(&buf)
	for _, f := range z.File {
		raw, err := f.OpenRaw()
		if err != nil {
			t.Fatal(err)
		}
		head := f.FileHeader
		if f == victim {
			head.UncompressedSize64 /= 2
		}
		w, err := out.CreateRaw(&head)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := io.Copy(w, raw); err != nil {
			t.Fatal(err)
		}
	}
	if err := out.Close(); err != nil {
		t.Fatal(err)
	}
	return buf.Bytes()
}

// TestFormats holds the reading of number formats against ECMA-376 part 1, §18.8.30 and §18.8.31.
func TestFormats(t *testing.T) {
	for code, want := range map[string]format{
		"General":                             {},
		"0":                                   {},
		"0.00":                                {},
		"0000":                                {digits: 4},
		"#,##0.00":                            {},
		`"d"0`:                                {},
		`0\d`:                                 {},
		"[Red]0;[Blue]-0":                     {},
		"0_d":                                 {},
		"0%":                                  {},
		"@":                                   {},
		"yyyy-mm-dd":                          {date: true},
		"mm/dd/yy;@":                          {date: true},
		"mmm":                                 {date: true},
		"mmm-yy":                              {date: true},
		`[$-F800]dddd\,\ mmmm\ dd\,\ yyyy`:    {date: true},
		"h:mm AM/PM":                          {clock: true},
		"mm:ss.0":                             {clock: true},
		"[h]:mm":                              {clock: true},
		"[mm]":                                {clock: true},
		"d/m/yyyy h:mm":                       {date: true, clock: true},
		`"Saved "yyyy"-"mm"-"dd" at "hh":"mm`: {date: true, clock: true},
	} {
		if got := formatOfCode(code); got != want {
			t.Errorf("%q: %+v, want %+v", code, got, want)
		}
	}
	for id, want := range map[int]format{0: {}, 1: {}, 13: {}, 14: {date: true}, 17: {date: true}, 18: {clock: true}, 21: {clock: true}, 22: {date: true, clock: true}, 37: {}, 47: {clock: true}, 49: {}} {
		if got := builtIn(id); got != want {
			t.Errorf("format %d: %+v, want %+v", id, got, want)
		}
	}
}

// TestForeignWorkbook reads a workbook that a library wrote, streamed and not.
func TestForeignWorkbook(t *testing.T) {
	for _, streamed := range []bool{false, true} {
		f := excelize.NewFile()
		style, err := f.NewStyle(&excelize.Style{NumFmt: 14})
		if err != nil {
			t.Fatal(err)
		}
		day := time.Date(2025, 3, 1, 0, 0, 0, 0, time.UTC)
		if streamed {
			w, err := f.NewStreamWriter("Sheet1")
			if err != nil {
				t.Fatal(err)
			}
			for i, row := range [][]any{{"code", "joined"}, {"P1", excelize.Cell{StyleID: style, Value: day}}} {
				if err := w.SetRow(fmt.Sprintf("A%d", i+1), row); err != nil {
					t.Fatal(err)
				}
			}
			if err := w.Flush(); err != nil {
				t.Fatal(err)
			}
		} else {
			for cell, v := range map[string]any{"A1": "code", "B1": "joined", "A2": "P1", "B2": day} {
				if err := f.SetCellValue("Sheet1", cell, v); err != nil {
					t.Fatal(err)
				}
			}
		}
		var buf bytes.Buffer
		if err := f.Write(&buf); err != nil {
			t.Fatal(err)
		}
		rows, _, faults := read(t, buf.Bytes(), Options{}, "code", "joined")
		if len(faults) > 0 || len(rows) != 1 || rows[0][0] != "P1" || !strings.HasPrefix(rows[0][1], "2025-03-01") {
			t.Errorf("streamed %t: rows %q, faults %v", streamed, rows, faults)
		}
	}
}

// TestDialects reads the same workbook as other writers spell it: with a prefix on every element
// and absolute targets, or in the strict namespaces (ECMA-376 part 1, annex A; from memory).
func TestDialects(t *testing.T) {
	b := single(data(1, []string{"code", "name", "joined"}, []string{` t="s"><v>0</v>`, "Ada", ` s="1" t="d"><v>2025-03-01T00:00:00</v>`}))
	b.strings, b.formats = []string{"<t>P1</t>"}, []string{"dd/mm/yyyy"}
	for name, respell := range map[string]func(part, s string) string{
		"as it is": func(_, s string) string { return s },
		"prefixed": func(part, s string) string {
			if strings.Contains(s, mainNS) {
				s = regexp.MustCompile(`<(/?)([a-zA-Z])`).ReplaceAllString(strings.Replace(s, "xmlns=", "xmlns:x=", 1), "<${1}x:$2")
			}
			return strings.ReplaceAll(s, `Target="worksheets/`, `Target="/xl/worksheets/`)
		},
		"strict": func(part, s string) string {
			s = strings.ReplaceAll(s, "http://schemas.openxmlformats.org/spreadsheetml/2006/main", "http://purl.oclc.org/ooxml/spreadsheetml/main")
			return strings.ReplaceAll(s, "http://schemas.openxmlformats.org/officeDocument/2006/relationships", "http://purl.oclc.org/ooxml/officeDocument/relationships")
		},
		"back slashes": func(part, s string) string {
			return strings.ReplaceAll(s, `Target="worksheets/`, `Target="worksheets\`)
		},
	} {
		respelt := b
		respelt.extra = map[string]string{}
		for part, s := range b.parts() {
			respelt.extra[part] = respell(part, s)
		}
		rows, _, faults := read(t, respelt.bytes(t), Options{}, "code", "name", "joined")
		if len(faults) > 0 || len(rows) != 1 || !slices.Equal(rows[0], []string{"P1", "Ada", "2025-03-01"}) {
			t.Errorf("%s: rows %q, faults %v", name, rows, faults)
		}
	}
}

// TestTemporaryFiles checks that nothing is left behind, whether a table was read or refused.
func TestTemporaryFiles(t *testing.T) {
	dir := t.TempDir()
	many := []string{"code"}
	rows := [][]string{{"code", "name"}}
	for i := range 20000 {
		many = append(many, fmt.Sprintf("<t>Person %d of the site, with a long name</t>", i))
		rows = append(rows, []string{"P1", fmt.Sprintf(` t="s"><v>%d</v>`, i+1)})
	}
	b := single(data(1, rows...))
	b.strings = many
	r, faults, err := opened(b.bytes(t), Options{TempDir: dir})
	if err != nil || len(faults) > 0 {
		t.Fatal(faults, err)
	}
	during, err := filepath.Glob(filepath.Join(dir, "*"))
	if err != nil || len(during) < 2 {
		t.Errorf("while reading there are %d temporary files, want the large parts in some: %v", len(during), err)
	}
	for n := 1; ; n++ {
		row, _, err := r.Next()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil || row.Text("name") != fmt.Sprintf("Person %d of the site, with a long name", n-1) {
			t.Fatal(row, err)
		}
	}
	if done, total := r.Progress(); done != total {
		t.Errorf("at the end, progress is %d of %d", done, total)
	}
	closed(t, r)
	for _, refused := range []written{single(data(1, []string{"nothing"})), single("<row>")} {
		if _, faults, err := opened(refused.bytes(t), Options{TempDir: dir}); err != nil || len(faults) == 0 {
			t.Error(faults, err)
		}
	}
	left, err := os.ReadDir(dir)
	if err != nil || len(left) > 0 {
		t.Errorf("left behind: %v, %v", left, err)
	}
}
