package book

import (
	"cmp"
	"context"
	"slices"
	"strings"

	"github.com/google/uuid"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
	"lodebook/models/store"
)

// Attendee is somebody on staff today who may have taken part in what is about to be recorded.
type Attendee struct {
	Code, Name, Crew, CrewName, Level string
	Word                              standing.Word // the worst of what the record answers for them; empty: nothing is asked
	Due                               *civil.Day
	Away                              bool // a pause of theirs covers the day
}

// Attendees lists everybody on staff today by name, with where each stands with what the record
// (kind/code, or empty) answers.
func (b *Book) Attendees(ctx context.Context, actor Actor, site, record string) ([]Attendee, error) {
	var out []Attendee
	err := b.at(ctx, actor, site, nil, func(v *siteOn) error {
		worst, err := v.answeredBy(record)
		if err != nil {
			return err
		}
		for _, s := range v.m.engine.Subjects(v.Code, program.AsksPerson, v.on, v.k) {
			p := v.m.engine.Profile(v.Code, s, v.on, v.k)
			a := Attendee{Code: s.Code, Name: v.subjectName(s), Crew: p.Crew, CrewName: cmp.Or(named(v.Program.Crew(p.Crew)), p.Crew), Level: p.Level}
			a.Away = v.paused(s)
			if st, ok := worst[s]; ok {
				a.Word, a.Due = st.Word, st.Due
			}
			out = append(out, a)
		}
		return nil
	})
	slices.SortStableFunc(out, func(a, b Attendee) int {
		return cmp.Or(strings.Compare(strings.ToLower(a.Name), strings.ToLower(b.Name)), strings.Compare(a.Code, b.Code))
	})
	return out, err
}

// paused tells whether a pause of the subject covers the day.
func (v *siteOn) paused(s standing.Subject) bool {
	return slices.ContainsFunc(v.m.excusals.get(subjectBody{string(s.Asks), s.Code}.key(v.Code)), func(x store.ExcusalRow) bool {
		return x.Item == "" && x.Ended == 0 && x.From <= v.on && (x.To == nil || *x.To >= v.on)
	})
}

// answeredBy gives each person's worst standing of those that the record answers.
func (v *siteOn) answeredBy(record string) (map[standing.Subject]standing.Standing, error) {
	out := map[standing.Subject]standing.Standing{}
	for _, item := range v.Program.Items {
		if item.Asks != program.AsksPerson || !slices.Contains(item.Records, record) {
			continue
		}
		list, err := v.m.engine.Evaluate(v.Code, standing.Query{On: v.on, KnownAt: v.k, Item: item.Code})
		if err != nil {
			return nil, err
		}
		for _, s := range list {
			if old, ok := out[s.Subject]; !ok || Worse(s.Word, old.Word) {
				out[s.Subject] = s
			}
		}
	}
	return out, nil
}

// partID is the identifier of one subject's record of a form: the same form sent twice gives the same
// ones, and so writes once. Empty (a fresh one) for a form that has none.
func partID(form string, s subjectBody) string {
	ns, err := uuid.Parse(form)
	if err != nil {
		return ""
	}
	return uuid.NewSHA1(ns, []byte(s.Kind+":"+s.Code)).String()
}
