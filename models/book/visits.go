package book

import (
	"cmp"
	"context"
	"fmt"
	"slices"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
	"lodebook/models/store"
)

// VisitForm announces a visit, as typed. From and To are moments by the site's clocks; an empty From is now.
type VisitForm struct {
	ID                              string
	Visitor, Employer, Badge, Kind  string
	Purpose, From, To, Escort, Tool string
	Zones                           []string
	Person                          string
}

// Announce puts a visit on record.
func (b *Book) Announce(ctx context.Context, actor Actor, site string, f VisitForm) (Receipt, error) {
	if err := actor.may(HandleVisits, site); err != nil {
		return Receipt{}, err
	}
	return b.write(ctx, actor, func(s *session) error {
		body, faults := s.check(site).visitBody(f)
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		return s.add(draft{id: f.ID, site: site, body: body})
	})
}

func (c *check) visitBody(f VisitForm) (*visitBody, []Fault) {
	person := strings.TrimSpace(f.Person)
	body := &visitBody{
		Visitor: veiled(strings.TrimSpace(f.Visitor), person), Employer: veiled(strings.TrimSpace(f.Employer), person), Badge: veiled(strings.TrimSpace(f.Badge), person),
		Visit: f.Kind, Purpose: veiled(strings.TrimSpace(f.Purpose), person), Escort: strings.TrimPrefix(strings.TrimSpace(f.Escort), "person:"), Person: person,
		Tools: veiled(strings.TrimSpace(f.Tool), person),
	}
	for _, z := range f.Zones {
		if z = strings.TrimSpace(z); z != "" && !slices.Contains(body.Zones, z) {
			body.Zones = append(body.Zones, z)
		}
	}
	var faults []Fault
	from, to := c.now, time.Time{}
	for _, x := range []struct {
		field, text string
		to          *time.Time
	}{{"from", f.From, &from}, {"to", f.To, &to}} {
		if strings.TrimSpace(x.text) == "" && x.field == "from" {
			continue
		}
		text, more := c.readMoment(x.field, x.text)
		m := parseMoment(text, c.zone())
		switch {
		case len(more) > 0:
			faults = append(faults, more...)
		case m.time == nil:
			faults = append(faults, Fault{x.field, x.text, "is a day and not a moment", "add a time, as in " + m.day.String() + " 12:00"})
		default:
			*x.to = *m.time
		}
	}
	body.From, body.To = from.UTC().Format(time.RFC3339), to.UTC().Format(time.RFC3339)
	body.Late = from.Before(c.now.Add(-lateVisit))
	return body, faults
}

// StepForm says what became of a visit, as typed. An empty At is now. Tools are those that are checked in with arrived,
// and those that are taken out again with gone.
type StepForm struct {
	ID                 string
	Visit              string // the entry that announced it
	Step               VisitStep
	At, Screener, Note string
	Outcome            Outcome
	Tools              []string
}

// StepVisit puts a step of a visit on record: the visitor is here, is gone, was turned away, or the visit is called off.
func (b *Book) StepVisit(ctx context.Context, actor Actor, f StepForm) (Receipt, error) {
	return b.write(ctx, actor, func(s *session) error {
		old, ok, err := s.tx.EntryByID(f.Visit)
		if err != nil {
			return err
		}
		if !ok || old.Kind != kindVisit {
			return &NotFound{"visit", f.Visit}
		}
		if err := actor.may(HandleVisits, old.Site); err != nil {
			return err
		}
		c := s.check(old.Site)
		v, ok := s.m.visit(old.Site, f.Visit)
		if !ok {
			return &NotFound{"visit", f.Visit}
		}
		body, faults := c.stepBody(v, f)
		if len(faults) > 0 {
			return &Invalid{faults}
		}
		return s.add(draft{id: f.ID, site: old.Site, body: body})
	})
}

