package web

import (
	"lodebook/models/book"
	"lodebook/models/program"
)

// rightFields are what a right is made of, but for whose it is.
func (v *visit) rightFields(f *Form) []field {
	zones := make([]option, 0, len(v.site.Program.Zones))
	for _, z := range v.site.Program.Zones {
		if z.Restricted {
			zones = append(zones, option{Value: z.Code, Words: zoneName(z)})
		}
	}
	return []field{
		f.Choice("zone", "Which zone", zones).Need(),
		f.Text("from", "From").Need().Help("A day, or a day and time such as 2026-03-02 14:30"),
		f.Text("to", "To").Help("The last day, or a day and time; empty: until it is withdrawn"),
		f.Long("because", "Why"),
	}
}

func rightOf(f *Form) book.RightForm {
	return book.RightForm{ID: f.Get("id"), Person: f.Get("person"), Zone: f.Get("zone"), From: f.Get("from"), To: f.Get("to"), Reason: f.Get("because")}
}

func grantForm(v *visit, f *Form) (*formLeaf, error) {
	f.Default("from", v.today().String())
	p := &formLeaf{page: page{Title: "Grant a right", Section: secZones}, Head: "Grant a right", Action: v.url("grant"), Form: f, Button: "Grant it"}
	p.Say = "It lets a person into one zone and no other, and only while all that guards the zone stands good for them. It ends when they leave."
	id, err := v.formID(f)
	p.Hidden = []hidden{id}
	p.Fields = v.rightFields(f)
	p.Cautions = []string{"A right replaces no screening, training or judgement. Local rules decide."}
	p.about(v, f, "person", "Whom")
	return p, err
}

func grantPage(v *visit) error {
	if v.unchosen("person") {
		return v.chooseSubject(&chooseLeaf{page: page{Title: "Grant a right", Section: secZones}, Head: "Grant a right", Say: "To whom?"}, "person", program.AsksPerson)
	}
	return v.showGrant(v.asked())
}

func (v *visit) showGrant(f *Form) error {
	p, err := grantForm(v, f)
	if err != nil {
		return err
	}
	return v.showForm(p)
}

func grant(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.Grant(v.ctx(), v.actor, v.site.Code, rightOf(f), book.Correction{})
	if f.Take(err) {
		return v.showGrant(f)
	}
	if err != nil {
		return err
	}
	return v.kept(v.backTo("person:"+f.Get("person")), "Kept: the right.", r.ID())
}

func endRightForm(v *visit, f *Form) *formLeaf {
	p := &formLeaf{page: page{Title: "Withdraw a right", Section: secZones}, Head: "Withdraw a right", Action: v.url("end-right"), Form: f, Button: "Withdraw it", Risk: true}
	p.Say = "It ends at the moment that you name. The doors do not know of it yet: hand the list for the doors to who runs them."
	p.Hidden = []hidden{{"entry", f.Get("entry")}, {"person", f.Get("person")}, {"zone", f.Get("zone")}}
	if f.Get("person") != "" {
		p.Head += ": " + v.subjectName("person:"+f.Get("person")) + ", zone " + f.Get("zone")
	}
	p.Fields = []field{
		f.Text("at", "From when").Help("A day and time, or a day with the end of which it ends; empty: now"),
		f.Long("reason", "Why").Need(),
	}
	return p
}

func endRightPage(v *visit) error { return v.showForm(endRightForm(v, v.asked())) }

func endRight(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	r, err := v.b.EndRight(v.ctx(), v.actor, f.Get("entry"), f.Get("at"), f.Get("reason"))
	if f.Take(err) {
		return v.showForm(endRightForm(v, f))
	}
	if err != nil {
		return err
	}
	return v.kept(v.backTo("person:"+f.Get("person")), "The right is withdrawn.", r.ID())
}
