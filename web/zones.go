package web

import (
	"bytes"
	"cmp"
	"fmt"
	"html/template"
	"slices"
	"strings"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/standing"
	"lodebook/models/table"
)

// zoneTabs are the zones and what else is about doors.
func (v *visit) zoneTabs(current string) []spineLink {
	var out []spineLink
	for _, z := range v.site.Program.Zones {
		out = append(out, spineLink{Name: "Zone " + z.Code, URL: v.url("zones", z.Code), Current: z.Code == current})
	}
	return out
}

// zoneTabsWithDoors are the tabs of the page of a zone.
func (v *visit) zoneTabsWithDoors(current string) []spineLink {
	out := v.doorTabs("")
	for i, z := range v.site.Program.Zones {
		out[i].Current = z.Code == current
	}
	return out
}

// zoneLine is one person and the zone.
type zoneLine struct {
	Disc            template.HTML
	Name, Note, URL string
	Band            template.HTML
	Word            string // class of the words beside it
	When, Small     string
	More            []string // the other reasons
	Do              []act
}

type zoneLeaf struct {
	page
	Head, Say   string
	At, KnownAt string // as the boxes have them
	Path        string
	Then        string // what the two moments mean, where they are not now
	Tabs        []spineLink
	Open        bool // not restricted
	Means       string
	Barred, In  []zoneLine // with a right but not entitled; entitled
	Without     []zoneLine // without a right
	WithoutMore int
	Outages     []outageLine
	Window      string
	Finder      finder
	Pager       pager
	GrantURL    string
	ListURL     string
	ExportURL   string
}

var zoneSheet = leafOf[zoneLeaf]("zone")

// zonesPage leads to the most restricted zone, which is the one that is asked about first.
func zonesPage(v *visit) error {
	zones := v.site.Program.Zones
	if len(zones) == 0 {
		return v.seeOther(v.url("program"))
	}
	last := zones[len(zones)-1]
	for _, z := range zones {
		if z.Restricted {
			last = z
		}
	}
	return v.seeOther(v.url("zones", last.Code))
}

// zoneQuery reads the two moments of the address; nil is now, and all that is recorded.
func (v *visit) zoneQuery(zone string) (book.ReachQuery, error) {
	q := book.ReachQuery{Site: v.site.Code, Zone: zone}
	for name, to := range map[string]**time.Time{"at": &q.At, "known_at": &q.KnownAt} {
		if text := strings.TrimSpace(v.query(name)); text != "" {
			t, err := v.b.Moment(v.ctx(), v.site.Code, name, text)
			if err != nil {
				return q, err
			}
			*to = &t
		}
	}
	return q, nil
}

// zonePage tells who may enter a zone, until when, and who holds a right and may not.
func zonePage(v *visit) error {
	z, ok := v.site.Program.Zone(v.param("zone"))
	if !ok {
		return &book.NotFound{What: "zone", Code: v.param("zone")}
	}
	p := &zoneLeaf{page: page{Title: zoneName(*z), Section: secZones}, Head: zoneName(*z), Tabs: v.zoneTabsWithDoors(z.Code), Path: v.c.Request.URL.EscapedPath()}
	p.Means = zoneMeans[strings.ToUpper(z.Code)]
	if !z.Restricted {
		p.Open = true
		p.Say = zoneName(*z) + " is not restricted: nobody needs a right there."
		return zoneSheet.show(v, 200, p)
	}
	q, err := v.zoneQuery(z.Code)
	if err != nil {
		return err
	}
	x, err := v.b.Reach(v.ctx(), v.actor, q)
	if err != nil {
		return err
	}
	if v.query("format") == "csv" {
		return v.reachCSV(x)
	}
	return v.showZone(p, q, x)
}