// stepBody checks a step against what became of the visit so far.
func (c *check) stepBody(v visitNow, f StepForm) (*visitStepBody, []Fault) {
	body := &visitStepBody{Announced: v.ID, Step: f.Step, At: c.now.UTC().Format(time.RFC3339), Note: veiled(strings.TrimSpace(f.Note), v.Person)}
	if strings.TrimSpace(f.At) != "" {
		at, faults := c.readMoment("at", f.At)
		if len(faults) > 0 {
			return nil, faults
		}
		if m := parseMoment(at, c.zone()); m.time == nil {
			return nil, []Fault{{"at", f.At, "is a day and not a moment", "add a time, as in " + m.day.String() + " 12:00"}}
		}
		body.At = at
	}
	at, _ := time.Parse(time.RFC3339, body.At)
	switch f.Step {
	case Arrived, TurnedAway, CalledOff:
		if done := v.last(); done != "" {
			return nil, []Fault{{"step", string(f.Step), "comes too late: " + v.words(c), "nothing more is to be done"}}
		}
	case Gone:
		if v.arrived == nil || v.over != nil {
			return nil, []Fault{{"step", string(f.Step), "does not fit: " + v.words(c), "a visit whose visitor is here"}}
		}
		if at.Before(v.arrived.At) {
			return nil, []Fault{{"at", f.At, "lies before the visitor came", "a moment after " + clockWords(v.arrived.At, c.zone())}}
		}
		return body, body.takeOut(v, f)
	default:
		return nil, []Fault{{"step", string(f.Step), "is no step of a visit", "arrived, gone, turned-away or called-off"}}
	}
	if f.Step == Arrived {
		return body, c.arrival(body, v, f, at)
	}
	return body, nil
}

// arrival checks who is let in: somebody screened them, with an outcome that lets them in, and an escort who still may.
func (c *check) arrival(body *visitStepBody, v visitNow, f StepForm, at time.Time) []Fault {
	body.Screener, body.Outcome = strings.TrimPrefix(strings.TrimSpace(f.Screener), "person:"), f.Outcome
	body.Tools = veiled(strings.Join(f.Tools, "\n"), v.Person)
	announced := &visitBody{Visit: v.Kind, Zones: v.Zones, Escort: v.Escort, Person: v.Person}
	if faults := c.checkEscort(announced, at); len(faults) > 0 {
		return faults
	}
	restricted := c.restrictedOf(v.Zones, at)
	if restricted == "" && body.Outcome == "" && body.Screener == "" {
		return nil
	}
	if v.Kind == emergencyVisit && body.Outcome == "" {
		return nil // nobody waits for a form
	}
	switch body.Outcome {
	case Cleared, ClearedInPart:
	case NotCleared:
		return []Fault{{"outcome", string(body.Outcome), "lets nobody in", "turn the visitor away, or screen them again"}}
	default:
		return []Fault{{"outcome", string(body.Outcome), "is not on record", outcomesInWords}}
	}
	if body.Screener == "" {
		return []Fault{{"screener", "", "is empty", "the code of the person who screened the visitor"}}
	}
	if faults := c.checkSubject("screener", subjectBody{"person", body.Screener}); len(faults) > 0 {
		return faults
	}
	if body.Screener == v.Person {
		return []Fault{{"screener", body.Screener, "is the visitor, and nobody screens themselves", "somebody else"}}
	}
	if restricted == "" {
		return nil
	}
	if _, level := c.escortLevel(restricted, at); !c.m.holdsLevel(c.site, body.Screener, level, civil.DayOf(at, c.zone())) {
		return []Fault{{"screener", body.Screener, "does not hold " + cmp.Or(level, "a level that may escort there") + ", which zone " + restricted + " asks of whoever lets somebody in", "somebody who holds it"}}
	}
	return nil
}

// restrictedOf is the most restricted of zones, empty where none is.
func (c *check) restrictedOf(zones []string, at time.Time) string {
	found := ""
	for _, z := range c.m.site(c.site).on(civil.DayOf(at, c.zone())).program.Zones {
		if z.Restricted && slices.Contains(zones, z.Code) {
			found = z.Code
		}
	}
	return found
}

// takeOut checks that every tool that came in goes out again, or that somebody says why not.
func (b *visitStepBody) takeOut(v visitNow, f StepForm) []Fault {
	var left []string
	for _, t := range v.Tools {
		if !slices.Contains(f.Tools, t) {
			left = append(left, t)
		}
	}
	b.Tools = veiled(strings.Join(left, "\n"), v.Person)
	if len(left) > 0 && strings.TrimSpace(f.Note) == "" {
		return []Fault{{"note", "", "is empty, and not checked out is: " + strings.Join(left, ", "), "tick what was taken along, or say where the rest is"}}
	}
	return nil
}

