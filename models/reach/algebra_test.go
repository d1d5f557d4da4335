package reach_test

import (
	"fmt"
	"testing"
	"time"

	"github.com/RoaringBitmap/roaring/v2"
	"pgregory.net/rapid"

	"lodebook/models/civil"
	"lodebook/models/reach"
	"lodebook/models/standing"
)

// minutes is a set of minutes after an instant that lies before everything.
type minutes struct{ *roaring.Bitmap }

var (
	zero = time.Date(2023, 1, 1, 0, 0, 0, 0, time.UTC)
	end  = time.Date(2026, 1, 1, 0, 0, 0, 0, time.UTC)
)

func minute(t time.Time) uint64 { return uint64(t.Sub(zero) / time.Minute) }

func (m minutes) add(from, to time.Time) {
	if from.IsZero() || from.Before(zero) {
		from = zero
	}
	if to.IsZero() || to.After(end) {
		to = end
	}
	if from.Before(to) {
		m.AddRange(minute(from), minute(to))
	}
}

// TestTheAlgebraIsThatOfSets works the ribbon out once more as sets of minutes, with the operations of a general-purpose
// library of sets (github.com/RoaringBitmap/roaring): present and granted, without paused, and for the items the minutes
// in which one is asked without those in which one is asked and not open.
func TestTheAlgebraIsThatOfSets(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d := newDraws(t)
		l := d.book().known(standing.Always)
		e := l.engine()
		g, err := e.Guard("S", standing.Always)
		if err != nil {
			t.Fatal(err)
		}
		set := func() minutes { return minutes{roaring.New()} }
		in, granted, paused, asked, shut := set(), set(), set(), set(), set()
		days := func(m minutes, runs []standing.Days) {
			for _, r := range runs {
				to := time.Time{}
				if r.Last < civil.LastDay {
					to = g.Dawn(r.Last + 1)
				}
				m.add(g.Dawn(r.First), to)
			}
		}
		days(in, g.Present("ann"))
		days(paused, g.Paused("ann"))
		for _, x := range g.Grants("ann") {
			if x.Zone == "IV" {
				granted.add(x.From, x.To)
			}
		}
		for _, item := range g.Items("IV") {
			list := g.Stretches(item, "IV", "ann")
			for i, s := range list {
				to := time.Time{}
				if i+1 < len(list) {
					to = list[i+1].From
				}
				if s.Asked {
					asked.add(s.From, to)
				}
				if s.Asked && !s.Open {
					shut.add(s.From, to)
				}
			}
		}
		in.And(granted.Bitmap)
		in.AndNot(paused.Bitmap)
		in.And(asked.Bitmap)
		in.AndNot(shut.Bitmap)
		r, err := reach.New(e, "S", standing.Always)
		if err != nil {
			t.Fatal(err)
		}
		got := set()
		for _, s := range r.Ribbon("ann", "IV") {
			if s.Entitled {
				got.add(s.From, s.To)
			}
		}
		if !got.Equals(in.Bitmap) {
			t.Fatalf("the ribbon has %d minutes, the sets %d\n%s", got.GetCardinality(), in.GetCardinality(), l)
		}
	})
}

// TestThenIsAReaderOfItsMoment asks about instants each as known at a moment of its own, in order and out of it.
func TestThenIsAReaderOfItsMoment(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d := newDraws(t)
		l := d.book()
		e := l.engine()
		then := reach.NewThen(e, "S")
		k := int64(0)
		for range 40 {
			if d.chance(30) {
				if k = int64(1 + d.n(int(d.seq)+3)); k > d.seq {
					k = standing.Always
				}
			}
			zone := []string{"III", "IV"}[d.n(2)]
			at := d.quarters()
			yes, why, err := then.At("ann", zone, at, k)
			if err != nil {
				t.Fatal(err)
			}
			r, err := reach.New(e, "S", k)
			if err != nil {
				t.Fatal(err)
			}
			one := r.One("ann", zone, at)
			if one.Entitled != yes || fmt.Sprint(one.Reasons) != fmt.Sprint(why) && words(one.Reasons) != words(why) {
				t.Fatalf("at %v known at %d: %v (%s), and by itself %v (%s)\n%s", at, k, yes, words(why), one.Entitled, words(one.Reasons), l)
			}
		}
	})
}
