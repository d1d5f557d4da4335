package standing_test

import (
	"testing"

	"lodebook/models/standing"
)

func TestExcusal(t *testing.T) {
	b := newBook(t, itemT(yearly(t)))
	b.excusal("T", "2025-02-01", "2025-02-10", false)
	b.excusal("X", "2025-01-01", "2025-12-31", false) // of another item
	b.want("2025-01-31", "missing due 2025-01-01 since 2025-01-02")
	b.want("2025-02-01", "excused until 2025-02-10") // both days are included
	b.want("2025-02-10", "excused until 2025-02-10")
	b.want("2025-02-11", "missing due 2025-01-01 since 2025-01-02")
	b.wantRecord("2025-02-05", "")
}

func TestExcusalAndFailureDay(t *testing.T) {
	for _, c := range []struct{ from, to, day, want string }{
		{"2025-03-10", "2025-03-20", "2025-03-12", "failed since 2025-03-10"},  // begins on the failure's day
		{"2025-03-11", "2025-03-20", "2025-03-12", "excused until 2025-03-20"}, // begins later
		{"2025-03-05", "2025-03-20", "2025-03-09", "excused until 2025-03-20"}, // the failure is yet to come
		{"2025-03-05", "2025-03-20", "2025-03-10", "failed since 2025-03-10"},  // and breaks the excusal
		{"2025-03-05", "2025-03-20", "2025-03-20", "failed since 2025-03-10"},
		{"2025-03-11", "2025-03-20", "2025-03-21", "failed since 2025-03-10"}, // it is over
	} {
		for _, item := range []string{"T", ""} { // a pause does as an excusal does
			b := newBook(t, itemT(yearly(t)))
			b.record("2025-02-01")
			b.record("2025-03-10", "fail")
			b.excusal(item, c.from, c.to, false)
			if b.want(c.day, c.want); t.Failed() {
				t.Fatalf("with %q from %s to %s", item, c.from, c.to)
			}
		}
	}
}

// Of several that cover the day, only those count that begin after the failure; the last end stands.
func TestExcusalsTogether(t *testing.T) {
	b := newBook(t, itemT(yearly(t)))
	b.record("2025-03-10", "fail")
	b.excusal("T", "2025-03-01", "2025-12-31", false)
	b.excusal("T", "2025-03-15", "2025-03-20", false)
	b.excusal("", "2025-03-18", "2025-03-25", false)
	b.want("2025-03-14", "failed since 2025-03-10")
	b.want("2025-03-16", "excused until 2025-03-20")
	b.want("2025-03-18", "excused until 2025-03-25")
	b.want("2025-03-26", "failed since 2025-03-10")
}

func TestOpenPause(t *testing.T) {
	b := newBook(t, itemT(yearly(t)))
	pause := b.excusal("", "2025-02-01", "", false)
	b.want("2030-01-01", "excused") // no day until which
	// The pause is ended by an entry that supersedes it.
	b.PutExcusal("S", standing.Excusal{Line: standing.Line{Seq: pause, Ended: b.seq + 1}, Subject: ann, From: on(t, "2025-02-01")})
	b.excusal("", "2025-02-01", "2025-02-28", false)
	b.want("2025-02-28", "excused until 2025-02-28")
	b.want("2025-03-01", "missing due 2025-01-01 since 2025-01-02")
	b.wantAt("2025-03-01", pause, "excused")
}

// A person's pauses count at every site; excusals count at theirs.
func TestExcusalsOfAnotherSite(t *testing.T) {
	b := newBook(t, itemT(yearly(t)))
	b.PutExcusal("other", standing.Excusal{Line: b.line(), Subject: ann, Item: "T", From: on(t, "2025-02-01"), To: maybe(t, "2025-02-10")})
	b.want("2025-02-05", "missing due 2025-01-01 since 2025-01-02")
	b.PutExcusal("other", standing.Excusal{Line: b.line(), Subject: ann, From: on(t, "2025-02-01"), To: maybe(t, "2025-02-10")})
	b.want("2025-02-05", "excused until 2025-02-10")
}
