package book_test

import (
	"testing"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/standing"
)

// The counts of a period and the history of an obligation say of each day what is asked of that day alone,
// also as the book knew it before a late record.
func TestOverAndHistoryAgreeWithEachDay(t *testing.T) {
	d := bigSite(t, 30)
	before := d.now
	d.now = d.now.Add(time.Hour)
	d.record("training/level-2", "P00007", "2026-02-10", "fail")
	to := civil.Of(2026, time.March, 10)
	for _, known := range []*time.Time{nil, &before} {
		over, err := d.Over(t.Context(), d.officer, book.OverQuery{Site: site, From: to - 100, To: to, KnownAt: known})
		d.ok(err)
		history, err := d.History(t.Context(), d.officer, book.HistoryQuery{Site: site, Item: "TRAIN-L2", Subject: "P00007", KnownAt: known})
		d.ok(err)
		for day := to - 100; day <= to; day += 7 {
			st, err := d.Standings(t.Context(), d.officer, book.StandingQuery{Site: site, On: &day, KnownAt: known})
			d.ok(err)
			counts, word := map[string]standing.Tally{}, standing.Word("")
			for _, r := range st.Rows {
				c := counts[r.Item]
				for i, w := range standing.Words {
					if w == r.Word {
						c[i]++
					}
				}
				counts[r.Item] = c
				if r.Item == "TRAIN-L2" && r.Subject.Code == "P00007" {
					word = r.Word
				}
			}
			for _, item := range over.Items {
				if got := item.On(day); got != counts[item.Item] {
					t.Errorf("on %v %s is counted %v, want %v", day, item.Item, got, counts[item.Item])
				}
			}
			got := standing.Word("")
			for _, s := range history {
				if s.First <= day && day <= s.Last {
					got = s.Word
				}
			}
			if got != word {
				t.Errorf("on %v the history says %q, want %q", day, got, word)
			}
		}
	}
	for name, err := range map[string]error{
		"a period that ends before it begins": func() error {
			_, err := d.Over(t.Context(), d.officer, book.OverQuery{Site: site, From: to, To: to - 1})
			return err
		}(),
		"another site": func() error {
			_, err := d.Over(t.Context(), d.officer, book.OverQuery{Site: "NOWHERE", From: to, To: to})
			return err
		}(),
		"no item": func() error {
			_, err := d.History(t.Context(), d.officer, book.HistoryQuery{Site: site, Item: "NONE", Subject: "P00007"})
			return err
		}(),
		"no subject": func() error {
			_, err := d.History(t.Context(), d.officer, book.HistoryQuery{Site: site, Item: "TRAIN-L2"})
			return err
		}(),
	} {
		if err == nil {
			t.Errorf("%s was answered", name)
		}
	}
}
