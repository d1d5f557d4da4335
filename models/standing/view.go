package standing

import (
	"cmp"
	"fmt"
	"slices"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// view is one site as known at one moment. It serves one call and is not shared.
type view struct {
	e       *Engine
	site    *site
	k       int64
	reigns  []reign
	answers map[*program.Selector]*answers
	ladders map[int32]ladder // by number of the subject
	board   *board           // of a writer: the one that it keeps
	// beneath is the same view without held levels: those are derived in it, so that a held level
	// can never hang on itself. In the view beneath it is nil.
	beneath *view

	*scratch
}

// scratch is what a view writes into while it judges.
type scratch struct {
	obligation obligation // see verdict
	deeds      []deed     // see gather
	turnDays   turns      // see segments
	due        civil.Day  // see walk
	dawns      map[civil.Day]time.Time
	days       []civil.Day // what the days of standings point into
}

func (e *Engine) view(code string, k int64) (*view, error) {
	s := e.site(code)
	if s == nil || len(s.editions) == 0 {
		return nil, fmt.Errorf("site %q is not in the book", code)
	}
	return e.viewOf(s, k), nil
}

func (e *Engine) viewOf(s *site, k int64) *view {
	v := e.newView(s, k, s.reigns(k))
	v.beneath = e.newView(s, k, v.reigns)
	return v
}

func (e *Engine) newView(s *site, k int64, reigns []reign) *view {
	return &view{e: e, site: s, k: k, reigns: reigns, answers: map[*program.Selector]*answers{}, ladders: map[int32]ladder{}, scratch: &scratch{}}
}

// day gives a day that stays put, for a standing to point to.
func (v *view) day(d civil.Day) *civil.Day {
	if len(v.days) == cap(v.days) {
		v.days = make([]civil.Day, 0, 512)
	}
	v.days = append(v.days, d)
	return &v.days[len(v.days)-1]
}

// presence is a subject that exists at the site on a day. Since is the first day of the stint, or
// FirstDay where the subject has none.
type presence struct {
	*local
	since civil.Day
}

// Subjects lists the subjects of a kind that exist at the site on the day, as known at k, by code:
// people and fixtures whose stint covers it, others as the version of the day declares them.
func (e *Engine) Subjects(site string, asks program.Asks, on civil.Day, k int64) []Subject {
	v, err := e.view(site, k)
	if err != nil {
		return nil
	}
	var out []Subject
	for _, p := range v.present(asks, on) {
		out = append(out, p.subject)
	}
	return out
}

// SubjectCount is how many subjects Subjects lists.
func (e *Engine) SubjectCount(site string, asks program.Asks, on civil.Day, k int64) int {
	v, err := e.view(site, k)
	if err != nil {
		return 0
	}
	return len(v.here(asks, on))
}

func (v *view) present(asks program.Asks, on civil.Day) []presence {
	out := v.here(asks, on)
	slices.SortFunc(out, func(a, b presence) int { return cmp.Compare(a.subject.Code, b.subject.Code) })
	return out
}

// here are the subjects that exist on the day, in no order.
func (v *view) here(asks program.Asks, on civil.Day) []presence {
	var out []presence
	if hasStints(asks) {
		for _, no := range v.site.ofKind[asks] {
			if p, ok := v.presence(v.site.locals[no], on); ok {
				out = append(out, p)
			}
		}
	} else if ed := v.edition(on); ed != nil {
		for sub := range ed.declared {
			if sub.Asks == asks {
				out = append(out, presence{v.local(sub), civil.FirstDay})
			}
		}
	}
	return out
}

// only is the one subject, if it exists on the day.
func (v *view) only(sub Subject, on civil.Day) []presence {
	if p, ok := v.presence(v.local(sub), on); ok {
		return []presence{p}
	}
	return nil
}

// local is what the site has on record about a subject: nothing at all where it has no line.
func (v *view) local(sub Subject) *local {
	if no, ok := v.site.number[sub]; ok {
		return v.site.locals[no]
	}
	return &local{no: -1, person: -1, subject: sub, past: &past{}}
}

// past is what happened to the subject.
func (v *view) past(l *local) *past {
	if l.person >= 0 {
		return v.e.people.at(l.person)
	}
	return l.past
}

// presence tells whether the subject exists on the day.
func (v *view) presence(l *local, on civil.Day) (presence, bool) {
	if !hasStints(l.subject.Asks) {
		ed := v.edition(on)
		return presence{l, civil.FirstDay}, ed != nil && ed.declared[l.subject]
	}
	p, found := presence{local: l}, false
	for i := range l.stints {
		s := &l.stints[i]
		if !v.stands(l, i) || s.First != nil && *s.First > on || s.Last != nil && *s.Last < on {
			continue
		}
		first := civil.FirstDay
		if s.First != nil {
			first = *s.First
		}
		if !found || first > p.since {
			p.since = first
		}
		found = true
	}
	return p, found
}

// stands tells whether the stint is known and no later known one begins on the same day.
func (v *view) stands(l *local, i int) bool {
	s := &l.stints[i]
	if !s.KnownAt(v.k) {
		return false
	}
	for j := i + 1; j < len(l.stints); j++ {
		if later := &l.stints[j]; later.KnownAt(v.k) && sameDay(s.First, later.First) {
			return false
		}
	}
	return true
}

func sameDay(a, b *civil.Day) bool {
	if a == nil || b == nil {
		return a == b
	}
	return *a == *b
}

// hasStints tells the kinds that come and go by stints from those that a version declares.
func hasStints(asks program.Asks) bool {
	return asks == program.AsksPerson || asks == program.AsksFixture
}
