package main

import (
	"math/rand/v2"
	"time"

	"lodebook/models/standing"
)

// recordRows put new records of every kind of subject and item at random, with the counts kept current.
func recordRows(b *bench) ([]*contest, error) {
	w, err := b.load()
	if err != nil {
		return nil, err
	}
	w.turn()
	few, err := b.fewSites()
	if err != nil {
		return nil, err
	}
	few.turn()
	const work = "one new record, counts included"
	ours := b.putting(w)
	return []*contest{
		{work: work, against: "a full evaluation", asked: 1000, check: w.checkPut, ours: ours, theirs: b.timed(1, func() error {
			w.engine.AllCounts(w.past())
			return nil
		})},
		{work: work, against: "a microsecond", asked: 1, ours: ours, theirs: func() (float64, error) { return 1000, nil }},
		{work: work, against: "the same at 5 sites", asked: 1 / 1.5, ours: ours, theirs: b.putting(few)},
	}, nil
}

// fewSites is a world of five sites that are as large as those of the whole network.
func (b *bench) fewSites() (*world, error) {
	s := b.network
	few := min(5, s.Sites)
	s.People, s.Fixtures, s.Sites = s.People*few/s.Sites, s.Fixtures*few/s.Sites, few
	return b.newWorld(s)
}

// putting is one round: a mix of records that are new, on sites drawn at random.
func (b *bench) putting(w *world) func() (float64, error) {
	r := rand.New(rand.NewPCG(b.network.Seed, uint64(len(w.sites))))
	return func() (float64, error) {
		mix := w.mix(r, b.mix)
		began := b.clock()
		for i := range mix {
			w.engine.PutRecord(mix[i])
		}
		return nanoseconds(b.clock().Sub(began), len(mix)), nil
	}
}

// mix draws records like those that are there: nine of ten of today, the others of a past day.
func (w *world) mix(r *rand.Rand, size int) []standing.Record {
	out := make([]standing.Record, size)
	for i := range out {
		like := w.unlike(r)
		if r.IntN(10) > 0 {
			like.record.Day = w.today()
		}
		if !like.record.Time.IsZero() { // of the day, what is written down comes last
			like.record.Time = like.record.Day.Midnight(time.UTC).Add(20*time.Hour + time.Duration(len(w.renewed))*time.Millisecond)
		}
		like.record.Failed = r.IntN(50) == 0
		out[i] = w.record(like.site, &like.record)
	}
	return out
}

// unlike draws one of the records, of a subject that has had no new one of its kind yet: nobody does the same
// thing again and again on one day. When most have, any will do.
func (w *world) unlike(r *rand.Rand) sampled {
	if w.renewed == nil {
		w.renewed = map[string]bool{}
	}
	for try := 0; ; try++ {
		like := w.sample[r.IntN(len(w.sample))]
		key := like.site + " " + string(like.record.Subject.Asks) + " " + like.record.Subject.Code + " " + like.record.What
		if !w.renewed[key] || try > 20 {
			w.renewed[key] = true
			return like
		}
	}
}

// checkPut asserts that the counts that are kept current are those that an evaluation gives.
func (w *world) checkPut() error {
	for _, rec := range w.mix(rand.New(rand.NewPCG(w.n.Seed, 1)), 500) {
		w.engine.PutRecord(rec)
	}
	kept := w.answerOf(w.engine.AllCounts(w.today()))
	full := answer{}
	site, item := index(w.sites), index(w.items)
	for _, code := range w.sites {
		rows, err := w.engine.Evaluate(code, standing.Query{On: w.today(), KnownAt: standing.Always})
		if err != nil {
			return err
		}
		for _, s := range rows {
			full[cell{site[code], item[s.Item], wordNumber[s.Word]}]++
		}
	}
	return agree("after new records", kept, full)
}

// wordNumber numbers the words by their place in standing.Words.
var wordNumber = func() map[standing.Word]int {
	out := map[standing.Word]int{}
	for i, w := range standing.Words {
		out[w] = i
	}
	return out
}()
