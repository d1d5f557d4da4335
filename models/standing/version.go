package standing

import (
	"cmp"
	"slices"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// edition is a recorded version with its program indexed. It never changes.
type edition struct {
	Version
	site       string
	loc        *time.Location
	items      []*program.Item // by code
	byCode     map[string]*program.Item
	declared   map[Subject]bool // zones, crews, posts, documents and the site itself
	conferring []rung           // highest level first
}

// rung is a level and the items that confer it.
type rung struct {
	level program.Level
	items []*program.Item
}

func newEdition(site string, v Version) *edition {
	ed := &edition{Version: v, site: site, loc: v.Program.Site.Location, byCode: map[string]*program.Item{}}
	if ed.loc == nil {
		ed.loc = time.UTC
	}
	for i := range v.Program.Items {
		item := &v.Program.Items[i]
		ed.items = append(ed.items, item)
		ed.byCode[item.Code] = item
	}
	slices.SortFunc(ed.items, func(a, b *program.Item) int { return cmp.Compare(a.Code, b.Code) })
	ed.declared = declarations(site, v.Program)
	ed.conferring = rungs(v.Program.Levels, ed.items)
	return ed
}

func declarations(site string, p *program.Program) map[Subject]bool {
	all := map[Subject]bool{{program.AsksSite, site}: true}
	for _, z := range p.Zones {
		all[Subject{program.AsksZone, z.Code}] = true
	}
	for _, c := range p.Crews {
		all[Subject{program.AsksCrew, c.Code}] = true
	}
	for _, x := range p.Posts {
		all[Subject{program.AsksPost, x.Code}] = true
	}
	for _, d := range p.Documents {
		all[Subject{program.AsksDocument, d.Code}] = true
	}
	return all
}

// rungs lists the levels, highest first, with the items that confer each.
func rungs(levels []program.Level, items []*program.Item) []rung {
	var out []rung
	for _, l := range levels {
		r := rung{level: l}
		for _, item := range items {
			if item.Confers == l.Code {
				r.items = append(r.items, item)
			}
		}
		out = append(out, r)
	}
	slices.SortStableFunc(out, func(a, b rung) int { return cmp.Compare(b.level.Rank, a.level.Rank) })
	return out
}

// reign is a span of days judged by one version: from the day until the next reign.
type reign struct {
	from civil.Day
	*edition
}

// reigns lays the versions known at k over the days: on each day, of those in force from that day
// or before, the last recorded.
func (s *site) reigns(k int64) []reign {
	var known []*edition
	for _, ed := range s.editions {
		if ed.KnownAt(k) {
			known = append(known, ed)
		}
	}
	slices.SortStableFunc(known, func(a, b *edition) int { return cmp.Compare(a.InForceFrom, b.InForceFrom) })
	var out []reign
	for _, ed := range known {
		n := len(out)
		switch {
		case n > 0 && ed.Seq < out[n-1].Seq: // overruled by a later one that is in force already
		case n > 0 && ed.InForceFrom == out[n-1].from:
			out[n-1].edition = ed
		default:
			out = append(out, reign{ed.InForceFrom, ed})
		}
	}
	return out
}

// edition is the version of the day, or nil before the first.
func (v *view) edition(on civil.Day) *edition {
	if i := v.reign(on); i >= 0 {
		return v.reigns[i].edition
	}
	return nil
}

func (v *view) reign(on civil.Day) int {
	i := len(v.reigns) - 1
	for i >= 0 && v.reigns[i].from > on {
		i--
	}
	return i
}

// inForce is the first day of the present unbroken run of versions that have the item of the day's
// version, or the item's since, if that is later.
func (v *view) inForce(item *program.Item, on civil.Day) civil.Day {
	i := v.reign(on)
	for i > 0 && v.reigns[i-1].byCode[item.Code] != nil {
		i--
	}
	if item.Since != nil {
		return max(v.reigns[i].from, *item.Since)
	}
	return v.reigns[i].from
}

// VersionOn is the version by which the day is judged as known at k: of those recorded by then and
// in force from that day or before, the last recorded. It is false where there is none.
func (e *Engine) VersionOn(site string, on civil.Day, k int64) (Version, bool) {
	v, err := e.view(site, k)
	if err != nil {
		return Version{}, false
	}
	ed := v.edition(on)
	if ed == nil {
		return Version{}, false
	}
	return ed.Version, true
}

// Location is the zone in which the site counts the day: that of the day's version; before the
// first version, that of the first; UTC for a site without any.
func (e *Engine) Location(site string, on civil.Day, k int64) *time.Location {
	v, err := e.view(site, k)
	if err != nil || len(v.reigns) == 0 {
		return time.UTC
	}
	return v.reigns[max(0, v.reign(on))].loc
}
