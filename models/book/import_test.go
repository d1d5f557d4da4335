package book_test

import (
	"errors"
	"fmt"
	"strings"
	"testing"
	"time"

	"lodebook/models/book"
	"lodebook/models/standing"
	"lodebook/models/table"
)

const threePeople = "code,name,email,level,crew,joined,employer\n" +
	"P1,Runa Sandoy,runa@skerry.example,L2,early,2025-02-01,Skerry Works\n" +
	"P2,Teis Joensen,,L1,night,2025-03-01,\n" +
	"P3,\"Holm, Sanna\",,L1,,2025-04-01,\n"

func TestImportTwiceChangesNothing(t *testing.T) {
	d := newDesk(t)
	for name, csv := range map[string]string{
		"people":   threePeople,
		"fixtures": "code,kind,name,zone,since,outlet_height_m\nV1,vent,North vent,IV,2025-01-15,6.50\nD1,detector,Entrance,III,2025-01-15,\n",
	} {
		if r := d.imp(name, csv); len(r.Faults) > 0 || r.Written != r.Read || r.Batch == "" {
			t.Fatalf("%s: %+v", name, r)
		}
		r := d.imp(name, csv)
		if r.Written != 0 || r.Unchanged != r.Read || r.Batch != "" || len(r.Kept) > 0 {
			t.Errorf("%s, second import: %+v", name, r)
		}
	}
	for name, csv := range map[string]string{
		"records":  "record,subject,on,result,note\ntraining/level-2,P1,2025-05-01,pass,a\ntraining/level-2,P1,2025-05-01,pass,a\ntraining/level-2,P1,2025-05-01,fail,\ntraining/level-2,P1,2025-05-01,pass,a\n",
		"events":   "event,subject,on\nroof-work,V1,2026-01-05\n",
		"excusals": "item,subject,from,to,reason\nINDUCTION,P2,2026-01-01,2026-02-01,away\n",
		"pauses":   "subject,from,to,reason\nP2,2026-01-01,,leave\n",
	} {
		first := d.imp(name, csv)
		if len(first.Faults) > 0 || first.Written == 0 {
			t.Fatalf("%s: %+v", name, first)
		}
		if r := d.imp(name, csv); r.Written != 0 || r.Unchanged != r.Read {
			t.Errorf("%s, second import: %+v", name, r)
		}
		if name == "records" && first.Written != 3 {
			t.Errorf("equal rows that follow one another are one: %d of 4 rows written, want 3", first.Written)
		}
	}
}

func TestImportRefusesWhole(t *testing.T) {
	d := newDesk(t)
	csv := threePeople + "P4,,,,,,\nP5,Una Dahl,,L9,early,2025-02-30,\n"
	r := d.imp("people", csv)
	if r.Written != 0 || r.Batch != "" || len(r.Faults) < 3 {
		t.Fatalf("%+v", r)
	}
	for i, want := range []table.Fault{{Line: 5, Column: "name"}, {Line: 6, Column: "joined", Value: "2025-02-30"}, {Line: 6, Column: "level", Value: "L9"}} {
		if f := r.Faults[i]; f.Line != want.Line || f.Column != want.Column || want.Value != "" && f.Value != want.Value || f.Problem == "" || f.Accepted == "" {
			t.Errorf("fault %d is %+v, want %+v", i, f, want)
		}
	}
	list, err := d.People_(t.Context(), d.officer)
	d.ok(err)
	if len(list) != 0 {
		t.Errorf("%d people stayed of a refused import", len(list))
	}
	part, err := d.try("people", csv, book.ImportOptions{Partial: true})
	d.ok(err)
	if part.Written != 3 || len(part.Faults) != len(r.Faults) {
		t.Errorf("partial: %+v", part)
	}
	dry, err := d.try("people", "code,name\nP9,Nils Lund\n", book.ImportOptions{DryRun: true})
	d.ok(err)
	if dry.Written != 1 || dry.Batch != "" {
		t.Errorf("dry run: %+v", dry)
	}
	list, err = d.People_(t.Context(), d.officer)
	d.ok(err)
	if len(list) != 3 {
		t.Errorf("%d people after a partial import and a dry run, want 3", len(list))
	}
}

