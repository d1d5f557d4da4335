package book_test

import (
	"errors"
	"strings"
	"sync"
	"testing"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
)

// hall is a desk whose zones III and IV are escorted by level 2, with P1, who holds it, and P2, who does not.
func hall(t *testing.T) *desk {
	d := newDesk(t)
	d.program("restricted: true}", "restricted: true, escort: L2}", "restricted: true, devices: false}", "restricted: true, devices: false, escort: L2}", "of: person}]", "of: person, self_report: true}]")
	d.person("P1", "Runa Sandoy", "L2")
	d.person("P2", "Teis Joensen", "L2")
	d.record("training/level-2", "P1", "2026-02-01", "pass")
	return d
}

// program gives the site a new version of its program, with texts replaced.
func (d *desk) program(pairs ...string) {
	d.Helper()
	source, err := d.Source(d.Context(), d.officer, site)
	d.ok(err)
	text := string(source)
	for i := 0; i+1 < len(pairs); i += 2 {
		if !strings.Contains(text, pairs[i]) {
			d.Fatalf("the program has no %q", pairs[i])
		}
		text = strings.ReplaceAll(text, pairs[i], pairs[i+1])
	}
	_, err = d.OpenProgram(d.Context(), d.officer, []byte(text), "escorts are named")
	d.ok(err)
}

func engineer() book.VisitForm {
	return book.VisitForm{Visitor: "Ada Lund", Employer: "Skerry Magnets", Kind: "vendor", Purpose: "cold head", Zones: []string{"III", "IV"}, To: "2026-03-02 16:00", Escort: "P1", Tool: "torque wrench\nlaptop"}
}

func (d *desk) announce(f book.VisitForm) string {
	d.Helper()
	r, err := d.Announce(d.Context(), d.officer, site, f)
	d.ok(err)
	return r.ID()
}

func (d *desk) visit(id string) book.VisitView {
	d.Helper()
	v, err := d.Visit(d.Context(), d.officer, site, id)
	d.ok(err)
	return v
}

func wantFault(t *testing.T, name string, err error, field string) {
	t.Helper()
	var invalid *book.Invalid
	if !errors.As(err, &invalid) || invalid.Faults[0].Field != field || invalid.Faults[0].Accepted == "" {
		t.Errorf("%s: %v, want a fault of %s", name, err, field)
	}
}

func TestAVisit(t *testing.T) {
	d := hall(t)
	id := d.announce(engineer())
	v := d.visit(id)
	if !v.Awaited() || v.EscortName != "Runa Sandoy" || v.Purpose != "cold head" || len(v.Tools) != 2 || v.Late {
		t.Errorf("announced: %+v", v)
	}
	arrive := book.StepForm{Visit: id, Step: book.Arrived, Screener: "P1", Outcome: book.Cleared, Tools: []string{"torque wrench", "laptop"}}
	for name, c := range map[string]struct {
		change func(*book.StepForm)
		field  string
	}{
		"no outcome":              {func(f *book.StepForm) { f.Outcome = "" }, "outcome"},
		"not cleared":             {func(f *book.StepForm) { f.Outcome = book.NotCleared }, "outcome"},
		"another word":            {func(f *book.StepForm) { f.Outcome = "fine" }, "outcome"},
		"nobody screened":         {func(f *book.StepForm) { f.Screener = "" }, "screener"},
		"screened by nobody":      {func(f *book.StepForm) { f.Screener = "P9" }, "screener"},
		"screened by one without": {func(f *book.StepForm) { f.Screener = "P2" }, "screener"},
		"another step":            {func(f *book.StepForm) { f.Step = "hidden" }, "step"},
		"gone before they came":   {func(f *book.StepForm) { f.Step = book.Gone }, "step"},
		"a day":                   {func(f *book.StepForm) { f.At = "2026-03-02" }, "at"},
	} {
		f := arrive
		c.change(&f)
		_, err := d.StepVisit(t.Context(), d.officer, f)
		wantFault(t, name, err, c.field)
	}
	_, err := d.StepVisit(t.Context(), d.officer, arrive)
	d.ok(err)
	if v := d.visit(id); !v.Here() || v.Outcome != book.Cleared || v.ScreenerName != "Runa Sandoy" {
		t.Errorf("here: %+v", v)
	}
	_, err = d.StepVisit(t.Context(), d.officer, arrive)
	wantFault(t, "here twice", err, "step")
	if !strings.Contains(err.Error(), "here already") || !strings.Contains(err.Error(), "olga") {
		t.Errorf("who comes second is told %v", err)
	}
	d.now = d.now.Add(9 * time.Hour) // 17:00, past the end
	if v := d.visit(id); !v.Overdue {
		t.Errorf("overstaying: %+v", v)
	}
	gone := book.StepForm{Visit: id, Step: book.Gone, Tools: []string{"laptop"}}
	_, err = d.StepVisit(t.Context(), d.officer, gone)
	wantFault(t, "a tool is missing", err, "note")
	if !strings.Contains(err.Error(), "torque wrench") {
		t.Errorf("the tool that is missing is not named: %v", err)
	}
	gone.Note = "stays in the plant room until Friday"
	_, err = d.StepVisit(t.Context(), d.officer, gone)
	d.ok(err)
	if v := d.visit(id); v.Over != book.Gone || v.Overdue || v.Here() {
		t.Errorf("gone: %+v", v)
	}
	list, err := d.Visits(t.Context(), d.officer, book.VisitQuery{Site: site, Open: true})
	if err != nil || len(list) != 0 {
		t.Errorf("open are %+v, %v", list, err)
	}
}

