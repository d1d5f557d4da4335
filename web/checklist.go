package web

import (
	"errors"
	"fmt"
	"html/template"
	"slices"
	"strings"

	"lodebook/models/book"
	"lodebook/models/program"
	"lodebook/models/program/starter"
	"lodebook/models/standing"
)

type itemLine struct {
	Disc                   template.HTML
	Title, URL, Cadence    string
	Basis, Counts, Subject string
	Guards                 string
}

type itemGroup struct {
	Name  string
	Lines []itemLine
}

type versionLine struct{ Name, From, When, URL string }

type checklistLeaf struct {
	page
	Say        string
	Groups     []itemGroup
	Versions   []versionLine
	Warnings   []string
	MaySet     bool
	GroupsURL  string
	ProgramURL string
	FileURL    string
	When       *asOf
}

var checklistSheet = leafOf[checklistLeaf]("checklist")

// checklistPage lists the items in force, by group.
func checklistPage(v *visit) error {
	x, err := v.b.Checklist(v.ctx(), v.actor, v.site.Code, v.on)
	if err != nil {
		return err
	}
	p := &checklistLeaf{page: page{Title: "Checklist", Section: secChecklist, AsOf: v.asOf()}, MaySet: v.acts(book.SetProgram), GroupsURL: v.url("groups"), ProgramURL: v.url("program"), FileURL: siteURL(v.site.Code, "program.yaml")}
	p.When = p.AsOf
	p.Warnings = x.Warnings
	at := map[string]int{}
	for _, i := range x.Items {
		name := orCode(i.Group, "Of our own")
		n, ok := at[name]
		if !ok {
			n = len(p.Groups)
			at[name] = n
			p.Groups = append(p.Groups, itemGroup{Name: name})
		}
		p.Groups[n].Lines = append(p.Groups[n].Lines, v.itemLine(i))
	}
	for _, ver := range x.Versions {
		p.Versions = append(p.Versions, versionLine{fmt.Sprintf("Version %d, %s", ver.Number, count(ver.Items, "item", "items")), "in force from " + shortDay(ver.InForceFrom, v.today()), moment(ver.Recorded, v.site.Location, v.today()), v.url("book", ver.Entry)})
	}
	p.Say = checklistSay(x)
	return checklistSheet.show(v, 200, p)
}

func checklistSay(x book.Checklist) string {
	if len(x.Items) == 0 {
		return "The checklist is empty: nothing is asked of anybody until you choose it."
	}
	whole := 0
	for _, i := range x.Items {
		if i.Counts[standing.Missing]+i.Counts[standing.Lapsed]+i.Counts[standing.Failed] == 0 {
			whole++
		}
	}
	return fmt.Sprintf("%s in force, by version %d of the program. %s without a gap.", upperFirst(count(len(x.Items), "item is", "items are")), x.Site.Version, upperFirst(count(whole, "is", "are")))
}

func (v *visit) itemLine(i book.ItemSummary) itemLine {
	left := 0.5
	if i.Worst == standing.Met {
		left = 1
	}
	l := itemLine{Disc: disc(i.Worst, left), Title: i.Title, URL: v.url("checklist", i.Code), Cadence: i.CadenceWords, Basis: i.Basis, Counts: countWords(i.Counts), Subject: askedOf(i.Subjects, i.Asks)}
	if len(i.Guards) > 0 {
		l.Guards = "guards Zone " + strings.Join(i.Guards, ", ")
	}
	return l
}

// countWords lists how many stand where, worst first.
func countWords(n map[standing.Word]int) string {
	var parts []string
	for _, w := range []standing.Word{standing.Failed, standing.Missing, standing.Lapsed, standing.DataFault, standing.Closing, standing.Awaited, standing.Excused, standing.Met} {
		if n[w] > 0 {
			parts = append(parts, fmt.Sprintf("%d %s", n[w], word(w)))
		}
	}
	return strings.Join(parts, ", ")
}

type itemLeaf struct {
	page
	Head, Say string
	About     []faultLine
	Rows      []rowLine
	Pager     pager
	Finder    finder
	When      *asOf
}

var itemSheet = leafOf[itemLeaf]("item")

// itemPage shows one item with everybody and everything behind it.
func itemPage(v *visit) error {
	code := v.param("item")
	st, err := v.b.Standings(v.ctx(), v.actor, book.StandingQuery{Site: v.site.Code, On: v.on, Item: code, Why: true})
	if err != nil {
		return err
	}
	p := &itemLeaf{page: page{Title: code, Section: secChecklist, AsOf: v.asOf()}, Head: code}
	p.When = p.AsOf
	item, ok := st.Site.Program.Item(code)
	if !ok {
		p.Say = "This item is not in force on this day."
		return itemSheet.show(v, 200, p)
	}
	p.Head, p.Title = item.Title, item.Title
	p.About = aboutItem(item)
	bad, low, told := sorted(pointers(st.Rows))
	var rest []*book.Row
	for i := range st.Rows {
		if r := &st.Rows[i]; !r.Word.IsGap() && r.Word != standing.Closing && r.Word != standing.DataFault {
			rest = append(rest, r)
		}
	}
	all := slices.Concat(bad, told, low, rest)
	p.Say = upperFirst(item.Cadence.Words()) + ", asked of " + askedOf(len(all), item.Asks) + ". " + upperFirst(countWords(st.Count())) + "."
	if len(all) == 0 {
		p.Say = upperFirst(item.Cadence.Words()) + ". It is asked of nothing on this day."
	}
	list, f := find(v, all, "Name or word", func(r *book.Row) string {
		return r.SubjectName + " " + r.Subject.Code + " " + word(r.Word) + " " + r.SubjectNote
	})
	p.Finder = f
	shown, pg := paged(v, list)
	for _, r := range shown {
		p.Rows = append(p.Rows, v.rowLine(*r))
	}
	p.Pager = pg
	return itemSheet.show(v, 200, p)
}