func TestImportUndoneCanBeImportedAgain(t *testing.T) {
	d := newDesk(t)
	d.imp("people", threePeople)
	csv := "record,subject,on\ntraining/level-2,P1,2026-01-15\n"
	r := d.imp("records", csv)
	if w := d.word("TRAIN-L2", "P1", "2026-03-02"); w != standing.Met {
		t.Fatalf("imported: %s", w)
	}
	_, err := d.UndoImport(t.Context(), d.op, r.Batch)
	d.ok(err)
	if w := d.word("TRAIN-L2", "P1", "2026-03-02"); w != standing.Missing {
		t.Fatalf("taken back: %s", w)
	}
	var stale *book.Stale
	if _, err := d.UndoImport(t.Context(), d.op, r.Batch); !errors.As(err, &stale) {
		t.Errorf("taken back twice: %v", err)
	}
	if r := d.imp("records", csv); r.Written != 1 {
		t.Fatalf("again: %+v", r)
	}
	if w := d.word("TRAIN-L2", "P1", "2026-03-02"); w != standing.Met {
		t.Fatalf("imported again: %s", w)
	}
	if r := d.imp("records", csv); r.Written != 0 || r.Unchanged != 1 {
		t.Errorf("and once more: %+v", r)
	}
}

func TestImportDoesNotUndoLaterEdits(t *testing.T) {
	d := newDesk(t)
	ctx := t.Context()
	d.imp("people", threePeople)
	r := d.imp("records", "record,subject,on\ntraining/level-2,P1,2026-01-15\n")
	entries, err := d.Entries(ctx, d.officer, book.EntryQuery{Batch: r.Batch, Limit: 5})
	d.ok(err)
	_, err = d.Withdraw(ctx, d.officer, entries[0].ID, book.Correction{Reason: "not-done"})
	d.ok(err)
	again := d.imp("records", "record,subject,on\ntraining/level-2,P1,2026-01-15\n")
	if again.Written != 0 || len(again.Kept) != 1 || again.Kept[0].Line != 2 {
		t.Errorf("a withdrawn record came back: %+v", again)
	}
	_, err = d.KeepPerson(ctx, d.officer, site, book.PersonForm{Code: "P1", Name: "Runa Sandoy Dal", Level: "L1"}, book.Correction{})
	d.ok(err)
	for name, csv := range map[string]string{
		"the same file":               threePeople,
		"a file with another e-mail":  strings.Replace(threePeople, "runa@skerry", "r.s@skerry", 1),
		"a file with another surname": strings.Replace(threePeople, "L2,early,2025-02-01,Skerry Works", "L2,early,2025-02-01,Skerry Yard", 1),
	} {
		r := d.imp("people", csv)
		if r.Written != 0 || len(r.Kept) != 1 || r.Kept[0].Line != 2 {
			t.Errorf("%s: %+v", name, r)
		}
	}
	v, err := d.Person(ctx, d.officer, site, "P1", nil)
	d.ok(err)
	if v.Name != "Runa Sandoy Dal" || v.Level != "L1" {
		t.Errorf("the later edit was undone: %s, %s", v.Name, v.Level)
	}
}

func TestImportChangesHoldFromTheirDay(t *testing.T) {
	d := newDesk(t)
	d.imp("people", threePeople)
	r := d.imp("people", "code,level,from\nP2,L2,2026-02-10\n")
	if r.Written != 1 {
		t.Fatalf("%+v", r)
	}
	if w := d.word("TRAIN-L2", "P2", "2026-02-09"); w != "" {
		t.Errorf("the day before the change: %s", w)
	}
	if w := d.word("TRAIN-L2", "P2", "2026-02-10"); w == "" {
		t.Error("the change does not hold from its day")
	}
	if w := d.word("INDUCTION", "P2", "2026-02-10"); w != standing.Missing {
		t.Errorf("a file without a column took something off: %s", w)
	}
}

func TestImportStints(t *testing.T) {
	d := newDesk(t)
	r := d.imp("people", "code,name,level,joined,left\nP1,Runa Sandoy,L1,2025-02-01,2025-08-31\nP1,Runa Sandoy,L2,2026-01-01,\n")
	if r.Written != 2 || len(r.Faults) > 0 {
		t.Fatalf("%+v", r)
	}
	for day, want := range map[string]standing.Word{"2025-01-31": "", "2025-02-01": standing.Closing, "2025-08-31": standing.Missing, "2025-09-01": "", "2025-12-31": "", "2026-01-01": standing.Closing} {
		if w := d.word("INDUCTION", "P1", day); w != want {
			t.Errorf("on %s: %q, want %q", day, w, want)
		}
	}
	over := d.imp("people", "code,joined,left\nP1,2025-08-31,2025-10-01\n")
	if len(over.Faults) != 1 || over.Faults[0].Column != "joined" {
		t.Errorf("overlapping stints: %+v", over)
	}
	older := d.imp("people", "code,name,email,level,joined,left\nP1,Runa Sandoy,new@skerry.example,L1,2025-02-01,2025-08-31\n")
	if older.Written != 1 {
		t.Fatalf("%+v", older)
	}
	v, err := d.Person(t.Context(), d.officer, site, "P1", nil)
	d.ok(err)
	if v.Level != "L2" || v.Email != "new@skerry.example" {
		t.Errorf("a row about the earlier stint changed the present level to %s (e-mail %s)", v.Level, v.Email)
	}
}

