package main

// scanRows hold counting against a plain loop that adds up the same bytes: what no look at all of them can be
// quicker than.
func scanRows(b *bench) ([]*contest, error) {
	w, err := b.load()
	if err != nil {
		return nil, err
	}
	w.turn()
	day := w.past()
	const against = "a plain loop over the same bytes"
	return []*contest{
		{
			work: "all standings as of a past day", against: against, asked: 1.0 / 5,
			ours:   b.timed(5, func() error { w.engine.AllCounts(day); return nil }),
			theirs: b.timed(5, func() error { w.engine.ScanAsOf(); return nil }),
		},
		{
			work: "all standings today", against: against, asked: 1 / 3.5,
			ours:   b.timed(20, func() error { w.engine.Recount(); return nil }),
			theirs: b.timed(20, func() error { w.engine.ScanNow(); return nil }),
		},
	}, nil
}
