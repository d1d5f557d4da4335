package book_test

import (
	"errors"
	"os"
	"strings"
	"sync"
	"testing"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
)

// The words that must never be read by whoever is not a safety officer.
const (
	secretWhat   = "the trolley flew at the bore"
	secretWho    = "Runa and a visitor in green"
	secretAction = "the table was pulled out"
	secretDoing  = "tether the green trolley"
)

func incidentForm() book.IncidentForm {
	return book.IncidentForm{Kind: "projectile", Zone: "IV", At: "2026-02-27 08:30", Severity: "high", What: secretWhat, Who: secretWho, Action: secretAction, People: []string{"P1"}}
}

// fillRemedies puts incidents, remedies and what is out of service on record.
func (d *desk) fillRemedies() {
	d.Helper()
	ctx := d.Context()
	d.extended()
	_, err := d.ReportIncident(ctx, d.officer, site, incidentForm())
	d.ok(err)
	_, err = d.MarkReported(ctx, d.officer, site, 1, book.IncidentReportForm{Report: "BODY", Day: "2026-03-02", Reference: "case of the trolley"})
	d.ok(err)
	_, err = d.KeepRemedy(ctx, d.officer, site, book.RemedyForm{Incident: "1", Severity: "high", Owner: "P2", Due: "2026-03-20", Because: "the part comes late", What: secretDoing})
	d.ok(err)
	done, err := d.RemedyDone(ctx, d.officer, site, 1, book.RemedyDoneForm{Day: "2026-03-02", By: "Teis Joensen", Note: "tethered"})
	d.ok(err)
	_, err = d.CheckRemedy(ctx, d.other(), site, 1, book.RemedyCheckForm{Done: done.ID(), Note: "it holds"})
	d.ok(err)
	_, err = d.TakeOut(ctx, d.officer, site, book.OutageForm{Subject: "fixture:V1", From: "2026-03-01 10:00", Because: "the flap sticks"})
	d.ok(err)
	_, err = d.SignBack(ctx, d.officer, site, book.ReturnForm{Subject: "fixture:V1", Note: "the flap was freed"})
	d.ok(err)
}

// other is a second safety officer.
func (d *desk) other() book.Actor {
	d.Helper()
	if a, err := d.ActorNamed(d.Context(), "odin"); err == nil {
		return a
	}
	return d.account("odin", book.SafetyOfficer, "")
}

// manned is a desk with people, a vent and a detector.
func manned(t *testing.T) *desk {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	d.person("P2", "Teis Joensen", "L1")
	d.vent("V1")
	d.extended()
	return d
}

// extended gives the site a rule for reports, and a sheet that takes its fixture out of service.
func (d *desk) extended(pairs ...string) {
	d.Helper()
	source, err := os.ReadFile("testdata/site.yaml")
	d.ok(err)
	text := strings.Replace(string(source), "items:", "reports: [{code: BODY, to: The body that is told, within: 3, days: working, kinds: [projectile, burn]}]\nitems:", 1)
	text = strings.Replace(text, "    on_fail: Call", "    on_fail_out: true\n    also_zone: true\n    back_by_another: true\n    on_fail: Call", 1)
	text = strings.NewReplacer(pairs...).Replace(text)
	_, err = d.OpenProgram(d.Context(), d.op, []byte(text), "")
	d.ok(err)
}

func (d *desk) remedy(f book.RemedyForm) int {
	d.Helper()
	if f.What == "" {
		f.What = "put it right"
	}
	r, err := d.KeepRemedy(d.Context(), d.officer, site, f)
	d.ok(err)
	list, err := d.Remedies(d.Context(), d.officer, site, false)
	d.ok(err)
	for _, l := range list {
		if l.Entry == r.ID() {
			return l.Number
		}
	}
	d.Fatal("the remedy is not listed")
	return 0
}

// overdue are the codes of what is overdue on a day, as gaps.
func (d *desk) overdue(item, on string) []string {
	d.Helper()
	day, err := civil.ParseDay(on)
	d.ok(err)
	st, err := d.Standings(d.Context(), d.op, book.StandingQuery{Site: site, On: &day, Item: item})
	d.ok(err)
	var out []string
	for _, r := range st.Gaps() {
		out = append(out, r.Subject.Code)
	}
	return out
}

func denied(err error) bool {
	var no *book.Denied
	return errors.As(err, &no)
}

