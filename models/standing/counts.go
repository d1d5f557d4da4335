package standing

import (
	"slices"

	"lodebook/models/civil"
)

// Words are the standings in the order in which a Tally counts them.
var Words = [...]Word{Met, Closing, Lapsed, Missing, Failed, Excused, Awaited, DataFault}

// Tally counts obligations by standing, in the order of Words.
type Tally [len(Words)]int

// Of is the count of a standing.
func (t Tally) Of(w Word) int { return t[slices.Index(Words[:], w)] }

// Gaps is how many are lapsed, missing or failed.
func (t Tally) Gaps() int { return t.Of(Lapsed) + t.Of(Missing) + t.Of(Failed) }

// ItemCount counts the obligations of one item of a site.
type ItemCount struct {
	Item string
	Tally
}

// SiteCount counts the obligations of a site, by item in order of code; only items with an
// obligation or a data fault are listed.
type SiteCount struct {
	Site  string
	Items []ItemCount
}

// Counts counts the standings of a site on a day by all that is recorded.
func (e *Engine) Counts(site string, on civil.Day) (SiteCount, error) {
	rows, err := e.Evaluate(site, Query{On: on, KnownAt: Always})
	c := SiteCount{Site: site}
	for _, r := range rows {
		n := len(c.Items)
		if n == 0 || c.Items[n-1].Item != r.Item {
			c.Items = append(c.Items, ItemCount{Item: r.Item})
			n++
		}
		c.Items[n-1].Tally[slices.Index(Words[:], r.Word)]++
	}
	return c, err
}

// AllCounts counts the standings of every site that has a version, in order of code, over all cores.
func (e *Engine) AllCounts(on civil.Day) []SiteCount {
	var out []SiteCount
	for _, s := range e.sites {
		if len(s.editions) > 0 {
			c, _ := e.Counts(s.code, on) // the site is there
			out = append(out, c)
		}
	}
	slices.SortFunc(out, func(a, b SiteCount) int { return compareStrings(a.Site, b.Site) })
	return out
}

func compareStrings(a, b string) int {
	switch {
	case a < b:
		return -1
	case a > b:
		return 1
	}
	return 0
}

// Span is a run of days on which an obligation has one standing and one due day. First and Last are
// included; Last is civil.LastDay where nothing known ends it.
type Span struct {
	First, Last civil.Day
	Word        Word
	Due         *civil.Day
	Record      string // identifier of the entry that decided, or empty
}
