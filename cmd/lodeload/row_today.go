package main

import "lodebook/models/standing"

// todayRows count all standings today by looking at each obligation's present word, which is kept current. (The
// counts themselves are kept current too, and would be had for nothing; but then SQL might keep them as well.)
func todayRows(b *bench) ([]*contest, error) {
	const work = "all standings today"
	w, err := b.load()
	if err != nil {
		return nil, err
	}
	today := w.today()
	right := w.answerOf(w.engine.AllCounts(today)) // from the courses: nothing is kept current yet
	w.turn()
	for _, counts := range [][]standing.SiteCount{w.engine.AllCounts(today), w.engine.Recount()} {
		if err := agree(work, right, w.answerOf(counts)); err != nil {
			return nil, err
		}
	}
	ours := b.timed(20, func() error { w.engine.Recount(); return nil })
	lite, err := b.sqlite()
	if err != nil {
		return nil, err
	}
	c, err := b.versus(lite, work, 60, sqliteToday, int(today), right, ours)
	if err != nil {
		return nil, err
	}
	pg, err := b.postgresRow(work, 60, postgresToday, int(today), right, ours)
	return []*contest{c, pg}, err
}

// turn makes today the present day at every site.
func (w *world) turn() {
	for _, site := range w.sites {
		w.engine.Turn(site, w.today())
	}
}
