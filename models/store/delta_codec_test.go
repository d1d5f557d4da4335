package store

import (
	"bytes"
	"fmt"
	"reflect"
	"slices"
	"testing"
	"time"

	"pgregory.net/rapid"

	"lodebook/models/civil"
)

// fataler is a test, a benchmark or a check of a property.
type fataler interface {
	Helper()
	Fatal(...any)
}

func works(t fataler, err error) {
	t.Helper()
	if err != nil {
		t.Fatal(err)
	}
}

// draws makes rows of which any field may be empty, shared by many or on the edge of what it can hold.
type draws struct {
	*rapid.T
	n int
}

func (d *draws) label(what string) string {
	d.n++
	return fmt.Sprintf("%s %d", what, d.n)
}

func (d *draws) text() string {
	return rapid.OneOf(rapid.SampledFrom([]string{"", "QUAY", "person", "P1"}), rapid.String()).Draw(d.T, d.label("text"))
}

func (d *draws) number() int { return rapid.Int().Draw(d.T, d.label("number")) }

func (d *draws) flag() bool { return rapid.Bool().Draw(d.T, d.label("flag")) }

func (d *draws) day() civil.Day {
	return civil.Day(rapid.Int32Range(int32(civil.FirstDay), int32(civil.LastDay)).Draw(d.T, d.label("day")))
}

func (d *draws) maybeDay() *civil.Day {
	if !d.flag() {
		return nil
	}
	day := d.day()
	return &day
}

func (d *draws) moment() time.Time {
	return time.UnixMicro(rapid.Int64Range(-62135596800000000, 253402300799999999).Draw(d.T, d.label("moment"))).UTC()
}

func (d *draws) maybeMoment() *time.Time {
	if !d.flag() {
		return nil
	}
	t := d.moment()
	return &t
}

func (d *draws) line() Line {
	return Line{Seq: rapid.Int64().Draw(d.T, d.label("seq")), Ended: rapid.Int64().Draw(d.T, d.label("ended")), ID: d.text(), Batch: d.text()}
}

func (d *draws) subject() SubjectKey { return SubjectKey{d.text(), d.text(), d.text()} }

// some makes a few rows; none is nil, as it is when read.
func some[T any](d *draws, row func() T) []T {
	var rows []T
	for range rapid.IntRange(0, 3).Draw(d.T, d.label("rows")) {
		rows = append(rows, row())
	}
	return rows
}

func (d *draws) texts() []string {
	if !d.flag() {
		return nil
	}
	return append([]string{}, some(d, d.text)...)
}

