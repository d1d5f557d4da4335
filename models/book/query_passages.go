package book

import (
	"cmp"
	"context"
	"slices"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/reach"
	"lodebook/models/standing"
	"lodebook/models/store"
)

// PassageVerdict is what a passage is held to be.
type PassageVerdict string

// The verdicts.
const (
	PassageEntitled PassageVerdict = "entitled"
	NotEntitled     PassageVerdict = "not-entitled"
	UnknownBadge    PassageVerdict = "unknown-badge"
	UnknownDoor     PassageVerdict = "unknown-door"
	InVisit         PassageVerdict = "visit"
	Explained       PassageVerdict = "explained"
)

// Verdicts are all verdicts, in the order in which pages count them.
var Verdicts = []PassageVerdict{PassageEntitled, InVisit, Explained, NotEntitled, UnknownBadge, UnknownDoor}

// Words is the verdict as a person says it.
func (v PassageVerdict) Words() string {
	switch v {
	case NotEntitled:
		return "not entitled"
	case UnknownBadge:
		return "badge not known"
	case UnknownDoor:
		return "door not known"
	case InVisit:
		return "in a visit"
	}
	return string(v)
}

// Open tells whether the passage wants an answer.
func (v PassageVerdict) Open() bool { return v == NotEntitled || v == UnknownBadge || v == UnknownDoor }

// PassageQuery asks for the door events of a site from a moment on and before another. A nil KnownAt is all that is
// recorded.
type PassageQuery struct {
	Site     string
	From, To time.Time
	KnownAt  *time.Time
}

// PassageView is one door event, judged by all that is recorded and as the book knew it at its own moment.
type PassageView struct {
	At               time.Time
	Door, DoorName   string
	Zone             string // into which the door leads; empty where the door is not known
	Badge, Direction string
	Person, Name     string // of the badge's holder; empty where it is nobody's
	Verdict, Then    PassageVerdict
	Reasons          []ReachReason
	Mark             string // the entry that explains it, or empty
}

// PassageJSON is a passage as commands and the API give it.
type PassageJSON struct {
	At      time.Time         `json:"at"`
	Door    string            `json:"door"`
	Zone    *string           `json:"zone"`
	Badge   string            `json:"badge"`
	Person  *string           `json:"person"`
	Verdict PassageVerdict    `json:"verdict"`
	Then    PassageVerdict    `json:"verdict_then"`
	Reasons []ReachReasonJSON `json:"reasons"`
}

// JSON gives the passage as commands and the API do.
func (p PassageView) JSON() PassageJSON {
	j := PassageJSON{At: p.At, Door: p.Door, Badge: p.Badge, Verdict: p.Verdict, Then: p.Then, Reasons: reasonsJSON(p.Reasons)}
	if p.Zone != "" {
		j.Zone = &p.Zone
	}
	if p.Person != "" {
		j.Person = &p.Person
	}
	return j
}

// Passages judges the door events of a time, in order of time, and calls fn with each; it gives how many there were of
// each verdict. What fn is given is good until it returns.
func (b *Book) Passages(ctx context.Context, actor Actor, q PassageQuery, fn func(PassageView) error) (map[PassageVerdict]int, error) {
	counts := map[PassageVerdict]int{}
	if err := actor.may(SeePassages, q.Site); err != nil {
		return counts, err
	}
	if !q.To.After(q.From) {
		return counts, invalid("to", q.To.Format(time.RFC3339), "is not after the beginning", "a moment after "+q.From.Format(time.RFC3339))
	}
	k, err := b.knownAt(ctx, q.KnownAt)
	if err != nil {
		return counts, err
	}
	return counts, b.withEntries(ctx, func(tx *store.Tx, m *model) error {
		j, err := m.judging(tx, q, k, b.Now())
		if err != nil {
			return err
		}
		return tx.EachPassage(q.Site, q.From, q.To, func(r store.PassageRow) error {
			p, err := j.judge(r)
			if err != nil {
				return err
			}
			counts[p.Verdict]++
			return fn(p)
		})
	})
}

// judging holds passages against what is on record, one after the other in order of time.
type judging struct {
	*siteOn
	k        int64
	now      *reach.Then // by all that is recorded by k
	then     *reach.Then
	recorded []store.Recorded // of the time asked for
	known    int64            // what was known at the moment of the passage under way
	days     dayCache
	names    map[string]string
}

// dayCache remembers the day of the last instant, since passages come in order.
type dayCache struct {
	day      civil.Day
	from, to time.Time
}