func faultOf(err error) string {
	var bad *book.Invalid
	if !errors.As(err, &bad) {
		return ""
	}
	var fields []string
	for _, f := range bad.Faults {
		fields = append(fields, f.Field)
	}
	return strings.Join(fields, " ")
}

func TestRemedyFromDueToClosed(t *testing.T) {
	d := manned(t)
	ctx := t.Context()
	n := d.remedy(book.RemedyForm{Item: "VENT", Subject: "fixture:V1", Severity: "high", Owner: "Teis Joensen"})
	low := d.remedy(book.RemedyForm{Item: "VENT", Subject: "fixture:V1", Severity: "low", Owner: "olga"})
	list, err := d.Remedies(ctx, d.officer, site, true)
	d.ok(err)
	if len(list) != 2 || list[0].Number != low || !list[0].Mine || list[0].Due.String() != "2026-05-31" || list[1].Due.String() != "2026-03-09" || list[1].Owner != "P2" || !list[1].Confirm {
		t.Fatalf("%+v", list)
	}
	for on, want := range map[string]int{"2026-03-01": 0, "2026-03-09": 0, "2026-03-10": 1, "2026-06-01": 2} {
		if got := d.overdue("remedy", on); len(got) != want {
			t.Errorf("overdue on %s: %v", on, got)
		}
	}
	d.now = d.now.AddDate(0, 0, 8)
	owner := d.account("teis", book.Member, "P2")
	done, err := d.RemedyDone(ctx, owner, site, n, book.RemedyDoneForm{Day: "2026-03-08"})
	d.ok(err)
	if got := d.overdue("remedy", "2026-03-10"); len(got) != 1 {
		t.Errorf("done and not confirmed by its due day: %v", got)
	}
	_, err = d.CheckRemedy(ctx, d.officer, site, n, book.RemedyCheckForm{Done: done.ID(), Refused: true})
	if faultOf(err) != "note" {
		t.Errorf("sent back without a reason: %v", err)
	}
	_, err = d.CheckRemedy(ctx, d.officer, site, n, book.RemedyCheckForm{Done: done.ID(), Refused: true, Note: "it still sticks"})
	d.ok(err)
	if _, err = d.RemedyDone(ctx, owner, site, n, book.RemedyDoneForm{Day: "2026-03-08"}); faultOf(err) != "day" {
		t.Errorf("done again before it was sent back: %v", err)
	}
	again, err := d.RemedyDone(ctx, owner, site, n, book.RemedyDoneForm{Day: "2026-03-10"})
	d.ok(err)
	if _, err = d.CheckRemedy(ctx, d.officer, site, n, book.RemedyCheckForm{Done: done.ID()}); faultOf(err) != "remedy" {
		t.Errorf("confirmed what was sent back: %v", err)
	}
	_, err = d.CheckRemedy(ctx, d.officer, site, n, book.RemedyCheckForm{Done: again.ID()})
	d.ok(err)
	view, err := d.Remedy(ctx, d.officer, site, n)
	d.ok(err)
	if view.State != book.RemedyClosed || len(view.History) != 5 || view.Overdue {
		t.Errorf("%+v", view)
	}
	// A miss stays a miss: the tenth was late, the day itself is mended.
	if got := d.overdue("remedy", "2026-03-10"); len(got) != 0 {
		t.Errorf("closed on the tenth and a gap that day: %v", got)
	}
	if got := d.overdue("remedy", "2026-06-01"); len(got) != 1 || got[0] != "2" {
		t.Errorf("in June: %v", got)
	}
}

// A duration that ends on a day that a month does not have ends on its last: 29 February of 2024 and 2028 exist.
func TestRemedyDueOnALeapDay(t *testing.T) {
	d := manned(t)
	d.extended("reports:", "remedies: [{severity: slow, due: P1M}, {severity: year, due: P1Y}]\nreports:")
	for _, c := range []struct{ made, severity, due string }{{"2027-12-31", "slow", "2028-01-31"}, {"2028-01-31", "slow", "2028-02-29"}, {"2028-02-29", "year", "2029-02-28"}} {
		at, err := time.Parse(time.DateOnly, c.made)
		d.ok(err)
		d.now = at.Add(12 * time.Hour)
		n := d.remedy(book.RemedyForm{Item: "VENT", Subject: "fixture:V1", Severity: c.severity, Owner: "P2"})
		v, err := d.Remedy(t.Context(), d.officer, site, n)
		d.ok(err)
		if v.Due.String() != c.due {
			t.Errorf("made %s: due %s, want %s", c.made, v.Due, c.due)
		}
	}
}

