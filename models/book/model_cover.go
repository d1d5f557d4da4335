package book

import (
	"maps"
	"slices"

	"lodebook/models/program"
	"lodebook/models/store"
)

// coverModel is the part of the model about who is there when.
type coverModel struct {
	duties shelf[string, []store.DutyRow]    // by site
	stocks shelf[siteCode, []store.StockRow] // by site and item
	// stocked are the sites of which stock is taken: some version of theirs has an item with cover, or one that
	// reads the state of the list of who can open which door.
	stocked map[string]bool
}

func newCoverModel(own *owner) coverModel {
	return coverModel{newShelf[string, []store.DutyRow](own), newShelf[siteCode, []store.StockRow](own), nil}
}

func (c coverModel) fork(own *owner) coverModel {
	return coverModel{c.duties.fork(own), c.stocks.fork(own), c.stocked}
}

// note keeps in mind what a version of a site's program asks for.
func (c *coverModel) note(site string, p *program.Program) {
	if c.stocked[site] || !slices.ContainsFunc(p.Items, func(i program.Item) bool { return i.Cadence.Cover != nil || readsDoors(&i) }) {
		return
	}
	if c.stocked = maps.Clone(c.stocked); c.stocked == nil {
		c.stocked = map[string]bool{}
	}
	c.stocked[site] = true
}

// readsDoors tells whether the item asks for the state of the list of who can open which door.
func readsDoors(i *program.Item) bool {
	for _, s := range []*program.Selector{i.When, i.Cadence.Holds} {
		if s != nil && (slices.Contains(s.Reads(), program.FactDoorListAge) || slices.Contains(s.Reads(), program.FactDoorListOpen)) {
			return true
		}
	}
	return false
}

func (c *coverModel) takeCover(d store.Delta) {
	for _, x := range d.Duties {
		put(&c.duties, x.Site, x, func(x store.DutyRow) int64 { return x.Seq }, always)
	}
	for _, x := range d.Stocks {
		put(&c.stocks, siteCode{x.Site, x.Item}, x, func(x store.StockRow) int64 { return x.Seq }, always)
	}
}

// shelveCover puts the rows of a snapshot up.
func (c *coverModel) shelveCover(d *store.Delta) {
	shelve(&c.duties, d.Duties, func(x *store.DutyRow) string { return x.Site })
	shelve(&c.stocks, d.Stocks, func(x *store.StockRow) siteCode { return siteCode{x.Site, x.Item} })
}

// listCover adds the rows to those of a snapshot.
func (c *coverModel) listCover(d *store.Delta) {
	d.Duties, d.Stocks = listed(c.duties), listed(c.stocks)
}
