package book_test

import (
	"database/sql"
	"encoding/json"
	"fmt"
	"strings"
	"testing"

	"lodebook/models/book"
)

// whispered is a desk on which an incident and all that belongs to it stands, reported by a member.
func whispered(t *testing.T) (d *desk, member book.Actor, incident string) {
	d = manned(t)
	member = d.account("teis", book.Member, "P2")
	r, err := d.ReportIncident(t.Context(), member, site, incidentForm())
	d.ok(err)
	_, err = d.KeepRemedy(t.Context(), d.officer, site, book.RemedyForm{Incident: "1", Severity: "high", Owner: "olga", What: secretDoing})
	d.ok(err)
	_, err = d.RemedyDone(t.Context(), d.officer, site, 1, book.RemedyDoneForm{Day: "2026-03-02", Note: "the trolley is tethered"})
	d.ok(err)
	return d, member, r.ID()
}

// leaks tells which of the secret words stand in a text.
func leaks(text string) []string {
	var out []string
	for _, word := range []string{"trolley", "in green", "pulled out", "tether"} {
		if strings.Contains(text, word) {
			out = append(out, word)
		}
	}
	return out
}

func TestIncidentsAreKeptForOfficers(t *testing.T) {
	d, member, incident := whispered(t)
	ctx := t.Context()
	list, err := d.Entries(ctx, d.officer, book.EntryQuery{Site: site, Limit: 500})
	d.ok(err)
	actors := []book.Actor{d.op, member}
	for _, role := range []book.Role{book.Administrator, book.Facilities, book.Reader} {
		actors = append(actors, d.account(string(role), role, ""))
	}
	for _, a := range actors {
		if _, err := d.Incidents(ctx, a, site); !denied(err) {
			t.Errorf("%s lists incidents: %v", a.Role, err)
		}
		if _, err := d.Incident(ctx, a, site, 1); !denied(err) {
			t.Errorf("%s sees an incident: %v", a.Role, err)
		}
		seen, err := d.Entries(ctx, a, book.EntryQuery{Site: site, Limit: 500})
		if err == nil && len(seen) != len(list) {
			t.Errorf("%s sees %d entries of %d", a.Role, len(seen), len(list))
		}
		text := fmt.Sprintf("%+v", seen)
		for _, e := range list {
			v, err := d.Entry(ctx, a, e.ID)
			if err == nil {
				text += fmt.Sprintf("%+v %+v %+v", v, v.Old, v.New)
			}
		}
		remedies, err := d.Remedies(ctx, a, site, false)
		text += fmt.Sprintf("%+v", remedies)
		if x, err := d.Remedy(ctx, a, site, 1); err == nil {
			text += fmt.Sprintf("%+v", x)
		}
		if bad := leaks(text); len(bad) > 0 {
			t.Errorf("%s reads %v (%v)", a.Role, bad, err)
		}
		// Asking for what somebody wrote does not tell that they reported something.
		if a.Account != member.Account {
			seen, _ = d.Entries(ctx, a, book.EntryQuery{Site: site, Actor: member.Account, Limit: 500})
			if len(seen) != 0 {
				t.Errorf("%s finds out who reported: %+v", a.Role, seen)
			}
		}
	}
	if x, err := d.Entry(ctx, member, incident); err != nil || !x.Hidden || x.MayCorrect {
		t.Errorf("who reported it sees that it was received, and no more: %+v %v", x, err)
	}
	own, err := d.OwnIncidents(ctx, member, site)
	d.ok(err)
	if len(own) != 1 || own[0].Number != 1 {
		t.Errorf("%+v", own)
	}
	if _, err := d.Withdraw(ctx, member, incident, book.Correction{}); !denied(err) {
		t.Errorf("a member withdrew it: %v", err)
	}
	if x, err := d.Incident(ctx, d.officer, site, 1); err != nil || x.What != secretWhat || x.Reporter != "teis" || len(x.Remedies) != 1 {
		t.Errorf("the officer: %+v %v", x, err)
	}
}

// A form that is sent with an identifier which stands for an incident is refused, and shows nothing of it.
func TestConflictShowsNothingOfAnIncident(t *testing.T) {
	d, member, incident := whispered(t)
	for name, send := range map[string]func(book.Actor) error{
		"incident": func(a book.Actor) error {
			_, err := d.ReportIncident(t.Context(), a, site, book.IncidentForm{ID: incident, Kind: "burn", At: "2026-02-27 08:30", Severity: "low", What: "x"})
			return err
		},
		"nameless": func(a book.Actor) error {
			_, err := d.ReportIncident(t.Context(), a, site, book.IncidentForm{ID: incident, Kind: "burn", At: "2026-02-27 08:30", Severity: "low", What: "x", Anonymous: true})
			return err
		},
		"acknowledgement": func(a book.Actor) error {
			_, err := d.Record(t.Context(), a, site, book.RecordForm{ID: incident, Record: "acknowledgement/POL-ACCESS", Subject: "P2", On: "2026-03-01"}, book.Correction{})
			return err
		},
	} {
		err := send(member)
		if err == nil || len(leaks(err.Error())) > 0 || len(leaks(book.Classify(err).Sentence)) > 0 {
			t.Errorf("%s: %v", name, err)
		}
	}
}

