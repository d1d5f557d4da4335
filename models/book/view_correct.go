package book

import (
	"context"
	"strings"
	"time"

	"lodebook/models/store"
)

// Correctable is an entry as its form is filled in again: the values by field.
type Correctable struct {
	Kind, Summary string
	Values        map[string]string
	Timed         bool // it happened at a time of day and not just on a day
	Sheet         bool // a filled-in sheet: Values hold its fields as v-code, and its fixture
	NeedReason    bool
}

// Correctable gives the values of an entry that the actor may correct.
func (b *Book) Correctable(ctx context.Context, actor Actor, id string) (Correctable, error) {
	view, err := b.Entry(ctx, actor, id)
	if err != nil {
		return Correctable{}, err
	}
	if view.SupersededBy != "" {
		return Correctable{}, &Stale{id, view.SupersededBy}
	}
	if !view.MayCorrect {
		return Correctable{}, &Denied{Action: Correct, Role: actor.Role, Why: "this entry is not corrected from here"}
	}
	if onOwnPage(view.Kind) {
		return Correctable{}, &Denied{Action: Correct, Role: actor.Role, Why: "this entry is corrected from its own page"}
	}
	out := Correctable{Kind: view.Kind, Summary: view.Summary, NeedReason: view.NeedReason}
	err = b.withEntries(ctx, func(tx *store.Tx, m *model) error {
		e, _, err := tx.EntryByID(id)
		if err != nil {
			return err
		}
		_, bd, err := m.entryLine(tx, e)
		if err != nil {
			return err
		}
		out.Values = formValues(bd)
		if at := parseMoment(out.Values["on"], m.zone(e.Site)).time; at != nil {
			out.Timed, out.Values["on"] = true, clockWords(*at, m.zone(e.Site))
		}
		if r, ok := bd.(*recordBody); ok && len(r.Values) > 0 {
			out.Sheet = true
			out.Values["fixture"] = r.Subject.Code
			for k, f := range r.Values {
				out.Values["v-"+k] = f.show()
			}
		}
		return nil
	})
	return out, err
}

// clockWords is an instant as it is typed into a form: by the site's clocks, to the minute, and in
// full where that would lose something.
func clockWords(t time.Time, zone *time.Location) string {
	if t.Second() == 0 && t.Nanosecond() == 0 {
		return t.In(zone).Format("2006-01-02 15:04")
	}
	return t.Format(time.RFC3339)
}

// formValues gives a body's values by the names that its form has.
func formValues(bd body) map[string]string {
	key := func(s subjectBody) string { return s.Kind + ":" + s.Code }
	switch b := bd.(type) {
	case *recordBody:
		return map[string]string{"record": b.Record, "subject": key(b.Subject), "on": b.On, "result": b.Result, "until": dayOr(b.Until, ""), "limit": strings.Join(b.Limit, " "), "by": b.By.Value, "note": b.Note.Value}
	case *eventBody:
		return map[string]string{"event": b.Event, "subject": key(b.Subject), "on": b.On, "note": b.Note.Value}
	case *excusalBody:
		return map[string]string{"item": b.Item, "subject": key(b.Subject), "from": b.From.String(), "to": b.To.String(), "because": b.Because.Value, "opens": map[bool]string{true: "yes", false: "no"}[b.Opens]}
	case *pauseBody:
		return map[string]string{"subject": key(b.Subject), "from": b.From.String(), "to": dayOr(b.To, ""), "because": b.Because.Value}
	case *rightBody:
		return map[string]string{"person": b.Person, "zone": b.Zone, "from": b.From, "to": b.To, "because": b.Because.Value}
	case *dutyBody:
		return map[string]string{"person": b.Person, "from": b.From, "to": b.To, "duty": b.Duty}
	case *planBody:
		return map[string]string{"record": b.Record, "crew": b.Crew, "day": b.Day.String(), "at": b.At, "note": b.Note.Value}
	default:
		return map[string]string{}
	}
}