func TestVisitsThatAreRefused(t *testing.T) {
	d := hall(t)
	for name, c := range map[string]struct {
		change func(*book.VisitForm)
		field  string
	}{
		"no name":               {func(f *book.VisitForm) { f.Visitor = " " }, "visitor"},
		"no such kind":          {func(f *book.VisitForm) { f.Kind = "tourist" }, "kind"},
		"no zone":               {func(f *book.VisitForm) { f.Zones = nil }, "zones"},
		"no such zone":          {func(f *book.VisitForm) { f.Zones = []string{"V"} }, "zones"},
		"no end":                {func(f *book.VisitForm) { f.To = "" }, "to"},
		"a day as an end":       {func(f *book.VisitForm) { f.To = "2026-03-02" }, "to"},
		"an end before":         {func(f *book.VisitForm) { f.To = "2026-03-02 07:00" }, "to"},
		"two months":            {func(f *book.VisitForm) { f.To = "2026-05-02 07:00" }, "to"},
		"over already":          {func(f *book.VisitForm) { f.From, f.To = "2026-03-01 07:00", "2026-03-01 09:00" }, "from"},
		"no escort":             {func(f *book.VisitForm) { f.Escort = "" }, "escort"},
		"an escort without":     {func(f *book.VisitForm) { f.Escort = "P2" }, "escort"},
		"an escort of nobody":   {func(f *book.VisitForm) { f.Escort = "P8" }, "escort"},
		"an escort of oneself":  {func(f *book.VisitForm) { f.Person = "P1" }, "escort"},
		"a visitor not on file": {func(f *book.VisitForm) { f.Person = "P7" }, "person"},
		"an hour there is not":  {func(f *book.VisitForm) { f.From, f.To = "2026-03-29 01:30", "2026-03-29 09:00" }, "from"},
	} {
		f := engineer()
		c.change(&f)
		_, err := d.Announce(t.Context(), d.officer, site, f)
		wantFault(t, name, err, c.field)
	}
	if _, err := d.Announce(t.Context(), d.account("r", book.Reader, ""), site, engineer()); !errors.As(err, new(*book.Denied)) {
		t.Errorf("by a reader: %v", err)
	}
	if _, err := d.Announce(t.Context(), d.account("m", book.Member, "P2"), site, engineer()); err != nil {
		t.Errorf("by a member: %v", err)
	}
	hall := engineer()
	hall.Zones, hall.Escort = []string{"II"}, ""
	if _, err := d.Announce(t.Context(), d.officer, site, hall); err != nil {
		t.Errorf("where nobody needs an escort: %v", err)
	}
	fire := engineer()
	fire.Kind, fire.Escort, fire.From, fire.To = "emergency", "", "2026-03-01 20:00", "2026-03-01 21:00"
	if v := d.visit(d.announce(fire)); !v.Late {
		t.Errorf("an emergency crew after the fact: %+v", v)
	}
}

// Before the program names who may escort, nobody may.
func TestNobodyEscortsWithoutALineInTheProgram(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	d.record("training/level-2", "P1", "2026-02-01", "pass")
	_, err := d.Announce(t.Context(), d.officer, site, engineer())
	wantFault(t, "no line", err, "zones")
}

