package book

import (
	"maps"
	"slices"
	"strings"
	"time"

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
	row table.Row
	rowFaults
	zone *time.Location
}

// rowFaults gathers what is wrong with one row.
type rowFaults struct {
	line   int
	faults []table.Fault
}

// content is what a row says, as it is known again: a part for each column that is not empty.
type content []string

func (c *content) note(col, value string) {
	if value != "" {
		*c = append(*c, col+"="+value)
	}
}

func (c content) String() string { return strings.Join(c, "\x1f") }

func (in *importing) cells(row table.Row) *cells {
	return &cells{row: row, rowFaults: rowFaults{line: row.Line}, zone: in.c.zone()}
}

func (c *cells) text(col string) string { return c.row.Text(col) }

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
	return d.String()
}

// moment gives a day or an instant as an entry holds it, or empty.
func (c *cells) moment(col string) string {
	m, ok, f := c.row.Moment(col, c.zone)
	if f != nil {
		c.faults = append(c.faults, *f)
		return ""
	}
	if !ok {
		return ""
	}
	return moment{day: m.Day, time: m.Time}.String()
}

// add turns faults of a body into faults of the row.
func (c *rowFaults) add(faults []Fault) {
	for _, f := range faults {
		if slices.ContainsFunc(c.faults, func(o table.Fault) bool { return o.Column == f.Field }) {
			continue // one fault of a cell is enough
		}
		c.faults = append(c.faults, table.Fault{Line: c.line, Column: f.Field, Value: f.Value, Problem: f.Problem, Accepted: f.Accepted})
	}
}

// finish validates the draft's body against what is on record and gives the draft, or the faults. A silent
// one says nothing new and has no body.
func (c *rowFaults) finish(in *importing, d rowDraft, silent bool) (rowDraft, []table.Fault) {
	if silent && len(c.faults) == 0 {
		d.body = nil
		return d, nil
	}
	c.add(d.body.validate(in.c))
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
				out[k] = n
			}
		default:
			out[k] = c.text(k)
		}
	}
	return out
}

func personRow(in *importing, row table.Row) (rowDraft, []table.Fault) {
	c := in.cells(row)
	f := PersonForm{
		Code: c.text("code"), Name: c.text("name"), Email: c.text("email"), Badge: c.text("badge"), Level: c.text("level"),
		Crew: c.text("crew"), Joined: c.day("joined"), Left: c.day("left"), From: c.day("from"), Facts: c.factCells(in.c.personFacts()),
	}
	return f.draft(in, c.rowFaults)
}

func (PersonForm) table() string { return "people" }

// draft makes the draft of a row that says what the form does, or gives its faults. So do those of the
// other tables' forms.
func (f PersonForm) draft(in *importing, c rowFaults) (rowDraft, []table.Fault) {
	in.c.m = in.m
	body, faults := in.c.personBody(f)
	c.add(faults)
	if body == nil {
		return rowDraft{}, c.faults
	}
	var says content
	for _, x := range [][2]string{
		{"code", f.Code}, {"name", f.Name}, {"email", f.Email}, {"badge", f.Badge}, {"level", f.Level}, {"crew", f.Crew},
		{"joined", f.Joined}, {"left", f.Left}, {"from", f.From},
	} {
		says.note(x[0], x[1])
	}
	says.facts(f.Facts)
	d := rowDraft{key: store.SubjectKey{Kind: string(program.AsksPerson), Code: f.Code}, body: body, content: says.String()}
	d.undoes = in.personUndoes(f, c.line)
	return c.finish(in, d, body.saysNothing())
}

func (c *content) facts(facts map[string]string) {
	for _, k := range sortedKeys(facts) {
		c.note(k, facts[k])
	}
}

func fixtureRow(in *importing, row table.Row) (rowDraft, []table.Fault) {
	c := in.cells(row)
	f := FixtureForm{
		Code: c.text("code"), Kind: c.text("kind"), Name: c.text("name"), Zone: c.text("zone"), Since: c.day("since"), Until: c.day("until"), From: c.day("from"),
	}
	f.Facts = c.factCells(in.allFixtureFacts())
	return f.draft(in, c.rowFaults)
}

func (FixtureForm) table() string { return "fixtures" }

func (f FixtureForm) draft(in *importing, c rowFaults) (rowDraft, []table.Fault) {
	in.c.m = in.m
	body, faults := in.c.fixtureBody(f)
	c.add(faults)
	if body == nil {
		return rowDraft{}, c.faults
	}
	var says content
	for _, x := range [][2]string{
		{"code", f.Code}, {"kind", f.Kind}, {"name", f.Name}, {"zone", f.Zone}, {"since", f.Since}, {"until", f.Until}, {"from", f.From},
	} {
		says.note(x[0], x[1])
	}
	says.facts(f.Facts)
	d := rowDraft{key: store.SubjectKey{Site: in.o.Site, Kind: string(program.AsksFixture), Code: f.Code}, body: body, content: says.String()}
	d.undoes = in.fixtureUndoes(f, c.line)
	return c.finish(in, d, body.saysNothing(in.m, in.o.Site))
}