// What withdraws or takes the place of an incident does not show it either.
func TestCorrectedIncidentsStayHidden(t *testing.T) {
	d, _, incident := whispered(t)
	ctx := t.Context()
	f := incidentForm()
	f.Severity = "medium"
	r, err := d.CorrectIncident(ctx, d.officer, site, 1, f, book.Correction{Reason: "other", ReasonText: "the trolley was light"})
	d.ok(err)
	w, err := d.Withdraw(ctx, d.officer, r.ID(), book.Correction{Reason: "other", ReasonText: "no trolley at all"})
	d.ok(err)
	reader := d.account("reader", book.Reader, "")
	for _, id := range []string{incident, r.ID(), w.ID()} {
		v, err := d.Entry(ctx, reader, id)
		d.ok(err)
		if text := fmt.Sprintf("%+v %+v %+v", v, v.Old, v.New); !v.Hidden || len(leaks(text)) > 0 {
			t.Errorf("%s: %s", v.Kind, text)
		}
	}
	if _, err := d.CorrectIncident(ctx, reader, site, 1, f, book.Correction{}); !denied(err) {
		t.Errorf("a reader corrected it: %v", err)
	}
}

// Whoever reports without a name leaves no account in any table.
func TestAnonymousLeavesNoAccount(t *testing.T) {
	d := manned(t)
	member := d.account("teis", book.Member, "P2")
	before := strings.Count(d.everyTable(), member.Account)
	f := incidentForm()
	f.Anonymous, f.ID = true, "01890a5d-ac96-774b-bcce-b302099a8057"
	r, err := d.ReportIncident(t.Context(), member, site, f)
	d.ok(err)
	if again, err := d.ReportIncident(t.Context(), member, site, f); err != nil || len(again.Unchanged) != 1 {
		t.Errorf("sent twice: %+v %v", again, err)
	}
	if after := strings.Count(d.everyTable(), member.Account); after != before {
		t.Errorf("the account stands %d times in the book, and %d times before", after, before)
	}
	e, err := d.Entry(t.Context(), d.officer, r.ID())
	d.ok(err)
	if e.ActorID != "anonymous" || strings.Contains(e.Canonical, member.Account) || strings.Contains(e.Canonical, "teis") || strings.Contains(e.Canonical, "operator") {
		t.Errorf("%s", e.Canonical)
	}
	if own, err := d.OwnIncidents(t.Context(), member, site); err != nil || len(own) != 0 {
		t.Errorf("it is shown to whoever wrote it: %+v %v", own, err)
	}
	if _, err := d.Withdraw(t.Context(), member, r.ID(), book.Correction{}); !denied(err) {
		t.Errorf("withdrawn by whoever wrote it: %v", err)
	}
	x, err := d.Incident(t.Context(), d.officer, site, 1)
	d.ok(err)
	if x.Reporter != "nobody named" || !x.Anonymous {
		t.Errorf("%+v", x)
	}
	// An officer corrects it; that it was reported without a name stays.
	f.ID, f.Severity, f.Anonymous = "", "low", false
	_, err = d.CorrectIncident(t.Context(), d.officer, site, 1, f, book.Correction{Reason: "other", ReasonText: "nobody was near"})
	d.ok(err)
	if x, err = d.Incident(t.Context(), d.officer, site, 1); err != nil || !x.Anonymous || x.Reporter != "nobody named" || x.Grave != "Low" {
		t.Errorf("%+v %v", x, err)
	}
}

// Erasing a person who is named in an incident makes the texts about it unreadable, and everything still verifies.
func TestErasingWhoIsNamedInAnIncident(t *testing.T) {
	d, _, incident := whispered(t)
	ctx := t.Context()
	_, err := d.ReportIncident(ctx, d.officer, site, book.IncidentForm{Kind: "quench", At: "2026-02-20 10:00", Severity: "low", What: "another matter"})
	d.ok(err)
	_, err = d.KeepPerson(ctx, d.officer, site, book.PersonForm{Code: "P1", Left: "2026-03-01"}, book.Correction{})
	d.ok(err)
	_, err = d.ErasePerson(ctx, d.officer, "P1")
	d.ok(err)
	x, err := d.Incident(ctx, d.officer, site, 1)
	d.ok(err)
	v, err := d.Remedy(ctx, d.officer, site, 1)
	d.ok(err)
	e, err := d.Entry(ctx, d.officer, incident)
	d.ok(err)
	if bad := leaks(fmt.Sprintf("%+v %+v %+v", x.What+x.Who+x.Action, v.What, e.Fields)); len(bad) > 0 {
		t.Errorf("%v is readable: %+v", bad, x)
	}
	if x.Number != 1 || x.Kind != "projectile" || x.What != "(erased)" || v.What != "(erased)" {
		t.Errorf("%+v %+v", x, v)
	}
	if bad := leaks(string(d.bytesOf())); len(bad) > 0 {
		t.Errorf("%v is left in the file", bad)
	}
	if other, err := d.Incident(ctx, d.officer, site, 2); err != nil || other.What != "another matter" {
		t.Errorf("another incident was erased: %+v %v", other, err)
	}
	report, err := d.Verify(ctx, nil)
	d.ok(err)
	if report.FirstFault != "" {
		t.Error(report.FirstFault)
	}
	d.ok(d.Rebuild(ctx))
	if again, err := d.Incident(ctx, d.officer, site, 1); err != nil || again.What != "(erased)" {
		t.Errorf("after a rebuild: %+v %v", again, err)
	}
}

