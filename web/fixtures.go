package web

import (
	"fmt"
	"html/template"
	"strings"

	"lodebook/models/book"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// fixtureLine is one line of the list of fixtures.
type fixtureLine struct {
	Disc                  template.HTML
	Name, URL, Code, Zone string
	Word                  standing.Word
	More, Next            string
}

type fixtureGroup struct {
	Kind  string
	Lines []fixtureLine
}

type fixturesLeaf struct {
	page
	Say      string
	Groups   []fixtureGroup
	Former   []fixtureLine
	Finder   finder
	Pager    pager
	MayKeep  bool
	MayEvent bool
	KeepURL  string
	EventURL string
	When     *asOf
}

var fixturesSheet = leafOf[fixturesLeaf]("fixtures")

// fixturesPage lists what is inspected, by kind.
func fixturesPage(v *visit) error {
	sv, all, err := v.b.Fixtures(v.ctx(), v.actor, v.site.Code, v.on)
	if err != nil {
		return err
	}
	p := &fixturesLeaf{page: page{Title: "Fixtures", Section: secRounds, AsOf: v.asOf()}, MayKeep: v.acts(book.KeepFixtures), MayEvent: v.acts(book.ReportEvent), KeepURL: v.url("keep-fixture"), EventURL: v.url("event")}
	p.When = p.AsOf
	list, f := find(v, all, "Name, kind or zone", func(x book.FixtureSummary) string {
		return strings.Join([]string{x.Name, x.Code, x.KindName, x.Zone, word(x.Worst)}, " ")
	})
	p.Finder = f
	list, p.Pager = paged(v, list)
	for _, x := range list {
		l := v.fixtureLine(x)
		switch {
		case !x.Here:
			p.Former = append(p.Former, l)
		case len(p.Groups) == 0 || p.Groups[len(p.Groups)-1].Kind != x.KindName:
			p.Groups = append(p.Groups, fixtureGroup{x.KindName, []fixtureLine{l}})
		default:
			g := &p.Groups[len(p.Groups)-1]
			g.Lines = append(g.Lines, l)
		}
	}
	p.Say = fixturesSay(sv.Fixtures, all)
	return fixturesSheet.show(v, 200, p)
}

func fixturesSay(inUse int, all []book.FixtureSummary) string {
	gaps, low := 0, 0
	for _, x := range all {
		switch {
		case !x.Here:
		case x.Gaps > 0:
			gaps++
		case x.Closing > 0:
			low++
		}
	}
	switch {
	case len(all) == 0:
		return "No fixtures are on record yet. Add one, or import a table of fixtures."
	case gaps+low == 0:
		return upperFirst(count(inUse, "fixture is", "fixtures are")) + " in use, and nothing on them has run out or is running low."
	default:
		return upperFirst(count(inUse, "fixture is", "fixtures are")) + " in use: " + count(gaps, "has", "have") + " a gap, " + number(low) + " more have something running low."
	}
}

func (v *visit) fixtureLine(x book.FixtureSummary) fixtureLine {
	l := fixtureLine{Name: x.Name, URL: v.url("fixtures", x.Code), Code: x.Code, Word: x.Worst}
	if x.Zone != "" {
		l.Zone = "Zone " + x.Zone
	}
	l.Disc, l.More = disc(x.Worst, roughly(x.Worst)), moreGaps(x.Gaps)
	if x.NextDue != nil {
		l.Next = shortDay(*x.NextDue, v.today())
	}
	if !x.Here {
		l.Next = "until " + shortDayOr(x.Until, v.today(), "")
	}
	return l
}

// fixturePage shows one fixture; subjectPage any other subject but a person.
func fixturePage(v *visit) error {
	return v.showSubject(standing.Subject{Asks: program.AsksFixture, Code: v.param("code")})
}

func subjectPage(v *visit) error {
	s := standing.Subject{Asks: program.Asks(v.param("kind")), Code: v.param("code")}
	if s.Asks == program.AsksPerson || s.Asks == program.AsksFixture {
		return v.seeOther(v.subjectURL(s))
	}
	return v.showSubject(s)
}

func (v *visit) showSubject(s standing.Subject) error {
	x, err := v.b.Subject(v.ctx(), v.actor, v.site.Code, s, v.on)
	if err != nil {
		return err
	}
	p := &personLeaf{page: page{Title: x.Name, Section: secRounds, AsOf: v.asOf()}, Name: x.Name}
	p.When = p.AsOf
	v.part(p, x.Rows)
	p.Who = v.whoWords(x)
	v.personPast(p, x)
	p.Say = v.subjectSay(x, p)
	p.MayEnd = v.acts(book.Excuse)
	p.EndURL, p.ConfirmURL = v.url("pause-end"), v.url("confirm")
	p.Do = v.subjectActs(s)
	if p.Outages, err = v.outagesOf(s); err != nil {
		return err
	}
	if s.Asks == program.AsksPost && !v.elsewhen() {
		if p.Holders, err = v.holders(s.Code); err != nil {
			return err
		}
		if v.acts(book.RecordDone) {
			p.Do = append(p.Do, act{"Appoint", with(v.url("appoint"), "post", s.Code)})
		}
	}
	if len(p.Outages) > 0 {
		p.Say = "It is out of service until a safety officer signs it back. " + p.Say
	}
	return fixtureSheet.show(v, 200, (*fixtureLeaf)(p))
}

// fixtureLeaf is a personLeaf on its own template, without what is said of people.
type fixtureLeaf personLeaf

func (p *fixtureLeaf) head() *page { return &p.page }

var fixtureSheet = leafOf[fixtureLeaf]("fixture")

// subjectSay says what the subject is and where, and what falls short.
func (v *visit) subjectSay(x book.SubjectView, p *personLeaf) string {
	what := string(x.Subject.Asks)
	if k, ok := v.site.Program.FixtureKind(x.Kind); ok {
		what = strings.ToLower(orCode(k.Name, x.Kind))
	}
	s := upperFirst(withArticle(what))
	if x.Subject.Asks != program.AsksFixture {
		return s + "; " + v.oweWords(p) + "."
	}
	if x.Zone != "" {
		s += " in Zone " + x.Zone
	}
	if last, gone := v.gone(x); gone {
		return s + ", in use until " + shortDay(last, v.today()) + "; nothing is asked of it any more."
	}
	if pause := v.pausedOn(x); pause != nil {
		return s + ", paused from " + shortDay(pause.From, v.today()) + " to " + shortDayOr(pause.To, v.today(), "no end yet") + "; nothing is asked meanwhile."
	}
	return s + "; " + v.oweWords(p) + "."
}

func (v *visit) subjectActs(s standing.Subject) []act {
	var out []act
	key := subjectKey(s)
	if v.acts(book.ReportEvent) {
		out = append(out, act{"Report an event", with(v.url("event"), "subject", key)})
	}
	if s.Asks == program.AsksFixture && v.acts(book.KeepFixtures) {
		out = append(out, act{"Change", with(v.url("keep-fixture"), "code", s.Code)})
	}
	if v.acts(book.Excuse) {
		out = append(out, act{"Excuse", with(v.url("excuse"), "subject", key)}, act{"Pause", with(v.url("pause"), "subject", key)})
	}
	if v.acts(book.TakeOut) && (s.Asks == program.AsksFixture || s.Asks == program.AsksZone) {
		out = append(out, act{"Take out of service", with(v.url("out-of-service"), "subject", key)})
	}
	return out
}

func keepFixtureForm(v *visit, f *Form) *formLeaf {
	p := v.site.Program
	leaf := &formLeaf{page: page{Title: "Fixture", Section: secRounds}, Head: "Add a fixture", Action: v.url("keep-fixture"), Form: f, Button: "Keep"}
	leaf.Say = "A thing that gets inspected. What stays empty is not said."
	k, ok := p.FixtureKind(f.Get("kind"))
	zones := codesAsOptions("Not on record", p.Zones, func(z program.Zone) string { return z.Code }, zoneName)
	leaf.Fields = []field{
		f.Text("name", "Name"),
		f.Choice("zone", "Zone", f.said("zone", zones)).Help("For a door: the zone that it leads into"),
		f.Date("since", "In use since"),
		f.Date("until", "In use until").Help("The last day, included; empty while it is in use"),
	}
	if f.Get("known") != "" {
		leaf.Head = "Change " + orCode(f.Get("name"), f.Get("code"))
		leaf.Say = "Only what differs is written. A changed fact holds from the day below; the days before it stay as they were."
		leaf.Hidden = []hidden{{"known", "1"}, {"code", f.Get("code")}}
		leaf.Fields = append(leaf.Fields, f.Date("from", "Changed facts hold from"))
	} else {
		leaf.Fields = append([]field{f.Text("code", "Code").Need().Help("As it stands on its label")}, leaf.Fields...)
	}
	if !ok || f.Fault("kind") != "" {
		kinds := codesAsOptions("Choose", p.FixtureKinds, func(k program.FixtureKind) string { return k.Code }, func(k program.FixtureKind) string { return k.Name })
		leaf.Fields = append([]field{f.Choice("kind", "Kind", kinds).Need()}, leaf.Fields...)
		return leaf
	}
	leaf.Hidden = append(leaf.Hidden, hidden{"kind", k.Code})
	if f.Get("known") == "" {
		leaf.Head += ": " + strings.ToLower(orCode(k.Name, k.Code))
	}
	leaf.Fields = append(leaf.Fields, factFields(f, k.Facts)...)
	return leaf
}

// chooseKind asks what kind of thing is added, since each kind has facts of its own.
func (v *visit) chooseKind() error {
	p := &chooseLeaf{page: page{Title: "Fixture", Section: secRounds}, Head: "Add a fixture", Say: "What kind of thing is it?"}
	var g chooseGroup
	for _, k := range v.site.Program.FixtureKinds {
		g.Lines = append(g.Lines, chooseLine{orCode(k.Name, k.Code), "", with(v.url("keep-fixture"), "kind", k.Code)})
	}
	if p.Groups = []chooseGroup{g}; len(g.Lines) == 0 {
		p.Say = "The program names no kind of fixture yet. Adopt a group of the starter that brings one, or write one into its text."
		p.Groups = nil
	}
	return chooseSheet.show(v, 200, p)
}

func keepFixturePage(v *visit) error {
	f := v.asked()
	code := f.Get("code")
	if code == "" && f.Get("kind") == "" {
		return v.chooseKind()
	}
	if code != "" {
		x, err := v.b.Subject(v.ctx(), v.actor, v.site.Code, standing.Subject{Asks: program.AsksFixture, Code: code}, nil)
		if err != nil {
			return err
		}
		f.Set("known", "1").Set("name", x.Name).Set("kind", x.Kind).Set("zone", x.Zone).Set("from", v.today().String())
		for _, s := range x.Stints {
			f.Set("since", shortISO(s.First)).Set("until", shortISO(s.Last))
		}
		v.presentFacts(f, x)
	}
	return v.showForm(keepFixtureForm(v, f))
}

func keepFixture(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	form := book.FixtureForm{Code: f.Get("code"), Kind: f.Get("kind"), Name: f.Get("name"), Zone: f.Get("zone"), Since: f.Get("since"), Until: f.Get("until"), From: f.Get("from")}
	k, ok := v.site.Program.FixtureKind(form.Kind)
	if ok {
		form.Facts = factValues(f, k.Facts)
	}
	r, err := v.b.KeepFixture(v.ctx(), v.actor, v.site.Code, form, book.Correction{})
	if f.Take(err) {
		if ok {
			renameFacts(f, k.Facts)
		}
		return v.showForm(keepFixtureForm(v, f))
	}
	if err != nil {
		return err
	}
	if r.ID() == "" {
		return v.kept(v.url("fixtures", form.Code), "Nothing was new, so nothing was written.", "")
	}
	return v.kept(v.url("fixtures", form.Code), fmt.Sprintf("Kept: %s.", orCode(form.Name, form.Code)), r.ID())
}
