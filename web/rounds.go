package web

import (
	"html/template"
	"slices"

	"lodebook/models/book"
	"lodebook/models/standing"
)

// roundLine is one sheet to fill in for one fixture, with all that it answers.
type roundLine struct {
	Disc                  template.HTML
	Word                  standing.Word
	Sheet, Asks, When     string
	Name, Kind, Code, URL string
	FillURL               string
	what                  string
}

type roundZone struct {
	Zone    string
	Devices bool
	Lines   []roundLine
}

type roundsLeaf struct {
	page
	Say      string
	Zones    []roundZone
	Later    []rowLine
	Print    string
	Fixtures string
	SeeAll   bool
	When     *asOf
	Outages  []outageLine
}

var roundsSheet = leafOf[roundsLeaf]("rounds")

const laterShown = 12

// roundsPage lists what there is to look at, zone by zone.
func roundsPage(v *visit) error {
	x, err := v.b.Rounds(v.ctx(), v.actor, v.site.Code, v.on)
	if err != nil {
		return err
	}
	p := &roundsLeaf{page: page{Title: "Rounds", Section: secRounds, AsOf: v.asOf()}, Fixtures: v.url("fixtures"), SeeAll: v.may(book.SeeSite)}
	p.When = p.AsOf
	if len(x.Due) > 0 {
		p.Print = v.url("round-sheet")
	}
	for _, s := range x.Due {
		if n := len(p.Zones); n == 0 || p.Zones[n-1].Zone != s.Fixture.Zone {
			p.Zones = append(p.Zones, roundZone{Zone: s.Fixture.Zone, Devices: s.Devices})
		}
		z := &p.Zones[len(p.Zones)-1]
		z.Lines = append(z.Lines, v.roundLines(s)...)
	}
	for _, r := range x.Later {
		if r.Due != nil && len(p.Later) < laterShown {
			p.Later = append(p.Later, v.rowLine(r))
		}
	}
	p.Say = roundSay(x)
	if p.Outages, err = v.outages(); err != nil {
		return err
	}
	return roundsSheet.show(v, 200, p)
}

// roundLines makes a line for each sheet of a stop: what one sheet answers is walked to once, and
// stands where the worst of it does.
func (v *visit) roundLines(s book.RoundStop) []roundLine {
	rows := slices.Clone(s.Rows)
	slices.SortStableFunc(rows, func(a, b book.Row) int {
		switch {
		case book.Worse(a.Word, b.Word):
			return -1
		case book.Worse(b.Word, a.Word):
			return 1
		}
		return 0
	})
	var out []roundLine
	for _, r := range rows {
		what := v.sheetOf(r)
		if i := slices.IndexFunc(out, func(l roundLine) bool { return what != "" && l.what == what }); i >= 0 {
			out[i].Asks += "; " + r.Cadence
			continue
		}
		l := roundLine{
			Disc: disc(r.Word, r.Left), Word: r.Word, Sheet: orCode(r.Title, r.Item), Asks: r.Cadence, When: v.whenWords(r),
			Name: s.Fixture.Name, Kind: s.Fixture.KindName, Code: s.Fixture.Code, what: what,
		}
		if what != "" {
			l.Sheet = v.what(what)
		}
		if v.may(book.SeeSite) {
			l.URL = v.url("fixtures", s.Fixture.Code)
		}
		if what != "" && v.acts(book.FillSheet) {
			l.FillURL = with(v.url("sheet"), "record", what, "fixture", s.Fixture.Code)
		}
		out = append(out, l)
	}
	return out
}

// sheetOf is the first record that answers the row and has a sheet, or empty.
func (v *visit) sheetOf(r book.Row) string {
	for _, what := range r.Records {
		if _, ok := v.site.Program.SheetFor(what); ok {
			return what
		}
	}
	return ""
}

func roundSay(x book.Round) string {
	if len(x.Due) == 0 {
		if len(x.Later) == 0 {
			return "Nothing is asked of any fixture yet. Put the fixtures on record and adopt the groups of the checklist that are about them."
		}
		return "Nothing is due on any fixture. What comes next is below."
	}
	out := 0
	zones := map[string]bool{}
	for _, s := range x.Due {
		zones[s.Fixture.Zone] = true
		if slices.ContainsFunc(s.Rows, func(r book.Row) bool { return r.Word.IsGap() }) {
			out++
		}
	}
	s := upperFirst(count(len(x.Due), "fixture wants", "fixtures want")) + " looking at in " + count(len(zones), "zone", "zones") + "."
	switch {
	case out == 0:
		return s + " Nothing has run out; all of it is due soon."
	case out == len(x.Due):
		return s + " On each of them something has run out or failed."
	default:
		return s + " On " + number(out) + " something has run out or failed; the rest is due soon."
	}
}
