package web

import (
	"cmp"
	"slices"
	"strings"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
)

// passageLine is one door event as a page lists it.
type passageLine struct {
	When, Door, Zone string
	Verdict, Then    string
	Word             string // class of the verdict's word
	Why              string
	MarkURL, Explain string
}

// passageGroup is what one person's, or one unknown badge's, door events want an answer for.
type passageGroup struct {
	Name, URL, Note string
	Lines           []passageLine
	More            int
}

type passagesLeaf struct {
	page
	Say        string
	From, To   string // as the boxes have them
	KnownAt    string
	Path       string
	Then       string
	Tabs       []spineLink
	Counts     []countLine
	Groups     []passageGroup
	Answered   []passageGroup // in a visit, or explained
	ImportURL  string
	ExportURL  string
	MayExplain bool
}

// countLine is a number with its word.
type countLine struct {
	N    int
	Word string
}

var passagesSheet = leafOf[passagesLeaf]("passages")

const (
	passageDays = 7  // shown where no time is asked for
	passageEach = 12 // of one person
	passageMost = 60 // people
)

// doorTabs are the tabs of the zones with those about the doors' own system.
func (v *visit) doorTabs(current string) []spineLink {
	out := v.zoneTabs("")
	if v.may(book.SeePassages) {
		out = append(out,
			spineLink{Name: "Door events", URL: v.url("passages"), Current: current == "passages"},
			spineLink{Name: "Badges against rights", URL: v.url("badges"), Current: current == "badges"})
	}
	return out
}

// passageQuery reads the time that the address asks for; without one the last days, up to now.
func (v *visit) passageQuery() (book.PassageQuery, error) {
	now := v.b.Now()
	q := book.PassageQuery{Site: v.site.Code, To: now.Add(time.Minute).Truncate(time.Minute)}
	q.From = (v.today() - passageDays).Midnight(v.site.Location)
	for name, to := range map[string]*time.Time{"from": &q.From, "to": &q.To} {
		if text := strings.TrimSpace(v.query(name)); text != "" {
			t, err := v.dayOrMoment(name, text)
			if err != nil {
				return q, err
			}
			*to = t
		}
	}
	if text := strings.TrimSpace(v.query("known_at")); text != "" {
		t, err := v.b.Moment(v.ctx(), v.site.Code, "known_at", text)
		if err != nil {
			return q, err
		}
		q.KnownAt = &t
	}
	return q, nil
}

// dayOrMoment reads a moment, or a day: its first instant, or as an end the one after it.
func (v *visit) dayOrMoment(name, text string) (time.Time, error) {
	if d, err := civil.ParseDay(text); err == nil {
		if name == "to" {
			d++
		}
		return d.Midnight(v.site.Location), nil
	}
	return v.b.Moment(v.ctx(), v.site.Code, name, text)
}

// passagesPage holds the door events of a time against who was entitled.
func passagesPage(v *visit) error {
	q, err := v.passageQuery()
	if err != nil {
		return err
	}
	if v.query("format") == "csv" {
		return v.passagesCSV(q)
	}
	loc := v.site.Location
	p := &passagesLeaf{page: page{Title: "Door events", Section: secZones}, Path: v.c.Request.URL.EscapedPath(), Tabs: v.doorTabs("passages"), MayExplain: v.may(book.ExplainPassage)}
	p.From, p.To = q.From.In(loc).Format("2006-01-02 15:04"), q.To.In(loc).Format("2006-01-02 15:04")
	if q.KnownAt != nil {
		p.KnownAt = q.KnownAt.In(loc).Format("2006-01-02 15:04")
		p.Then = "Judged as the book knew it at " + moment(*q.KnownAt, loc, v.today()) + "."
	}
	if v.may(book.ImportTables) {
		p.ImportURL = with(v.url("import"), "table", "passages")
	}
	p.ExportURL = with(v.url("passages"), "format", "csv", "from", p.From, "to", p.To, "known_at", p.KnownAt)
	open, answered := map[string]*passageGroup{}, map[string]*passageGroup{}
	counts, err := v.b.Passages(v.ctx(), v.actor, q, func(x book.PassageView) error {
		switch {
		case x.Verdict.Open():
			v.passage(open, x)
		case x.Verdict != book.PassageEntitled:
			v.passage(answered, x)
		}
		return nil
	})
	if err != nil {
		return err
	}
	p.Groups, p.Answered = passageGroups(open), passageGroups(answered)
	for _, w := range book.Verdicts {
		if counts[w] > 0 {
			p.Counts = append(p.Counts, countLine{counts[w], w.Words()})
		}
	}
	p.Say = passagesSay(counts)
	return passagesSheet.show(v, 200, p)
}

