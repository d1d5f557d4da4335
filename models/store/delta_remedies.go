package store

// codeRemedies is the part of a delta about incidents, remedies and what is out of service.
func (d *Delta) codeRemedies(c coder) {
	codeRows(c, &d.Incidents, codeIncident)
	codeRows(c, &d.Reports, codeReport)
	codeRows(c, &d.Remedies, codeRemedy)
	codeRows(c, &d.RemedySteps, codeRemedyStep)
	codeRows(c, &d.Outages, codeOutage)
	codeRows(c, &d.Returns, codeReturn)
}

func codeIncident(c coder, r *IncidentRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.number(&r.Number)
	c.shared(&r.Kind)
	c.shared(&r.Zone)
	c.shared(&r.Severity)
	c.moment(&r.At)
	c.flag(&r.Anonymous)
	c.shared(&r.Reporter)
	c.list(&r.People)
}

func codeReport(c coder, r *ReportRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.number(&r.Incident)
	c.shared(&r.Code)
	c.day(&r.Day)
}

func codeRemedy(c coder, r *RemedyRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.number(&r.Number)
	c.number(&r.Incident)
	c.own(&r.Record)
	c.shared(&r.Item)
	codeSubject(c, &r.Subject)
	c.shared(&r.Severity)
	c.shared(&r.Owner)
	c.shared(&r.Account)
	c.day(&r.Made)
	c.day(&r.Due)
	c.flag(&r.Confirm)
}

func codeRemedyStep(c coder, r *RemedyStepRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.number(&r.Remedy)
	c.shared(&r.Step)
	c.day(&r.Day)
	c.shared(&r.Account)
	c.shared(&r.DoneBy)
}

func codeOutage(c coder, r *OutageRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	codeSubject(c, &r.Subject)
	c.shared(&r.Cause)
	c.own(&r.Record)
	c.moment(&r.From)
	c.flag(&r.Another)
	c.shared(&r.Account)
}

func codeReturn(c coder, r *ReturnRow) {
	c.line(&r.Line)
	c.shared(&r.Site)
	c.list(&r.Outages)
	c.moment(&r.At)
}