// The escort's training ends on the second day of the visit: it warns, and on that day they let nobody in.
func TestAnEscortWhoseLevelLapses(t *testing.T) {
	d := hall(t)
	d.now = time.Date(2027, 2, 28, 8, 0, 0, 0, time.UTC)
	f := engineer()
	f.From, f.To = "2027-02-28 09:00", "2027-03-01 17:00"
	id := d.announce(f)
	if v := d.visit(id); v.EscortLapses == nil || v.EscortLapses.String() != "2027-03-01" {
		t.Errorf("the escort lapses on %v", v.EscortLapses)
	}
	d.now = time.Date(2027, 3, 1, 9, 0, 0, 0, time.UTC)
	_, err := d.StepVisit(t.Context(), d.officer, book.StepForm{Visit: id, Step: book.Arrived, Screener: "P1", Outcome: book.Cleared})
	wantFault(t, "an escort who lapsed", err, "escort")
}

// Two people tap at once: one is kept, the other is told that it is done.
func TestTwoTapsAtOnce(t *testing.T) {
	d := hall(t)
	id := d.announce(engineer())
	var done sync.WaitGroup
	errs := make([]error, 2)
	for i := range errs {
		done.Go(func() {
			_, errs[i] = d.StepVisit(t.Context(), d.officer, book.StepForm{Visit: id, Step: book.Arrived, Screener: "P1", Outcome: book.Cleared})
		})
	}
	done.Wait()
	if (errs[0] == nil) == (errs[1] == nil) {
		t.Errorf("%v and %v", errs[0], errs[1])
	}
}

// A visit over a midnight and over the night in which the clocks go forward is open on both days; a passage with the lent
// badge falls into it from arrival to leaving and not outside.
func TestAPassageInAVisit(t *testing.T) {
	d := hall(t)
	d.imp("fixtures", "code,kind,name,zone,since\nD1,detector,Door,IV,2025-02-01\nD3,detector,Door,III,2025-02-01\n")
	d.now = time.Date(2026, 3, 28, 20, 0, 0, 0, time.UTC)
	f := engineer()
	f.Zones, f.From, f.To, f.Badge = []string{"IV"}, "2026-03-28 20:00", "2026-03-29 06:00", "LENT-1"
	id := d.announce(f)
	_, err := d.StepVisit(t.Context(), d.officer, book.StepForm{Visit: id, Step: book.Arrived, Screener: "P1", Outcome: book.Cleared, Tools: []string{"laptop"}})
	d.ok(err)
	for _, day := range []string{"2026-03-28", "2026-03-29"} {
		on, err := civil.ParseDay(day)
		d.ok(err)
		if list, err := d.Visits(t.Context(), d.officer, book.VisitQuery{Site: site, On: &on}); err != nil || len(list) != 1 {
			t.Errorf("on %s: %+v, %v", day, list, err)
		}
	}
	d.now = time.Date(2026, 3, 29, 4, 0, 0, 0, time.UTC)
	_, err = d.StepVisit(t.Context(), d.officer, book.StepForm{Visit: id, Step: book.Gone, Tools: []string{"laptop", "torque wrench"}})
	d.ok(err)
	d.now = d.now.Add(time.Hour)
	d.imp("passages", "at,door,badge,direction\n2026-03-28T19:59:00Z,D1,LENT-1,in\n2026-03-29T00:30:00Z,D1,LENT-1,in\n2026-03-29T00:40:00Z,D3,LENT-1,in\n2026-03-29T04:01:00Z,D1,LENT-1,in\n")
	got := d.passages("2026-03-28T00:00:00Z", "2026-03-30T00:00:00Z")
	if want := "19:59 D1 LENT-1 unknown-badge/unknown-badge\n00:30 D1 LENT-1 visit/visit\n00:40 D3 LENT-1 unknown-badge/unknown-badge\n04:01 D1 LENT-1 unknown-badge/unknown-badge"; got != want {
		t.Errorf("got\n%s\nwant\n%s", got, want)
	}
}

