package main

import (
	"fmt"
	"time"

	"lodebook/models/book"
	"lodebook/models/program"
)

// demoIncidents does what follows when something goes wrong: it is reported, also without a name, a remedy is made
// and done, and something is taken out of service.
func demoIncidents(a *app, b *book.Book, site string, by map[book.Role]book.Actor) error {
	officer, member, facilities := by[book.SafetyOfficer], by[book.Member], by[book.Facilities]
	ago := func(hours int) string { return b.Now().Add(-time.Duration(hours) * time.Hour).Format(time.RFC3339) }
	for _, x := range []struct {
		who  book.Actor
		form book.IncidentForm
	}{
		{member, book.IncidentForm{Kind: "projectile", Zone: "IV", At: ago(75), Severity: "high", What: "A floor polisher was rolled to the door of the seaward magnet and pulled out of the cleaner's hands. It struck the gantry; nobody stood between.", Who: "The evening cleaner, the technologist on duty", Action: "The room was cleared and locked, and the magnet was looked at before the next day."}},
		{member, book.IncidentForm{Kind: "near-miss", Zone: "III", At: ago(52), Severity: "low", Anonymous: true, What: "The door from the loading bay stood wedged open with a box for most of the morning."}},
	} {
		if _, err := b.ReportIncident(a.ctx, x.who, site, x.form); err != nil {
			return fmt.Errorf("the demo's incident: %w", err)
		}
	}
	if _, err := b.MarkReported(a.ctx, officer, site, 1, book.IncidentReportForm{Report: "NETWORK", Day: b.Now().AddDate(0, 0, -1).Format(time.DateOnly), Reference: "letter of that day"}); err != nil {
		return fmt.Errorf("the demo's report: %w", err)
	}
	for _, f := range []book.RemedyForm{
		{Incident: "1", Severity: "high", Owner: facilities.Person, What: "Keep the polisher in the store outside Zone III, behind a lock of its own, and mark it."},
		{Incident: "2", Severity: "low", Owner: officer.Person, What: "Fit a closer and an alarm to the loading bay door."},
	} {
		if _, err := b.KeepRemedy(a.ctx, officer, site, f); err != nil {
			return fmt.Errorf("the demo's remedy: %w", err)
		}
	}
	if err := demoGapRemedy(a, b, site, officer, facilities); err != nil {
		return err
	}
	if _, err := b.RemedyDone(a.ctx, facilities, site, 1, book.RemedyDoneForm{Day: b.Now().Format(time.DateOnly), Note: "The store has a new lock; the key is with the porter."}); err != nil {
		return fmt.Errorf("the demo's remedy: %w", err)
	}
	_, err := b.TakeOut(a.ctx, facilities, site, book.OutageForm{Subject: "fixture:VENT-QUAY", Because: "The flap of the outlet hangs loose over the path; the path is closed."})
	return err
}

// demoGapRemedy makes a remedy for the gap of a fixture.
func demoGapRemedy(a *app, b *book.Book, site string, officer, owner book.Actor) error {
	st, err := b.Short(a.ctx, officer, site, nil)
	if err != nil {
		return err
	}
	for _, r := range st.Gaps() {
		if r.Subject.Asks == program.AsksFixture {
			_, err := b.KeepRemedy(a.ctx, officer, site, book.RemedyForm{Item: r.Item, Subject: "fixture:" + r.Subject.Code, Severity: "medium", Owner: owner.Person, What: "Have the firm that keeps it look at it this month, and put what it finds on record."})
			return err
		}
	}
	return nil
}
