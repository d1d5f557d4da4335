package book

import "lodebook/models/store"

// remedyModel is the part of the model about incidents, remedies and what is out of service.
type remedyModel struct {
	incidents shelf[string, []store.IncidentRow] // by site
	reports   shelf[siteNumber, []store.ReportRow]
	remedies  shelf[string, []store.RemedyRow] // by site
	steps     shelf[siteNumber, []store.RemedyStepRow]
	outages   shelf[string, []store.OutageRow] // by site
	returns   shelf[string, []store.ReturnRow] // by site
}

func newRemedyModel(own *owner) remedyModel {
	return remedyModel{
		newShelf[string, []store.IncidentRow](own), newShelf[siteNumber, []store.ReportRow](own), newShelf[string, []store.RemedyRow](own),
		newShelf[siteNumber, []store.RemedyStepRow](own), newShelf[string, []store.OutageRow](own), newShelf[string, []store.ReturnRow](own),
	}
}

func (r remedyModel) fork(own *owner) remedyModel {
	return remedyModel{r.incidents.fork(own), r.reports.fork(own), r.remedies.fork(own), r.steps.fork(own), r.outages.fork(own), r.returns.fork(own)}
}

func (r *remedyModel) takeRemedies(d store.Delta) {
	for _, x := range d.Incidents {
		put(&r.incidents, x.Site, x, func(x store.IncidentRow) int64 { return x.Seq }, always)
	}
	for _, x := range d.Reports {
		put(&r.reports, siteNumber{x.Site, x.Incident}, x, func(x store.ReportRow) int64 { return x.Seq }, always)
	}
	for _, x := range d.Remedies {
		put(&r.remedies, x.Site, x, func(x store.RemedyRow) int64 { return x.Seq }, always)
	}
	for _, x := range d.RemedySteps {
		put(&r.steps, siteNumber{x.Site, x.Remedy}, x, func(x store.RemedyStepRow) int64 { return x.Seq }, always)
	}
	for _, x := range d.Outages {
		put(&r.outages, x.Site, x, func(x store.OutageRow) int64 { return x.Seq }, always)
	}
	for _, x := range d.Returns {
		put(&r.returns, x.Site, x, func(x store.ReturnRow) int64 { return x.Seq }, always)
	}
}

// shelveRemedies puts the rows of a snapshot up.
func (r *remedyModel) shelveRemedies(d *store.Delta) {
	shelve(&r.incidents, d.Incidents, func(x *store.IncidentRow) string { return x.Site })
	shelve(&r.reports, d.Reports, func(x *store.ReportRow) siteNumber { return siteNumber{x.Site, x.Incident} })
	shelve(&r.remedies, d.Remedies, func(x *store.RemedyRow) string { return x.Site })
	shelve(&r.steps, d.RemedySteps, func(x *store.RemedyStepRow) siteNumber { return siteNumber{x.Site, x.Remedy} })
	shelve(&r.outages, d.Outages, func(x *store.OutageRow) string { return x.Site })
	shelve(&r.returns, d.Returns, func(x *store.ReturnRow) string { return x.Site })
}

// listRemedies adds the rows to those of a snapshot.
func (r *remedyModel) listRemedies(d *store.Delta) {
	d.Incidents, d.Reports, d.Remedies = listed(r.incidents), listed(r.reports), listed(r.remedies)
	d.RemedySteps, d.Outages, d.Returns = listed(r.steps), listed(r.outages), listed(r.returns)
}