// visitNow is a visit with what became of it.
type visitNow struct {
	store.VisitRow
	arrived, over *store.VisitStepRow
}

// last is the last step, empty where there is none.
func (v visitNow) last() string {
	switch {
	case v.over != nil:
		return v.over.Step
	case v.arrived != nil:
		return v.arrived.Step
	}
	return ""
}

// words says what became of the visit, and who put it on record.
func (v visitNow) words(c *check) string {
	step := v.over
	if step == nil {
		step = v.arrived
	}
	if step == nil {
		return "the visitor is not here yet"
	}
	by := c.m.actorName(step.Account, &visitStepBody{})
	return fmt.Sprintf("%s, %s, put down by %s", stepWords[VisitStep(step.Step)], clockWords(step.At, c.zone()), by)
}

var stepWords = map[VisitStep]string{
	Arrived: "the visitor is here already", Gone: "the visitor is gone already", TurnedAway: "the visitor was turned away", CalledOff: "the visit was called off",
}

// visit is a visit that stands, by all that is recorded.
func (m *model) visit(site, id string) (visitNow, bool) {
	for _, r := range m.visits.get(site) {
		if r.ID == id && r.Ended == 0 {
			return m.visitAt(r, always64), true
		}
	}
	return visitNow{}, false
}

// visitAt adds to a visit what became of it as known at k.
func (m *model) visitAt(r store.VisitRow, k int64) visitNow {
	v := visitNow{VisitRow: r}
	for _, s := range m.visitSteps.get(r.ID) {
		if s.Seq > k || s.Ended != 0 && s.Ended <= k {
			continue
		}
		step := s
		if s.Step == string(Arrived) {
			v.arrived = &step
		} else {
			v.over = &step
		}
	}
	return v
}

// inVisit tells whether a passage into a zone falls into a visit of whoever bears the badge: after they came and before they
// were gone, with a zone that was announced.
func (m *model) inVisit(site, zone string, at time.Time, badge, person string, k int64) bool {
	for _, r := range m.visits.get(site) {
		if r.Seq > k || r.Ended != 0 && r.Ended <= k || !slices.Contains(r.Zones, zone) {
			continue
		}
		if !(badge != "" && r.Badge == badge || person != "" && r.Person == person) {
			continue
		}
		v := m.visitAt(r, k)
		if v.arrived == nil || at.Before(v.arrived.At) {
			continue
		}
		end := r.To
		if v.over != nil {
			end = v.over.At
		}
		if !at.After(end) {
			return true
		}
	}
	return false
}

// VisitView is one visit as pages show it.
type VisitView struct {
	Entry                      string
	Visitor, Employer, Purpose string
	Kind, KindWords            string
	Zones                      []string
	From, To                   time.Time
	Escort, EscortName         string
	EscortLapses               *civil.Day // the day from which the escort no longer holds the level, before the visit's end
	Person                     string
	Badge                      string
	Tools                      []string
	Late                       bool
	ArrivedAt, OverAt          *time.Time
	ArrivedEntry, OverEntry    string
	Over                       VisitStep // empty: it goes on, or is still to come
	Screener, ScreenerName     string
	Outcome                    Outcome
	Overdue                    bool // here after its end
	Erased                     bool
}

// Here tells whether the visitor is here.
func (v VisitView) Here() bool { return v.ArrivedAt != nil && v.Over == "" }

// Awaited tells whether the visitor is still to come.
func (v VisitView) Awaited() bool { return v.ArrivedAt == nil && v.Over == "" }

// VisitJSON is a visit as commands and the API give it.
type VisitJSON struct {
	ID       string     `json:"id"`
	Visitor  string     `json:"visitor"`
	Employer string     `json:"employer"`
	Kind     string     `json:"kind"`
	Zones    []string   `json:"zones"`
	From     time.Time  `json:"from"`
	To       time.Time  `json:"to"`
	Escort   *string    `json:"escort"`
	Person   *string    `json:"person"`
	Arrived  *time.Time `json:"arrived"`
	Over     *time.Time `json:"over"`
	Step     *VisitStep `json:"step"`
	Screener *string    `json:"screener"`
	Outcome  *Outcome   `json:"outcome"`
	Overdue  bool       `json:"overdue"`
}

