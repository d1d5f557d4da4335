package book_test

import (
	"bytes"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"lodebook/models/book"
)

// TestImportWorkbook brings people in from a workbook of the 1904 date system, where serial 44105 is
// 2024-10-02 (ECMA-376 part 1, §18.17.4.1: serial 0 is 1904-01-01), and history from a
// Windows-1252 file with semicolons, as old office programs write them.
func TestImportWorkbook(t *testing.T) {
	d := newDesk(t)
	f := excelize.NewFile()
	d.ok(f.SetWorkbookProps(&excelize.WorkbookPropsOptions{Date1904: new(true)}))
	for cell, v := range map[string]any{"A1": "Code", "B1": "NAME", "C1": "Joined", "D1": "level", "A2": "P1", "B2": "Jákup Dal", "C2": 44105, "D2": "L2"} {
		d.ok(f.SetCellValue("Sheet1", cell, v))
	}
	var workbook bytes.Buffer
	d.ok(f.Write(&workbook))
	r, err := d.Import(t.Context(), d.op, book.ImportOptions{Table: "people", Site: site, File: bytes.NewReader(workbook.Bytes()), Size: int64(workbook.Len()), FileName: "people.xlsx"})
	d.ok(err)
	if r.Written != 1 || len(r.Faults) > 0 {
		t.Fatalf("%+v", r)
	}
	v, err := d.Person(t.Context(), d.officer, site, "P1", nil)
	d.ok(err)
	if v.Name != "Jákup Dal" || v.Stints[0].First.String() != "2024-10-02" {
		t.Errorf("%s, from %s", v.Name, v.Stints[0].First)
	}
	old := "record;subject;on;by\r\ntraining/level-2;P1;45993;J\xe1kup Dal\r\n;;;\r\n"
	rep := d.imp("records", old)
	if rep.Written != 1 || len(rep.Notes) == 0 || !strings.Contains(rep.Notes[0], "1 dates") {
		t.Fatalf("%+v", rep)
	}
	// Serial 45993 of the 1900 system is 2025-12-02: 43831 is 2020-01-01, and 2162 days follow.
	v, err = d.Person(t.Context(), d.officer, site, "P1", nil)
	d.ok(err)
	if v.Records[0].Day.String() != "2025-12-02" {
		t.Errorf("the training is of %s", v.Records[0].Day)
	}
}
