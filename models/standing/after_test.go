package standing_test

import (
	"testing"

	"lodebook/models/program"
	"lodebook/models/standing"
)

func afterChange(t *testing.T) program.Cadence {
	return program.Cadence{Rule: program.After, After: []string{"change"}, Within: dur(t, "P2D")}
}

func TestAfter(t *testing.T) {
	b := newBook(t, itemT(afterChange(t), grace(t, "P1D")))
	b.want("2025-02-28", "none") // no such event yet
	b.event("change", "2025-03-01")
	b.event("quench", "2025-02-01") // not one that the item asks after
	// due = 2025-03-01 + P2D = 2025-03-03, plus P1D = 2025-03-04
	b.want("2025-02-28", "none")
	b.want("2025-03-01", "closing due 2025-03-03")
	b.want("2025-03-03", "closing due 2025-03-03")
	b.want("2025-03-04", "closing due 2025-03-03 in grace")
	b.want("2025-03-05", "missing due 2025-03-03 since 2025-03-05")
	answer := b.record("2025-03-06")
	b.want("2025-03-05", "missing due 2025-03-03 since 2025-03-05")
	b.want("2025-03-06", "met")
	b.want("2030-01-01", "met")
	b.wantRecord("2030-01-01", answer.ID)
	b.event("change", "2025-04-01") // a second one: due 2025-04-03, and there is an accepted record
	b.want("2025-04-05", "lapsed due 2025-04-03 since 2025-04-05")
}

func TestAfterTheEarliestUnanswered(t *testing.T) {
	b := newBook(t, itemT(afterChange(t)))
	b.event("change", "2025-03-10")
	b.event("change", "2025-03-12")
	b.want("2025-03-12", "closing due 2025-03-12") // the event of the 10th, and P2D
	b.record("2025-03-11")
	b.want("2025-03-12", "closing due 2025-03-14") // only that of the 12th is left
	b.record("2025-03-13", "fail")
	b.want("2025-03-13", "failed since 2025-03-13")
	b.record("2025-03-14")
	b.want("2025-03-14", "met") // one record answers every event before it
}

// The event's own day: by the times where both have one; else a record of that day answers, unless
// the item guards a zone.
func TestAfterOnTheSameDay(t *testing.T) {
	for _, c := range []struct {
		event, record    string
		answers, guarded bool
	}{
		{"2025-03-10", "2025-03-10", true, false},
		{"2025-03-10T10:00Z", "2025-03-10", true, false},
		{"2025-03-10", "2025-03-10T10:00Z", true, false},
		{"2025-03-10T10:00Z", "2025-03-10T09:59Z", false, false},
		{"2025-03-10T10:00Z", "2025-03-10T10:00Z", false, false},
		{"2025-03-10T10:00Z", "2025-03-10T10:01Z", true, true},
		{"2025-03-10T10:00Z", "2025-03-09", false, false},
		{"2025-03-10", "2025-03-09T23:59Z", false, false},
		{"2025-03-10T23:00Z", "2025-03-11", true, true},
	} {
		for _, guarding := range []bool{false, true} {
			var more []func(*program.Item)
			want := c.answers
			if guarding {
				more, want = append(more, guards), c.guarded
			}
			b := newBook(t, itemT(afterChange(t), more...))
			b.event("change", c.event)
			b.record(c.record)
			if got := b.get("2025-03-11", standing.Always).Word == standing.Met; got != want {
				t.Errorf("event %s, record %s, guarding %v: answered %v, want %v", c.event, c.record, guarding, got, want)
			}
		}
	}
}

func TestAfterEventsFromBeforeTheStart(t *testing.T) {
	b := newBook(t, itemT(afterChange(t)))
	b.event("change", "2024-06-01")
	b.want("2025-01-10", "missing due 2024-06-03 since 2025-01-01") // no gap is older than the start
	b.wantStart("2025-01-10", "2025-01-01")
}

// Without an event there is no obligation, unless the last record from the start on failed.
func TestAfterFailedWithoutAnEvent(t *testing.T) {
	b := newBook(t, itemT(afterChange(t)))
	b.record("2024-12-31", "fail") // before the start
	b.want("2025-01-10", "none")
	b.record("2025-02-01", "fail")
	b.want("2025-02-01", "failed since 2025-02-01")
	b.excusal("T", "2025-02-10", "2025-02-12", false)
	b.want("2025-02-10", "excused until 2025-02-12")
	b.want("2025-02-13", "failed since 2025-02-01")
	b.record("2025-03-01")
	b.want("2025-03-01", "none")
	// With an event, a failure from before the start counts like any other.
	b = newBook(t, itemT(afterChange(t)))
	b.event("change", "2024-12-01")
	b.record("2024-12-02", "fail")
	b.want("2025-01-10", "failed since 2025-01-01")
}

func TestAfterSeveralEvents(t *testing.T) {
	c := afterChange(t)
	c.After = []string{"quench", "change"}
	b := newBook(t, itemT(c))
	b.event("change", "2025-03-10")
	b.event("quench", "2025-03-08")
	b.want("2025-03-10", "closing due 2025-03-10") // 2025-03-08 + P2D
}

func TestLeftAfterAnEvent(t *testing.T) {
	c := afterChange(t)
	c.Within = dur(t, "P10D")
	b := newBook(t, itemT(c))
	b.record("2025-02-01")
	b.event("change", "2025-03-01") // the span runs from the event to 2025-03-11
	if got := b.get("2025-03-06", standing.Always).Left; got != 0.5 {
		t.Errorf("%v is left, want 0.5", got)
	}
}