// passage puts a door event to those of the same person, or of the same unknown badge or door.
func (v *visit) passage(to map[string]*passageGroup, x book.PassageView) {
	key, name, url := "person "+x.Person, x.Name, v.url("people", x.Person)
	if x.Person == "" {
		key, name, url = "badge "+x.Badge, "Badge "+orCode(x.Badge, "without a number"), ""
	}
	g := to[key]
	if g == nil {
		g = &passageGroup{Name: name, URL: url}
		to[key] = g
	}
	if len(g.Lines) == passageEach {
		g.Lines = g.Lines[1:] // the latest are shown
		g.More++
	}
	l := passageLine{When: moment(x.At, v.site.Location, v.today()), Door: x.DoorName, Zone: x.Zone, Verdict: x.Verdict.Words(), Word: verdictWord(x.Verdict)}
	if x.Then != x.Verdict {
		l.Then = thenWords(x.Then)
	}
	var why []string
	for _, r := range x.Reasons {
		why = append(why, v.reasonWords(r))
	}
	l.Why = strings.Join(why, "; ")
	if x.Mark != "" {
		l.MarkURL = v.entryURL("mark", x.Mark, false)
	}
	if x.Verdict.Open() && v.may(book.ExplainPassage) {
		l.Explain = with(v.url("explain"), "at", x.At.Format(time.RFC3339Nano), "door", x.Door, "badge", x.Badge)
	}
	g.Lines = append(g.Lines, l)
}

// thenWords says what a passage was by what the book knew at its moment.
func thenWords(v book.PassageVerdict) string {
	switch v {
	case book.UnknownDoor:
		return "then the book did not know the door"
	case book.UnknownBadge:
		return "then the book did not know the badge"
	}
	return "by what was known then: " + v.Words()
}

// verdictWord is the standing as whose word a verdict is coloured.
func verdictWord(v book.PassageVerdict) string {
	switch v {
	case book.NotEntitled:
		return "lapsed"
	case book.UnknownBadge, book.UnknownDoor:
		return "missing"
	}
	return ""
}

// passageGroups puts those with the most events first.
func passageGroups(all map[string]*passageGroup) []passageGroup {
	out := make([]passageGroup, 0, len(all))
	for _, g := range all {
		slices.Reverse(g.Lines)
		out = append(out, *g)
	}
	slices.SortFunc(out, func(a, b passageGroup) int {
		return cmp.Or(cmp.Compare(len(b.Lines)+b.More, len(a.Lines)+a.More), strings.Compare(a.Name, b.Name))
	})
	return out[:min(len(out), passageMost)]
}

func passagesSay(counts map[book.PassageVerdict]int) string {
	total := 0
	for _, n := range counts {
		total += n
	}
	if total == 0 {
		return "No door events are on record of this time. They come from the doors' own system, as a table that is imported."
	}
	s := upperFirst(count(total, "door event.", "door events.")) + " "
	unknown := counts[book.UnknownBadge] + counts[book.UnknownDoor]
	switch n := counts[book.NotEntitled]; {
	case n == 0 && unknown == 0:
		return s + "Nobody went through a door to whom it should have been shut."
	case n == 0:
		s += "Nobody who is known went where they were not entitled; " + count(unknown, "event is", "events are") + " of a badge or a door that is not known."
	default:
		s += upperFirst(count(n, "was by somebody not entitled and is not explained", "were by people not entitled and are not explained"))
		if unknown > 0 {
			s += "; " + number(unknown) + " more " + singular(unknown, "is", "are") + " of a badge or a door that is not known"
		}
		s += "."
	}
	return s
}

func explainForm(v *visit, f *Form) (*formLeaf, error) {
	p := &formLeaf{page: page{Title: "Explain a passage", Section: secZones}, Head: "Explain a passage", Action: v.url("explain"), Form: f, Button: "Keep this explanation"}
	p.Say = "The passage stays on record as it was, with your words beside it. It is no substitute for a visit: the counts keep them apart."
	if t, err := time.Parse(time.RFC3339Nano, f.Get("at")); err == nil {
		p.Head += ": " + f.Get("door") + ", " + moment(t, v.site.Location, v.today())
	}
	id, err := v.formID(f)
	p.Hidden = []hidden{id, {"at", f.Get("at")}, {"door", f.Get("door")}, {"badge", f.Get("badge")}}
	p.Fields = []field{f.Long("note", "How it came about").Need().Help("Nothing medical belongs here")}
	return p, err
}

