package book_test

import (
	"errors"
	"reflect"
	"slices"
	"testing"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// TestShortIsWhatStandingsSay: it gives those rows of all standings that ask for attention, in their order
// and, with their names, the same to the last field.
func TestShortIsWhatStandingsSay(t *testing.T) {
	d := newDesk(t)
	d.fill()
	_, err := d.RewriteProgram(t.Context(), d.officer, site, func(source []byte) ([]byte, error) {
		return append(source, "\n  - {code: FIRE, title: The way out is walked each month, asks: person, record: training/fire, every: P1M, notice: P1D, basis: Site rule}\n"...), nil
	})
	d.ok(err)
	d.record("training/fire", "person:P1", "2026-03-02", "pass")
	first := civil.Of(2026, time.January, 1)
	met := 0
	for i := range civil.Day(200) {
		on := first + i
		week := civil.PeriodOf(civil.ByWeek, on)
		all, err := d.Standings(t.Context(), d.officer, book.StandingQuery{Site: site, On: &on})
		d.ok(err)
		var want []book.Row
		for _, r := range all.Rows {
			due := r.Due != nil && *r.Due >= week.First && *r.Due <= week.Last
			if due && r.Word == standing.Met && r.Rule == program.Each {
				continue // is met again each period, and of no matter
			}
			if r.Word.IsGap() || r.Word == standing.Closing || r.Word == standing.DataFault || due {
				want = append(want, r)
			}
			if due && r.Word == standing.Met {
				met++
			}
		}
		short, err := d.Short(t.Context(), d.officer, site, &on)
		d.ok(err)
		rows := slices.DeleteFunc(short.Rows, func(r book.Row) bool { return r.Word == standing.Met && r.Rule == program.Each })
		d.ok(d.Named(t.Context(), d.officer, site, &on, rows))
		if len(rows) != len(want) {
			t.Fatalf("on %v there are %d rows, want %d", on, len(rows), len(want))
		}
		for i := range rows {
			if !reflect.DeepEqual(rows[i], want[i]) {
				t.Errorf("on %v:\n%+v, want\n%+v", on, rows[i], want[i])
			}
		}
		spine, err := d.SpineCounts(t.Context(), d.officer, site)
		d.ok(err)
		if today, err := d.Short(t.Context(), d.officer, site, nil); err != nil || len(today.Gaps()) != spine.Gaps || today.Due() != spine.Due || today.Entries != spine.Entries {
			t.Fatalf("%d gaps, %d due, %d entries, want %+v: %v", len(today.Gaps()), today.Due(), today.Entries, spine, err)
		}
		if proved := slices.ContainsFunc(all.Rows, func(r book.Row) bool { return r.Record != "" }); short.Proved != proved {
			t.Errorf("on %v proved is %v, want %v", on, short.Proved, proved)
		}
	}
	if met == 0 {
		t.Error("no day had something that is met and falls due in its week")
	}
}

// TestShortIsTheirOwn for who does not see the site; names of others are not given to them.
func TestShortIsTheirOwn(t *testing.T) {
	d := newDesk(t)
	d.person("P1", "Runa Sandoy", "L2")
	d.person("P2", "Teis Joensen", "L2")
	member := d.account("mina", book.Member, "P2")
	own, err := d.Short(t.Context(), member, site, nil)
	d.ok(err)
	for _, r := range own.Rows {
		if r.Subject.Code != "P2" {
			t.Errorf("a member is shown %+v", r.Subject)
		}
	}
	if len(own.Rows) == 0 || own.Plans != nil {
		t.Errorf("a member is shown %d rows and the plans %v", len(own.Rows), own.Plans)
	}
	d.ok(d.Named(t.Context(), member, site, nil, own.Rows))
	all, err := d.Short(t.Context(), d.officer, site, nil)
	d.ok(err)
	var denied *book.Denied
	if err := d.Named(t.Context(), member, site, nil, all.Rows); !errors.As(err, &denied) {
		t.Errorf("a member was given everybody's names: %v", err)
	}
	stranger := member
	stranger.Sites = []string{"ELSEWHERE"}
	if _, err := d.Short(t.Context(), stranger, site, nil); !errors.As(err, &denied) {
		t.Errorf("a stranger was let in: %v", err)
	}
	if err := d.Named(t.Context(), stranger, site, nil, own.Rows); !errors.As(err, &denied) {
		t.Errorf("a stranger was given names: %v", err)
	}
	nowhere := d.officer
	nowhere.Sites = nil
	var missing *book.NotFound
	if _, err := d.Short(t.Context(), nowhere, "NOWHERE", nil); !errors.As(err, &missing) {
		t.Errorf("a site that is not there: %v", err)
	}
	if err := d.Named(t.Context(), nowhere, "NOWHERE", nil, own.Rows); !errors.As(err, &missing) {
		t.Errorf("names of a site that is not there: %v", err)
	}
}