func TestNobodyConfirmsForThemselves(t *testing.T) {
	d := manned(t)
	ctx := t.Context()
	mine := d.account("runa", book.SafetyOfficer, "P1")
	twin := d.account("runa2", book.SafetyOfficer, "P1") // another account of the same person
	third := d.other()
	owned := d.remedy(book.RemedyForm{Item: "VENT", Subject: "fixture:V1", Severity: "high", Owner: "P1"})
	done, err := d.RemedyDone(ctx, d.officer, site, owned, book.RemedyDoneForm{Day: "2026-03-02"})
	d.ok(err)
	for _, a := range []book.Actor{mine, twin, d.officer} {
		if _, err := d.CheckRemedy(ctx, a, site, owned, book.RemedyCheckForm{Done: done.ID()}); !denied(err) {
			t.Errorf("%s confirmed: %v", a.Name, err)
		}
	}
	byRuna := d.remedy(book.RemedyForm{Item: "VENT", Subject: "fixture:V1", Severity: "high", Owner: "P2"})
	did, err := d.RemedyDone(ctx, d.officer, site, byRuna, book.RemedyDoneForm{Day: "2026-03-02", By: "Runa Sandoy"})
	d.ok(err)
	if _, err := d.CheckRemedy(ctx, mine, site, byRuna, book.RemedyCheckForm{Done: did.ID()}); !denied(err) {
		t.Errorf("who did it confirmed it: %v", err)
	}
	for _, role := range []book.Role{book.Administrator, book.Facilities, book.Member, book.Reader} {
		if _, err := d.CheckRemedy(ctx, d.account(string(role), role, ""), site, byRuna, book.RemedyCheckForm{Done: did.ID()}); !denied(err) {
			t.Errorf("%s confirmed: %v", role, err)
		}
	}
	_, err = d.CheckRemedy(ctx, third, site, owned, book.RemedyCheckForm{Done: done.ID()})
	d.ok(err)
	// Its owner neither gets more time nor withdraws it by themselves.
	open := d.remedy(book.RemedyForm{Item: "VENT", Subject: "fixture:V1", Severity: "low", Owner: "P1"})
	view, err := d.Remedy(ctx, d.officer, site, open)
	d.ok(err)
	later := book.RemedyForm{Severity: "low", Owner: "P1", Due: "2026-12-01", Because: "busy", What: "put it right"}
	if _, err := d.ChangeRemedy(ctx, mine, site, open, later, book.Correction{Reason: "other", ReasonText: "busy"}); !denied(err) {
		t.Errorf("the owner got more time: %v", err)
	}
	if _, err := d.Withdraw(ctx, mine, view.Entry, book.Correction{Reason: "not-done"}); !denied(err) {
		t.Errorf("the owner withdrew it: %v", err)
	}
	if _, err := d.KeepRemedy(ctx, mine, site, book.RemedyForm{Item: "VENT", Subject: "fixture:V1", Severity: "high", Owner: "P1", Due: "2027-01-01", Because: "busy", What: "x"}); !denied(err) {
		t.Errorf("an officer gave themselves more time: %v", err)
	}
	_, err = d.ChangeRemedy(ctx, third, site, open, later, book.Correction{Reason: "other", ReasonText: "busy"})
	d.ok(err)
	if view, err = d.Remedy(ctx, d.officer, site, open); err != nil || view.Due.String() != "2026-12-01" || view.Because != "busy" || len(view.History) != 2 {
		t.Errorf("%+v %v", view, err)
	}
}

func TestTwoConfirmAtOnce(t *testing.T) {
	d := manned(t)
	n := d.remedy(book.RemedyForm{Item: "VENT", Subject: "fixture:V1", Severity: "high", Owner: "P2"})
	done, err := d.RemedyDone(t.Context(), d.account("teis", book.Member, "P2"), site, n, book.RemedyDoneForm{Day: "2026-03-02"})
	d.ok(err)
	officers := []book.Actor{d.officer, d.other()}
	errs := make([]error, len(officers))
	var all sync.WaitGroup
	for i, a := range officers {
		all.Go(func() {
			_, errs[i] = d.CheckRemedy(t.Context(), a, site, n, book.RemedyCheckForm{Done: done.ID(), Refused: i == 1, Note: "looked at it"})
		})
	}
	all.Wait()
	if (errs[0] == nil) == (errs[1] == nil) {
		t.Fatalf("one of two is to be taken: %v, %v", errs[0], errs[1])
	}
	v, err := d.Remedy(t.Context(), d.officer, site, n)
	d.ok(err)
	if len(v.History) != 3 || (v.State == book.RemedyClosed) != (errs[0] == nil) {
		t.Errorf("%+v", v)
	}
}

