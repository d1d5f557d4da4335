package web

import "lodebook/models/book"

type runLine struct{ Job, Site, Due, Started, Outcome, Message string }

type jobsLeaf struct {
	page
	Say  string
	Next []runLine
	Runs []runLine
}

var jobsSheet = leafOf[jobsLeaf]("jobs")

const runsShown = 60

// jobsPage shows what the scheduled jobs did and when each runs next.
func jobsPage(v *visit) error {
	runs, err := v.b.Runs(v.ctx(), v.actor, runsShown)
	if err != nil {
		return err
	}
	p := &jobsLeaf{page: page{Title: "Jobs", Section: secJobs}}
	if v.o.Jobs != nil {
		next, err := v.o.Jobs(v.ctx())
		if err != nil {
			return err
		}
		for _, n := range next {
			if v.actor.SeesSite(n.Site) {
				p.Next = append(p.Next, runLine{Job: upperFirst(n.Name), Site: n.Site, Due: n.Next.Format("Mon 2 Jan, 15:04"), Message: n.About})
			}
		}
	}
	failed := 0
	for _, r := range runs {
		p.Runs = append(p.Runs, v.runLine(r))
		if r.Outcome == "failed" {
			failed++
		}
	}
	p.Say = "Each morning, by the clocks of each site, the book is evaluated and flags are raised and cleared. A run that was missed is caught up once."
	if failed > 0 {
		p.Say = upperFirst(count(failed, "run failed", "runs failed")) + " of those below. " + p.Say
	}
	return jobsSheet.show(v, 200, p)
}

func (v *visit) runLine(r book.RunView) runLine {
	zone, err := v.b.Zone(v.ctx(), r.Site)
	if err != nil {
		zone = nil // the moment is then shown in UTC
	}
	today := v.today()
	if today == 0 {
		today, _ = v.b.Today(v.ctx(), r.Site)
	}
	return runLine{Job: upperFirst(r.Job), Site: r.Site, Due: moment(r.Due, zone, today), Started: moment(r.Started, zone, today), Outcome: r.Outcome, Message: r.Message}
}
