package scenario

import (
	"cmp"
	"slices"
	"strconv"
	"strings"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// row is one line of the table of records.
type row struct {
	what, subject string
	day           civil.Day
	clock         string // the instant, where it is known; else empty
	failed        bool
	until         *civil.Day
	limit         string
	by, note      string
}

// history is what the site has done, in the order in which it is invented.
type history struct {
	almanac
	program *program.Program
	never   []string // what a subject never did: the record and the subject
	rows    []row
}

// write invents a history in which every item is kept. The stories change it afterwards.
func (h *history) write(all []subject) {
	for i := range h.program.Items {
		it := &h.program.Items[i]
		if len(it.Records) == 0 {
			continue // it holds, or does not
		}
		if it.Asks == program.AsksPerson && strings.HasPrefix(it.Records[0], drillKind) {
			continue // those who took part in their crew's drills have done theirs
		}
		for _, s := range all {
			if s.asks == it.Asks {
				h.keep(it, s)
			}
		}
	}
	h.attend(all)
	h.appoint()
}

// keep invents the records by which a subject meets an item, in every span in which it is asked.
func (h *history) keep(it *program.Item, s subject) {
	if slices.Contains(h.never, it.Records[0]+" "+s.ref()) {
		return
	}
	c := &course{history: h, item: it, subject: s, chance: chance(it.Code, s.code)}
	for _, sp := range s.spans {
		if asked, err := matches(it, sp.what); err == nil && asked {
			c.run(sp)
		}
	}
}

// matches tells whether the item asks the subject. The error is that of its selector, as where a
// fact is not on record.
func matches(it *program.Item, s program.Subject) (bool, error) {
	if it.When == nil {
		return true, nil
	}
	return it.When.Match(s)
}

// yesterday is the last day of the history.
func (h *history) yesterday() civil.Day { return h.today - 1 }

// add puts a record into the history, unless it lies beyond its end.
func (h *history) add(r row) {
	if r.day > h.yesterday() {
		return
	}
	h.rows = append(h.rows, r)
}

// drop takes out every record that the question is true of.
func (h *history) drop(is func(row) bool) { h.rows = slices.DeleteFunc(h.rows, is) }

const drillKind = "drill/"

// attend puts those who took part in each drill of a crew on record: most of the crew, and whoever
// has taken part in none for half a year.
func (h *history) attend(all []subject) {
	var drills []row
	for _, r := range h.rows {
		if strings.HasPrefix(r.what, drillKind) {
			drills = append(drills, r)
		}
	}
	last := map[string]civil.Day{}
	for _, r := range sorted(drills) {
		crew := strings.TrimPrefix(r.subject, "crew:")
		luck := chance(r.what, crew, strconv.Itoa(int(h.today-r.day)))
		for _, s := range all {
			if s.asks != program.AsksPerson || s.on(r.day).Crew != crew {
				continue
			}
			if there := luck.IntN(4) > 0; there || r.day-last[s.code] > 180 {
				last[s.code] = r.day
				h.add(row{what: r.what, subject: s.code, day: r.day, by: r.by})
			}
		}
	}
}

// appoint fills the posts, long ago and for good.
func (h *history) appoint() {
	for _, a := range []struct {
		post, person string
		years        int
	}{{"MRMD", director, 5}, {"MRSE", expert, 4}, {"MRSO", officer, 5}, {"MRSO", deputy, 3}} {
		day := h.ago(a.years * 365)
		h.add(row{what: "appointment/" + a.post, subject: a.person, day: day, by: nameOf(director)})
	}
}

// sorted gives the rows as an export would: by day, then by record and subject, none twice.
func sorted(rows []row) []row {
	out := slices.Clone(rows)
	key := func(r row) string { return r.what + " " + r.subject }
	slices.SortStableFunc(out, func(a, b row) int {
		return cmp.Or(cmp.Compare(a.day, b.day), cmp.Compare(key(a), key(b)))
	})
	return slices.CompactFunc(out, func(a, b row) bool {
		return a.day == b.day && key(a) == key(b) && a.failed == b.failed && a.clock == b.clock
	})
}
