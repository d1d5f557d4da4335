package main

import (
	"fmt"
	"sync"

	"lodebook/cmd/lodeload/network"
	"lodebook/models/civil"
	"lodebook/models/standing"
)

// overRows count the standings of every day of the history, against as many counts of one day. Only a few
// of those are run, and the time of all is reckoned from them.
func overRows(b *bench) ([]*contest, error) {
	w, err := b.load()
	if err != nil {
		return nil, err
	}
	first, last := network.First, w.today()
	days := int(last-first) + 1
	var sample []civil.Day
	for i := range 8 {
		sample = append(sample, first+civil.Day((2*i+1)*days/16))
	}
	one := b.timed(1, func() error {
		for _, d := range sample {
			w.engine.AllCounts(d)
		}
		return nil
	})
	return []*contest{{
		work: fmt.Sprintf("counts of each of %d days", days), asked: 300,
		against: fmt.Sprintf("as many full evaluations (%d run, the rest reckoned)", len(sample)),
		check:   func() error { return w.checkOver(sample) },
		ours:    b.timed(1, func() error { return w.engine.AllCountsOver(first, last, func(standing.SiteCourse) {}) }),
		theirs: func() (float64, error) {
			took, err := one()
			return took / float64(len(sample)) * float64(days), err
		},
	}}, nil
}

// checkOver asserts that the sweep gives what counting the days one by one does.
func (w *world) checkOver(days []civil.Day) error {
	swept := make(map[civil.Day][]standing.SiteCount)
	var mu sync.Mutex
	err := w.engine.AllCountsOver(network.First, w.today(), func(s standing.SiteCourse) {
		mu.Lock()
		defer mu.Unlock()
		for _, d := range days {
			c := standing.SiteCount{Site: s.Site}
			for i := range s.Items {
				c.Items = append(c.Items, standing.ItemCount{Item: s.Items[i].Item, Tally: s.Items[i].On(d)})
			}
			swept[d] = append(swept[d], c)
		}
	})
	if err != nil {
		return err
	}
	for _, d := range days {
		if err := agree(d.String(), w.answerOf(swept[d]), w.answerOf(w.engine.AllCounts(d))); err != nil {
			return err
		}
	}
	return nil
}