func recordRow(in *importing, row table.Row) (rowDraft, []table.Fault) {
	c := in.cells(row)
	f := RecordForm{
		ID: strings.ToLower(c.text("id")), Record: c.text("record"), Subject: c.text("subject"), On: c.moment("on"), Result: strings.ToLower(c.text("result")),
		Until: c.day("until"), Limit: c.text("limit"), By: c.text("by"), Note: c.text("note"),
	}
	if f.ID != "" && checkID(f.ID) != nil {
		c.faults = append(c.faults, *row.Fault("id", "is no identifier", "a UUID, or nothing"))
	}
	return f.draft(in, c.rowFaults)
}

func (RecordForm) table() string { return "records" }

func (f RecordForm) draft(in *importing, c rowFaults) (rowDraft, []table.Fault) {
	body, faults := in.c.recordBody(f)
	c.add(faults)
	subject := body.Subject.Kind + ":" + body.Subject.Code
	var says content
	for _, x := range [][2]string{
		{"record", f.Record}, {"on", body.On}, {"until", f.Until}, {"limit", f.Limit}, {"by", f.By}, {"note", f.Note},
		{"result", body.Result}, {"subject", subject},
	} {
		says.note(x[0], x[1])
	}
	if _, known := in.idle[body.Record]; !known && len(c.faults) == 0 {
		in.idle[body.Record] = !in.m.site(in.o.Site).answers(body.Record)
	}
	d := rowDraft{id: f.ID, key: body.Subject.key(in.o.Site), run: subject + " " + body.Record, body: body, content: says.String()}
	return c.finish(in, d, false)
}

func eventRow(in *importing, row table.Row) (rowDraft, []table.Fault) {
	c := in.cells(row)
	f := EventForm{Event: c.text("event"), Subject: c.text("subject"), On: c.moment("on"), Note: c.text("note")}
	return f.draft(in, c.rowFaults)
}

func (EventForm) table() string { return "events" }

func (f EventForm) draft(in *importing, c rowFaults) (rowDraft, []table.Fault) {
	body, faults := in.c.eventBody(f)
	c.add(faults)
	var says content
	for _, x := range [][2]string{{"event", f.Event}, {"subject", f.Subject}, {"on", body.On}, {"note", f.Note}} {
		says.note(x[0], x[1])
	}
	return c.finish(in, rowDraft{key: body.Subject.key(in.o.Site), body: body, content: says.String()}, false)
}

func excusalRow(in *importing, row table.Row) (rowDraft, []table.Fault) {
	c := in.cells(row)
	f := ExcusalForm{Item: c.text("item"), Subject: c.text("subject"), From: c.day("from"), To: c.day("to"), Reason: c.text("reason"), ApprovedBy: c.text("approved_by"), Opens: c.text("opens")}
	return f.draft(in, c.rowFaults)
}

func (ExcusalForm) table() string { return "excusals" }

func (f ExcusalForm) draft(in *importing, c rowFaults) (rowDraft, []table.Fault) {
	body, faults := in.c.excusalBody(f)
	c.add(faults)
	var says content
	for _, x := range [][2]string{
		{"item", f.Item}, {"subject", f.Subject}, {"from", f.From}, {"to", f.To}, {"reason", f.Reason}, {"approved_by", f.ApprovedBy}, {"opens", f.Opens},
	} {
		says.note(x[0], x[1])
	}
	return c.finish(in, rowDraft{key: body.Subject.key(in.o.Site), body: body, content: says.String()}, false)
}

func pauseRow(in *importing, row table.Row) (rowDraft, []table.Fault) {
	c := in.cells(row)
	f := PauseForm{Subject: c.text("subject"), From: c.day("from"), To: c.day("to"), Reason: c.text("reason")}
	return f.draft(in, c.rowFaults)
}

func (PauseForm) table() string { return "pauses" }

func (f PauseForm) draft(in *importing, c rowFaults) (rowDraft, []table.Fault) {
	body, faults := in.c.pauseBody(f)
	c.add(faults)
	var says content
	for _, x := range [][2]string{{"subject", f.Subject}, {"from", f.From}, {"to", f.To}, {"reason", f.Reason}} {
		says.note(x[0], x[1])
	}
	return c.finish(in, rowDraft{key: body.Subject.key(in.o.Site), body: body, content: says.String()}, false)
}