func aboutItem(i *program.Item) []faultLine {
	var out []faultLine
	add := func(label, value string) {
		if value != "" {
			out = append(out, faultLine{label, value})
		}
	}
	add("Code", i.Code)
	add("Basis", i.Basis)
	add("Good to know", i.Help)
	if i.When != nil {
		add("Asked when", i.When.Source())
	}
	if i.Cadence.Holds != nil {
		add("Must hold", i.Cadence.Holds.Source())
	}
	add("Answered by", strings.Join(i.Records, ", "))
	if len(i.Guards) > 0 {
		add("Guards", "Zone "+strings.Join(i.Guards, ", "))
	}
	add("Confers", i.Confers)
	return out
}

type groupLine struct {
	Code, Title, About string
	Items              []starter.GroupItem
	Adopted            int
}

type groupsLeaf struct {
	page
	Say    string
	Groups []groupLine
	Action string
}

var groupsSheet = leafOf[groupsLeaf]("groups")

// groupsPage offers the starter's groups, one at a time.
func groupsPage(v *visit) error {
	p := &groupsLeaf{page: page{Title: "Adopt a group", Section: secChecklist}, Action: v.url("groups")}
	p.Say = "A starting point, a group at a time. Nothing is asked of anybody that you did not choose. Local codes, the accreditor's current text, the manufacturer and the site's medical director decide; change the numbers to yours."
	for _, g := range starter.Groups() {
		l := groupLine{Code: g.Code, Title: g.Title, About: g.About, Items: g.Items}
		for _, i := range g.Items {
			if _, ok := v.site.Program.Item(i.Code); ok {
				l.Adopted++
			}
		}
		p.Groups = append(p.Groups, l)
	}
	return groupsSheet.show(v, 200, p)
}

func adoptGroup(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	group := f.Get("group")
	r, err := v.b.RewriteProgram(v.ctx(), v.actor, v.site.Code, func(src []byte) ([]byte, error) { return starter.Adopt(src, group) })
	if err != nil {
		return asInvalid(err)
	}
	text := fmt.Sprintf("Adopted: version %d, in force from %s.", r.Version, shortDay(r.From, v.today()))
	if r.Unchanged {
		text = "That group is in the checklist already."
	}
	return v.kept(v.url("checklist"), text, "")
}

// asInvalid lets what the starter cannot fit into a site's own program be read as it is.
func asInvalid(err error) error {
	var faults program.Faults
	var denied *book.Denied
	var missing *book.NotFound
	if errors.As(err, &faults) || errors.As(err, &denied) || errors.As(err, &missing) {
		return err
	}
	return &book.Invalid{Faults: []book.Fault{{Field: "group", Problem: err.Error()}}}
}

type programLeaf struct {
	page
	Say       string
	Text      string
	Lines     []string
	Faults    []book.Fault
	Why       string
	MaySet    bool
	Action    string
	FileURL   string
	SchemaURL string
}

var programSheet = leafOf[programLeaf]("program")

// programPage shows the text of the program, to edit.
func programPage(v *visit) error {
	src, err := v.b.Source(v.ctx(), v.actor, v.site.Code)
	if err != nil {
		return err
	}
	return v.showProgram(&programLeaf{Text: string(src)}, 200)
}

func (v *visit) showProgram(p *programLeaf, status int) error {
	p.page = page{Title: "Program", Section: secChecklist}
	p.Say = "What the site asks of itself, as text. Kept, it becomes a new version; the days before its first day are judged by the version of their time."
	p.MaySet, p.Action, p.FileURL, p.SchemaURL = v.may(book.SetProgram), v.url("program"), siteURL(v.site.Code, "program.yaml"), "/api/schema"
	return programSheet.show(v, status, p)
}

func saveProgram(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	text := f.Values.Get("text")
	again := &programLeaf{Text: text, Why: f.Get("why")}
	p, err := program.Parse([]byte(text))
	var faults program.Faults
	if errors.As(err, &faults) {
		again.Lines = faultLines(faults)
		return v.showProgram(again, 422)
	}
	if err != nil {
		return err
	}
	if p.Site.Code != v.site.Code {
		again.Faults = []book.Fault{{Field: "site", Value: p.Site.Code, Problem: "is another site than this one, " + v.site.Code, Accepted: "keep the code of this site"}}
		return v.showProgram(again, 422)
	}
	r, err := v.b.OpenProgram(v.ctx(), v.actor, []byte(text), f.Get("why"))
	var invalid *book.Invalid
	if errors.As(err, &invalid) {
		again.Faults = invalid.Faults
		return v.showProgram(again, 422)
	}
	if err != nil {
		return err
	}
	said := fmt.Sprintf("Kept: version %d, in force from %s.", r.Version, shortDay(r.From, v.today()))
	if r.Unchanged {
		said = "Nothing was changed, so nothing was written."
	}
	if n := len(r.Changed); n > 0 {
		said += " It changes " + count(n, "past standing.", "past standings.")
	}
	return v.kept(v.url("checklist"), said, "")
}

// programFile gives the text as a file.
func programFile(v *visit) error {
	src, err := v.b.Source(v.ctx(), v.actor, v.site.Code)
	if err != nil {
		return err
	}
	v.c.Header("Content-Disposition", `attachment; filename="`+strings.Map(plainName, v.site.Code)+`.yaml"`)
	v.c.Data(200, "application/yaml; charset=utf-8", src)
	return nil
}
