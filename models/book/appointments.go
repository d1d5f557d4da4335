package book

import "context"

// deputySuffix follows the code of a post in the kind and code of a record that appoints its deputy, as in
// appointment/MRSO/deputy.
const deputySuffix = "/deputy"

// AppointForm appoints a person to a post, or as its deputy, as typed: From and Until are days, both included; without
// Until it holds until it is ended.
type AppointForm struct {
	ID, Post, Person, From, Until string
	Deputy                        bool
}

func (f AppointForm) record() RecordForm {
	what := "appointment/" + f.Post
	if f.Deputy {
		what += deputySuffix
	}
	return RecordForm{ID: f.ID, Record: what, Subject: "person:" + f.Person, On: f.From, Until: f.Until}
}

// Appoint puts an appointment on record. Nobody appoints themselves.
func (b *Book) Appoint(ctx context.Context, actor Actor, site string, f AppointForm) (Receipt, error) {
	return b.Record(ctx, actor, site, f.record(), Correction{})
}

// EndAppointment says through which day an appointment holds, in the place of the entry that did not.
func (b *Book) EndAppointment(ctx context.Context, actor Actor, id, until string) (Receipt, error) {
	x, err := b.Correctable(ctx, actor, id)
	if err != nil {
		return Receipt{}, err
	}
	if x.Kind != kindRecord || until == "" {
		return Receipt{}, invalid("until", until, "is empty", "the last day on which the appointment holds")
	}
	e, err := b.Entry(ctx, actor, id)
	if err != nil {
		return Receipt{}, err
	}
	f := RecordForm{Record: x.Values["record"], Subject: x.Values["subject"], On: x.Values["on"], Until: until, By: x.Values["by"], Note: x.Values["note"]}
	return b.Record(ctx, actor, e.Site, f, Correction{Supersedes: id, Reason: "other", ReasonText: "The appointment was ended."})
}
