package book

import (
	"context"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// OverQuery asks how the standings of a site went from one day to another, both included. Nil KnownAt is
// all that is recorded.
type OverQuery struct {
	Site     string
	From, To civil.Day
	KnownAt  *time.Time
}

// Over gives the counts of each item and standing on every day of a period.
func (b *Book) Over(ctx context.Context, actor Actor, q OverQuery) (standing.SiteCourse, error) {
	var out standing.SiteCourse
	if err := actor.may(SeeSite, q.Site); err != nil {
		return out, err
	}
	if q.To < q.From {
		return out, invalid("to", q.To.String(), "is before the period begins", "a day from "+q.From.String()+" on")
	}
	err := b.known(ctx, q.Site, q.KnownAt, func(m *model, k int64) error {
		e := m.engine
		if k != always64 {
			e = e.AsKnownAt(k)
		}
		var err error
		out, err = e.CountsOver(q.Site, q.From, q.To)
		return err
	})
	return out, err
}

// HistoryQuery asks for all standings of one obligation. Subject is a code, or kind:code; nil KnownAt is all that
// is recorded.
type HistoryQuery struct {
	Site, Item, Subject string
	KnownAt             *time.Time
}

// History gives all standings of one obligation as spans of days, to whoever may see them: a member only their own.
func (b *Book) History(ctx context.Context, actor Actor, q HistoryQuery) ([]standing.Span, error) {
	own, err := b.mayRead(actor, q.Site)
	if err != nil {
		return nil, err
	}
	var out []standing.Span
	err = b.known(ctx, q.Site, q.KnownAt, func(m *model, k int64) error {
		subject, err := m.narrow(actor, own, StandingQuery{Site: q.Site, Subject: q.Subject})
		if err != nil {
			return err
		}
		if subject == nil {
			return invalid("subject", "", "is empty", "the code of a subject, or kind:code")
		}
		if !m.site(q.Site).declares(func(p *program.Program) bool { _, ok := p.Item(q.Item); return ok }) {
			return &NotFound{"item", q.Item}
		}
		out, err = m.engine.History(q.Site, q.Item, *subject, k)
		return err
	})
	return out, err
}

// known gives fn the model, if it has the site, and the sequence number that a moment comes down to.
func (b *Book) known(ctx context.Context, site string, at *time.Time, fn func(m *model, k int64) error) error {
	k, err := b.knownAt(ctx, at)
	if err != nil {
		return err
	}
	return b.read(ctx, func(m *model) error {
		if m.site(site) == nil {
			return &NotFound{"site", site}
		}
		return fn(m, k)
	})
}
