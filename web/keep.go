package web

import (
	"strings"

	"lodebook/models/book"
	"lodebook/models/program"
)

// factFields are the declared facts of people or of a fixture kind as fields of a form.
func factFields(f *Form, facts []program.Fact) []field {
	var out []field
	for _, x := range facts {
		name, label := "fact-"+x.Code, orCode(x.Label, strings.ReplaceAll(x.Code, "_", " "))
		label = upperFirst(label)
		switch x.Type {
		case program.FactYesNo:
			out = append(out, f.Choice(name, label, f.said(name, []option{{Value: "", Words: "Not on record"}, {Value: "yes", Words: "Yes"}, {Value: "no", Words: "No"}})))
		case program.FactChoice:
			options := []option{{Value: "", Words: "Not on record"}}
			for _, c := range x.Choices {
				options = append(options, option{Value: c, Words: c})
			}
			out = append(out, f.Choice(name, label, f.said(name, options)))
		case program.FactNumber:
			out = append(out, f.Number(name, label, x.Unit))
		case program.FactDay:
			out = append(out, f.Date(name, label))
		default:
			out = append(out, f.Text(name, label))
		}
	}
	return out
}

// said leaves the empty choice out where something is on record: what is empty is not said, and would
// take nothing off.
func (f *Form) said(name string, options []option) []option {
	if f.Get("known") != "" && f.Get(name) != "" {
		return options[1:]
	}
	return options
}

func factValues(f *Form, facts []program.Fact) map[string]string {
	out := map[string]string{}
	for _, x := range facts {
		out[x.Code] = f.Get("fact-" + x.Code)
	}
	return out
}

// renameFacts puts the faults of facts at their fields.
func renameFacts(f *Form, facts []program.Fact) {
	for _, x := range facts {
		f.Rename(x.Code, "fact-"+x.Code)
	}
}

func codesAsOptions[T any](none string, list []T, code, name func(T) string) []option {
	out := []option{{Value: "", Words: none}}
	for _, x := range list {
		out = append(out, option{Value: code(x), Words: orCode(name(x), code(x))})
	}
	return out
}

func keepPersonForm(v *visit, f *Form) *formLeaf {
	p := v.site.Program
	leaf := &formLeaf{page: page{Title: "Person", Section: secPeople}, Head: "Add a person", Action: v.url("keep-person"), Form: f, Button: "Keep"}
	leaf.Say = "Who they are, when they joined, and what level and crew they shall have. What stays empty is not said."
	levels := codesAsOptions("Not on record", p.Levels, func(l program.Level) string { return l.Code }, func(l program.Level) string { return l.Name })
	crews := codesAsOptions("Not on record", p.Crews, func(c program.Crew) string { return c.Code }, func(c program.Crew) string { return c.Name })
	leaf.Fields = []field{
		f.Text("name", "Name").Need(),
		f.Choice("level", "Assigned level", f.said("level", levels)),
		f.Choice("crew", "Crew", f.said("crew", crews)),
		f.Date("joined", "Joined"),
		f.Date("left", "Left").Help("The last day, included; empty while they are on staff"),
		f.Text("email", "E-mail"),
		f.Text("badge", "Badge"),
	}
	if f.Get("known") != "" {
		leaf.Head = "Change " + f.Get("name")
		leaf.Say = "Only what differs is written. A changed level, crew or other fact holds from the day below; the days before it stay as they were."
		leaf.Hidden = []hidden{{"known", "1"}, {"code", f.Get("code")}}
		leaf.Fields = append([]field{f.Date("from", "Changed facts hold from")}, leaf.Fields...)
	} else {
		leaf.Fields = append([]field{f.Text("code", "Code").Need().Help("Short and never used again for somebody else")}, leaf.Fields...)
	}
	leaf.Fields = append(leaf.Fields, factFields(f, p.PersonFacts)...)
	return leaf
}

func keepPersonPage(v *visit) error {
	f := v.asked()
	if code := f.Get("code"); code != "" {
		x, err := v.b.Person(v.ctx(), v.actor, v.site.Code, code, nil)
		if err != nil {
			return err
		}
		f.Set("known", "1").Set("name", x.Name).Set("level", x.Level).Set("crew", x.Crew).Set("email", x.Email).Set("badge", x.Badge).Set("from", v.today().String())
		for _, s := range x.Stints {
			f.Set("joined", shortISO(s.First)).Set("left", shortISO(s.Last))
		}
		v.presentFacts(f, x)
	}
	return v.showForm(keepPersonForm(v, f))
}

// presentFacts fills in the declared facts as they stand today.
func (v *visit) presentFacts(f *Form, x book.SubjectView) {
	for i := len(x.Facts) - 1; i >= 0; i-- {
		fact := x.Facts[i]
		if fact.Ended || fact.From > v.today() || fact.Value == "not on record" {
			continue
		}
		value := fact.Value
		for _, d := range append(v.site.Program.FactsOf(program.AsksFixture), v.site.Program.PersonFacts...) {
			if d.Code == fact.Code && d.Type == program.FactNumber {
				value, _, _ = strings.Cut(value, " ")
			}
		}
		f.Set("fact-"+fact.Code, value)
	}
}

func keepPerson(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	facts := v.site.Program.PersonFacts
	r, err := v.b.KeepPerson(v.ctx(), v.actor, v.site.Code, book.PersonForm{
		Code: f.Get("code"), Name: f.Get("name"), Email: f.Get("email"), Badge: f.Get("badge"), Level: f.Get("level"), Crew: f.Get("crew"),
		Joined: f.Get("joined"), Left: f.Get("left"), From: f.Get("from"), Facts: factValues(f, facts),
	}, book.Correction{})
	if f.Take(err) {
		renameFacts(f, facts)
		return v.showForm(keepPersonForm(v, f))
	}
	if err != nil {
		return err
	}
	if r.ID() == "" {
		return v.kept(v.url("people", f.Get("code")), "Nothing was new, so nothing was written.", "")
	}
	return v.kept(v.url("people", f.Get("code")), "Kept: "+f.Get("name")+".", r.ID())
}

func eraseForm(v *visit, f *Form) *formLeaf {
	p := &formLeaf{page: page{Title: "Erase a person", Section: secPeople}, Head: "Erase " + v.subjectName("person:"+f.Get("person")), Action: v.url("erase"), Form: f, Button: "Erase for good", Risk: true, Hidden: []hidden{{"person", f.Get("person")}}}
	p.Say = "The name, address, badge and every text about this person become unreadable for good, in every entry. What was done and when stays, under the code alone, and every hash still verifies. Of incidents that name them by code, all texts go, and those of their remedies."
	p.Cautions = []string{"It cannot be taken back. Copies of the book that were made before still hold the name: destroy them too."}
	p.Fields = []field{f.Text("again", "Write the code again: "+f.Get("person")).Need()}
	return p
}

func erasePage(v *visit) error { return v.showForm(eraseForm(v, v.asked())) }

func erase(v *visit) error {
	f, err := v.form()
	if err != nil {
		return err
	}
	if f.Get("again") != f.Get("person") {
		f.Loose("again", "does not match the code "+f.Get("person"))
		return v.showForm(eraseForm(v, f))
	}
	_, err = v.b.ErasePerson(v.ctx(), v.actor, f.Get("person"))
	if f.Take(err) {
		f.Rename("person", "again")
		return v.showForm(eraseForm(v, f))
	}
	if err != nil {
		return err
	}
	return v.kept(v.url("people", f.Get("person")), "Erased.", "")
}