func (v *visit) showZone(p *zoneLeaf, q book.ReachQuery, x book.Reached) error {
	loc := x.Site.Location
	p.At = x.At.In(loc).Format("2006-01-02 15:04")
	if q.KnownAt != nil {
		p.KnownAt = q.KnownAt.In(loc).Format("2006-01-02 15:04")
	}
	p.Then = v.thenWords(q, x)
	if q.At == nil && q.KnownAt == nil {
		out, err := v.outages()
		if err != nil {
			return err
		}
		p.Outages = out
	}
	p.ListURL = with(v.url("zones", x.Zone.Code, "list"), "at", v.query("at"), "known_at", v.query("known_at"))
	p.ExportURL = with(v.url("zones", x.Zone.Code), "format", "csv", "at", v.query("at"), "known_at", v.query("known_at"))
	if v.may(book.KeepRights) {
		p.GrantURL = with(v.url("grant"), "zone", x.Zone.Code)
	}
	p.Say = zoneSay(x, v.site.Today)
	rows, f := find(v, x.Rows, "Name or crew", func(r book.ReachRow) string { return r.Name + " " + r.Person + " " + r.Note })
	p.Finder = f
	w := windowAround(x.At, loc)
	p.Window = w.words()
	barred, in, without := partReach(rows)
	p.WithoutMore = len(without)
	shown, pg := paged(v, slices.Concat(barred, in))
	p.Pager = pg
	bands, err := v.bands(q, w, shown)
	if err != nil {
		return err
	}
	for i, r := range shown {
		l := v.zoneLine(r, x.At, loc)
		l.Band = bands[i]
		if r.Entitled {
			p.In = append(p.In, l)
		} else {
			p.Barred = append(p.Barred, l)
		}
	}
	for _, r := range without[:min(len(without), perPage)] {
		p.Without = append(p.Without, v.zoneLine(r, x.At, loc))
	}
	p.WithoutMore -= len(p.Without)
	return zoneSheet.show(v, 200, p)
}

// thenWords says which moments the page shows, where they are not now.
func (v *visit) thenWords(q book.ReachQuery, x book.Reached) string {
	switch {
	case q.At == nil && q.KnownAt == nil:
		return ""
	case q.KnownAt == nil:
		return "This is how it stood at " + moment(x.At, x.Site.Location, v.site.Today) + ", by all that is recorded now."
	default:
		return "This is how it stood at " + moment(x.At, x.Site.Location, v.site.Today) + ", as the book knew it at " + moment(*q.KnownAt, x.Site.Location, v.site.Today) + "."
	}
}

// partReach parts those with a right who are not entitled, by name; those who are, the soonest to end first; and those
// without a right.
func partReach(rows []book.ReachRow) (barred, in, without []book.ReachRow) {
	for _, r := range rows {
		switch {
		case r.Entitled:
			in = append(in, r)
		case r.HasRight:
			barred = append(barred, r)
		default:
			without = append(without, r)
		}
	}
	byName := func(a, b book.ReachRow) int {
		return cmp.Or(strings.Compare(a.Name, b.Name), strings.Compare(a.Person, b.Person))
	}
	slices.SortFunc(barred, byName)
	slices.SortFunc(without, byName)
	slices.SortFunc(in, func(a, b book.ReachRow) int {
		switch {
		case a.Until == nil && b.Until == nil:
			return byName(a, b)
		case a.Until == nil:
			return 1
		case b.Until == nil:
			return -1
		}
		return cmp.Or(a.Until.Compare(*b.Until), byName(a, b))
	})
	return barred, in, without
}

// zoneSay answers the question of the page.
func zoneSay(x book.Reached, today civil.Day) string {
	barred, in, without := partReach(x.Rows)
	s := upperFirst(count(len(in), "person is", "people are")) + " entitled at this moment, " +
		count(len(barred), "holds a right but is not", "hold a right but are not") + ", " + number(len(without)) + " " + singular(len(without), "has", "have") + " no right."
	if len(x.Rows) == 0 {
		return "Nobody is on staff here, so nobody is entitled to " + zoneName(x.Zone) + "."
	}
	if len(in) > 0 && in[0].Until != nil {
		s += " The next to end is that of " + in[0].Name + ", " + endWords(*in[0].Until, x.Site.Location, today) + "."
	}
	return s
}

func singular(n int, one, many string) string {
	if n == 1 {
		return one
	}
	return many
}

// untilWords says when an entitlement ends: through a day, or at a time of one.
func untilWords(t, at time.Time, loc *time.Location, today civil.Day) string {
	day := civil.DayOf(t, loc)
	switch {
	case t.Equal(day.Midnight(loc)):
		return "through " + shortDay(day-1, today)
	case day == civil.DayOf(at, loc):
		return "until " + t.In(loc).Format("15:04")
	}
	return "until " + moment(t, loc, today)
}

