package scenario

import (
	"bytes"
	"crypto/rand"
	"path/filepath"
	"testing"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/standing"
)

// demo is a book with the whole scenario in it.
type demo struct {
	*testing.T
	*book.Book
	site  Site
	a     almanac
	op    book.Actor
	facil book.Actor
}

// newDemo makes the book as a user would: the program, the tables, the accounts, the sheets, the
// plans. The clock stands at nine in the morning.
func newDemo(t *testing.T, today civil.Day) *demo {
	t.Helper()
	d := &demo{T: t, site: Make(today), op: book.SystemOperator("ops")}
	p := parsed(t, d.site)
	d.a = newAlmanac(today, p.Calendar, p.Site.Location)
	now := today.Midnight(p.Site.Location).Add(9 * time.Hour)
	b, err := book.Create(t.Context(), filepath.Join(t.TempDir(), "demo.book"), book.Options{Clock: func() time.Time { return now }, Random: rand.Reader})
	d.ok(err)
	d.Book = b
	t.Cleanup(func() { d.ok(b.Close()) })
	report, err := b.OpenProgram(t.Context(), d.op, d.site.Program, "")
	d.ok(err)
	if len(report.Warnings) > 0 {
		t.Errorf("warnings: %v", report.Warnings)
	}
	for _, f := range d.site.Files {
		if r := d.imp(f); len(r.Faults)+len(r.Kept)+r.Unchanged > 0 || r.Written == 0 {
			t.Fatalf("import of %s: %+v", f.Name, r)
		}
	}
	d.accounts()
	d.fill()
	return d
}

func (d *demo) ok(err error) {
	d.Helper()
	if err != nil {
		d.Fatal(err)
	}
}

func (d *demo) imp(f File) book.ImportReport {
	d.Helper()
	r, err := d.Import(d.Context(), d.op, book.ImportOptions{
		Table: f.Table, Site: d.site.Code, File: bytes.NewReader(f.CSV), Size: int64(len(f.CSV)), FileName: f.Name,
	})
	d.ok(err)
	return r
}

func (d *demo) accounts() {
	d.Helper()
	for _, a := range d.site.Accounts {
		form := book.AccountForm{Name: a.Name, Role: book.Role(a.Role), Person: a.Person}
		if form.Role != book.Administrator {
			form.Sites = []string{d.site.Code}
		}
		_, err := d.AddAccount(d.Context(), d.op, form)
		d.ok(err)
		if form.Role == book.Facilities {
			d.facil, err = d.ActorNamed(d.Context(), a.Name)
			d.ok(err)
		}
	}
}

func (d *demo) fill() {
	d.Helper()
	for _, e := range d.site.Sheets {
		form := book.SheetForm{Record: e.Record, Fixture: e.Fixture, On: e.On.String(), Values: e.Values, Note: e.Note}
		_, v, err := d.FillSheet(d.Context(), d.facil, d.site.Code, form, book.Correction{})
		d.ok(err)
		if failing := e.Fixture == failedVent; failing == (v.Result == book.Pass) {
			d.Errorf("sheet %s of %s on %s comes to %s", e.Record, e.Fixture, e.On, v.Result)
		}
	}
	officer, err := d.ActorNamed(d.Context(), "sunniva")
	d.ok(err)
	for _, p := range d.site.Plans {
		_, err := d.PlanDrill(d.Context(), officer, d.site.Code, book.PlanForm{Record: p.Record, Crew: p.Crew, Day: p.Day.String(), At: p.At, Note: p.Note}, book.Correction{})
		d.ok(err)
	}
}

func (d *demo) standings(on civil.Day) book.Standings {
	d.Helper()
	st, err := d.Standings(d.Context(), d.op, book.StandingQuery{Site: d.site.Code, On: &on})
	d.ok(err)
	return st
}

// words gives the standing of each obligation on a day, by item and subject.
func (d *demo) words(on civil.Day) map[string]standing.Word {
	d.Helper()
	out := map[string]standing.Word{}
	for _, r := range d.standings(on).Rows {
		out[r.Item+" "+r.Subject.Code] = r.Word
	}
	return out
}

func (d *demo) person(code string) book.SubjectView {
	d.Helper()
	v, err := d.Person(d.Context(), d.op, d.site.Code, code, nil)
	d.ok(err)
	return v
}