func (d *draws) delta() Delta {
	return Delta{
		Sites: some(d, func() SiteRow { return SiteRow{d.line(), d.text(), d.text(), d.text()} }),
		Versions: some(d, func() VersionRow {
			return VersionRow{d.line(), d.text(), rapid.Int().Draw(d.T, d.label("number")), d.day(), d.flag(), rapid.SliceOf(rapid.Byte()).Draw(d.T, d.label("source"))}
		}),
		People: some(d, func() PersonRow {
			return PersonRow{d.line(), d.text(), d.text(), d.text(), d.text(), d.maybeDay(), d.flag()}
		}),
		Fixtures: some(d, func() FixtureRow { return FixtureRow{d.line(), d.text(), d.text(), d.text(), d.text()} }),
		Stints:   some(d, func() StintRow { return StintRow{d.line(), d.text(), d.text(), d.text(), d.maybeDay(), d.maybeDay()} }),
		Facts: some(d, func() FactRow {
			return FactRow{d.line(), d.text(), d.text(), d.text(), d.text(), d.day(), d.text()}
		}),
		Events: some(d, func() EventRow { return EventRow{d.line(), d.text(), d.subject(), d.text(), d.day(), d.maybeMoment()} }),
		Excusals: some(d, func() ExcusalRow {
			return ExcusalRow{d.line(), d.text(), d.subject(), d.text(), d.day(), d.maybeDay(), d.flag(), d.flag()}
		}),
		Rights: some(d, func() RightRow { return RightRow{d.line(), d.text(), d.text(), d.text(), d.moment(), d.maybeMoment()} }),
		Duties: some(d, func() DutyRow { return DutyRow{d.line(), d.text(), d.text(), d.moment(), d.moment(), d.text()} }),
		Stocks: some(d, func() StockRow {
			return StockRow{d.line(), d.text(), d.text(), d.moment(), d.moment(), d.texts()}
		}),
		Incidents: some(d, func() IncidentRow {
			return IncidentRow{d.line(), d.text(), d.number(), d.text(), d.text(), d.text(), d.moment(), d.flag(), d.text(), d.texts()}
		}),
		Reports: some(d, func() ReportRow { return ReportRow{d.line(), d.text(), d.number(), d.text(), d.day()} }),
		Remedies: some(d, func() RemedyRow {
			return RemedyRow{d.line(), d.text(), d.number(), d.number(), d.text(), d.text(), d.subject(), d.text(), d.text(), d.text(), d.day(), d.day(), d.flag()}
		}),
		RemedySteps: some(d, func() RemedyStepRow {
			return RemedyStepRow{d.line(), d.text(), d.number(), d.text(), d.day(), d.text(), d.text()}
		}),
		Outages: some(d, func() OutageRow {
			return OutageRow{d.line(), d.text(), d.subject(), d.text(), d.text(), d.moment(), d.flag(), d.text()}
		}),
		Returns: some(d, func() ReturnRow { return ReturnRow{d.line(), d.text(), d.texts(), d.moment()} }),
		Plans:   some(d, func() PlanRow { return PlanRow{d.line(), d.text(), d.text(), d.text(), d.day(), d.text()} }),
		Accounts: some(d, func() AccountRow {
			return AccountRow{d.line(), d.text(), d.text(), d.text(), d.texts(), d.text(), d.maybeDay(), d.flag()}
		}),
		Batches: some(d, func() BatchRow {
			return BatchRow{d.line(), d.text(), d.text(), d.text(), rapid.Int().Draw(d.T, d.label("rows")), d.text(), d.moment()}
		}),
	}
}

func TestDeltaIsReadAsItWasWritten(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d := (&draws{T: t}).delta()
		var b bytes.Buffer
		works(t, WriteDelta(&b, &d))
		got, err := ReadDelta(b.String())
		works(t, err)
		if !reflect.DeepEqual(got, d) {
			t.Fatalf("read\n%+v\nwritten\n%+v", got, d)
		}
		if cut := b.Len() - 1 - rapid.IntRange(0, b.Len()-1).Draw(t, "cut"); cut >= 0 {
			if _, err := ReadDelta(b.String()[:cut]); err == nil {
				t.Fatalf("the first %d of %d bytes are read as if they were all", cut, b.Len())
			}
		}
	})
}

