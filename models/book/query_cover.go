package book

import (
	"cmp"
	"context"
	"slices"
	"strconv"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/reach"
)

// Uncovered is a time in which a site is short of people by an item: From is included, To is not.
type Uncovered struct {
	Item, Title string
	Words       string // who must be there
	From, To    time.Time
	There       int // how many are
	Needed      int
}

// UncoveredJSON is one as commands and the API give it.
type UncoveredJSON struct {
	Item   string    `json:"item"`
	From   time.Time `json:"from"`
	To     time.Time `json:"to"`
	There  int       `json:"there"`
	Needed int       `json:"needed"`
}

// JSON gives it as commands and the API do.
func (u Uncovered) JSON() UncoveredJSON {
	return UncoveredJSON{u.Item, u.From.UTC(), u.To.UTC(), u.There, u.Needed}
}

// CoverColumns are the columns of a table of uncovered times.
var CoverColumns = []string{"item", "from", "to", "there", "needed"}

// Cells are those of CoverColumns.
func (u Uncovered) Cells() []string {
	return []string{u.Item, u.From.UTC().Format(time.RFC3339), u.To.UTC().Format(time.RFC3339), strconv.Itoa(u.There), strconv.Itoa(u.Needed)}
}

// CoverTime is the time of days at a site, both included, as typed: from today, and for four weeks, where they are
// empty.
func (b *Book) CoverTime(ctx context.Context, site, from, to string) (first, end time.Time, err error) {
	today, err := b.Today(ctx, site)
	if err != nil {
		return first, end, err
	}
	loc, err := b.Zone(ctx, site)
	if err != nil {
		return first, end, err
	}
	day := func(field, text string, unless civil.Day) civil.Day {
		if strings.TrimSpace(text) == "" {
			return unless
		}
		d, bad := civil.ParseDay(strings.TrimSpace(text))
		if bad != nil && err == nil {
			err = invalid(field, text, "is not a day", "write it as YYYY-MM-DD")
		}
		return d
	}
	a := day("from", from, today)
	z := day("to", to, a+nearHorizon-1)
	if err == nil && z < a {
		err = invalid("to", to, "lies before the first day, "+a.String(), "a day on or after it")
	}
	return a.Midnight(loc), (min(z, civil.LastDay-1) + 1).Midnight(loc), err
}

// CoverQuery asks when a site is short of people. Of the spans those are given that reach into the time from From,
// which is included, to To, with their own beginnings and ends; a nil KnownAt is all that is recorded.
type CoverQuery struct {
	Site, Item string
	From, To   time.Time
	KnownAt    *time.Time
}

// CoverItem is an item with cover: who must be there, and for which time that is reckoned; both ends are zero where
// there is no roster.
type CoverItem struct {
	Code, Title string
	Words       string // who must be there
	When        string // in which hours
	From, To    time.Time
}

// Coverage is the answer.
type Coverage struct {
	Site  SiteView
	Items []CoverItem // in order of code
	Rows  []Uncovered // in order of time, then item
}

// Coverage tells when a site is short of people, by what the book has reckoned.
func (b *Book) Coverage(ctx context.Context, actor Actor, q CoverQuery) (Coverage, error) {
	var out Coverage
	if err := actor.may(SeeSite, q.Site); err != nil {
		return out, err
	}
	if !q.To.After(q.From) {
		return out, invalid("to", q.To.Format(time.RFC3339), "is not after the beginning", "a moment after "+q.From.Format(time.RFC3339))
	}
	k, err := b.knownAt(ctx, q.KnownAt)
	if err != nil {
		return out, err
	}
	return out, b.read(ctx, func(m *model) error {
		if m.site(q.Site) == nil {
			return &NotFound{"site", q.Site}
		}
		v, err := m.view(q.Site, nil, k, b.Now())
		if err != nil {
			return err
		}
		out.Site = v.SiteView
		for _, item := range m.coverItems(q.Site) {
			if q.Item != "" && q.Item != item.Code {
				continue
			}
			is, _ := m.reckoned(q.Site, item.Code, k)
			item.From, item.To = is.from, is.to
			out.Items = append(out.Items, item)
			for _, u := range is.spans {
				if u.From.Before(q.To) && u.To.After(q.From) {
					out.Rows = append(out.Rows, item.uncovered(u))
				}
			}
		}
		if q.Item != "" && len(out.Items) == 0 {
			return invalid("item", q.Item, "is no item that asks for people on duty", "the code of an item with cover")
		}
		slices.SortStableFunc(out.Rows, func(a, b Uncovered) int {
			return cmp.Or(a.From.Compare(b.From), cmp.Compare(a.Item, b.Item))
		})
		return nil
	})
}

func (c CoverItem) uncovered(u reach.Uncovered) Uncovered {
	return Uncovered{c.Code, c.Title, c.Words, u.From, u.To, u.There, u.Needed}
}

// coverItems are the items with cover of all versions of a site, as the last that has each says it.
func (m *model) coverItems(site string) []CoverItem {
	var out []CoverItem
	versions := m.site(site).versions
	for i := len(versions) - 1; i >= 0; i-- {
		for _, item := range versions[i].program.Items {
			c := item.Cadence
			if c.Rule == program.Cover && !slices.ContainsFunc(out, func(o CoverItem) bool { return o.Code == item.Code }) {
				out = append(out, CoverItem{Code: item.Code, Title: item.Title, Words: c.Cover.Words(), When: c.Words()})
			}
		}
	}
	slices.SortFunc(out, func(a, b CoverItem) int { return cmp.Compare(a.Code, b.Code) })
	return out
}

// Uncovered are the times between two instants in which a site is short of people, cut to them.
func (b *Book) Uncovered(ctx context.Context, actor Actor, site string, from, to time.Time) ([]Uncovered, error) {
	c, err := b.Coverage(ctx, actor, CoverQuery{Site: site, From: from, To: to})
	for i := range c.Rows {
		u := &c.Rows[i]
		if u.From.Before(from) {
			u.From = from
		}
		if u.To.After(to) {
			u.To = to
		}
	}
	return c.Rows, err
}
