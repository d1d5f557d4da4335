package table

import (
	"archive/zip"
	"bytes"
	"cmp"
	"fmt"
	"io"
	"strings"
	"testing"
)

// written is a workbook written here by hand, from ECMA-376 part 1, so that what reads it is not
// what wrote it.
type written struct {
	sheets   []writtenSheet
	date1904 bool
	strings  []string // the shared strings, each the content of an si element
	formats  []string // codes of the cell styles 1, 2, ...; style 0 is General
	extra    map[string]string
	without  string // a part to leave out
}

type writtenSheet struct{ name, state, data string } // data: the content of the sheetData element

const (
	mainNS    = `xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"`
	relNS     = `xmlns:r="http://schemas.openxmlformats.org/officeDocument/2006/relationships"`
	packageNS = `xmlns="http://schemas.openxmlformats.org/package/2006/relationships"`
	officeRel = "http://schemas.openxmlformats.org/officeDocument/2006/relationships/"
)

// write writes the workbook's zip.
func (b written) write(t testing.TB, w io.Writer) {
	t.Helper()
	z := zip.NewWriter(w)
	for name, content := range b.parts() {
		if name == b.without {
			continue
		}
		f, err := z.Create(name)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := io.WriteString(f, content); err != nil {
			t.Fatal(err)
		}
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
}

func (b written) bytes(t testing.TB) []byte {
	var buf bytes.Buffer
	b.write(t, &buf)
	return buf.Bytes()
}

func (b written) parts() map[string]string {
	var sheets, rels, formats, styles strings.Builder
	parts := map[string]string{
		"[Content_Types].xml": `<Types xmlns="http://schemas.openxmlformats.org/package/2006/content-types"><Default Extension="xml" ContentType="application/xml"/></Types>`,
		"_rels/.rels":         fmt.Sprintf(`<Relationships %s><Relationship Id="rId1" Type="%sofficeDocument" Target="xl/workbook.xml"/></Relationships>`, packageNS, officeRel),
	}
	for i, s := range b.sheets {
		fmt.Fprintf(&sheets, `<sheet name="%s" sheetId="%d" state="%s" r:id="rId%d"/>`, s.name, i+1, cmp.Or(s.state, "visible"), i+1)
		fmt.Fprintf(&rels, `<Relationship Id="rId%d" Type="%sworksheet" Target="worksheets/sheet%d.xml"/>`, i+1, officeRel, i+1)
		parts[fmt.Sprintf("xl/worksheets/sheet%d.xml", i+1)] = fmt.Sprintf(`<?xml version="1.0"?><worksheet %s><sheetData>%s</sheetData></worksheet>`, mainNS, s.data)
	}
	for i, code := range b.formats {
		fmt.Fprintf(&formats, `<numFmt numFmtId="%d" formatCode="%s"/>`, 164+i, code)
		fmt.Fprintf(&styles, `<xf numFmtId="%d"/>`, 164+i)
	}
	parts["xl/styles.xml"] = fmt.Sprintf(`<styleSheet %s><numFmts count="%d">%s</numFmts><cellXfs><xf numFmtId="0"/>%s</cellXfs></styleSheet>`, mainNS, len(b.formats), &formats, &styles)
	if b.strings != nil {
		parts["xl/sharedStrings.xml"] = fmt.Sprintf(`<sst %s><si>%s</si></sst>`, mainNS, strings.Join(b.strings, "</si><si>"))
		fmt.Fprintf(&rels, `<Relationship Id="rId99" Type="%ssharedStrings" Target="sharedStrings.xml"/>`, officeRel)
	}
	parts["xl/workbook.xml"] = fmt.Sprintf(`<workbook %s %s><workbookPr date1904="%t"/><sheets>%s</sheets></workbook>`, mainNS, relNS, b.date1904, &sheets)
	parts["xl/_rels/workbook.xml.rels"] = fmt.Sprintf(`<Relationships %s>%s</Relationships>`, packageNS, &rels)
	for name, content := range b.extra {
		parts[name] = content
	}
	return parts
}

// data writes a sheet's rows: each cell is the inside of a c element from its attributes on, as
// ` t="str"><v>x</v>`, or a plain text, or "" for no cell.
func data(first int, rows ...[]string) string {
	var b strings.Builder
	for i, row := range rows {
		fmt.Fprintf(&b, `<row r="%d">`, first+i)
		for j, cell := range row {
			if cell == "" {
				continue
			}
			if !strings.HasPrefix(cell, " ") && !strings.HasPrefix(cell, ">") {
				cell = ` t="inlineStr"><is><t>` + cell + `</t></is>`
			}
			fmt.Fprintf(&b, `<c r="%c%d"%s</c>`, 'A'+j, first+i, cell)
		}
		b.WriteString("</row>")
	}
	return b.String()
}

// single is a workbook of one sheet.
func single(rows string) written { return written{sheets: []writtenSheet{{name: "Staff", data: rows}}} }
