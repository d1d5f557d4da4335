package main

import (
	"fmt"
	"time"

	"lodebook/models/book"
)

// demoVisits has an engineer and a companion in the house, and a fitter who is expected.
func demoVisits(a *app, b *book.Book, site string, officer book.Actor) error {
	zone, err := b.Zone(a.ctx, site)
	if err != nil {
		return err
	}
	now := b.Now()
	moment := func(d time.Duration) string { return now.Add(d).In(zone).Format("2006-01-02 15:04") }
	engineer := book.VisitForm{Visitor: "Ragnhild Osterby", Employer: "Holmgarth Magnet Service", Kind: "vendor", Purpose: "Cold head of the landward magnet", Zones: []string{"III", "IV"}, Escort: officer.Person, Tool: "Torque wrench, titanium\nService laptop"}
	steps := []struct {
		form  book.VisitForm
		from  time.Duration
		to    time.Duration
		steps []book.VisitStep
	}{
		{engineer, -3 * time.Hour, time.Hour, []book.VisitStep{book.Arrived}},
		{book.VisitForm{Visitor: "Baldur Ennisfjord", Employer: "Nordhella Ventilation", Kind: "trade", Purpose: "Grille in the plant room", Zones: []string{"III"}, Escort: officer.Person}, time.Hour, 3 * time.Hour, nil},
		{book.VisitForm{Visitor: "Tove Almskog", Kind: "companion", Zones: []string{"II"}}, -time.Hour, time.Hour, []book.VisitStep{book.Arrived}},
	}
	for _, s := range steps {
		s.form.From, s.form.To = moment(s.from), moment(s.to)
		r, err := b.Announce(a.ctx, officer, site, s.form)
		if err != nil {
			return fmt.Errorf("the demo's visit of %s: %w", s.form.Visitor, err)
		}
		for _, step := range s.steps {
			f := book.StepForm{Visit: r.ID(), Step: step, At: moment(s.from), Screener: officer.Person, Outcome: book.Cleared}
			if _, err := b.StepVisit(a.ctx, officer, f); err != nil {
				return fmt.Errorf("the demo's visit of %s: %w", s.form.Visitor, err)
			}
		}
	}
	return nil
}
