package web

import (
	"slices"
	"strings"

	"lodebook/models/book"
	"lodebook/models/program"
)

// roundSheetLeaf is the round, or one sheet of it, on paper with boxes to tick.
type roundSheetLeaf struct {
	page
	Head  string
	Zones []paperZone
	Only  []act // the round of one zone alone
	Back  string
}

type paperZone struct {
	Zone    string
	Devices bool
	Stops   []paperStop
	said    []string // cautions that stand above already
}

type paperStop struct {
	Name, Code string
	Sheets     []paperSheet
}

type paperSheet struct {
	Title    string
	Cautions []string
	Fields   []paperField
}

// paperField is one question: boxes to tick, or else a line to write on.
type paperField struct {
	Label, Limits, Unit string
	Boxes               []string
	Long                bool
}

var roundSheetSheet = leafOf[roundSheetLeaf]("round-sheet")

// roundSheetPage prints the round for zones into which no device goes: all of it, that of ?zone=, or
// the one sheet of ?record= for ?fixture=.
func roundSheetPage(v *visit) error {
	p := &roundSheetLeaf{page: page{Title: "Round on paper", Section: secRounds}, Head: "Round, " + longDay(v.day(), v.today()), Back: v.url("rounds")}
	if v.query("fixture") != "" {
		return v.oneSheet(p)
	}
	x, err := v.b.Rounds(v.ctx(), v.actor, v.site.Code, v.on)
	if err != nil {
		return err
	}
	var zones []string
	for _, s := range x.Due {
		if !slices.Contains(zones, s.Fixture.Zone) {
			zones = append(zones, s.Fixture.Zone)
			p.Only = append(p.Only, act{zoneWords(s.Fixture.Zone), with(v.url("round-sheet"), "zone", s.Fixture.Zone)})
		}
		if only := v.query("zone"); only != "" && only != s.Fixture.Zone {
			continue
		}
		z := p.zone(s.Fixture.Zone, s.Devices)
		st := paperStop{Name: s.Fixture.Name, Code: s.Fixture.Code}
		for _, l := range v.roundLines(s) {
			st.Sheets = append(st.Sheets, v.paperSheet(z, l.Sheet, l.what))
		}
		z.Stops = append(z.Stops, st)
	}
	return roundSheetSheet.show(v, 200, p)
}

// oneSheet is a single sheet on paper.
func (v *visit) oneSheet(p *roundSheetLeaf) error {
	head, err := v.b.SheetHead(v.ctx(), v.actor, v.site.Code, v.query("fixture"), v.query("record"))
	if err != nil {
		return err
	}
	if _, ok := v.site.Program.SheetFor(v.query("record")); !ok {
		return &book.NotFound{What: "sheet", Code: v.query("record")}
	}
	p.Head = head.Name
	p.Back = with(v.url("sheet"), "record", v.query("record"), "fixture", v.query("fixture"))
	z := p.zone(head.Zone, head.Devices)
	z.Stops = []paperStop{{Name: head.Name, Code: v.query("fixture"), Sheets: []paperSheet{v.paperSheet(z, "", v.query("record"))}}}
	return roundSheetSheet.show(v, 200, p)
}

func zoneWords(zone string) string {
	if zone == "" {
		return "No zone on record"
	}
	return "Zone " + zone
}

// zone is the zone that the round has come to, made when it is first entered.
func (p *roundSheetLeaf) zone(name string, devices bool) *paperZone {
	if n := len(p.Zones); n == 0 || p.Zones[n-1].Zone != name {
		p.Zones = append(p.Zones, paperZone{Zone: name, Devices: devices})
	}
	return &p.Zones[len(p.Zones)-1]
}

// paperSheet is a sheet with its boxes; its cautions stand once in each zone. A record without a sheet
// is a title to tick.
func (v *visit) paperSheet(z *paperZone, title, record string) paperSheet {
	sh, ok := v.site.Program.SheetFor(record)
	if !ok {
		return paperSheet{Title: title}
	}
	out := paperSheet{Title: sh.Title}
	for _, c := range sh.Cautions {
		if !slices.Contains(z.said, c) {
			z.said = append(z.said, c)
			out.Cautions = append(out.Cautions, c)
		}
	}
	for _, f := range sh.Fields {
		x := paperField{Label: orCode(f.Label, upperFirst(spaced(f.Code))), Limits: limitWords(f), Unit: f.Unit, Long: f.Type == program.FieldText}
		switch f.Type {
		case program.FieldYesNo:
			x.Boxes = []string{"yes", "no"}
		case program.FieldChoice:
			x.Boxes = f.Choices
		}
		out.Fields = append(out.Fields, x)
	}
	return out
}

// limitWords says what a field asks, as it stands under it.
func limitWords(f program.Field) string {
	var parts []string
	unit := strings.TrimSuffix(" "+f.Unit, " ")
	add := func(words string, n *float64) {
		if n != nil {
			parts = append(parts, words+" "+trimNumber(*n)+unit)
		}
	}
	add("at least", f.Min)
	add("at most", f.Max)
	add("a remark below", f.WarnBelow)
	add("a remark above", f.WarnAbove)
	if f.Help != "" {
		parts = append(parts, f.Help)
	}
	return strings.Join(parts, "; ")
}