func (m *model) judging(tx *store.Tx, q PassageQuery, k int64, now time.Time) (*judging, error) {
	v, err := m.view(q.Site, nil, k, now)
	if err != nil {
		return nil, err
	}
	j := &judging{siteOn: v, k: k, now: reach.NewThen(m.engine, q.Site), then: reach.NewThen(m.engine, q.Site), names: map[string]string{}}
	if j.known, err = tx.SeqAt(q.From); err != nil {
		return nil, err
	}
	j.recorded, err = tx.RecordedBetween(q.From, q.To)
	return j, err
}

func (j *judging) judge(r store.PassageRow) (PassageView, error) {
	for len(j.recorded) > 0 && !j.recorded[0].At.After(r.At) {
		j.known = j.recorded[0].Seq
		j.recorded = j.recorded[1:]
	}
	p := PassageView{At: r.At, Door: r.Door, Badge: r.Badge, Direction: r.Direction}
	on := j.day(r.At)
	p.DoorName = j.door(r.Door)
	var err error
	p.Then, err = j.verdict(&p, r, on, j.now0(j.known), j.then)
	if err != nil {
		return p, err
	}
	p.Reasons, p.Person, p.Zone, p.Mark = nil, "", "", ""
	p.Verdict, err = j.verdict(&p, r, on, j.k, j.now)
	if err == nil && p.Person != "" {
		p.Name = j.name(p.Person)
	}
	return p, err
}

// now0 bounds what was known then by what is asked as known.
func (j *judging) now0(known int64) int64 { return min(known, j.k) }

// verdict judges the passage by what was recorded by k, and fills in what it finds.
func (j *judging) verdict(p *PassageView, r store.PassageRow, on civil.Day, k int64, then *reach.Then) (PassageVerdict, error) {
	explained := func(v PassageVerdict) PassageVerdict {
		if p.Mark = j.mark(r, k); p.Mark != "" {
			return Explained
		}
		return v
	}
	p.Zone = j.leadsInto(r.Door, on, k)
	if p.Zone == "" {
		return explained(UnknownDoor), nil
	}
	p.Person = j.m.badgeHolder(r.Badge, on, k)
	if r.Direction == "out" || !j.isRestricted(p.Zone, on, k) {
		return PassageEntitled, nil // whoever goes out did come in, and anybody may go where nobody needs a right
	}
	if p.Person != "" {
		entitled, reasons, err := then.At(p.Person, p.Zone, r.At, k)
		if err != nil || entitled {
			return PassageEntitled, err
		}
		p.Reasons = j.reasons(reasons)
	}
	if j.m.inVisit(j.Code, p.Zone, r.At, r.Badge, p.Person, k) {
		p.Reasons = nil
		return InVisit, nil
	}
	if p.Person == "" {
		return explained(UnknownBadge), nil
	}
	return explained(NotEntitled), nil
}

// mark is the entry that explains the passage.
func (j *judging) mark(r store.PassageRow, k int64) string {
	for _, x := range j.m.marks.get(markKey{j.Code, r.Door, r.At.UnixMicro()}) {
		if x.Seq <= k && (x.Ended == 0 || x.Ended > k) && (x.Badge == r.Badge || x.Badge == "") {
			return x.ID
		}
	}
	return ""
}

// leadsInto is the zone into which a door leads on a day, empty where no door of that code is on record.
func (j *judging) leadsInto(door string, on civil.Day, k int64) string {
	if _, ok := j.m.fixture(j.Code, door); !ok {
		return ""
	}
	zone, _ := j.m.engine.Facts(j.Code, factZone, []standing.Subject{{Asks: program.AsksFixture, Code: door}}, on, k)[0].(string)
	return zone
}

// isRestricted tells whether a zone needs a right on a day. One that the program does not name is held to.
func (j *judging) isRestricted(zone string, on civil.Day, k int64) bool {
	in, ok := j.m.engine.VersionOn(j.Code, on, k)
	if !ok {
		return true
	}
	z, ok := in.Program.Zone(zone)
	return !ok || z.Restricted
}

// day is the day of an instant at the site.
func (j *judging) day(t time.Time) civil.Day {
	c := &j.days
	if t.Before(c.from) || !t.Before(c.to) {
		c.day = civil.DayOf(t, j.Location)
		c.from, c.to = c.day.Midnight(j.Location), (c.day + 1).Midnight(j.Location)
	}
	return c.day
}

func (j *judging) door(code string) string {
	if f, ok := j.m.fixture(j.Code, code); ok {
		return cmp.Or(f.Name, code)
	}
	return code
}

