package main

// asOfRows count all standings as of a day of the past.
func asOfRows(b *bench) ([]*contest, error) {
	const work = "all standings as of a past day"
	w, err := b.load()
	if err != nil {
		return nil, err
	}
	day := w.past()
	right := w.answerOf(w.engine.AllCounts(day))
	ours := b.timed(5, func() error { w.engine.AllCounts(day); return nil })
	lite, err := b.sqlite()
	if err != nil {
		return nil, err
	}
	c, err := b.versus(lite, work, 40, sqliteAsOf, lastPoint(day), right, ours)
	if err != nil {
		return nil, err
	}
	pg, err := b.postgresRow(work, 40, postgresAsOf, lastPoint(day), right, ours)
	return []*contest{c, pg}, err
}
