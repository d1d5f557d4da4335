package book

import (
	"context"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// deputySuffix follows the code of a post in the kind and code of a record that appoints its deputy, as in
// appointment/MRSO/deputy.
const deputySuffix = "/deputy"

// AppointForm appoints a person to a post, or as its deputy, as typed: From and Until are days, both included; without
// Until it holds until it is ended.
type AppointForm struct {
	ID, Post, Person, From, Until string
	Deputy                        bool
}

func (f AppointForm) record() RecordForm {
	what := "appointment/" + f.Post
	if f.Deputy {
		what += deputySuffix
	}
	return RecordForm{ID: f.ID, Record: what, Subject: "person:" + f.Person, On: f.From, Until: f.Until}
}

// Appoint puts an appointment on record. Nobody appoints themselves.
func (b *Book) Appoint(ctx context.Context, actor Actor, site string, f AppointForm) (Receipt, error) {
	return b.Record(ctx, actor, site, f.record(), Correction{})
}

// EndAppointment says through which day an appointment holds, in the place of the entry that did not.
func (b *Book) EndAppointment(ctx context.Context, actor Actor, id, until string) (Receipt, error) {
	x, err := b.Correctable(ctx, actor, id)
	if err != nil {
		return Receipt{}, err
	}
	if x.Kind != kindRecord || until == "" {
		return Receipt{}, invalid("until", until, "is empty", "the last day on which the appointment holds")
	}
	e, err := b.Entry(ctx, actor, id)
	if err != nil {
		return Receipt{}, err
	}
	f := RecordForm{Record: x.Values["record"], Subject: x.Values["subject"], On: x.Values["on"], Until: until, By: x.Values["by"], Note: x.Values["note"]}
	return b.Record(ctx, actor, e.Site, f, Correction{Supersedes: id, Reason: "other", ReasonText: "The appointment was ended."})
}

// HolderLine is a run of days on which somebody holds a post or is its deputy. Last is nil where no end is known.
type HolderLine struct {
	Person, Name, Entry string
	First               civil.Day
	Last                *civil.Day
	Deputy              bool
}

// Holders tells who held a post when, and who was its deputy: the holders first, each by code and then in order of days.
func (b *Book) Holders(ctx context.Context, actor Actor, site, post string) ([]HolderLine, error) {
	if err := actor.may(SeeSite, site); err != nil {
		return nil, err
	}
	var out []HolderLine
	return out, b.read(ctx, func(m *model) error {
		if m.site(site) == nil || !m.hasSubject(site, subjectBody{string(program.AsksPost), post}) {
			return &NotFound{"post", post}
		}
		g, err := m.engine.Guard(site, always64)
		if err != nil {
			return err
		}
		for _, t := range g.Tenures(post) {
			l := HolderLine{t.Person, m.subjectWords(site, subjectBody{"person", t.Person}), t.Entry, t.First, nil, t.Deputy}
			if t.Last < civil.LastDay {
				l.Last = dayPtr(t.Last)
			}
			out = append(out, l)
		}
		return nil
	})
}
