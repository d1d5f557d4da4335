package book

import (
	"maps"
	"slices"
	"strings"

	"lodebook/models/program"
	"lodebook/models/store"
	"lodebook/models/table"
)

var (
	peopleColumns  = []string{"code", "name", "email", "level", "crew", "badge", "joined", "left", "from"}
	fixtureColumns = []string{"code", "kind", "name", "zone", "since", "until", "from"}
	recordColumns  = []string{"id", "record", "subject", "on", "result", "until", "limit", "by", "note"}
	eventColumns   = []string{"event", "subject", "on", "note"}
	excusalColumns = []string{"item", "subject", "from", "to", "reason", "approved_by", "opens"}
	pauseColumns   = []string{"subject", "from", "to", "reason"}
)

// cells reads a row's cells as forms want them, gathering the faults.
type cells struct {
	in     *importing
	row    table.Row
	faults []table.Fault
	parts  []string // of the row's content
}

func (c *cells) note(col, value string) string {
	if value != "" {
		c.parts = append(c.parts, col+"="+value)
	}
	return value
}

func (c *cells) text(col string) string { return c.note(col, c.row.Text(col)) }

// day gives a day as YYYY-MM-DD, or empty.
func (c *cells) day(col string) string {
	d, ok, f := c.row.Day(col)
	if f != nil {
		c.faults = append(c.faults, *f)
		return ""
	}
	if !ok {
		return ""
	}
	return c.note(col, d.String())
}

// moment gives a day or an instant as an entry holds it, or empty.
func (c *cells) moment(col string) string {
	m, ok, f := c.row.Moment(col, c.in.c.zone())
	if f != nil {
		c.faults = append(c.faults, *f)
		return ""
	}
	if !ok {
		return ""
	}
	return c.note(col, moment{day: m.Day, time: m.Time}.String())
}

// add turns faults of a body into faults of the row.
func (c *cells) add(faults []Fault) {
	for _, f := range faults {
		if slices.ContainsFunc(c.faults, func(o table.Fault) bool { return o.Column == f.Field }) {
			continue // one fault of a cell is enough
		}
		c.faults = append(c.faults, table.Fault{Line: c.row.Line, Column: f.Field, Value: f.Value, Problem: f.Problem, Accepted: f.Accepted})
	}
}

func (c *cells) content() string { return strings.Join(c.parts, "\x1f") }

// finish validates the body and gives the draft, or the faults.
func (c *cells) finish(d rowDraft, silent bool) (rowDraft, []table.Fault) {
	d.content = c.content()
	if silent && len(c.faults) == 0 {
		d.body = nil
		return d, nil
	}
	c.add(d.body.validate(c.in.c))
	return d, c.faults
}

func personFactColumns(in *importing) []string { return declaredColumns(in.c.personFacts()) }

func fixtureFactColumns(in *importing) []string { return declaredColumns(in.allFixtureFacts()) }

// allFixtureFacts are the facts of every fixture kind of the site.
func (in *importing) allFixtureFacts() map[string]program.Fact {
	all := map[string]program.Fact{}
	for _, k := range in.m.site(in.o.Site).kindCodes() {
		maps.Copy(all, in.c.fixtureFacts(k))
	}
	return all
}

// declaredColumns are the facts that have no column of their own.
func declaredColumns(facts map[string]program.Fact) []string {
	var out []string
	for _, k := range sortedKeys(facts) {
		if facts[k].Type != "" {
			out = append(out, k)
		}
	}
	return out
}

// factCells reads the fact columns; those dated as days take every form that a date may have.
func (c *cells) factCells(declared map[string]program.Fact) map[string]string {
	out := map[string]string{}
	for _, k := range declaredColumns(declared) {
		if !c.row.Has(k) {
			continue
		}
		switch declared[k].Type {
		case program.FactDay:
			out[k] = c.day(k)
		case program.FactNumber:
			n, ok, f := c.row.Number(k)
			if f != nil {
				c.faults = append(c.faults, *f)
			} else if ok {
				out[k] = c.note(k, n)
			}
		default:
			out[k] = c.text(k)
		}
	}
	return out
}