// endWords says at what moment an entitlement ends.
func endWords(t time.Time, loc *time.Location, today civil.Day) string {
	if day := civil.DayOf(t, loc); t.Equal(day.Midnight(loc)) {
		return "after " + shortDay(day-1, today)
	}
	return "on " + moment(t, loc, today)
}

// bands draws the ribbons of those who are shown.
func (v *visit) bands(q book.ReachQuery, w window, rows []book.ReachRow) ([]template.HTML, error) {
	people := make([]string, len(rows))
	for i, r := range rows {
		people[i] = r.Person
	}
	ribbons, err := v.b.Ribbons(v.ctx(), v.actor, book.RibbonQuery{Site: v.site.Code, Zone: q.Zone, People: people, From: w.from, To: w.to, KnownAt: q.KnownAt})
	out := make([]template.HTML, len(ribbons))
	for i, r := range ribbons {
		out[i] = w.band(r)
	}
	return out, err
}

func (v *visit) zoneLine(r book.ReachRow, at time.Time, loc *time.Location) zoneLine {
	l := zoneLine{Name: r.Name, Note: r.Note, URL: v.url("people", r.Person)}
	if r.Entitled {
		v.entitledLine(&l, r, at, loc)
		return l
	}
	worst := reasonWord(r.Reasons)
	l.Disc, l.Word = disc(worst, 0), string(worst)
	for i, x := range r.Reasons {
		if i == 0 {
			l.When = v.reasonWords(x)
		} else {
			l.More = append(l.More, v.reasonWords(x))
		}
	}
	if len(r.Restore) > 0 {
		l.Small = "restored by: " + and(r.Restore)
	}
	if v.may(book.KeepRights) && !r.HasRight {
		l.Do = []act{{"Grant", with(v.url("grant"), "person", r.Person, "zone", r.Zone)}}
	}
	return l
}

func (v *visit) entitledLine(l *zoneLine, r book.ReachRow, at time.Time, loc *time.Location) {
	l.Disc, l.When = disc(standing.Met, 1), "no end in sight"
	if r.Until == nil {
		return
	}
	l.When = untilWords(*r.Until, at, loc, v.today())
	left := r.Until.Sub(at)
	l.Disc = disc(standing.Met, min(1, left.Hours()/(24*365)))
	if left < lowLongest {
		l.Disc, l.Word = disc(standing.Closing, left.Hours()/lowLongest.Hours()), string(standing.Closing)
	}
	if len(r.Ends) > 0 {
		l.Small = v.endedBy(r.Ends[0])
	}
}

// endedBy names what ends an entitlement.
func (v *visit) endedBy(x book.ReachReason) string {
	if x.Item == "" {
		return reasonsWithout[x.Standing].ends
	}
	return orCode(x.Title, x.Item)
}

// reasonsWithout are the reasons that are about no item: as what stands against somebody, and as what ends.
var reasonsWithout = map[string]struct{ now, ends string }{
	"no-right":     {"No right", "the right ends"},
	"right-ended":  {"The right has ended", "the right ends"},
	"not-on-staff": {"Not on staff", "leaves"},
	"paused":       {"Paused", "a pause begins"},
	"no-guard":     {"Nothing that guards this zone is asked of them", "nothing guards the zone any more"},
}

func (v *visit) reasonWords(x book.ReachReason) string {
	if x.Item == "" {
		return reasonsWithout[x.Standing].now
	}
	s := orCode(x.Title, x.Item) + ": "
	switch x.Standing {
	case string(standing.DataFault):
		return s + "cannot be told for want of a fact"
	case "limited":
		return s + "cleared for other zones only"
	case string(standing.Excused):
		return s + "excused, which opens nothing"
	}
	s += x.Standing
	if x.Due != nil && x.Standing == string(standing.Lapsed) {
		s += " since " + shortDay(*x.Due+1, v.today())
	}
	return s
}