// JSON gives the visit as commands and the API do.
func (v VisitView) JSON() VisitJSON {
	j := VisitJSON{ID: v.Entry, Visitor: v.Visitor, Employer: v.Employer, Kind: v.Kind, Zones: v.Zones, From: v.From, To: v.To, Arrived: v.ArrivedAt, Over: v.OverAt, Overdue: v.Overdue}
	for _, x := range []struct {
		to   **string
		text string
	}{{&j.Escort, v.Escort}, {&j.Person, v.Person}, {&j.Screener, v.Screener}} {
		if x.text != "" {
			*x.to = &x.text
		}
	}
	switch {
	case v.Over != "":
		j.Step = &v.Over
	case v.ArrivedAt != nil:
		step := Arrived
		j.Step = &step
	}
	if v.Outcome != "" {
		j.Outcome = &v.Outcome
	}
	return j
}

// VisitQuery asks for the visits of a site that touch a day (nil: today). Open leaves those who are here, or are still to come.
type VisitQuery struct {
	Site string
	On   *civil.Day
	Open bool
}

// Visits lists visits: those who are here first, the overdue ones before the others; then those to come, then the rest.
func (b *Book) Visits(ctx context.Context, actor Actor, q VisitQuery) ([]VisitView, error) {
	if err := actor.may(SeeVisits, q.Site); err != nil {
		return nil, err
	}
	out := []VisitView{}
	return out, b.read(ctx, func(m *model) error {
		v, err := m.view(q.Site, q.On, always64, b.Now())
		if err != nil {
			return err
		}
		from, to := v.on.Midnight(v.Location), (v.on + 1).Midnight(v.Location)
		for _, r := range m.visits.get(q.Site) {
			if r.Ended != 0 {
				continue
			}
			x := v.visitView(m.visitAt(r, always64), b.Now())
			touches := r.From.Before(to) && r.To.After(from) || x.Here() && v.on == v.Today
			if touches && (!q.Open || x.Here() || x.Awaited()) {
				out = append(out, x)
			}
		}
		slices.SortStableFunc(out, func(a, b VisitView) int {
			return cmp.Or(boolOrder(b.Here(), a.Here()), boolOrder(b.Overdue, a.Overdue), boolOrder(b.Awaited(), a.Awaited()), a.From.Compare(b.From))
		})
		return nil
	})
}

// Visit gives one visit.
func (b *Book) Visit(ctx context.Context, actor Actor, site, id string) (VisitView, error) {
	var out VisitView
	if err := actor.may(SeeVisits, site); err != nil {
		return out, err
	}
	return out, b.withEntries(ctx, func(tx *store.Tx, m *model) error {
		v, err := m.view(site, nil, always64, b.Now())
		if err != nil {
			return err
		}
		x, ok := m.visit(site, id)
		if !ok {
			return &NotFound{"visit", id}
		}
		out = v.visitView(x, b.Now())
		e, ok, err := tx.EntryByID(id)
		if err != nil || !ok {
			return err
		}
		_, bd, err := m.entryLine(tx, e)
		if err != nil {
			return err
		}
		if body, ok := bd.(*visitBody); ok {
			out.Purpose = body.Purpose.String()
		}
		return nil
	})
}

func (v *siteOn) visitView(x visitNow, now time.Time) VisitView {
	out := VisitView{
		Entry: x.ID, Visitor: x.Visitor, Employer: x.Employer, Kind: x.Kind, Zones: x.Zones, From: x.From, To: x.To, Escort: x.Escort,
		Person: x.Person, Badge: x.Badge, Tools: x.Tools, Late: x.Late, Erased: x.Visitor == "",
	}
	for _, k := range VisitKinds {
		if k.Code == x.Kind {
			out.KindWords = k.Words
		}
	}
	name := func(code string) string {
		if code == "" {
			return ""
		}
		return v.subjectName(standing.Subject{Asks: program.AsksPerson, Code: code})
	}
	out.EscortName = name(x.Escort)
	if out.Erased {
		out.Visitor = erasedText
	}
	if s := x.arrived; s != nil {
		out.ArrivedAt, out.ArrivedEntry, out.Screener, out.ScreenerName, out.Outcome = &s.At, s.ID, s.Screener, name(s.Screener), Outcome(s.Outcome)
	}
	if s := x.over; s != nil {
		out.OverAt, out.OverEntry, out.Over = &s.At, s.ID, VisitStep(s.Step)
	}
	out.Overdue = out.Here() && now.After(x.To)
	if out.Over == "" {
		out.EscortLapses = v.escortLapses(x)
	}
	return out
}