func explainPage(v *visit) error { return v.showExplain(v.asked()) }

func (v *visit) showExplain(f *Form) error {
	p, err := explainForm(v, f)
	if err != nil {
		return err
	}
	return v.showForm(p)
}

func explain(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.Explain(v.ctx(), v.actor, v.site.Code, book.MarkForm{ID: f.Get("id"), At: f.Get("at"), Door: f.Get("door"), Badge: f.Get("badge"), Note: f.Get("note")})
	if f.Take(err) {
		return v.showExplain(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("passages"), "The passage is explained.", r.ID())
}

// holderLine is one change to be made at a door.
type holderLine struct{ Change, Badge, Name, URL, Why string }

// doorChanges are the changes at one door.
type doorChanges struct {
	Door, Code, Zone string
	Lines            []holderLine
}

type badgesLeaf struct {
	page
	Say       string
	At        string
	Path      string
	Tabs      []spineLink
	Doors     []doorChanges
	ExportURL string
	ImportURL string
	Listed    string
}

var badgesSheet = leafOf[badgesLeaf]("badges")

// badgesPage says what has to change in the doors' own system, door by door.
func badgesPage(v *visit) error {
	var at *time.Time
	if text := strings.TrimSpace(v.query("at")); text != "" {
		t, err := v.b.Moment(v.ctx(), v.site.Code, "at", text)
		if err != nil {
			return err
		}
		at = &t
	}
	d, err := v.b.RightsDiff(v.ctx(), v.actor, v.site.Code, at)
	if err != nil {
		return err
	}
	if v.query("format") == "csv" {
		return v.badgesCSV(d)
	}
	p := &badgesLeaf{page: page{Title: "Badges against rights", Section: secZones}, Path: v.c.Request.URL.EscapedPath(), Tabs: v.doorTabs("badges")}
	p.At = d.At.In(v.site.Location).Format("2006-01-02 15:04")
	p.ExportURL = with(v.url("badges"), "format", "csv", "at", v.query("at"))
	if v.may(book.ImportTables) {
		p.ImportURL = with(v.url("import"), "table", "holders")
	}
	if d.Listed != nil {
		p.Listed = "list of " + moment(*d.Listed, v.site.Location, v.today())
	}
	p.Say = badgesSay(d, v)
	for _, r := range d.Rows {
		if n := len(p.Doors); n == 0 || p.Doors[n-1].Code != r.Door {
			p.Doors = append(p.Doors, doorChanges{Door: r.DoorName, Code: r.Door, Zone: r.Zone})
		}
		x := &p.Doors[len(p.Doors)-1]
		x.Lines = append(x.Lines, v.holderLine(r))
	}
	return badgesSheet.show(v, 200, p)
}

func (v *visit) holderLine(r book.HolderChange) holderLine {
	l := holderLine{Change: holderWords[r.Change], Badge: r.Badge, Name: r.Name}
	if r.Person != "" {
		l.URL = v.url("people", r.Person)
	}
	var why []string
	for _, x := range r.Reasons {
		why = append(why, v.reasonWords(x))
	}
	l.Why = strings.Join(why, "; ")
	return l
}

var holderWords = map[string]string{"withdraw": "withdraw", "add": "add", "unknown-badge": "nobody's badge", "unknown-door": "no such door here"}

func badgesSay(d book.RightsDiff, v *visit) string {
	if d.Listed == nil {
		return "No list of who can open which door has been brought in. The people who run the doors can export one; it is imported as the table holders."
	}
	out, add := d.Withdrawals(), len(d.Rows)-d.Withdrawals()
	age := int(v.today() - civil.DayOf(*d.Listed, v.site.Location))
	s := "The doors' list is from " + until(civil.DayOf(*d.Listed, v.site.Location), v.today()) + ". "
	if age == 0 {
		s = "The doors' list is from today. "
	}
	switch {
	case out == 0 && add == 0:
		return s + "It lets in those and only those who are entitled."
	case out == 0:
		return s + "It lets nobody in who should not be; " + count(add, "badge is missing", "badges are missing") + " at a door that it should open."
	}
	s += upperFirst(count(out, "line lets somebody in who should not be let in", "lines let somebody in who should not be let in"))
	if add > 0 {
		s += "; " + count(add, "badge is missing", "badges are missing") + " at a door that it should open"
	}
	return s + "."
}
