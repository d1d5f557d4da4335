package book

import (
	"context"
	"slices"
	"strings"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// WaitingExcusals are those that ask to open zones, still run, and wait for a safety officer.
func (b *Book) WaitingExcusals(ctx context.Context, actor Actor, site string) ([]ExcusalLine, error) {
	var out []ExcusalLine
	err := b.at(ctx, actor, site, nil, func(v *siteOn) error {
		for _, asks := range program.AllAsks {
			for _, s := range v.m.engine.Known(site, asks) {
				for _, x := range v.m.excusals.get(subjectBody{string(s.Asks), s.Code}.key(site)) {
					if x.Site == site && x.Waiting && x.Ended == 0 && (x.To == nil || *x.To >= v.Today) {
						out = append(out, v.excusalLine(x))
					}
				}
			}
		}
		return nil
	})
	slices.SortFunc(out, func(a, b ExcusalLine) int {
		if n := compareDays(a.To, b.To, civil.LastDay); n != 0 {
			return n
		}
		return strings.Compare(a.Entry, b.Entry)
	})
	return out, err
}
