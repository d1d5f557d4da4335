package web

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"io"
	"net/url"

	"lodebook/models/book"
	"lodebook/models/table"
)

type importLeaf struct {
	page
	Say     string
	Form    *Form
	Fields  []field
	Action  string
	Report  *book.ImportReport
	Head    string
	Faults  []string
	More    int
	Kept    []string
	Notes   []string
	Ready   string // the checked file's sum: it can be brought in without choosing it again
	Table   string
	Name    string
	Partial bool
	Batches string
}

var importSheet = leafOf[importLeaf]("import")

const faultsShown = 60

func importForm(v *visit, f *Form) *importLeaf {
	f.Default("table", "people")
	p := &importLeaf{page: page{Title: "Import", Section: secImport}, Form: f, Action: v.url("import"), Batches: with(v.url("book"), "kind", "batch")}
	p.Say = "A table as CSV or XLSX, with a header row. It is checked first and nothing is written; then you bring it in. The same file twice changes nothing, and a whole import can be taken back."
	var tables []option
	for _, t := range book.Tables {
		tables = append(tables, option{Value: t, Words: upperFirst(t)})
	}
	p.Fields = []field{
		f.Choice("table", "What it holds", tables).Need(),
		f.Choice("dates", "How dates like 03/04/2025 are meant", []option{{Value: "", Words: "Refuse them"}, {Value: "dmy", Words: "Day, month, year"}, {Value: "mdy", Words: "Month, day, year"}}),
	}
	return p
}

func importPage(v *visit) error { return importSheet.show(v, 200, importForm(v, v.asked())) }

// importTable checks a file and lays it in the tray, or brings in the one that lies there.
func importTable(v *visit) error {
	if err := v.c.Request.ParseMultipartForm(8 << 20); err != nil {
		return unreadable(err)
	}
	f := &Form{Values: url.Values(v.c.Request.MultipartForm.Value)}
	doc, err := v.paper(f)
	if err != nil {
		return err
	}
	if len(f.Faults) > 0 {
		return importSheet.show(v, 422, importForm(v, f))
	}
	write := f.Get("write") != ""
	r, err := v.b.Import(v.ctx(), v.actor, book.ImportOptions{
		Table: doc.Table, Site: v.site.Code, File: bytes.NewReader(doc.Data), Size: int64(len(doc.Data)), FileName: doc.Name,
		Read: table.Options{Dates: table.DateOrder(f.Get("dates"))}, DryRun: !write, Partial: f.Get("partial") != "",
	})
	if f.Take(err) {
		f.Rename("file", "table")
		return importSheet.show(v, 422, importForm(v, f))
	}
	if err != nil {
		return err
	}
	if write && !r.Refused(f.Get("partial") != "") {
		v.tray.drop(v.actor.Account)
		if r.Batch == "" {
			return v.kept(v.url("import"), "All of it is on record already. Nothing changed.", "")
		}
		return v.kept(v.url("book", r.Batch), fmt.Sprintf("Kept: %s of %s.", count(r.Written, "row", "rows"), doc.Table), "")
	}
	return v.showReport(f, doc, r)
}

// paper is the file that was sent, or the one in the tray.
func (v *visit) paper(f *Form) (paper, error) {
	if sum := f.Get("ready"); sum != "" {
		p, ok := v.tray.get(v.actor.Account, sum, v.b.Now())
		if ok && p.Site == v.site.Code {
			return p, nil
		}
		f.Loose("file", "the checked file was laid aside too long; choose it again")
		return paper{}, nil
	}
	sent, head, err := v.c.Request.FormFile("file")
	if err != nil {
		f.Loose("file", "no file was chosen")
		return paper{}, nil
	}
	data, err := io.ReadAll(sent)
	if err != nil {
		return paper{}, unreadable(err)
	}
	if err := sent.Close(); err != nil {
		return paper{}, err
	}
	sum := sha256.Sum256(data)
	p := paper{Site: v.site.Code, Table: f.Get("table"), Name: head.Filename, Sum: hex.EncodeToString(sum[:]), Data: data, At: v.b.Now()}
	v.tray.put(v.actor.Account, p)
	return p, nil
}

func (v *visit) showReport(f *Form, doc paper, r book.ImportReport) error {
	p := importForm(v, f)
	p.Report, p.Table, p.Name, p.Ready = &r, doc.Table, doc.Name, doc.Sum
	for i, x := range r.Faults {
		if i == faultsShown {
			p.More = len(r.Faults) - faultsShown
			break
		}
		p.Faults = append(p.Faults, upperFirst(x.Error())+".")
	}
	for _, x := range r.Kept {
		p.Kept = append(p.Kept, upperFirst(x.Error())+".")
	}
	for _, n := range r.Notes {
		p.Notes = append(p.Notes, upperFirst(n)+".")
	}
	switch {
	case len(r.Faults) > 0:
		p.Head = fmt.Sprintf("%s read, %s. Nothing was written.", upperFirst(count(r.Read, "row", "rows")), count(len(r.Faults), "fault", "faults"))
		p.Partial = true
	case r.Written == 0:
		p.Head = fmt.Sprintf("%s read; all of it is on record already.", upperFirst(count(r.Read, "row", "rows")))
		p.Ready = ""
	default:
		p.Head = fmt.Sprintf("%s read without a fault; %s would be written.", upperFirst(count(r.Read, "row", "rows")), count(r.Written, "row", "rows"))
	}
	return importSheet.show(v, 200, p)
}