// reasonWord is the standing that a line with such reasons is drawn as.
func reasonWord(reasons []book.ReachReason) standing.Word {
	for _, x := range reasons {
		switch w := standing.Word(x.Standing); {
		case x.Item != "" && x.Standing == "limited":
			return standing.Closing
		case x.Item != "":
			return w
		case x.Standing == "paused":
			return standing.Excused
		}
	}
	return standing.Lapsed
}

func (v *visit) reachCSV(x book.Reached) error {
	var buf bytes.Buffer
	header := []string{"person", "name", "zone", "entitled", "until", "reasons", "restored_by", "at", "known_at"}
	known := ""
	if x.KnownAt != nil {
		known = x.KnownAt.UTC().Format(time.RFC3339)
	}
	rows := func(yield func([]string) bool) {
		for _, r := range x.Rows {
			until, reasons := "", make([]string, len(r.Reasons))
			if r.Until != nil {
				until = r.Until.UTC().Format(time.RFC3339)
			}
			for i, reason := range r.Reasons {
				reasons[i] = reason.String()
			}
			if !yield([]string{r.Person, r.Name, r.Zone, fmt.Sprint(r.Entitled), until, strings.Join(reasons, "; "), strings.Join(r.Restore, "; "), x.At.UTC().Format(time.RFC3339), known}) {
				return
			}
		}
	}
	if err := table.Write(&buf, header, rows); err != nil {
		return err
	}
	v.c.Header("Content-Disposition", `attachment; filename="zone-`+strings.Map(plainName, x.Site.Code+"-"+x.Zone.Code)+`.csv"`)
	v.c.Data(200, "text/csv; charset=utf-8", buf.Bytes())
	return nil
}

// zoneMeans says what the trade's four zones are. Source: the American College of Radiology's Manual on MR Safety (2024),
// chapter on zones, in our own words; the 0.9 mT (9 gauss) limit of the area in which a field can harm is that of
// IEC 60601-2-33 edition 4 (2022). A site that names its zones otherwise sees nothing of it.
var zoneMeans = map[string]string{
	"I":   "The usual meaning of Zone I: open to everybody, outside the MR rooms (ACR Manual on MR Safety, 2024).",
	"II":  "The usual meaning of Zone II: where people from outside are met, asked and screened, and kept company (ACR Manual on MR Safety, 2024).",
	"III": "The usual meaning of Zone III: behind a lock, for those only who are screened or kept company by trained staff; near enough to the magnet that carelessness can hurt (ACR Manual on MR Safety, 2024). " + nineGauss,
	"IV":  "The usual meaning of Zone IV: the magnet room itself (ACR Manual on MR Safety, 2024). " + nineGauss,
}

const nineGauss = "Where the field passes 0.9 mT (9 gauss) it can harm people with implants and pull at things of iron (IEC 60601-2-33, edition 4, 2022); the maker's drawing shows where that is in your rooms."

type doorListLeaf struct {
	page
	Head, Say, Stamp string
	Back             string
	Lines            []zoneLine
}

var doorListSheet = leafOf[doorListLeaf]("door-list")

// doorListPage is who may enter a zone, to be hung inside its door.
func doorListPage(v *visit) error {
	q, err := v.zoneQuery(v.param("zone"))
	if err != nil {
		return err
	}
	x, err := v.b.Reach(v.ctx(), v.actor, q)
	if err != nil {
		return err
	}
	loc := x.Site.Location
	p := &doorListLeaf{page: page{Title: "List for the door", Section: secZones}, Head: zoneName(x.Zone) + ": who may enter", Back: v.url("zones", x.Zone.Code)}
	_, in, _ := partReach(x.Rows)
	slices.SortStableFunc(in, func(a, b book.ReachRow) int { return strings.Compare(a.Name, b.Name) })
	p.Say = upperFirst(count(len(in), "person is", "people are")) + " entitled at " + x.At.In(loc).Format("15:04 on Monday 2 January 2006") + ". Nobody else is, and nobody on it who has not been screened at the door."
	p.Stamp = "It is out of date as soon as a record, a right or a stint changes. Print it anew each morning and take the old one down."
	for _, r := range in {
		p.Lines = append(p.Lines, v.zoneLine(r, x.At, loc))
	}
	return doorListSheet.show(v, 200, p)
}
