package main

import (
	"iter"

	"lodebook/cmd/lodeload/network"
	"lodebook/models/book"
)

// bulkNetwork takes the tables of every site in by the bulk path, in one transaction.
func bulkNetwork(a *app, b *book.Book, n *network.Network, actor book.Actor, also func(*network.Site) error) error {
	var failed error
	_, err := b.Bulk(a.ctx, actor, func(yield func(book.BulkTable) bool) {
		for s := range n.Each() {
			for _, table := range network.Tables {
				if s.Rows(table) == 0 {
					continue
				}
				if !yield(book.BulkTable{Table: table, Site: s.Code, FileName: table + ".csv", Rows: forms(s, table)}) {
					return
				}
			}
			if failed = also(s); failed != nil {
				return
			}
		}
	})
	if failed != nil {
		return failed
	}
	return err
}

// forms are the rows of a table as the bulk path takes them.
func forms(s *network.Site, table string) iter.Seq[book.BulkRow] {
	switch table {
	case "people":
		return each(s.People, personForm)
	case "fixtures":
		return each(s.Fixtures, fixtureForm)
	case "records":
		return each(s.Records, recordForm)
	case "events":
		return each(s.Events, func(e *network.Event) book.BulkRow {
			return book.EventForm{Event: e.Code, Subject: e.Subject.String(), On: e.Day.String(), Note: e.Note}
		})
	case "excusals":
		return each(s.Excusals, func(x *network.Excusal) book.BulkRow {
			return book.ExcusalForm{Item: x.Item, Subject: x.Subject.String(), From: x.From.String(), To: x.To.String(), Reason: x.Reason, ApprovedBy: x.ApprovedBy, Opens: network.YesNo(x.Opens)}
		})
	}
	return each(s.Pauses, func(p *network.Pause) book.BulkRow {
		return book.PauseForm{Subject: p.Subject.String(), From: p.From.String(), To: network.DayText(p.To), Reason: p.Reason}
	})
}

func each[T any](rows []T, form func(*T) book.BulkRow) iter.Seq[book.BulkRow] {
	return func(yield func(book.BulkRow) bool) {
		for i := range rows {
			if !yield(form(&rows[i])) {
				return
			}
		}
	}
}

func personForm(p *network.Person) book.BulkRow {
	return book.PersonForm{
		Code: p.Code, Name: p.Name, Email: p.Email, Badge: p.Badge, Level: p.Level, Crew: p.Crew,
		Joined: network.DayText(p.Joined), Left: network.DayText(p.Left), From: network.DayText(p.From),
		Facts: map[string]string{"employer": p.Employer, "cryogen_work": p.Cryogen},
	}
}

func fixtureForm(f *network.Fixture) book.BulkRow {
	return book.FixtureForm{
		Code: f.Code, Kind: f.Kind, Name: f.Name, Zone: f.Zone, Since: network.DayText(f.Since), Until: network.DayText(f.Until), Facts: f.Facts,
	}
}

func recordForm(r *network.Record) book.BulkRow {
	return book.RecordForm{
		Record: r.What, Subject: r.Subject.String(), On: r.On(), Result: r.Result(), Until: network.DayText(r.Until), Limit: r.Limit, By: r.By, Note: r.Note,
	}
}
