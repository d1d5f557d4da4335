package table

import (
	"archive/zip"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"os"
	"path"
	"strings"

	"github.com/xuri/excelize/v2"
)

// Parts of a workbook (ECMA-376 part 1, §12.3) that a table is read from.
const (
	workbookPart = "xl/workbook.xml"
	relsPart     = "xl/_rels/workbook.xml.rels"
	stringsPart  = "xl/sharedStrings.xml"
	stylesPart   = "xl/styles.xml"
	sheetsFolder = "xl/worksheets/"
)

const (
	// spoolAbove is the size, in bytes, above which sheets and shared strings are unfolded to a
	// temporary file and read from there.
	spoolAbove = 1 << 20
	// maxSmallPart bounds the parts that are always unfolded in memory.
	maxSmallPart = 8 << 20
)

// parts are those parts of a workbook's zip that are needed, by their usual names.
type parts map[string]*zip.File

// workbook is an opened XLSX file. Package excelize reads its values; sheetWalker goes through the
// same sheet beside it, tells what kind of cell each is, and vouches that nothing was lost, since
// excelize takes a sheet that breaks off for one that ends.
type workbook struct {
	size    int64
	parts   parts
	file    *excelize.File
	reduced string // a temporary file: the workbook without the parts that are not needed
	epoch   Epoch
	formats []format // by cell style
	strings int      // how many shared strings there are
}

// damaged is the fault of a workbook that cannot be read as it is.
func damaged(why any) *Fault {
	return &Fault{Problem: fmt.Sprintf("the workbook is damaged: %v", why), Accepted: openSave}
}

// guardPanic turns a panic of a library over a malformed workbook into a fault.
func guardPanic(err *error) {
	if p := recover(); p != nil {
		*err = damaged(p)
	}
}

// openWorkbook opens an XLSX file at the first visible sheet whose header row will do.
func openWorkbook(r io.ReaderAt, size int64, want wanted, o Options) (*Reader, []Fault, error) {
	found, err := findParts(r, size, o.MaxUnfolded)
	if err != nil {
		return nil, nil, err
	}
	wb := &workbook{size: size, parts: found}
	sheets, err := wb.open(o.TempDir)
	if err != nil {
		return nil, nil, errors.Join(err, wb.close())
	}
	rd, faults, err := wb.choose(sheets, want, o)
	if rd == nil {
		err = errors.Join(err, wb.close())
	}
	return rd, faults, err
}

// findParts lists the needed parts and refuses what is no XLSX file or would unfold to too much.
// The sizes that a zip declares can be trusted: package archive/zip gives no byte beyond them.
func findParts(r io.ReaderAt, size, most int64) (parts, error) {
	z, err := zip.NewReader(r, size)
	if err != nil {
		return nil, damaged(err)
	}
	found, total := parts{}, uint64(0)
	for _, f := range z.File {
		name, ok := neededPart(f.Name)
		if !ok {
			if err := otherZip(f); err != nil {
				return nil, err
			}
			continue
		}
		if found[name] != nil {
			return nil, damaged("it has two parts named " + name)
		}
		found[name] = f
		if total += f.UncompressedSize64; f.UncompressedSize64 > uint64(most) || total > uint64(most) {
			return nil, &Fault{Problem: fmt.Sprintf("the workbook unfolds to more than %d MB", most>>20), Accepted: "a smaller workbook, or CSV"}
		}
		if f.UncompressedSize64 > maxSmallPart && !spooled(name) {
			return nil, damaged(name + " is far too big")
		}
	}
	if found[workbookPart] == nil || found[relsPart] == nil {
		return nil, &Fault{Problem: "the file is a zip without a workbook in it", Accepted: aTable}
	}
	return found, nil
}