func (j *judging) name(person string) string {
	name, ok := j.names[person]
	if !ok {
		name = j.subjectName(standing.Subject{Asks: program.AsksPerson, Code: person})
		j.names[person] = name
	}
	return name
}

// MarkForm explains a passage, as typed.
type MarkForm struct{ ID, At, Door, Badge, Note string }

// Explain marks a passage as explained. Nobody explains their own.
func (b *Book) Explain(ctx context.Context, actor Actor, site string, f MarkForm) (Receipt, error) {
	if err := actor.may(ExplainPassage, site); err != nil {
		return Receipt{}, err
	}
	at, err := time.Parse(time.RFC3339Nano, f.At)
	if err != nil {
		return Receipt{}, invalid("at", f.At, "is not an instant", "write it as 2026-03-01T08:30:00Z")
	}
	return b.write(ctx, actor, func(s *session) error {
		found, err := s.tx.HasPassage(site, at, f.Door, f.Badge)
		if err != nil {
			return err
		}
		if !found {
			return &NotFound{"passage", f.Door + " at " + f.At}
		}
		on := civil.DayOf(at, s.m.zone(site))
		holder := s.m.badgeHolder(f.Badge, on, always64)
		if holder != "" && holder == actor.Person {
			return &Denied{Action: ExplainPassage, Role: actor.Role, Why: "nobody explains their own passage; ask another safety officer"}
		}
		for _, x := range s.m.marks.get(markKey{site, f.Door, at.UnixMicro()}) {
			if x.Ended == 0 && x.Badge == f.Badge {
				return invalid("at", f.At, "is explained already", "a passage that is not")
			}
		}
		body := &markBody{At: at.UTC().Format(instantLayout), Door: f.Door, Badge: veiled(f.Badge, holder), Note: veiled(f.Note, holder)}
		return s.add(draft{id: f.ID, site: site, body: body})
	})
}

// HolderChange is one line of what is to be changed in the doors' own system: a badge to withdraw from a door, one to
// add, one that is nobody's, or a door that the book does not know.
type HolderChange struct {
	Badge          string
	Person, Name   string
	Door, DoorName string
	Zone           string
	Change         string // withdraw, add, unknown-badge or unknown-door
	Reasons        []ReachReason
}

// HolderChangeJSON is a change as commands and the API give it.
type HolderChangeJSON struct {
	Badge   string            `json:"badge"`
	Person  *string           `json:"person"`
	Door    string            `json:"door"`
	Zone    *string           `json:"zone"`
	Change  string            `json:"change"`
	Reasons []ReachReasonJSON `json:"reasons"`
}

// JSON gives the change as commands and the API do.
func (c HolderChange) JSON() HolderChangeJSON {
	j := HolderChangeJSON{Badge: c.Badge, Door: c.Door, Change: c.Change, Reasons: reasonsJSON(c.Reasons)}
	if c.Person != "" {
		j.Person = &c.Person
	}
	if c.Zone != "" {
		j.Zone = &c.Zone
	}
	return j
}

// RightsDiff is the doors' list of holders held against who is entitled.
type RightsDiff struct {
	Site    SiteView
	At      time.Time
	Listed  *time.Time // when the list was brought in; nil: none was, by then
	Holders int        // lines of the list
	Rows    []HolderChange
}

// Withdrawals counts the lines that let somebody in who should not be let in: badges to withdraw, and those that are nobody's.
func (d RightsDiff) Withdrawals() int {
	n := 0
	for _, r := range d.Rows {
		if r.Change != "add" {
			n++
		}
	}
	return n
}

// RightsDiff tells what has to change in the doors' own system for it to let in those and only those who are entitled at a
// moment (nil: now), by the last list that was brought in before it.
func (b *Book) RightsDiff(ctx context.Context, actor Actor, site string, at *time.Time) (RightsDiff, error) {
	out := RightsDiff{At: b.Now()}
	if at != nil {
		out.At = *at
	}
	if err := actor.may(SeePassages, site); err != nil {
		return out, err
	}
	return out, b.withEntries(ctx, func(tx *store.Tx, m *model) error { return m.rightsDiff(tx, site, b.Now(), &out) })
}

