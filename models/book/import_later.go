package book

import (
	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/store"
	"lodebook/models/table"
)

// A row would undo a later edit when it says again what an earlier import said, and somebody has
// changed that by hand since. Such a row is listed and left out.

func laterEdit(line int, column, value, now string) *table.Fault {
	return &table.Fault{
		Line: line, Column: column, Value: value,
		Problem: "was imported before and changed by hand to " + now + " since", Accepted: "the later edit stands; change it on its page, or write the new value into the file",
	}
}

// said is what lines said of one field, in order: the value and whether an import said it.
type said struct {
	value    string
	imported bool
}

// undone gives the value that stands, if the row's is what an import said and a hand changed it since.
func undone(lines []said, row string) (string, bool) {
	if row == "" || len(lines) == 0 {
		return "", false
	}
	last := lines[len(lines)-1]
	if last.imported || last.value == row {
		return "", false
	}
	for i := len(lines) - 1; i >= 0; i-- {
		if lines[i].imported {
			return last.value, lines[i].value == row
		}
	}
	return "", false
}

func (in *importing) personUndoes(f PersonForm, line int) *table.Fault {
	for _, field := range []struct {
		column, row string
		of          func(store.PersonRow) string
	}{
		{"name", f.Name, func(r store.PersonRow) string { return r.Name }},
		{"email", f.Email, func(r store.PersonRow) string { return r.Email }},
		{"badge", f.Badge, func(r store.PersonRow) string { return r.Badge }},
	} {
		var lines []said
		for _, r := range in.m.people.get(f.Code) {
			if v := field.of(r); r.Ended == 0 && v != "" {
				lines = append(lines, said{v, r.Batch != ""})
			}
		}
		if now, ok := undone(lines, field.row); ok {
			return laterEdit(line, field.column, field.row, now)
		}
	}
	if x := in.stintUndoes(program.AsksPerson, f.Code, stintForm{f.Joined, f.Left, "joined", "left"}, line); x != nil {
		return x
	}
	values, _ := in.c.factValues(in.c.personFacts(), withBuiltins(f.Facts, map[string]string{factLevel: f.Level, factCrew: f.Crew}), f.Code)
	return in.factsUndo(program.AsksPerson, f.Code, values, f.From, line)
}

func (in *importing) fixtureUndoes(f FixtureForm, line int) *table.Fault {
	var lines []said
	for _, r := range in.m.fixtures.get(siteCode{in.o.Site, f.Code}) {
		if r.Ended == 0 && r.Name != "" {
			lines = append(lines, said{r.Name, r.Batch != ""})
		}
	}
	if now, ok := undone(lines, f.Name); ok {
		return laterEdit(line, "name", f.Name, now)
	}
	if x := in.stintUndoes(program.AsksFixture, f.Code, stintForm{f.Since, f.Until, "since", "until"}, line); x != nil {
		return x
	}
	values, _ := in.c.factValues(in.c.fixtureFacts(f.Kind), withBuiltins(f.Facts, map[string]string{factZone: f.Zone}), "")
	return in.factsUndo(program.AsksFixture, f.Code, values, f.From, line)
}

// stintUndoes compares the end of the span that begins on the row's day.
func (in *importing) stintUndoes(asks program.Asks, code string, f stintForm, line int) *table.Fault {
	var lines []said
	for _, r := range in.m.stints.get(factKey(in.o.Site, asks, code)) {
		if r.Ended == 0 && dayOr(r.First, "") == f.first {
			lines = append(lines, said{dayOr(r.Last, "no end"), r.Batch != ""})
		}
	}
	if now, ok := undone(lines, f.last); ok {
		return laterEdit(line, f.lastName, f.last, now)
	}
	return nil
}

// factsUndo compares each fact with the lines that hold from the row's day or before it.
func (in *importing) factsUndo(asks program.Asks, code string, values map[string]factValue, from string, line int) *table.Fault {
	limit := civil.LastDay
	if d, err := civil.ParseDay(from); err == nil {
		limit = d
	}
	for _, k := range sortedKeys(values) {
		var lines []said
		for _, r := range in.m.facts.get(factKey(in.o.Site, asks, code)) {
			if r.Ended == 0 && r.Fact == k && r.From <= limit {
				lines = append(lines, said{r.Value, r.Batch != ""})
			}
		}
		if now, ok := undone(lines, values[k].row()); ok {
			return laterEdit(line, k, values[k].show(), now)
		}
	}
	return nil
}
