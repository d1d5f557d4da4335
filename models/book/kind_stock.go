package book

import (
	"fmt"
	"strconv"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/reach"
	"lodebook/models/store"
)

const kindStock = "stock"

// stockBody is what the book has reckoned from all that was on record, so that it is known what it said when: when
// a site is short of people by an item with cover, or what the list of who can open which door asks for. It is
// written by the book itself, and only where it differs from what was reckoned before.
type stockBody struct {
	common
	Item  string      `json:"item,omitempty"`
	From  string      `json:"from,omitempty"` // of an item: reckoned anew from here, included,
	To    string      `json:"to,omitempty"`   // up to here, excluded
	Spans []stockSpan `json:"spans,omitempty"`
	Days  []stockDay  `json:"days,omitempty"`
	Doors *stockDoors `json:"doors,omitempty"`
}

// stockSpan is a time in which fewer are there than are needed.
type stockSpan struct {
	From   string `json:"from"`
	To     string `json:"to"`
	There  int    `json:"there"`
	Needed int    `json:"needed"`
}

// stockDay says what holds from a day on: whether somebody is missing; nil: that is not known.
type stockDay struct {
	On    civil.Day `json:"on"`
	Short *bool     `json:"short"`
}

// stockDoors is the state of the list of who can open which door, from the day On: the day on which it was last
// imported (nil: never), and how much it asks for. Anew tells that Imported is another day than before.
type stockDoors struct {
	On       civil.Day  `json:"on"`
	Imported *civil.Day `json:"imported"`
	Anew     bool       `json:"anew,omitempty"`
	Open     int        `json:"open"`
}

func (b *stockBody) kind() string { return kindStock }
func (b *stockBody) version() int { return 1 }

func (b *stockBody) validate(c *check) []Fault {
	if b.Doors != nil {
		return nil
	}
	return c.checkItem("item", b.Item)
}

func (b *stockBody) apply(at applied) []any {
	if b.Doors != nil {
		return b.Doors.rows(at)
	}
	var rows []any
	row := store.StockRow{Line: at.line, Site: at.site, Item: b.Item, From: writtenAt(b.From), To: writtenAt(b.To)}
	for _, s := range b.Spans {
		row.Spans = append(row.Spans, fmt.Sprintf("%s/%s/%d/%d", s.From, s.To, s.There, s.Needed))
	}
	rows = append(rows, row)
	for _, d := range b.Days {
		value := "null"
		if d.Short != nil {
			value = fmt.Sprint(*d.Short)
		}
		rows = append(rows, siteFact(at, program.UncoveredFact(b.Item), d.On, value))
	}
	return rows
}

func siteFact(at applied, fact string, from civil.Day, value string) store.FactRow {
	return store.FactRow{Line: at.line, Site: at.site, Kind: string(program.AsksSite), Code: at.site, Fact: fact, From: from, Value: value}
}

// rows are the facts that follow.
func (d *stockDoors) rows(at applied) []any {
	rows := []any{siteFact(at, program.FactDoorListOpen, d.On, fmt.Sprint(d.Open))}
	switch {
	case !d.Anew:
	case d.Imported == nil:
		rows = append(rows, siteFact(at, program.FactDoorListOf, d.On, "false"))
	default:
		rows = append(rows, siteFact(at, program.FactDoorListOf, d.On, strconv.Quote(d.Imported.String())))
	}
	return rows
}

// writtenAt reads an instant that the book itself wrote.
func writtenAt(text string) time.Time {
	t, err := time.Parse(time.RFC3339, text)
	if err != nil {
		return time.Time{}
	}
	return t.UTC()
}

// spanOf reads a span of a stored row.
func spanOf(text string) (u reach.Uncovered, ok bool) {
	var from, to string
	parts := strings.Split(text, "/")
	if len(parts) != 4 {
		return u, false
	}
	from, to = parts[0], parts[1]
	if _, err := fmt.Sscan(parts[2]+" "+parts[3], &u.There, &u.Needed); err != nil {
		return u, false
	}
	u.From, u.To = writtenAt(from), writtenAt(to)
	return u, !u.From.IsZero() && !u.To.IsZero()
}

func (b *stockBody) summary() string {
	switch {
	case b.Doors != nil && b.Doors.Imported == nil:
		return "Reckoned: no list of who can open which door"
	case b.Doors != nil:
		return fmt.Sprintf("Reckoned: the list of who can open which door is of %v and asks for %d changes", *b.Doors.Imported, b.Doors.Open)
	case len(b.Spans) == 0:
		return fmt.Sprintf("Reckoned: %s is covered", b.Item)
	case len(b.Spans) == 1:
		return fmt.Sprintf("Reckoned: %s is uncovered once", b.Item)
	}
	return fmt.Sprintf("Reckoned: %s is uncovered %d times", b.Item, len(b.Spans))
}

func (b *stockBody) addFields(l *fieldList, m *model, site string) {
	if b.Doors != nil {
		l.add("Holds from", b.Doors.On.String())
		l.add("List imported", dayOr(b.Doors.Imported, "never"))
		l.add("Changes that it asks for", summaryNumber(b.Doors.Open))
		return
	}
	l.add("Item", b.Item)
	l.add("From", m.onWords(site, b.From))
	l.add("To", m.onWords(site, b.To))
	for _, s := range b.Spans {
		l.add("Uncovered", fmt.Sprintf("%s to %s, %d there of %d", m.onWords(site, s.From), m.onWords(site, s.To), s.There, s.Needed))
	}
}
