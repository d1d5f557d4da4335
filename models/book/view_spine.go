package book

import (
	"context"

	"lodebook/models/program"
	"lodebook/models/standing"
)

// SpineCounts are the numbers that stand beside the links of every page.
type SpineCounts struct {
	Gaps    int // obligations of today that are gaps
	Due     int // fixtures with a gap or something closing today
	Entries int64
}

// SpineCounts counts what every page shows of a site, for whoever may see the site.
func (b *Book) SpineCounts(ctx context.Context, actor Actor, site string) (SpineCounts, error) {
	var out SpineCounts
	err := b.at(ctx, actor, site, nil, func(v *siteOn) error {
		list, err := v.m.engine.Evaluate(v.Code, standing.Query{On: v.on, KnownAt: v.k})
		if err != nil {
			return err
		}
		due := map[string]bool{}
		for _, s := range list {
			if s.Word.IsGap() {
				out.Gaps++
			}
			if s.Subject.Asks == program.AsksFixture && (s.Word.IsGap() || s.Word == standing.Closing) {
				due[s.Subject.Code] = true
			}
		}
		out.Due, out.Entries = len(due), v.m.head
		return nil
	})
	return out, err
}
