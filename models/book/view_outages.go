package book

import (
	"context"
	"fmt"
	"time"

	"lodebook/models/civil"
	"lodebook/models/standing"
	"lodebook/models/store"
)

// OutageLine is something that is out of service, and why.
type OutageLine struct {
	Subject standing.Subject
	Name    string
	From    time.Time
	Why     string
	Record  string // identifier of the failed record's entry, or empty
	Entry   string
	Another bool       // who recorded the failure may not sign it back
	Passed  *civil.Day // the last time since that the same sheet passed, which signs nothing back
	MaySign bool
}

// OutOfService lists what is out of service at a site now, in order of recording, to who sees the site or walks rounds.
func (b *Book) OutOfService(ctx context.Context, actor Actor, site string) ([]OutageLine, error) {
	if err := actor.may(FillSheet, site); err != nil {
		if err := actor.may(SeeSite, site); err != nil {
			return nil, err
		}
	}
	var out []OutageLine
	err := b.withEntries(ctx, func(tx *store.Tx, m *model) error {
		if m.site(site) == nil {
			return &NotFound{"site", site}
		}
		for _, r := range m.outOfService(site, b.Now()) {
			l, err := m.outageLine(tx, actor, r)
			if err != nil {
				return err
			}
			out = append(out, l)
		}
		return nil
	})
	return out, err
}

func (m *model) outageLine(tx *store.Tx, actor Actor, r store.OutageRow) (OutageLine, error) {
	s := subjectOf(r.Subject.Kind, r.Subject.Code)
	l := OutageLine{Subject: s, Name: m.inWords(r.Site).subjectName(s), From: r.From, Record: r.Record, Entry: r.ID, Another: r.Another}
	l.MaySign = actor.may(SignBack, r.Site) == nil && !(r.Another && m.isActor(actor, "", r.Account))
	bd, err := bodyAt(tx, r.Seq)
	if err != nil {
		return l, err
	}
	if x, ok := bd.(*outageBody); ok {
		l.Why = x.Because.String()
	}
	if r.Record == "" {
		return l, nil
	}
	e, ok, err := tx.EntryByID(r.Record)
	if err != nil || !ok {
		return l, err
	}
	was, err := decode(e, nil)
	if err != nil {
		return l, err
	}
	if x, ok := was.(*recordBody); ok {
		cause := subjectOf("fixture", r.Cause)
		l.Why = fmt.Sprintf("%s failed on %s", m.whatWords(r.Site, x.Record), m.onWords(r.Site, x.On))
		if s != cause {
			l.Why = m.inWords(r.Site).subjectName(cause) + ": " + l.Why
		}
		l.Passed, err = m.passedSince(tx, r, cause, x.Record)
	}
	return l, err
}

// passedSince is the last day on which the same record passed after an outage began.
func (m *model) passedSince(tx *store.Tx, r store.OutageRow, fixture standing.Subject, what string) (*civil.Day, error) {
	records, err := tx.RecordsAt(m.engine.Lines(r.Site, fixture))
	if err != nil {
		return nil, err
	}
	from := m.dayAt(r.Site, r.From)
	var last *civil.Day
	for _, x := range records {
		after := x.Day > from || x.Day == from && x.Seq > r.Seq
		of := x.Subject == subjectBody{string(fixture.Asks), fixture.Code}.key(r.Site)
		if of && x.What == what && x.Passed && x.Ended == 0 && after && (last == nil || *last < x.Day) {
			last = dayPtr(x.Day)
		}
	}
	return last, nil
}