// neededPart gives the usual spelling of a part's name, if the part is one that is needed.
func neededPart(name string) (string, bool) {
	name = strings.ReplaceAll(name, `\`, "/")
	for _, usual := range []string{"[Content_Types].xml", "_rels/.rels", workbookPart, relsPart, stringsPart, stylesPart} {
		if strings.EqualFold(name, usual) {
			return usual, true
		}
	}
	return name, path.Dir(strings.ToLower(name))+"/" == sheetsFolder && strings.HasSuffix(strings.ToLower(name), ".xml")
}

// spooled tells whether excelize unfolds the part to a temporary file if it is large.
func spooled(name string) bool {
	return name == stringsPart || strings.HasPrefix(strings.ToLower(name), sheetsFolder+"sheet")
}

// otherZip knows the telling parts of other kinds of file that are zips.
func otherZip(f *zip.File) error {
	switch {
	case f.Name == "xl/workbook.bin":
		return &Fault{Problem: "the file is a binary workbook (.xlsb)", Accepted: saveAs}
	case f.Name == "mimetype":
		return &Fault{Problem: "the file is an OpenDocument file, such as .ods", Accepted: saveAs}
	case f.Name == "word/document.xml":
		return &Fault{Problem: "the file is a word processor's document, not a table", Accepted: aTable}
	}
	return nil
}

// sheet is a visible sheet and the part that holds it.
type sheet struct{ name, part string }

// open hands the workbook to excelize and lists its visible sheets in their order.
func (wb *workbook) open(tempDir string) (sheets []sheet, err error) {
	defer guardPanic(&err)
	if wb.reduced, err = wb.parts.reduce(tempDir); err != nil {
		return nil, err
	}
	if wb.strings, err = wb.countStrings(); err != nil {
		return nil, err
	}
	wb.file, err = excelize.OpenFile(wb.reduced, excelize.Options{
		RawCellValue:      true,
		UnzipSizeLimit:    excelize.UnzipSizeLimit, // findParts has kept the caller's limit
		UnzipXMLSizeLimit: spoolAbove,
		TmpDir:            tempDir,
	})
	if err != nil {
		return nil, damaged(err)
	}
	props, err := wb.file.GetWorkbookProps()
	if err != nil {
		return nil, damaged(err)
	}
	if props.Date1904 != nil && *props.Date1904 {
		wb.epoch = Epoch1904
	}
	wb.formats = formatsOf(wb.file)
	return wb.sheets()
}

// reduce copies the needed parts, still compressed, into a temporary zip, so that the pictures and
// caches of a workbook are never unfolded.
func (p parts) reduce(dir string) (name string, err error) {
	tmp, err := os.CreateTemp(dir, "lodebook-table-*.xlsx")
	if err != nil {
		return "", fmt.Errorf("making a temporary file: %w", err)
	}
	z := zip.NewWriter(tmp)
	for usual, f := range p {
		if err = copyPart(z, usual, f); err != nil {
			break
		}
	}
	if err = errors.Join(err, z.Close(), tmp.Close()); err != nil {
		return tmp.Name(), fmt.Errorf("copying the workbook: %w", err)
	}
	return tmp.Name(), nil
}

func copyPart(z *zip.Writer, usual string, f *zip.File) error {
	raw, err := f.OpenRaw()
	if err != nil {
		return damaged(err)
	}
	head := f.FileHeader
	head.Name = usual
	w, err := z.CreateRaw(&head)
	if err != nil {
		return err
	}
	_, err = io.Copy(w, raw)
	return err
}

// sheets pairs the workbook's visible sheets with their parts; sheets of charts have none.
func (wb *workbook) sheets() ([]sheet, error) {
	var rels struct {
		Relationship []struct {
			ID     string `xml:"Id,attr"`
			Target string `xml:"Target,attr"`
		}
	}
	in, err := wb.parts[relsPart].Open()
	if err != nil {
		return nil, damaged(err)
	}
	if err := errors.Join(xml.NewDecoder(in).Decode(&rels), in.Close()); err != nil {
		return nil, damaged(err)
	}
	var list []sheet
	for _, s := range wb.file.WorkBook.Sheets.Sheet {
		for _, rel := range rels.Relationship {
			part := partOf(rel.Target)
			if rel.ID == s.ID && (s.State == "" || s.State == "visible") && wb.parts[part] != nil {
				list = append(list, sheet{s.Name, part})
			}
		}
	}
	if len(list) == 0 {
		return nil, &Fault{Problem: "the workbook has no visible sheet with cells", Accepted: "the table on a visible sheet"}
	}
	return list, nil
}

func partOf(target string) string {
	target = strings.ReplaceAll(target, `\`, "/")
	if strings.HasPrefix(target, "/") {
		return path.Clean(target[1:])
	}
	return path.Join("xl", target)
}

// choose gives a Reader of the first sheet with a header row that will do. If none will, the faults
// are those of the sheet that comes nearest.
func (wb *workbook) choose(sheets []sheet, want wanted, o Options) (*Reader, []Fault, error) {
	var nearest []Fault
	var nearestErr error
	var name string
	for i, s := range sheets {
		src, err := wb.openSheet(s)
		if err != nil {
			return nil, nil, err
		}
		rd, faults, err := start(src, want, o)
		if rd != nil {
			rd.under = wb
			return rd, nil, nil
		}
		if i == 0 || nearer(faults, nearest) {
			name, nearest, nearestErr = s.name, faults, err
		}
	}
	if len(sheets) > 1 {
		nearest, nearestErr = sayNone(sheets, name, nearest, nearestErr)
	}
	return nil, nearest, nearestErr
}

// nearer tells whether header faults a are fewer than b, or b are of a first row without any
// column of the table.
func nearer(a, b []Fault) bool {
	if len(a) == 0 || len(b) == 0 {
		return len(b) == 0 && len(a) > 0
	}
	named := func(f []Fault) bool { return f[0].Column != "" }
	if named(a) != named(b) {
		return named(a)
	}
	return len(a) < len(b)
}

// sayNone says before the nearest sheet's faults that no other sheet has the header either.
func sayNone(sheets []sheet, nearest string, faults []Fault, err error) ([]Fault, error) {
	names := make([]string, len(sheets))
	for i, s := range sheets {
		names[i] = s.name
	}
	f := Fault{
		Value:    shorten(strings.Join(names, ", ")),
		Problem:  fmt.Sprintf("none of the workbook's visible sheets has the table; the faults of %q follow", nearest),
		Accepted: "the table on one of them, its header row first",
	}
	var own *Fault
	if errors.As(err, &own) {
		faults, err = []Fault{*own}, nil
	}
	return append([]Fault{f}, faults...), err
}

// close removes the temporary files.
func (wb *workbook) close() error {
	var err error
	if wb.file != nil {
		err = wb.file.Close()
		wb.file = nil
	}
	if wb.reduced != "" {
		err = errors.Join(err, os.Remove(wb.reduced))
		wb.reduced = ""
	}
	return err
}