func (m *model) rightsDiff(tx *store.Tx, site string, now time.Time, out *RightsDiff) error {
	v, r, err := m.reaching(site, out.At, always64, now)
	if err != nil {
		return err
	}
	out.Site = v.SiteView
	batch, ok := m.holderList(site, out.At)
	if !ok {
		return nil
	}
	out.Listed = &batch.At
	list, err := tx.Holders(batch.ID)
	if err != nil {
		return err
	}
	out.Holders = len(list)
	d := &differing{judging: &judging{siteOn: v, k: always64, names: map[string]string{}}, r: r, at: out.At, has: map[[2]string]bool{}, answers: map[string]map[string]reach.Answer{}}
	for _, h := range list {
		d.holder(h)
	}
	for _, door := range sortedKeys(d.doors) {
		d.missing(door, d.doors[door])
	}
	out.Rows = d.rows
	slices.SortStableFunc(out.Rows, func(a, b HolderChange) int { return cmp.Compare(a.Door, b.Door) })
	return nil
}

// differing is a list of holders under comparison.
type differing struct {
	*judging
	r       *reach.Reader
	at      time.Time
	doors   map[string]string // the doors of the list that lead into a restricted zone, with it
	has     map[[2]string]bool
	answers map[string]map[string]reach.Answer // of each zone, by person
	rows    []HolderChange
}

// holder holds one line of the list against who is entitled.
func (d *differing) holder(h store.HolderRow) {
	x := HolderChange{Badge: h.Badge, Door: h.Door, DoorName: d.door(h.Door), Zone: d.leadsInto(h.Door, d.on, d.k)}
	if x.Person = d.m.badgeHolder(h.Badge, d.on, d.k); x.Person != "" {
		x.Name = d.name(x.Person)
	}
	switch {
	case x.Zone == "":
		x.Change = "unknown-door"
	case !d.isRestricted(x.Zone, d.on, d.k):
		return
	case x.Person == "":
		x.Change = "unknown-badge"
	default:
		a := d.answer(x.Person, x.Zone)
		if a.Entitled {
			d.has[[2]string{x.Door, x.Person}] = true
		} else {
			x.Change, x.Reasons = "withdraw", d.reasons(a.Reasons)
		}
	}
	if x.Zone != "" {
		if d.doors == nil {
			d.doors = map[string]string{}
		}
		d.doors[x.Door] = x.Zone
	}
	if x.Change != "" {
		d.rows = append(d.rows, x)
	}
}

// answer is what holds of a person at the moment; what holds of everybody is worked out once for each zone.
func (d *differing) answer(person, zone string) reach.Answer {
	if d.answers[zone] == nil {
		d.answers[zone] = map[string]reach.Answer{}
		for _, a := range d.r.At(zone, d.at) {
			d.answers[zone][a.Person] = a
		}
	}
	if a, ok := d.answers[zone][person]; ok {
		return a
	}
	return d.r.One(person, zone, d.at)
}

// missing lists who is entitled to what is behind a door of the list, has a badge and cannot open it.
func (d *differing) missing(door, zone string) {
	d.answer("", zone)
	for _, person := range sortedKeys(d.answers[zone]) {
		badge := d.m.badgeOf(person, d.on, d.k)
		if !d.answers[zone][person].Entitled || d.has[[2]string{door, person}] || badge == "" || d.m.badgeHolder(badge, d.on, d.k) != person {
			continue
		}
		d.rows = append(d.rows, HolderChange{Badge: badge, Person: person, Name: d.name(person), Door: door, DoorName: d.door(door), Zone: zone, Change: "add"})
	}
}

// doorList is the state of the doors' list at a moment: when it was brought in, and how many of its lines let somebody in
// who should not be. It is false where there is none.
func (b *Book) doorList(ctx context.Context, site string, now time.Time) (imported civil.Day, open int, ok bool, err error) {
	d := RightsDiff{At: now}
	err = b.withEntries(ctx, func(tx *store.Tx, m *model) error { return m.rightsDiff(tx, site, now, &d) })
	if err != nil || d.Listed == nil {
		return 0, 0, false, err
	}
	return civil.DayOf(*d.Listed, d.Site.Location), d.Withdrawals(), true, nil
}

// Unexplained are the passages of a time that want an answer, the latest first and no more than so many, and how many
// there are.
func (b *Book) Unexplained(ctx context.Context, actor Actor, site string, from, to time.Time, most int) ([]PassageView, int, error) {
	var out []PassageView
	n := 0
	_, err := b.Passages(ctx, actor, PassageQuery{Site: site, From: from, To: to}, func(p PassageView) error {
		if p.Verdict.Open() {
			n++
			out = append(out, p)
			if len(out) > 2*most {
				out = slices.Delete(out, 0, len(out)-most)
			}
		}
		return nil
	})
	slices.Reverse(out)
	return out[:min(len(out), most)], n, err
}