func TestImportedExcusalWaits(t *testing.T) {
	d := newDesk(t)
	d.imp("people", threePeople)
	csv := "item,subject,from,to,reason,approved_by,opens\nTRAIN-L2,P1,2026-01-01,2026-06-01,course put off,O. Berg,yes\n"
	d.imp("excusals", csv)
	v, err := d.Person(t.Context(), d.officer, site, "P1", nil)
	d.ok(err)
	x := v.Excusals[0]
	if x.Opens || !x.Waiting || x.ApprovedBy != "O. Berg" || v.Held != "" {
		t.Fatalf("an operator's import opened: %+v, held %q", x, v.Held)
	}
	_, err = d.ConfirmExcusal(t.Context(), d.officer, x.Entry)
	d.ok(err)
	v, err = d.Person(t.Context(), d.officer, site, "P1", nil)
	d.ok(err)
	if v.Held != "L2" {
		t.Errorf("confirmed by an officer, the held level is %q", v.Held)
	}
}

func TestSubjectsOfTwoKindsWithOneCode(t *testing.T) {
	d := newDesk(t)
	d.imp("people", "code,name\nV1,Vidar One\n")
	d.imp("fixtures", "code,kind,name\nV1,vent,North vent\n")
	r := d.imp("records", "record,subject,on\ninspection/vent-yearly,V1,2026-01-05\n")
	if len(r.Faults) != 1 || !strings.Contains(r.Faults[0].Accepted, "fixture:V1") {
		t.Errorf("an ambiguous code: %+v", r.Faults)
	}
	if r := d.imp("records", "record,subject,on\ninspection/vent-yearly,fixture:V1,2026-01-05\n"); r.Written != 1 {
		t.Errorf("kind:code: %+v", r)
	}
}

func TestRecordRowsThatCannotBe(t *testing.T) {
	d := newDesk(t)
	d.imp("people", threePeople)
	for row, column := range map[string]string{
		"traning/level-2,P1,2026-01-05,pass,,":             "record",
		"training/level-2,P99,2026-01-05,pass,,":           "subject",
		"training/level-2,P1,2026-03-03,pass,,":            "on",
		"training/level-2,P1,03/04/2025,pass,,":            "on",
		"training/level-2,P1,2026-01-05,maybe,,":           "result",
		"training/level-2,P1,2026-01-05,pass,2026-01-04,":  "until",
		"training/level-2,P1,2026-01-05,pass,,V":           "limit",
		"appointment/MRSE,P1,2026-01-05,pass,,":            "record",
		"training/level-2,P1,2026-02-29,pass,,":            "on",
		"training/level-2,,2026-01-05,pass,,":              "subject",
		"training/level-2,P1,,pass,,":                      "on",
		"training/level-2,P1,2026-01-05,pass,next spring,": "until",
	} {
		r := d.imp("records", "record,subject,on,result,until,limit\n"+row+"\n")
		if len(r.Faults) == 0 || r.Faults[0].Column != column || r.Faults[0].Line != 2 || r.Written != 0 {
			t.Errorf("%s: %+v, want a fault in %s", row, r.Faults, column)
		}
	}
}

// TestManyRecords imports what a big site has of five years and looks at one standing.
func TestManyRecords(t *testing.T) {
	d := newDesk(t)
	var people, records strings.Builder
	people.WriteString("code,name,level,joined\n")
	records.WriteString("record,subject,on\n")
	day := time.Date(2021, 1, 4, 0, 0, 0, 0, time.UTC)
	for p := range 200 {
		fmt.Fprintf(&people, "P%d,Person %d,L2,2021-01-01\n", p, p)
		for r := range 100 {
			fmt.Fprintf(&records, "training/level-2,P%d,%s\n", p, day.AddDate(0, 0, r*18+p%7).Format("2006-01-02"))
		}
	}
	if r := d.imp("people", people.String()); r.Written != 200 {
		t.Fatalf("%+v", r)
	}
	if r := d.imp("records", records.String()); r.Written != 20000 {
		t.Fatalf("%d of 20000 records written", r.Written)
	}
	if r := d.imp("records", records.String()); r.Unchanged != 20000 {
		t.Fatalf("second import: %d unchanged", r.Unchanged)
	}
	if w := d.word("TRAIN-L2", "P7", "2026-03-02"); w != standing.Met {
		t.Errorf("P7: %s", w)
	}
	report, err := d.Verify(t.Context(), nil)
	d.ok(err)
	if report.FirstFault != "" || report.Entries != report.Checked {
		t.Errorf("%+v", report)
	}
}