func TestKnownVisitorsAndErasure(t *testing.T) {
	d := hall(t)
	for range 5 {
		id := d.announce(engineer())
		_, err := d.StepVisit(t.Context(), d.officer, book.StepForm{Visit: id, Step: book.CalledOff})
		d.ok(err)
		d.now = d.now.Add(time.Minute)
	}
	known, err := d.KnownVisitors(t.Context(), d.officer, site)
	d.ok(err)
	if len(known) != 1 || !known[0].Often() || known[0].Times != 5 {
		t.Fatalf("%+v", known)
	}
	id := known[0].Last.Entry
	_, err = d.EraseVisit(t.Context(), d.officer, id)
	d.ok(err)
	if v := d.visit(id); !v.Erased || strings.Contains(v.Visitor, "Ada") || v.Employer != "" {
		t.Errorf("erased: %+v", v)
	}
	_, err = d.EraseVisit(t.Context(), d.officer, id)
	wantFault(t, "twice", err, "visit")
	report, err := d.Verify(t.Context(), nil)
	if err != nil || report.FirstFault != "" || report.Erased == 0 {
		t.Errorf("%+v, %v", report, err)
	}
}

// A member says that something has changed: their zones close at that moment, and nothing says what.
func TestASelfReportClosesZonesAtOnce(t *testing.T) {
	d := hall(t)
	d.program("  - {code: INDUCTION,", "  - {code: CHANGE, title: Screened again after a change, asks: person, record: screening/staff, after: [health-change], within: P1D, guards: [III, IV], basis: Site rule}\n  - {code: INDUCTION,")
	d.record("screening/staff", "P1", "2026-02-01", "pass")
	d.grant(book.RightForm{Person: "P1", Zone: "IV", From: "2026-02-10"})
	entitled := func(at time.Time) bool {
		t.Helper()
		x, err := d.Reach(t.Context(), d.officer, book.ReachQuery{Site: site, Zone: "IV", At: &at, Person: "P1"})
		d.ok(err)
		return x.Rows[0].Entitled
	}
	d.now = time.Date(2026, 3, 4, 10, 0, 0, 0, time.UTC)
	if !entitled(d.now) {
		t.Fatal("P1 is not entitled to begin with")
	}
	if _, err := d.ReportSelf(t.Context(), d.account("nobody", book.Member, ""), site); !errors.As(err, new(*book.Denied)) {
		t.Errorf("an account of nobody: %v", err)
	}
	r, err := d.ReportSelf(t.Context(), d.account("runa", book.Member, "P1"), site)
	d.ok(err)
	if entitled(d.now) || entitled(d.now.Add(time.Hour)) || !entitled(d.now.Add(-time.Minute)) {
		t.Error("the zones did not close at that moment")
	}
	v, err := d.Entry(t.Context(), d.officer, r.ID())
	d.ok(err)
	if strings.Contains(v.Canonical, "note") {
		t.Errorf("it says more than that: %s", v.Canonical)
	}
	d.now = d.now.Add(3 * time.Hour)
	d.record("screening/staff", "P1", "2026-03-04T12:30:00Z", "pass")
	if !entitled(d.now) {
		t.Error("a screening after it does not open them again")
	}
	if _, err := d.ReportSelf(t.Context(), d.account("olga2", book.Administrator, ""), site); !errors.As(err, new(*book.Denied)) {
		t.Errorf("by an administrator: %v", err)
	}
}

// What somebody reported about themselves is taken back by a safety officer who is somebody else, with a reason: it would
// open their zones again.
func TestASelfReportIsTakenBackByAnotherOfficer(t *testing.T) {
	d := hall(t)
	member := d.account("runa", book.Member, "P1")
	r, err := d.ReportSelf(t.Context(), member, site)
	d.ok(err)
	if _, err := d.Withdraw(t.Context(), member, r.ID(), book.Correction{Reason: "slip"}); !errors.As(err, new(*book.Denied)) {
		t.Errorf("by themselves: %v", err)
	}
	own := d.account("officer", book.SafetyOfficer, "P1")
	if _, err := d.Withdraw(t.Context(), own, r.ID(), book.Correction{Reason: "slip"}); !errors.As(err, new(*book.Denied)) {
		t.Errorf("by an officer about themselves: %v", err)
	}
	_, err = d.Withdraw(t.Context(), d.officer, r.ID(), book.Correction{})
	wantFault(t, "without a reason", err, "reason")
	_, err = d.Withdraw(t.Context(), d.officer, r.ID(), book.Correction{Reason: "slip"})
	d.ok(err)
}