func TestBadIncidents(t *testing.T) {
	d := manned(t)
	for name, c := range map[string]struct {
		change func(*book.IncidentForm)
		fields string
	}{
		"kind":                     {func(f *book.IncidentForm) { f.Kind = "fire" }, "incident"},
		"zone":                     {func(f *book.IncidentForm) { f.Zone = "V" }, "zone"},
		"a day":                    {func(f *book.IncidentForm) { f.At = "2026-02-27" }, "at"},
		"the future":               {func(f *book.IncidentForm) { f.At = "2026-03-02 12:00" }, "at"},
		"no moment":                {func(f *book.IncidentForm) { f.At = "yesterday" }, "at"},
		"an hour that comes twice": {func(f *book.IncidentForm) { f.At = "2025-10-26 01:30" }, "at"},
		"severity":                 {func(f *book.IncidentForm) { f.Severity = "" }, "severity"},
		"no text":                  {func(f *book.IncidentForm) { f.What = "" }, "what"},
		"people":                   {func(f *book.IncidentForm) { f.People = []string{"P9"} }, "people"},
		"a date of birth":          {func(f *book.IncidentForm) { f.What = "born 12.03.1961, fell" }, "what"},
		"a short date of birth":    {func(f *book.IncidentForm) { f.Who = "a man of 3/12/61" }, "who"},
		"a number of a record":     {func(f *book.IncidentForm) { f.Action = "called 40028922" }, "action"},
		"a spaced number":          {func(f *book.IncidentForm) { f.Who = "number 943 476 5919" }, "who"},
	} {
		f := incidentForm()
		c.change(&f)
		if _, err := d.ReportIncident(t.Context(), d.officer, site, f); err == nil || faultOf(err) != c.fields {
			t.Errorf("%s: %q, %v", name, faultOf(err), err)
		}
	}
	f := incidentForm()
	f.What = "on 2026-02-27 at 8:30 the 3 T magnet pulled at a 40 kg trolley"
	if _, err := d.ReportIncident(t.Context(), d.officer, site, f); err != nil {
		t.Errorf("the day of the incident is taken for a date of birth: %v", err)
	}
	f.What, f.Sure = "bolt 40028922 was loose", true
	if _, err := d.ReportIncident(t.Context(), d.officer, site, f); err != nil {
		t.Errorf("whoever has looked may keep it: %v", err)
	}
	if _, err := d.ReportIncident(t.Context(), d.op, site, f); !denied(err) {
		t.Errorf("the operator reported: %v", err)
	}
}

func TestIncidentJSON(t *testing.T) {
	d, _, _ := whispered(t)
	list, err := d.Incidents(t.Context(), d.officer, site)
	d.ok(err)
	b, err := json.Marshal(list[0].JSON(site))
	d.ok(err)
	want := `{"site":"QUAY","number":1,"kind":"projectile","zone":"IV","at":"2026-02-27T08:30:00Z","severity":"high","anonymous":false,"people":["P1"],"what":"the trolley flew at the bore","who":"Runa and a visitor in green","action":"the table was pulled out","reports":[{"report":"BODY","to":"The body that is told","due":"2026-03-04","done":null}],"remedies":[1]}`
	if string(b) != want {
		t.Errorf("%s", b)
	}
}

// everyTable is all that stands in the tables of the book's database.
func (d *desk) everyTable() string {
	d.Helper()
	if driverOf(d.path) == "pgx" {
		return string(d.tables())
	}
	db, err := sql.Open("sqlite3", d.path)
	d.ok(err)
	var names []string
	d.each(db, "SELECT name FROM sqlite_master WHERE type = 'table' AND name NOT LIKE 'sqlite_%'", func(row string) { names = append(names, row) })
	var all strings.Builder
	for _, name := range names {
		d.each(db, "SELECT * FROM "+name, func(row string) { all.WriteString(name + " " + row + "\n") })
	}
	d.ok(db.Close())
	return all.String()
}

// each gives every row of a query as one text.
func (d *desk) each(db *sql.DB, query string, fn func(row string)) {
	d.Helper()
	rows, err := db.QueryContext(d.Context(), query)
	d.ok(err)
	columns, err := rows.Columns()
	d.ok(err)
	cells, into := make([]sql.RawBytes, len(columns)), make([]any, len(columns))
	for i := range cells {
		into[i] = &cells[i]
	}
	for rows.Next() {
		d.ok(rows.Scan(into...))
		var parts []string
		for _, c := range cells {
			parts = append(parts, string(c))
		}
		fn(strings.Join(parts, " "))
	}
	d.ok(rows.Err())
	d.ok(rows.Close())
}