// gaps are the site's gaps, on whatever day the demo runs.
var gaps = map[string]standing.Word{
	"TRAIN-LEVEL-2 " + lapsedVisitor:    standing.Lapsed,
	"SCREEN-STAFF " + newcomer:          standing.Missing,
	"LIFE-SUPPORT S43":                  standing.Lapsed,
	"HOUSE-RULES-READ " + unread:        standing.Lapsed,
	"VENT-YEAR " + overdueVent:          standing.Lapsed,
	"VENT-YEAR " + failedVent:           standing.Failed,
	"VENT-AFTER-QUENCH " + failedVent:   standing.Failed, // by rule 1: its last record failed
	"VENT-AFTER-ROOF " + roofVent:       standing.Lapsed,
	"OXYGEN-CALIBRATION " + lateMonitor: standing.Lapsed,
	"POWER-OFF-TEST " + lateButton:      standing.Lapsed,
	"LABEL-FIRST " + newItem:            standing.Missing,
	"LABEL-YEAR " + newItem:             standing.Missing,
	"DRILL-QUENCH night":                standing.Missing,
	"CREW-BRIEFING late":                standing.Lapsed,
}

// dataFaults are of the one who has neither level nor crew on record.
var dataFaults = []string{"TRAIN-LEVEL-1 " + levelUnknown, "TRAIN-LEVEL-2 " + levelUnknown, "LIFE-SUPPORT " + levelUnknown}

// TestGaps puts the scenario into a book on days of every sort, and finds the gaps that the stories
// make and no others.
func TestGaps(t *testing.T) {
	for _, today := range []civil.Day{
		civil.Of(2026, 12, 1), civil.Of(2028, 2, 29), civil.Of(2026, 12, 31), civil.Of(2027, 1, 1), civil.Of(2027, 5, 2),
	} {
		t.Run(today.String(), func(t *testing.T) {
			d := newDemo(t, today)
			st := d.standings(today)
			found := map[string]bool{}
			for _, r := range st.Rows {
				key := r.Item + " " + r.Subject.Code
				found[key] = true
				if want, ok := gaps[key]; ok != r.Word.IsGap() || ok && want != r.Word {
					t.Errorf("%s is %s, due %v", key, r.Word, r.Due)
				}
			}
			for key := range gaps {
				if !found[key] {
					t.Errorf("%s is asked of nobody", key)
				}
			}
			if n := st.Count()[standing.Closing]; n < 8 || n > 40 {
				t.Errorf("%d are closing", n)
			}
			if n := len(st.Faults()); n != len(dataFaults) {
				t.Errorf("%d data faults", n)
			}
			for _, key := range dataFaults {
				if w := d.words(today)[key]; w != standing.DataFault {
					t.Errorf("%s is %q", key, w)
				}
			}
		})
	}
}

// TestDemo looks at one book from several sides.
func TestDemo(t *testing.T) {
	d := newDemo(t, civil.Of(2026, 12, 1))
	t.Run("stories", d.with((*demo).storiesAreThere))
	t.Run("people", d.with((*demo).peopleAreThere))
	t.Run("past", d.with((*demo).pastIsInDecentOrder))
	t.Run("second import", d.with((*demo).secondImportChangesNothing))
}

// with looks at the same book in a subtest.
func (d *demo) with(look func(*demo)) func(*testing.T) {
	return func(t *testing.T) {
		in := *d
		in.T = t
		look(&in)
	}
}

