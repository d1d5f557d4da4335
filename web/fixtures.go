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
	Standing, Next        string
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
	bad := 0
	for _, x := range list {
		l := v.fixtureLine(x)
		if x.Gaps > 0 && x.Here {
			bad++
		}
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
	p.Say = upperFirst(count(sv.Fixtures, "fixture is", "fixtures are")) + " in use. " + upperFirst(count(bad, "has a gap.", "have a gap."))
	if sv.Fixtures == 0 {
		p.Say = "No fixtures are on record yet. Add one, or import a table of fixtures."
	}
	return fixturesSheet.show(v, 200, p)
}

func (v *visit) fixtureLine(x book.FixtureSummary) fixtureLine {
	left := 0.5
	if x.Worst == standing.Met {
		left = 1
	}
	l := fixtureLine{Disc: disc(x.Worst, left), Name: x.Name, URL: v.url("fixtures", x.Code), Code: x.Code, Zone: x.Zone, Standing: word(x.Worst)}
	if x.Gaps > 0 {
		l.Standing = count(x.Gaps, "gap", "gaps")
	}
	if x.NextDue != nil {
		l.Next = shortDay(*x.NextDue, v.today())
	}
	if !x.Here {
		l.Next, l.Standing = "until "+shortDayOr(x.Until, v.today(), ""), ""
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
	p := &personLeaf{page: page{Title: x.Name, Section: secRounds, AsOf: v.asOf()}, Name: x.Name, Code: s.Code}
	p.When = p.AsOf
	p.Bad, p.Low, p.Good = v.parted(x.Rows)
	p.Who = v.whoWords(x)
	v.personPast(p, x)
	p.Say = v.subjectSay(x, p)
	p.MayEnd = v.acts(book.Excuse)
	p.EndURL, p.ConfirmURL = v.url("pause-end"), v.url("confirm")
	p.Do = v.subjectActs(s)
	return fixtureSheet.show(v, 200, (*fixtureLeaf)(p))
}

// fixtureLeaf is a personLeaf on its own template, without what is said of people.
type fixtureLeaf personLeaf

func (p *fixtureLeaf) head() *page { return &p.page }

var fixtureSheet = leafOf[fixtureLeaf]("fixture")

func (v *visit) subjectSay(x book.SubjectView, p *personLeaf) string {
	name := string(x.Subject.Asks)
	if x.Kind != "" {
		name = x.Kind
		if k, ok := v.site.Program.FixtureKind(x.Kind); ok {
			name = orCode(k.Name, x.Kind)
		}
	}
	where := ""
	if x.Zone != "" {
		where = " in Zone " + x.Zone
	}
	s := upperFirst(name) + where + ". "
	switch {
	case len(p.Bad)+len(p.Low)+len(p.Good) == 0:
		return s + "Nothing is asked of it on this day."
	case len(p.Bad) == 0:
		return s + "Nothing has run out; " + count(len(p.Low), "thing is", "things are") + " due soon."
	default:
		return s + upperFirst(count(len(p.Bad), "thing has", "things have")) + " run out, failed or cannot be told."
	}
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
		out = append(out, act{"Excuse", with(v.url("excuse"), "subject", key)}, act{"Out of service", with(v.url("pause"), "subject", key)})
	}
	return out
}

func keepFixtureForm(v *visit, f *Form) *formLeaf {
	p := v.site.Program
	leaf := &formLeaf{page: page{Title: "Fixture", Section: secRounds}, Head: "Add a fixture", Action: v.url("keep-fixture"), Form: f, Button: "Keep"}
	leaf.Say = "A thing that gets inspected. What stays empty is not said."
	if f.Get("known") != "" {
		leaf.Head, leaf.Hidden = "Change "+f.Get("name"), []hidden{{"known", "1"}}
		leaf.Say = "Only what differs is written. A changed fact holds from the day below."
	}
	leaf.Fields = []field{
		f.Text("code", "Code").Need().Help("As it stands on its label"),
		f.Choice("kind", "Kind", choose(codesAsOptions("", p.FixtureKinds, func(k program.FixtureKind) string { return k.Code }, func(k program.FixtureKind) string { return k.Name })[1:])).Need(),
		f.Text("name", "Name"),
		f.Choice("zone", "Zone", codesAsOptions("Not on record", p.Zones, func(z program.Zone) string { return z.Code }, func(z program.Zone) string { return z.Name })).Help("For a door: the zone that it leads into"),
		f.Date("since", "In use since"),
		f.Date("until", "In use until, last day included"),
		f.Date("from", "Changed facts hold from"),
	}
	if k, ok := p.FixtureKind(f.Get("kind")); ok {
		leaf.Fields = append(leaf.Fields, factFields(f, k.Facts)...)
	} else {
		leaf.After = "Its kind's own facts can be put on record after it was added, with Change."
	}
	return leaf
}

func keepFixturePage(v *visit) error {
	f := v.asked()
	if code := f.Get("code"); code != "" {
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
