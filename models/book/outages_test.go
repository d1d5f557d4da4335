package book_test

import (
	"strings"
	"testing"
	"time"

	"lodebook/models/book"
)

func (d *desk) failing(actor book.Actor, id, on string) string {
	d.Helper()
	r, _, err := d.FillSheet(d.Context(), actor, site, book.SheetForm{ID: id, Record: "inspection/vent-yearly", Fixture: "V1", On: on, Values: map[string]string{"outlet_clear": "no", "clear_of_path_m": "5"}}, book.Correction{})
	d.ok(err)
	return r.Written[0]
}

// out are the subjects that are out of service, as in "fixture:V1 zone:IV".
func (d *desk) out() string {
	d.Helper()
	list, err := d.OutOfService(d.Context(), d.officer, site)
	d.ok(err)
	var out []string
	for _, l := range list {
		out = append(out, string(l.Subject.Asks)+":"+l.Subject.Code)
	}
	return strings.Join(out, " ")
}

func TestFailedSheetTakesItsFixtureOut(t *testing.T) {
	d := manned(t)
	ctx := t.Context()
	const id = "01890a5d-ac96-774b-bcce-b302099a8057"
	record := d.failing(d.officer, id, "2026-03-02 07:30")
	if got := d.out(); got != "fixture:V1 zone:IV" {
		t.Fatalf("out of service: %q", got)
	}
	list, err := d.OutOfService(ctx, d.officer, site)
	d.ok(err)
	if l := list[0]; l.Record != record || l.From.Format(time.RFC3339) != "2026-03-02T07:30:00Z" || !strings.Contains(l.Why, "failed") || l.MaySign {
		t.Errorf("%+v", l)
	}
	again, _, err := d.FillSheet(ctx, d.officer, site, book.SheetForm{ID: id, Record: "inspection/vent-yearly", Fixture: "V1", On: "2026-03-02 07:30", Values: map[string]string{"outlet_clear": "no", "clear_of_path_m": "5"}}, book.Correction{})
	d.ok(err)
	if len(again.Written) != 0 || d.out() != "fixture:V1 zone:IV" {
		t.Errorf("sent twice: %+v, %s", again, d.out())
	}
	// What is asked of it goes on being asked: it is no pause.
	if w := d.word("VENT", "V1", "2026-03-02"); w != "failed" {
		t.Errorf("the vent is %s", w)
	}
	d.now = d.now.Add(time.Hour)
	_, _, err = d.FillSheet(ctx, d.officer, site, book.SheetForm{Record: "inspection/vent-yearly", Fixture: "V1", On: "2026-03-02 08:30", Values: map[string]string{"outlet_clear": "yes", "clear_of_path_m": "5"}}, book.Correction{})
	d.ok(err)
	if list, err = d.OutOfService(ctx, d.officer, site); err != nil || len(list) != 2 || list[0].Passed == nil || list[0].Passed.String() != "2026-03-02" {
		t.Errorf("a pass is shown and signs nothing back: %+v %v", list, err)
	}
	sign := book.ReturnForm{Subject: "fixture:V1", Note: "the nest is gone"}
	if _, err := d.SignBack(ctx, d.officer, site, sign); !denied(err) {
		t.Errorf("who recorded the failure signed it back: %v", err)
	}
	for _, role := range []book.Role{book.Administrator, book.Facilities, book.Member, book.Reader} {
		if _, err := d.SignBack(ctx, d.account(string(role), role, ""), site, sign); !denied(err) {
			t.Errorf("%s signed it back: %v", role, err)
		}
	}
	if _, err := d.SignBack(ctx, d.other(), site, book.ReturnForm{Subject: "fixture:V1"}); faultOf(err) != "note" {
		t.Errorf("signed back without a word: %v", err)
	}
	sign.ID = "01890a5d-ac96-774b-bcce-b302099a8058"
	_, err = d.SignBack(ctx, d.other(), site, sign)
	d.ok(err)
	if got := d.out(); got != "" {
		t.Errorf("after it was signed back: %q", got)
	}
	if r, err := d.SignBack(ctx, d.other(), site, sign); err != nil || len(r.Unchanged) != 1 {
		t.Errorf("signed twice by one form: %+v %v", r, err)
	}
	sign.ID = ""
	if _, err := d.SignBack(ctx, d.other(), site, sign); faultOf(err) != "subject" {
		t.Errorf("signed back what is in service: %v", err)
	}
}