func TestRemediesOfTwoAtOnceHaveTwoNumbers(t *testing.T) {
	d := manned(t)
	var all sync.WaitGroup
	for range 8 {
		all.Go(func() {
			_, err := d.KeepRemedy(t.Context(), d.officer, site, book.RemedyForm{Item: "VENT", Subject: "fixture:V1", Severity: "low", Owner: "P2", What: "x"})
			if err != nil {
				t.Error(err)
			}
		})
	}
	all.Wait()
	list, err := d.Remedies(t.Context(), d.officer, site, false)
	d.ok(err)
	seen := map[int]bool{}
	for _, l := range list {
		seen[l.Number] = true
	}
	if len(seen) != 8 {
		t.Errorf("%d numbers", len(seen))
	}
}

func TestBadRemedies(t *testing.T) {
	d := manned(t)
	passed := d.record("training/level-2", "P1", "2026-01-15", "pass")
	failed := d.record("training/level-2", "P1", "2026-01-16", "fail")
	good := book.RemedyForm{Record: failed, Severity: "low", Owner: "P2", What: "teach again"}
	for name, c := range map[string]struct {
		change func(*book.RemedyForm)
		fields string
	}{
		"for nothing":                  {func(f *book.RemedyForm) { f.Record = "" }, "for"},
		"for two things":               {func(f *book.RemedyForm) { f.Item, f.Subject = "VENT", "fixture:V1" }, "for"},
		"a passed record":              {func(f *book.RemedyForm) { f.Record = passed }, "record"},
		"no such incident":             {func(f *book.RemedyForm) { f.Record, f.Incident = "", "9" }, "incident"},
		"a number that is none":        {func(f *book.RemedyForm) { f.Record, f.Incident = "", "one" }, "incident"},
		"no item":                      {func(f *book.RemedyForm) { f.Record, f.Item, f.Subject = "", "NONE", "fixture:V1" }, "item"},
		"no subject":                   {func(f *book.RemedyForm) { f.Record, f.Item = "", "VENT" }, "subject"},
		"no severity":                  {func(f *book.RemedyForm) { f.Severity = "terrible" }, "severity"},
		"nobody":                       {func(f *book.RemedyForm) { f.Owner = "nobody at all" }, "owner"},
		"no text":                      {func(f *book.RemedyForm) { f.What = " " }, "what"},
		"no day":                       {func(f *book.RemedyForm) { f.Due = "soon" }, "due"},
		"before it is made":            {func(f *book.RemedyForm) { f.Due, f.Because = "2026-03-01", "x" }, "due"},
		"another day without a reason": {func(f *book.RemedyForm) { f.Due = "2026-04-01" }, "because"},
		"no such record":               {func(f *book.RemedyForm) { f.Record = "01890a5d-ac96-774b-bcce-b302099a8057" }, ""},
	} {
		f := good
		c.change(&f)
		if _, err := d.KeepRemedy(t.Context(), d.officer, site, f); err == nil || faultOf(err) != c.fields {
			t.Errorf("%s: %q, %v", name, faultOf(err), err)
		}
	}
	f := good
	f.ID = "01890a5d-ac96-774b-bcce-b302099a8057"
	first, err := d.KeepRemedy(t.Context(), d.officer, site, f)
	d.ok(err)
	again, err := d.KeepRemedy(t.Context(), d.officer, site, f)
	d.ok(err)
	if len(first.Written) != 1 || len(again.Unchanged) != 1 {
		t.Errorf("sent twice: %+v, %+v", first, again)
	}
}

