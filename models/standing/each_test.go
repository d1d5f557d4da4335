package standing_test

import (
	"testing"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// In 2025 the first of January is a Wednesday; Mondays are 2024-12-30, 2025-01-06, 13, 20 and 27.

func each(unit civil.Unit, operating bool) program.Cadence {
	return program.Cadence{Rule: program.Each, Each: unit, Operating: operating}
}

// weekdays is a program that operates from Monday to Friday but on the days given.
func weekdays(t *testing.T, it program.Item, closed ...string) *program.Program {
	p := siteProgram(it)
	p.Calendar = civil.Calendar{Closed: map[civil.Day]bool{}}
	for d := time.Monday; d <= time.Friday; d++ {
		p.Calendar.Open[d] = true
	}
	for _, d := range closed {
		p.Calendar.Closed[on(t, d)] = true
	}
	return p
}

// weekly is a book whose item T asks each week on operating days, with a notice of a day.
func weekly(t *testing.T, closed []string, more ...func(*program.Item)) *book {
	b := emptyBook(t)
	more = append([]func(*program.Item){notice(t, "P1D")}, more...)
	b.versionOf("2020-01-01", weekdays(t, itemT(each(civil.ByWeek, true), more...), closed...))
	b.stint(ann, "2025-01-01", "")
	return b
}

func TestEachWeekWithoutARecord(t *testing.T) {
	b := weekly(t, nil)
	// The week of 2024-12-30 counts Monday to Friday; its last counted day, Friday 2025-01-03, is not
	// before start + P0D = 2025-01-01, so it asks. (iv): the notice begins on 2025-01-02.
	b.want("2025-01-01", "awaited due 2025-01-03")
	b.want("2025-01-02", "closing due 2025-01-03")
	b.want("2025-01-03", "closing due 2025-01-03")
	// (ii): Friday has gone by
	b.want("2025-01-04", "missing due 2025-01-03 since 2025-01-04")
	b.want("2025-01-06", "missing due 2025-01-03 since 2025-01-04") // the new week does not mend it
	b.want("2025-01-11", "missing due 2025-01-10 since 2025-01-11") // the latest week that was missed
}

func TestEachWeekWithGrace(t *testing.T) {
	b := weekly(t, nil, grace(t, "P3D"))
	// (iii) to 2025-01-03 + P3D = 2025-01-06, then (ii)
	b.want("2025-01-04", "closing due 2025-01-03 in grace")
	b.want("2025-01-06", "closing due 2025-01-03 in grace")
	b.want("2025-01-07", "missing due 2025-01-03 since 2025-01-07")
	b.record("2025-01-07")
	// (i): a record of the present week, and its next week ends on 2025-01-17
	b.want("2025-01-07", "met due 2025-01-17")
	b.want("2025-01-12", "met due 2025-01-17")
	// Monday: (ii) the week before has its record; (iv)
	b.want("2025-01-13", "awaited due 2025-01-17")
	// Saturday, (iii): the week of the 13th has none, and there is an accepted record for later
	b.want("2025-01-18", "closing due 2025-01-17 in grace")
	b.want("2025-01-21", "lapsed due 2025-01-17 since 2025-01-21")
}

func TestEachWeekMet(t *testing.T) {
	b := weekly(t, nil)
	r := b.record("2025-01-02")
	b.want("2025-01-02", "met due 2025-01-10") // Friday of the next week
	b.want("2025-01-05", "met due 2025-01-10") // Sunday: P is still that week
	b.wantRecord("2025-01-05", r.ID)
	b.want("2025-01-06", "awaited due 2025-01-10")
	b.want("2025-01-09", "closing due 2025-01-10")
	b.want("2025-01-11", "lapsed due 2025-01-10 since 2025-01-11")
	b.wantRecord("2025-01-11", "") // no record decided that
}

func TestEachWeekRecordOnAWeekend(t *testing.T) {
	b := weekly(t, nil)
	b.record("2025-01-05") // Sunday: not a day that counts, but of that week
	b.want("2025-01-05", "met due 2025-01-10")
	b.want("2025-01-06", "awaited due 2025-01-10")
}

func TestEachWeekThatBeginsClosed(t *testing.T) {
	b := weekly(t, []string{"2025-01-06"})
	b.record("2025-01-06") // the closed Monday
	// On Monday P is the week before (the new week's first counted day is Tuesday), and the record lies
	// between its first calendar day and Monday.
	b.want("2025-01-06", "met due 2025-01-10")
	// From Tuesday P is the week of the 6th, whose first calendar day is the Monday.
	b.want("2025-01-07", "met due 2025-01-17")
	b.want("2025-01-12", "met due 2025-01-17")
	// A week on it is still answered by the record of its closed Monday.
	b.want("2025-01-13", "awaited due 2025-01-17")
}

func TestEachWeekClosedThroughout(t *testing.T) {
	b := weekly(t, []string{"2025-01-06", "2025-01-07", "2025-01-08", "2025-01-09", "2025-01-10"})
	b.record("2025-01-02")
	// The closed week has no counted day: it asks nothing, and P stays the week of 2024-12-30.
	b.want("2025-01-03", "met due 2025-01-17")
	b.want("2025-01-12", "met due 2025-01-17")
	b.want("2025-01-13", "awaited due 2025-01-17")
	b.want("2025-01-18", "lapsed due 2025-01-17 since 2025-01-18")
}

func TestEachWeekExcused(t *testing.T) {
	b := weekly(t, nil)
	b.record("2025-01-02")
	b.excusal("T", "2025-01-06", "2025-01-08", false)
	b.excusal("T", "2025-01-09", "2025-01-10", false) // the two together cover Monday to Friday
	b.want("2025-01-03", "met due 2025-01-17")        // the excused week does not ask
	b.want("2025-01-07", "excused until 2025-01-08")
	b.want("2025-01-10", "excused until 2025-01-10")
	// Saturday lies outside; P is the excused week, it has no record, and the latest that asked has one
	b.want("2025-01-11", "awaited due 2025-01-17")
	b.want("2025-01-18", "lapsed due 2025-01-17 since 2025-01-18")
}

func TestEachWeekExcusedInPart(t *testing.T) {
	b := weekly(t, nil)
	b.record("2025-01-02")
	b.excusal("T", "2025-01-06", "2025-01-09", false) // Friday is left
	b.want("2025-01-10", "closing due 2025-01-10")
	b.want("2025-01-11", "lapsed due 2025-01-10 since 2025-01-11")
}

func TestEachWeekPausedForGood(t *testing.T) {
	b := weekly(t, nil)
	b.record("2025-01-02")
	b.excusal("", "2025-01-06", "", false)
	b.want("2025-01-05", "met") // no later week will ask: no due day
	b.want("2025-01-06", "excused")
	// Without the record, on the Saturday of a week that is paused from its Friday on:
	b = weekly(t, nil)
	b.excusal("", "2025-01-03", "2025-01-03", false)
	b.excusal("", "2025-01-06", "", false)
	b.want("2025-01-04", "missing due 2025-01-03 since 2025-01-04") // Wednesday and Thursday were not excused
	// And with nothing at all to ask, neither now nor later: nothing is due.
	b = emptyBook(t)
	b.versionOf("2020-01-01", weekdays(t, itemT(each(civil.ByWeek, true))))
	b.stint(ann, "2025-01-04", "") // a Saturday: the week's last counted day is before the start
	b.excusal("", "2025-01-06", "", false)
	b.want("2025-01-05", "awaited")
}

func TestEachWeekFarExcusal(t *testing.T) {
	b := newBook(t, itemT(each(civil.ByDay, false)))
	b.record("2025-01-02")
	b.excusal("T", "2025-01-03", "2025-01-05", false)
	b.want("2025-01-02", "met due 2025-01-06") // the first day that is not excused
	// An end that stands for "never" is strode over, not walked.
	b.excusal("T", "2025-01-06", "9999-12-30", false)
	b.want("2025-01-02", "met due 9999-12-31")
}

func TestEachFirst(t *testing.T) {
	b := weekly(t, nil, first(t, "P14D"))
	// start + P14D = 2025-01-15; the week that ends on 2025-01-10 does not ask, that of 2025-01-17 does
	b.want("2025-01-01", "awaited due 2025-01-17")
	b.want("2025-01-11", "awaited due 2025-01-17")
	b.want("2025-01-18", "missing due 2025-01-17 since 2025-01-18")
}

func TestEachDay(t *testing.T) {
	b := newBook(t, itemT(each(civil.ByDay, false), notice(t, "P0D")))
	b.want("2025-01-01", "closing due 2025-01-01")
	b.want("2025-01-02", "missing due 2025-01-01 since 2025-01-02")
	b.record("2025-01-02")
	b.want("2025-01-02", "met due 2025-01-03")
	b.want("2025-01-03", "closing due 2025-01-03")
	b.want("2025-01-04", "lapsed due 2025-01-03 since 2025-01-04")
	b.record("2025-01-04", "fail")
	b.want("2025-01-04", "failed since 2025-01-04")
	b.want("2025-01-08", "failed since 2025-01-04") // in whatever period the next pass lies
	b.record("2025-01-08")
	b.want("2025-01-08", "met due 2025-01-09")
}

func TestEachOperatingDay(t *testing.T) {
	b := emptyBook(t)
	b.versionOf("2020-01-01", weekdays(t, itemT(each(civil.ByDay, true), notice(t, "P0D"))))
	b.stint(ann, "2025-01-01", "")
	b.record("2025-01-03")                     // a Friday
	b.want("2025-01-03", "met due 2025-01-06") // Monday
	b.want("2025-01-05", "met due 2025-01-06") // Sunday: P is Friday
	b.want("2025-01-06", "closing due 2025-01-06")
	b.want("2025-01-07", "lapsed due 2025-01-06 since 2025-01-07")
}

func TestEachMonthQuarterYear(t *testing.T) {
	for _, c := range []struct {
		unit           civil.Unit
		due, next, gap string
	}{
		{civil.ByMonth, "2025-01-31", "2025-02-28", "2025-02-01"},
		{civil.ByQuarter, "2025-03-31", "2025-06-30", "2025-04-01"},
		{civil.ByYear, "2025-12-31", "2026-12-31", "2026-01-01"},
	} {
		b := newBook(t, itemT(each(c.unit, false), notice(t, "P5D")))
		b.want("2025-01-10", "awaited due "+c.due)
		b.want(c.gap, "missing due "+c.due+" since "+c.gap)
		b.record("2025-01-15")
		b.want("2025-01-15", "met due "+c.next)
	}
}

// A month whose last days are closed ends, for the item, on its last open day.
func TestEachMonthOperating(t *testing.T) {
	b := emptyBook(t)
	b.versionOf("2020-01-01", weekdays(t, itemT(each(civil.ByMonth, true), notice(t, "P3D"))))
	b.stint(ann, "2025-01-01", "")
	b.record("2025-03-03")
	// 2025-05-31 is a Saturday: May's last counted day is Friday the 30th, less P3D Tuesday the 27th.
	b.record("2025-04-01")
	b.want("2025-04-01", "met due 2025-05-30")
	b.want("2025-05-26", "awaited due 2025-05-30")
	b.want("2025-05-27", "closing due 2025-05-30")
	b.want("2025-05-31", "lapsed due 2025-05-30 since 2025-05-31")
	// 2025-06-01 is a Sunday, June's first counted day Monday the 2nd: on Sunday P is still May.
	b.record("2025-05-31")
	b.want("2025-06-01", "met due 2025-06-30")
	b.want("2025-06-02", "awaited due 2025-06-30")
}

func TestEachISOWeekOverNewYear(t *testing.T) {
	b := newBook(t, itemT(each(civil.ByWeek, false), notice(t, "P0D")))
	b.record("2024-12-30") // Monday of 2025-W01, before the start
	b.want("2025-01-05", "met due 2025-01-12")
	b.want("2025-01-06", "awaited due 2025-01-12")
}

// A calendar without an open day is a fault of the program; the evaluator asks nothing by it.
func TestEachNeverOpen(t *testing.T) {
	b := emptyBook(t)
	p := siteProgram(itemT(each(civil.ByMonth, true)))
	p.Calendar = civil.Calendar{}
	b.versionOf("2020-01-01", p)
	b.stint(ann, "2025-01-01", "")
	b.want("2025-06-01", "awaited")
	if got := b.get("2025-06-01", standing.Always).Left; got != 0 {
		t.Errorf("%v is left", got)
	}
}