// storiesAreThere finds what the stories say of single days and subjects.
func (d *demo) storiesAreThere() {
	today := d.a.today
	for _, x := range []struct {
		about, key string
		on         civil.Day
		want       standing.Word
	}{
		{"an excusal with a reason", "DRILL-EACH-PERSON " + excusedPerson, today, standing.Excused},
		{"an excusal that waits", "TRAIN-LEVEL-2 " + waitingOpen, today, standing.Excused},
		{"parental leave", "TRAIN-LEVEL-2 " + onLeave, today, standing.Excused},
		{"an item away for repair", "LABEL-YEAR " + awayItem, today, standing.Excused},
		{"a certificate with an end of its own", "TRAIN-LEVEL-2 " + certificate, today, standing.Closing},
		{"away between two stints", "SCREEN-STAFF " + cameBack, d.a.ago(200), ""},
		{"back again", "SCREEN-STAFF " + cameBack, today, standing.Met},
		{"level 1 before the promotion", "TRAIN-LEVEL-1 " + promoted, d.a.ago(245), standing.Met},
		{"level 2 since", "TRAIN-LEVEL-2 " + promoted, today, standing.Met},
		{"no longer level 1", "TRAIN-LEVEL-1 " + promoted, today, ""},
		{"roof work before it was looked at", "VENT-AFTER-ROOF " + roofVent, d.a.ago(141), standing.Lapsed},
		{"roof work once it was", "VENT-AFTER-ROOF " + roofVent, d.a.ago(140), standing.Met},
		{"a change reported", "SCREEN-AFTER-CHANGE " + selfReported, d.a.twoDays(34), standing.Closing},
		{"and answered", "SCREEN-AFTER-CHANGE " + selfReported, today, standing.Met},
		{"a door that failed", "DOOR-MONTH " + repairedDoor, d.a.twoDays(205), standing.Failed},
		{"and was repaired", "DOOR-MONTH " + repairedDoor, d.a.twoDays(205) + 1, standing.Met},
		{"and measured", "DOOR-AFTER-REPAIR " + repairedDoor, today, standing.Met},
		{"a missed morning", "DETECTOR-DAY " + missedCheck, (&tale{almanac: d.a}).missedMorning(), standing.Closing},
		{"beside one that was not", "DETECTOR-DAY " + driftDetector, (&tale{almanac: d.a}).missedMorning(), standing.Met},
		{"made again since", "DETECTOR-DAY " + missedCheck, today - 1, standing.Met},
		{"this morning's, still to be made", "DETECTOR-DAY " + missedCheck, today, standing.Closing},
		{"a magnet with helium has no ramp unit", "RAMP-UNIT-MONTH " + seaMagnet, today, ""},
		{"a magnet without has", "RAMP-UNIT-MONTH " + landMagnet, d.a.month(1).MonthEnd(), standing.Met},
		{"a magnet without a vent has no joint", "MAGNET-JOINT " + landMagnet, today, ""},
		{"a magnet with one has", "MAGNET-JOINT " + seaMagnet, today, standing.Met},
		{"drifting, and yet in order", "DETECTOR-SENSITIVITY " + driftDetector, d.a.month(1).MonthEnd(), standing.Met},
		{"what a member can do today", "HOUSE-RULES-READ " + technologist, today, standing.Closing},
		{"a deputy for the safety officer", "MRSO-DEPUTY MRSO", today, standing.Met},
	} {
		if got := d.words(x.on)[x.key]; got != x.want {
			d.Errorf("%s: %s on %s is %q, not %q", x.about, x.key, x.on, got, x.want)
		}
	}
}

// peopleAreThere finds what stands on record of single people.
func (d *demo) peopleAreThere() {
	waiting := 0
	for _, x := range d.person(waitingOpen).Excusals {
		if x.Waiting && !x.Opens && x.Because != "" && x.ApprovedBy != "" {
			waiting++
		}
	}
	if waiting != 1 {
		d.Errorf("%d excusals wait to be confirmed", waiting)
	}
	limit := ""
	for _, r := range d.person(limited).Records {
		if r.What == "screening/staff" {
			limit = r.Limit
			break // newest first
		}
	}
	if limit != "I II III" {
		d.Errorf("the last screening is limited to %q", limit)
	}
	if v := d.person(levelUnknown); v.Level != "" || v.Crew != "" {
		d.Errorf("level %q, crew %q", v.Level, v.Crew)
	}
	if v := d.person(cameBack); len(v.Stints) != 2 {
		d.Errorf("%d stints of who came back", len(v.Stints))
	}
	if v := d.person(movedCrew); v.Crew != "late" {
		d.Errorf("who moved is of the crew %q", v.Crew)
	}
}

// pastIsInDecentOrder looks at days within the history: none of them shows a disaster.
func (d *demo) pastIsInDecentOrder() {
	today := d.a.today
	for back := civil.Day(20); back < 540; back += 40 {
		if n := len(d.standings(today - back).Gaps()); n > 25 {
			d.Errorf("%d gaps on %s", n, today-back)
		}
	}
}

func (d *demo) secondImportChangesNothing() {
	size, err := d.Size(d.Context())
	d.ok(err)
	for _, f := range d.site.Files {
		if r := d.imp(f); r.Written > 0 || len(r.Faults)+len(r.Kept) > 0 || r.Unchanged != r.Read {
			d.Errorf("second import of %s: %d written, %d of %d unchanged, faults %v, kept %v", f.Name, r.Written, r.Unchanged, r.Read, r.Faults, r.Kept)
		}
	}
	if now, err := d.Size(d.Context()); err != nil || now != size {
		d.Errorf("the book grew from %d to %d (%v)", size, now, err)
	}
}