func TestReportsToOutsideBodies(t *testing.T) {
	d := manned(t)
	ctx := t.Context()
	f := incidentForm()
	f.At = "2026-02-27 23:30" // a Friday; the site's rule: three working days
	_, err := d.ReportIncident(ctx, d.officer, site, f)
	d.ok(err)
	f.Kind = "near-miss" // of which nobody is told
	_, err = d.ReportIncident(ctx, d.officer, site, f)
	d.ok(err)
	x, err := d.Incident(ctx, d.officer, site, 1)
	d.ok(err)
	if len(x.Reports) != 1 || x.Reports[0].Due.String() != "2026-03-04" || x.Reports[0].Left != 2 {
		t.Fatalf("%+v", x.Reports)
	}
	for on, want := range map[string]int{"2026-03-04": 0, "2026-03-05": 1} {
		if got := d.overdue("report", on); len(got) != want {
			t.Errorf("overdue on %s: %v", on, got)
		}
	}
	for name, c := range map[string]book.IncidentReportForm{
		"report": {Report: "NONE", Day: "2026-03-02"}, "day": {Report: "BODY", Day: "2026-03-03"},
	} {
		if _, err := d.MarkReported(ctx, d.officer, site, 1, c); faultOf(err) != name {
			t.Errorf("%s: %v", name, err)
		}
	}
	d.now = d.now.AddDate(0, 0, 4)
	if x, err = d.Incident(ctx, d.officer, site, 1); err != nil || x.Reports[0].Left != -2 {
		t.Errorf("two working days late: %+v, %v", x.Reports, err)
	}
	_, err = d.MarkReported(ctx, d.officer, site, 1, book.IncidentReportForm{Report: "BODY", Day: "2026-03-06"})
	d.ok(err)
	if got := d.overdue("report", "2026-03-06"); len(got) != 0 {
		t.Errorf("told on the sixth: %v", got)
	}
	if got := d.overdue("report", "2026-03-05"); len(got) != 1 {
		t.Errorf("a miss stays a miss: %v", got)
	}
	if _, err := d.MarkReported(ctx, d.officer, site, 1, book.IncidentReportForm{Report: "BODY", Day: "2026-03-06"}); faultOf(err) != "report" {
		t.Errorf("told twice: %v", err)
	}
	_, err = d.Withdraw(ctx, d.officer, x.Entry, book.Correction{Reason: "twice"})
	d.ok(err)
	if got := d.overdue("report", "2026-03-05"); len(got) != 0 {
		t.Errorf("of a withdrawn incident: %v", got)
	}
	if _, err := d.Incident(ctx, d.officer, site, 1); err == nil {
		t.Error("a withdrawn incident is shown as one")
	}
}

// What stood on a past day, as it was known at a past moment, stays as it was.
func TestRemediesAsKnownThen(t *testing.T) {
	d := manned(t)
	ctx := t.Context()
	n := d.remedy(book.RemedyForm{Item: "VENT", Subject: "fixture:V1", Severity: "high", Owner: "P2"})
	d.now = d.now.AddDate(0, 0, 20)
	then := d.now.Add(-time.Hour)
	done, err := d.RemedyDone(ctx, d.officer, site, n, book.RemedyDoneForm{Day: "2026-03-05"})
	d.ok(err)
	check, err := d.CheckRemedy(ctx, d.other(), site, n, book.RemedyCheckForm{Done: done.ID()})
	d.ok(err)
	day := civil.Of(2026, 3, 22)
	for known, want := range map[*time.Time]int{nil: 0, &then: 1} {
		st, err := d.Standings(ctx, d.op, book.StandingQuery{Site: site, On: &day, KnownAt: known, Item: "remedy"})
		d.ok(err)
		if len(st.Gaps()) != want {
			t.Errorf("as known at %v: %d gaps", known, len(st.Gaps()))
		}
	}
	if got := d.overdue("remedy", "2026-03-01"); len(got) != 0 {
		t.Errorf("before it was made: %v", got)
	}
	// What is withdrawn confirms nothing, and nothing confirms what is withdrawn.
	_, err = d.Withdraw(ctx, d.other(), check.ID(), book.Correction{})
	d.ok(err)
	if v, err := d.Remedy(ctx, d.officer, site, n); err != nil || v.State != book.RemedyDone {
		t.Errorf("%+v %v", v.RemedyLine, err)
	}
	_, err = d.CheckRemedy(ctx, d.other(), site, n, book.RemedyCheckForm{Done: done.ID()})
	d.ok(err)
	_, err = d.Withdraw(ctx, d.officer, done.ID(), book.Correction{})
	d.ok(err)
	if v, err := d.Remedy(ctx, d.officer, site, n); err != nil || v.State != book.RemedyOpen || !v.Overdue {
		t.Errorf("%+v %v", v.RemedyLine, err)
	}
	st, err := d.Short(ctx, d.op, site, &day)
	d.ok(err)
	long, err := d.Standings(ctx, d.op, book.StandingQuery{Site: site, On: &day})
	d.ok(err)
	if a, b := len(st.Gaps()), len(long.Gaps()); a != b || a == 0 {
		t.Errorf("%d gaps the short way and %d the long one", a, b)
	}
}