func personRow(in *importing, row table.Row) (rowDraft, []table.Fault) {
	in.c.m = in.m
	c := &cells{in: in, row: row}
	f := PersonForm{
		Code: c.text("code"), Name: c.text("name"), Email: c.text("email"), Badge: c.text("badge"), Level: c.text("level"),
		Crew: c.text("crew"), Joined: c.day("joined"), Left: c.day("left"), From: c.day("from"), Facts: c.factCells(in.c.personFacts()),
	}
	body, faults := in.c.personBody(f)
	c.add(faults)
	if body == nil {
		return rowDraft{}, c.faults
	}
	d := rowDraft{key: store.SubjectKey{Kind: string(program.AsksPerson), Code: f.Code}, body: body}
	d.undoes = in.personUndoes(f, row.Line)
	return c.finish(d, body.saysNothing())
}

func fixtureRow(in *importing, row table.Row) (rowDraft, []table.Fault) {
	in.c.m = in.m
	c := &cells{in: in, row: row}
	f := FixtureForm{
		Code: c.text("code"), Kind: c.text("kind"), Name: c.text("name"), Zone: c.text("zone"), Since: c.day("since"), Until: c.day("until"), From: c.day("from"),
	}
	f.Facts = c.factCells(in.allFixtureFacts())
	body, faults := in.c.fixtureBody(f)
	c.add(faults)
	if body == nil {
		return rowDraft{}, c.faults
	}
	d := rowDraft{key: store.SubjectKey{Site: in.o.Site, Kind: string(program.AsksFixture), Code: f.Code}, body: body}
	d.undoes = in.fixtureUndoes(f, row.Line)
	return c.finish(d, body.saysNothing(in.m, in.o.Site))
}

func recordRow(in *importing, row table.Row) (rowDraft, []table.Fault) {
	c := &cells{in: in, row: row}
	id := strings.ToLower(row.Text("id"))
	f := RecordForm{Record: c.text("record"), Subject: row.Text("subject"), On: c.moment("on"), Result: strings.ToLower(row.Text("result")), Until: c.day("until"), Limit: strings.Join(strings.Fields(c.text("limit")), " "), By: c.text("by"), Note: c.text("note")}
	body, faults := in.c.recordBody(f)
	c.add(faults)
	c.note("result", body.Result)
	c.note("subject", body.Subject.Kind+":"+body.Subject.Code)
	if id != "" && checkID(id) != nil {
		c.faults = append(c.faults, *row.Fault("id", "is no identifier", "a UUID, or nothing"))
	}
	if len(c.faults) == 0 && !in.m.site(in.o.Site).answers(body.Record) {
		in.idle[body.Record] = true
	}
	d := rowDraft{id: id, key: body.Subject.key(in.o.Site), run: body.Subject.Kind + ":" + body.Subject.Code + " " + body.Record, body: body}
	return c.finish(d, false)
}

func eventRow(in *importing, row table.Row) (rowDraft, []table.Fault) {
	c := &cells{in: in, row: row}
	body, faults := in.c.eventBody(EventForm{Event: c.text("event"), Subject: c.text("subject"), On: c.moment("on"), Note: c.text("note")})
	c.add(faults)
	return c.finish(rowDraft{key: body.Subject.key(in.o.Site), body: body}, false)
}

func excusalRow(in *importing, row table.Row) (rowDraft, []table.Fault) {
	c := &cells{in: in, row: row}
	f := ExcusalForm{Item: c.text("item"), Subject: c.text("subject"), From: c.day("from"), To: c.day("to"), Reason: c.text("reason"), ApprovedBy: c.text("approved_by"), Opens: c.text("opens")}
	body, faults := in.c.excusalBody(f)
	c.add(faults)
	return c.finish(rowDraft{key: body.Subject.key(in.o.Site), body: body}, false)
}

func pauseRow(in *importing, row table.Row) (rowDraft, []table.Fault) {
	c := &cells{in: in, row: row}
	f := PauseForm{Subject: c.text("subject"), From: c.day("from"), To: c.day("to"), Reason: c.text("reason")}
	body, faults := in.c.pauseBody(f)
	c.add(faults)
	return c.finish(rowDraft{key: body.Subject.key(in.o.Site), body: body}, false)
}
