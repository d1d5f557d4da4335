package book_test

import (
	"bytes"
	"fmt"
	"os"
	"strings"
	"testing"

	"lodebook/models/book"
)

// A book that is opened for one site answers about it as the whole book does, also where a record, a pause
// or an event of another site bears on it; and it is not written to.
func TestOneSiteAnswersAsTheWholeBook(t *testing.T) {
	d := bigSite(t, 40)
	source, err := os.ReadFile("testdata/site.yaml")
	d.ok(err)
	_, err = d.OpenProgram(t.Context(), d.op, bytes.ReplaceAll(source, []byte(site), []byte("OTHER")), "")
	d.ok(err)
	imp := func(at, table, csv string) {
		t.Helper()
		r, err := d.Import(t.Context(), d.op, book.ImportOptions{Table: table, Site: at, File: strings.NewReader(csv), Size: int64(len(csv)), FileName: table})
		d.ok(err)
		if len(r.Faults) > 0 || r.Written == 0 {
			t.Fatal(r)
		}
	}
	imp("OTHER", "people", "code,name,level,crew,joined,employer\nP00003,Person 3,L2,early,2024-01-01,Yard 3\nX1,Elsewhere,L2,early,2024-01-01,Yard\n")
	imp("OTHER", "records", "record,subject,on,result\ntraining/level-2,P00003,2026-02-01,fail\nscreening/staff,X1,2026-02-01,pass\n")
	imp("OTHER", "pauses", "subject,from,to,reason\nP00003,2026-02-20,2026-02-25,leave\n")
	size, err := d.KeepSnapshot(t.Context(), 1)
	d.ok(err)
	if size == 0 && driverOf(d.path) != "pgx" { // beside a database none is kept that nobody asked for
		t.Error("no snapshot was written, which is of all sites")
	}
	d.ok(d.Close())
	ask := func(only, at string) string {
		t.Helper()
		o := d.options()
		o.Site = only
		b, err := book.Open(t.Context(), d.path, o)
		d.ok(err)
		st, err := b.Standings(t.Context(), d.op, book.StandingQuery{Site: at, Why: true})
		d.ok(err)
		var out []string
		for _, r := range st.Rows {
			out = append(out, fmt.Sprint(r.Why))
		}
		if only != "" {
			if _, err := b.Record(t.Context(), d.op, at, book.RecordForm{Record: "training/level-2", Subject: "P00003", On: "2026-02-26"}, book.Correction{}); err == nil {
				t.Error("a book of which one site was read was written to")
			}
			if _, err := b.Standings(t.Context(), d.op, book.StandingQuery{Site: map[string]string{site: "OTHER", "OTHER": site}[at]}); err == nil {
				t.Error("it answers about a site that it did not read")
			}
		}
		d.ok(b.Close())
		return fmt.Sprint(dressed(st), out)
	}
	for _, at := range []string{site, "OTHER"} {
		if whole, one := ask("", at), ask(at, at); whole != one || len(whole) < 1000 {
			t.Errorf("at %s the whole book says\n%s\nand the one site\n%s", at, whole, one)
		}
	}
	b, err := book.Open(t.Context(), d.path, d.options())
	d.ok(err)
	d.Book = b // which the desk closes
}

// A book that is opened for one site sees what another program writes, also the past of somebody who is new there.
func TestOneSiteSeesWhatOthersWrite(t *testing.T) {
	d := bigSite(t, 5)
	source, err := os.ReadFile("testdata/site.yaml")
	d.ok(err)
	_, err = d.OpenProgram(t.Context(), d.op, bytes.ReplaceAll(source, []byte(site), []byte("OTHER")), "")
	d.ok(err)
	o := d.options()
	o.Site = "OTHER"
	one, err := book.Open(t.Context(), d.path, o)
	d.ok(err)
	ask := func(b *book.Book) string {
		t.Helper()
		st, err := b.Standings(t.Context(), d.op, book.StandingQuery{Site: "OTHER"})
		d.ok(err)
		return fmt.Sprint(dressed(st))
	}
	empty := ask(one)
	posted := "code,level,crew,joined,employer\nP00003,L2,early,2026-01-01,Yard 3\n"
	_, err = d.Import(t.Context(), d.op, book.ImportOptions{Table: "people", Site: "OTHER", File: strings.NewReader(posted), Size: int64(len(posted)), FileName: "people"})
	d.ok(err)
	d.record("screening/staff", "P00003", "2026-02-01", "fail")
	if whole, now := ask(d.Book), ask(one); whole != now || now == empty || !strings.Contains(now, "failed") {
		t.Errorf("the whole book says\n%s\nand the one site\n%s", whole, now)
	}
	d.ok(one.Close())
}