// escortLapses is the first day of the visit on which the escort does not hold the level that its zones ask for.
func (v *siteOn) escortLapses(x visitNow) *civil.Day {
	if x.Escort == "" {
		return nil
	}
	first, last := civil.DayOf(x.From, v.Location), civil.DayOf(x.To.Add(-time.Second), v.Location)
	for d := first; d <= last; d++ {
		for _, zone := range x.Zones {
			z, ok := v.m.site(v.Code).on(d).program.Zone(zone)
			if ok && z.Restricted && !v.m.holdsLevel(v.Code, x.Escort, z.Escort, d) {
				return &d
			}
		}
	}
	return nil
}

// KnownVisitor is somebody who has been here before.
type KnownVisitor struct {
	Visitor, Employer, Kind string
	Person                  string
	Times                   int // in the last 90 days
	Last                    VisitView
}

// Often tells whether somebody comes so often that they had better become a person of the book (common practice).
func (k KnownVisitor) Often() bool { return k.Times >= 5 && k.Person == "" }

// KnownVisitors lists who came in the last 90 days, the most frequent first.
func (b *Book) KnownVisitors(ctx context.Context, actor Actor, site string) ([]KnownVisitor, error) {
	if err := actor.may(HandleVisits, site); err != nil {
		return nil, err
	}
	var out []KnownVisitor
	return out, b.read(ctx, func(m *model) error {
		v, err := m.view(site, nil, always64, b.Now())
		if err != nil {
			return err
		}
		at := map[string]int{}
		for _, r := range m.visits.get(site) {
			if r.Ended != 0 || r.Visitor == "" || r.From.Before(b.Now().Add(-90*24*time.Hour)) {
				continue
			}
			key := strings.ToLower(r.Visitor + "\x00" + r.Employer)
			i, ok := at[key]
			if !ok {
				i = len(out)
				at[key] = i
				out = append(out, KnownVisitor{Visitor: r.Visitor, Employer: r.Employer, Kind: r.Kind})
			}
			out[i].Times++
			out[i].Last = v.visitView(m.visitAt(r, always64), b.Now())
			out[i].Person = cmp.Or(r.Person, out[i].Person, m.personNamed(r.Visitor))
		}
		slices.SortStableFunc(out, func(a, b KnownVisitor) int { return cmp.Or(b.Times-a.Times, strings.Compare(a.Visitor, b.Visitor)) })
		return nil
	})
}

// EraseVisit makes unreadable for good who came in a visit.
func (b *Book) EraseVisit(ctx context.Context, actor Actor, id string) (Receipt, error) {
	receipt, err := b.write(ctx, actor, func(s *session) error {
		old, ok, err := s.tx.EntryByID(id)
		if err != nil {
			return err
		}
		if !ok || old.Kind != kindVisit {
			return &NotFound{"visit", id}
		}
		if err := actor.may(Erase, old.Site); err != nil {
			return err
		}
		v, ok := s.m.visit(old.Site, id)
		if !ok || v.Visitor == "" {
			return invalid("visit", id, "was erased or taken back already", "a visit that still tells who came")
		}
		if v.last() == string(Arrived) {
			return invalid("visit", id, "goes on", "put down first that the visitor is gone")
		}
		return s.eraseVisit(old, v)
	})
	if err != nil {
		return Receipt{}, err
	}
	return receipt, b.afterErasure(ctx)
}

func (s *session) eraseVisit(old store.Entry, v visitNow) error {
	if err := s.add(draft{site: old.Site, body: &erasureBody{Visit: old.ID}}); err != nil {
		return err
	}
	size, err := s.tx.Size()
	if err != nil {
		return err
	}
	seqs := []int64{old.Seq}
	for _, step := range s.m.visitSteps.get(old.ID) {
		seqs = append(seqs, step.Seq)
	}
	for _, seq := range seqs {
		veils, err := s.tx.Veils(seq)
		if err != nil {
			return err
		}
		left := slices.DeleteFunc(veils[seq], func(x store.Veil) bool { return x.Erased })
		if err := s.tx.EraseVeils(left); err != nil {
			return err
		}
	}
	return s.tx.BlankVisit(old.Seq, size-1)
}
