package web

import (
	"strings"

	"lodebook/models/book"
	"lodebook/models/program"
)

// What a screening can come to.
const (
	cleared    = "cleared"
	restricted = "restricted"
	notCleared = "not"
)

func screeningForm(v *visit, f *Form) (*formLeaf, error) {
	f.Default("on", v.today().String())
	p := &formLeaf{page: page{Title: "Screening", Section: secPeople}, Head: "Screening", Action: v.url("screening"), Form: f, Button: "Keep this outcome"}
	p.Say = "Only the outcome is kept, and until when it is good."
	p.Cautions = []string{"No reason and nothing medical belongs here, in no field. Reasons stay where they were told, with who screened."}
	id, err := v.formID(f)
	if err != nil {
		return nil, err
	}
	p.Hidden = []hidden{id}
	var zones []tick
	for _, z := range v.site.Program.Zones {
		if z.Restricted {
			zones = append(zones, tick{Value: z.Code, Name: zoneName(z)})
		}
	}
	p.Fields = []field{
		f.Choice("record", "Kind of screening", choose(v.whats(program.AsksPerson, "screening"))).Need(),
		f.Date("on", "Day").Need().UpTo(v.today().String()),
		f.Picks("outcome", "Outcome", []option{{Value: cleared, Words: "Cleared"}, {Value: restricted, Words: "With a restriction"}, {Value: notCleared, Words: "Not cleared", Bad: true}}).Need(),
		f.Ticks("limit", "With a restriction: the zones that it still opens", zones),
		f.Date("until", "Good until").Help("Only where it is sooner than the usual span"),
		f.Text("by", "Screened by"),
	}
	p.about(v, f, "person", "Who was screened")
	p.After = "A clearance is a record and no permission to walk in: everybody is screened at the door, each time."
	return p, nil
}

// zoneName is a zone as a person reads it; a name that begins with the zone's code says it all.
func zoneName(z program.Zone) string {
	if z.Name == "" || z.Name == z.Code {
		return "Zone " + z.Code
	}
	return z.Name
}

func screeningPage(v *visit) error {
	if v.unchosen("person") {
		return v.chooseSubject(&chooseLeaf{page: page{Title: "Screening", Section: secPeople}, Head: "Screening", Say: "Who was screened?"}, "person", program.AsksPerson)
	}
	p, err := screeningForm(v, v.asked())
	if err != nil {
		return err
	}
	return v.showForm(p)
}

func recordScreening(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	form := book.RecordForm{ID: f.Get("id"), Record: f.Get("record"), Subject: "person:" + f.Get("person"), On: f.Get("on"), Until: f.Get("until"), By: f.Get("by"), Result: book.Pass}
	switch f.Get("outcome") {
	case cleared:
	case restricted:
		form.Limit = strings.Join(f.All("limit"), " ")
		if form.Limit == "" {
			f.Loose("limit", "tick the zones that the clearance still opens, or choose another outcome")
		}
	case notCleared:
		form.Result = book.Fail
	default:
		f.Loose("outcome", "choose what the screening came to")
	}
	var r book.Receipt
	if len(f.Faults) == 0 {
		r, err = v.b.Record(v.ctx(), v.actor, v.site.Code, form, book.Correction{})
		f.Take(err)
	}
	if len(f.Faults) > 0 {
		p, err := screeningForm(v, f.Rename("subject", "person"))
		if err != nil {
			return err
		}
		return v.showForm(p)
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("people", f.Get("person")), "Kept: the outcome of the screening.", r.ID())
}