// sampleDelta has every optional field without a value in one row and with one in another.
func sampleDelta() Delta {
	at, day := time.Date(2026, 3, 2, 8, 0, 0, 1000, time.UTC), civil.Of(2026, 3, 2)
	key := SubjectKey{"QUAY", "fixture", "V1"}
	line := func(seq int64) Line { return Line{seq, seq % 2 * 90, fmt.Sprint("id-", seq), "batch"} }
	return Delta{
		Sites:       []SiteRow{{line(0), "QUAY", "Quay", "UTC"}},
		Versions:    []VersionRow{{line(0), "QUAY", 1, day, true, []byte("site: {}")}, {line(1), "QUAY", 2, day, false, nil}},
		People:      []PersonRow{{line(2), "P1", "Runa", "r@x.example", "B-1", &day, false}, {line(3), "P1", "", "", "", nil, true}},
		Fixtures:    []FixtureRow{{line(4), "QUAY", "V1", "vent", "North"}},
		Stints:      []StintRow{{line(5), "QUAY", "person", "P1", &day, nil}, {line(6), "QUAY", "person", "P1", nil, &day}},
		Facts:       []FactRow{{line(7), "QUAY", "person", "P1", "level", civil.FirstDay, `"L2"`}},
		Events:      []EventRow{{line(8), "QUAY", key, "roof", day, nil}, {line(9), "QUAY", key, "roof", day, &at}},
		Excusals:    []ExcusalRow{{line(10), "QUAY", key, "", day, nil, false, true}, {line(11), "QUAY", key, "SCREEN", day, &day, true, false}},
		Rights:      []RightRow{{line(10), "QUAY", "P1", "IV", at, nil}, {line(11), "QUAY", "P1", "III", at, &at}},
		Duties:      []DutyRow{{line(12), "QUAY", "P1", at, at, "late"}},
		Stocks:      []StockRow{{line(13), "QUAY", "COVER", at, at, []string{"a", "b"}}, {line(14), "QUAY", "COVER", at, at, nil}},
		Incidents:   []IncidentRow{{line(12), "QUAY", 1, "burn", "IV", "high", at, true, "anonymous", nil}, {line(13), "QUAY", 2, "quench", "", "low", at, false, "A1", []string{"P1", "P2"}}},
		Reports:     []ReportRow{{line(14), "QUAY", 1, "BODY", day}},
		Remedies:    []RemedyRow{{line(15), "QUAY", 1, 1, "", "", SubjectKey{}, "high", "P1", "", day, day + 7, true}, {line(16), "QUAY", 2, 0, "id", "VENT", key, "low", "", "A1", day, day, false}},
		RemedySteps: []RemedyStepRow{{line(17), "QUAY", 1, "done", day, "A1", "P1"}},
		Outages:     []OutageRow{{line(18), "QUAY", key, "V1", "id", at, true, "A1"}},
		Returns:     []ReturnRow{{line(19), "QUAY", []string{"a", "b"}, at}},
		Marks:       []MarkRow{{line(12), "QUAY", at, "D1", "B-1"}},
		Visits:      []VisitRow{{line(13), "QUAY", "A Visitor", "A Firm", "", "vendor", []string{"IV"}, at, at, "P1", "", []string{"torch"}, true}},
		VisitSteps:  []VisitStepRow{{line(14), "QUAY", "id-13", "arrived", at, "P1", "cleared", "A1"}},
		Plans:       []PlanRow{{line(12), "QUAY", "drill/quench", "early", day, "14:00"}},
		Accounts:    []AccountRow{{line(13), "A1", "runa", "member", []string{"QUAY"}, "P1", &day, true}, {line(14), "A2", "ada", "administrator", nil, "", nil, false}},
		Batches:     []BatchRow{{line(15), "QUAY", "people", "people.csv", 3, "A1", at}},
	}
}

// However the bytes are damaged, they are read or refused, and what is read can be written and read again.
func FuzzReadDelta(f *testing.F) {
	d := sampleDelta()
	var b bytes.Buffer
	works(f, WriteDelta(&b, &d))
	f.Add(b.Bytes())
	for i := range b.Len() {
		damaged := slices.Clone(b.Bytes())
		damaged[i] ^= 0xff
		f.Add(damaged)
		f.Add(b.Bytes()[:i])
	}
	f.Add(bytes.Repeat([]byte{0xff}, 64))
	f.Fuzz(func(t *testing.T, b []byte) {
		d, err := ReadDelta(string(b))
		if err != nil {
			return
		}
		var again bytes.Buffer
		works(t, WriteDelta(&again, &d))
		got, err := ReadDelta(again.String())
		works(t, err)
		if !reflect.DeepEqual(got, d) {
			t.Fatalf("read again\n%+v\nfirst\n%+v", got, d)
		}
	})
}

func BenchmarkReadDelta(b *testing.B) {
	day := civil.Of(2026, 3, 2)
	var d Delta
	for i := range 100_000 {
		code := fmt.Sprint("P", i/4)
		d.Facts = append(d.Facts, FactRow{Line{Seq: int64(i), ID: fmt.Sprintf("01890a5d-ac96-774b-bcce-%012d", i)}, "QUAY", "person", code, "level", day, `"L2"`})
		d.Stints = append(d.Stints, StintRow{Line{Seq: int64(i), ID: fmt.Sprintf("01890a5d-ac96-774b-bcce-%012d", i)}, "QUAY", "person", code, &day, nil})
	}
	var w bytes.Buffer
	works(b, WriteDelta(&w, &d))
	text := w.String()
	for b.Loop() {
		if _, err := ReadDelta(text); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(len(d.Facts)+len(d.Stints))*float64(b.N)/b.Elapsed().Seconds()/1e6, "Mrows/s")
}