// Nobody gets round the signature: not by withdrawing what says that it is out, nor the failed record, nor by
// correcting it.
func TestOutageIsNotWithdrawn(t *testing.T) {
	d := manned(t)
	ctx := t.Context()
	facilities := d.account("fia", book.Facilities, "")
	record := d.failing(facilities, "", "2026-03-02")
	list, err := d.OutOfService(ctx, d.officer, site)
	d.ok(err)
	for _, a := range []book.Actor{facilities, d.officer} {
		if _, err := d.Withdraw(ctx, a, list[0].Entry, book.Correction{Reason: "slip"}); faultOf(err) != "entry" {
			t.Errorf("%s withdrew it: %v", a.Name, err)
		}
	}
	if at := list[0].From.Format(time.RFC3339); at != "2026-03-02T00:00:00Z" {
		t.Errorf("a failure with only a day takes it out from %s", at)
	}
	second, _, err := d.FillSheet(ctx, facilities, site, book.SheetForm{Record: "inspection/vent-yearly", Fixture: "V1", On: "2026-03-02", Values: map[string]string{"outlet_clear": "no", "clear_of_path_m": "4"}}, book.Correction{Supersedes: record, Reason: "wrong-result"})
	d.ok(err)
	if got := d.out(); got != "fixture:V1 zone:IV" {
		t.Errorf("a correction that fails too takes it out once more: %s", got)
	}
	if _, err = d.Withdraw(ctx, facilities, second.ID(), book.Correction{Reason: "not-done"}); err != nil {
		t.Fatal(err)
	}
	if got := d.out(); got != "fixture:V1 zone:IV" {
		t.Errorf("the failed record was withdrawn, and with it: %q", got)
	}
}

func TestOutOfServiceByHand(t *testing.T) {
	d := manned(t)
	ctx := t.Context()
	for name, c := range map[string]struct {
		f      book.OutageForm
		fields string
	}{
		"a person":   {book.OutageForm{Subject: "person:P1", Because: "x"}, "subject"},
		"nothing":    {book.OutageForm{Subject: "V9", Because: "x"}, "subject"},
		"no reason":  {book.OutageForm{Subject: "fixture:V1"}, "because"},
		"a day":      {book.OutageForm{Subject: "fixture:V1", From: "2026-03-01", Because: "x"}, "from"},
		"the future": {book.OutageForm{Subject: "zone:IV", From: "2026-03-05 08:00", Because: "x"}, "from"},
	} {
		if _, err := d.TakeOut(ctx, d.officer, site, c.f); faultOf(err) != c.fields {
			t.Errorf("%s: %q %v", name, faultOf(err), err)
		}
	}
	if _, err := d.TakeOut(ctx, d.account("reader", book.Reader, ""), site, book.OutageForm{Subject: "zone:IV", Because: "x"}); !denied(err) {
		t.Errorf("a reader took it out: %v", err)
	}
	_, err := d.TakeOut(ctx, d.account("fia", book.Facilities, ""), site, book.OutageForm{Subject: "zone:IV", Because: "water on the floor"})
	d.ok(err)
	d.failing(d.other(), "", "2026-03-02 07:00")
	if got := d.out(); got != "zone:IV fixture:V1 zone:IV" {
		t.Fatalf("out of service: %s", got)
	}
	// Signing the fixture back opens the zone as far as its failure closed it; the water stays.
	_, err = d.SignBack(ctx, d.officer, site, book.ReturnForm{Subject: "fixture:V1", Note: "cleared"})
	d.ok(err)
	if got := d.out(); got != "zone:IV" {
		t.Errorf("out of service: %s", got)
	}
	_, err = d.SignBack(ctx, d.officer, site, book.ReturnForm{Subject: "zone:IV", Note: "dry"})
	d.ok(err)
	if got := d.out(); got != "" {
		t.Errorf("out of service: %s", got)
	}
}

// Of an import only what failed when it was last looked at is taken out, and taking the import back signs nothing back.
func TestImportedFailureTakesItsFixtureOut(t *testing.T) {
	d := manned(t)
	d.vent("V2")
	const table = "record,subject,on,result\ninspection/vent-yearly,V1,2025-03-01,fail\ninspection/vent-yearly,V1,2025-03-02,pass\ninspection/vent-yearly,V2,2026-02-01,pass\ninspection/vent-yearly,V2,2026-02-20,fail\n"
	r := d.imp("records", table)
	if got := d.out(); got != "fixture:V2 zone:IV" || len(r.Notes) == 0 || !strings.Contains(r.Notes[0], "V2 is out of service") {
		t.Fatalf("out of service: %q, notes %v", got, r.Notes)
	}
	if again := d.imp("records", table); again.Written != 0 || d.out() != "fixture:V2 zone:IV" {
		t.Errorf("imported twice: %+v, %s", again, d.out())
	}
	list, err := d.OutOfService(t.Context(), d.officer, site)
	d.ok(err)
	if !list[0].From.Equal(time.Date(2026, 2, 20, 0, 0, 0, 0, time.UTC)) || !list[0].MaySign {
		t.Errorf("%+v", list[0])
	}
	_, err = d.UndoImport(t.Context(), d.op, r.Batch)
	d.ok(err)
	if got := d.out(); got != "fixture:V2 zone:IV" {
		t.Errorf("after the import was taken back: %q", got)
	}
	if dry, err := d.try("records", "record,subject,on,result\ninspection/vent-yearly,V1,2026-02-28,fail\n", book.ImportOptions{DryRun: true}); err != nil || d.out() != "fixture:V2 zone:IV" {
		t.Errorf("a dry run took something out: %+v %v", dry, err)
	}
}
