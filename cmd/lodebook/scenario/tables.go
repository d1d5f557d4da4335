package scenario

import (
	"bytes"
	"encoding/csv"
	"slices"
	"strings"

	"lodebook/models/civil"
)

// event is something that happened to a subject.
type event struct {
	code, subject string
	day           civil.Day
	note          string
}

// excusal is an exception for one obligation.
type excusal struct {
	item, subject string
	from, to      civil.Day
	reason        string
	approvedBy    string
	opens         bool
}

// pause is a span in which a subject is away or out of service; a nil to is open.
type pause struct {
	subject string
	from    civil.Day
	to      *civil.Day
	reason  string
}

func (p pause) end() civil.Day {
	if p.to == nil {
		return civil.LastDay
	}
	return *p.to
}

// table writes rows under a header.
func table(header string, rows [][]string) []byte {
	var b bytes.Buffer
	w := csv.NewWriter(&b)
	all := append([][]string{strings.Split(header, ",")}, rows...)
	if err := w.WriteAll(all); err != nil {
		panic(err) // a buffer takes everything
	}
	return b.Bytes()
}

func peopleTable(a almanac) []byte {
	var rows [][]string
	for i, x := range staff {
		for _, ph := range phases(a, x) {
			rows = append(rows, personRow(i, x, ph))
		}
	}
	return table("code,name,email,level,crew,badge,joined,left,from,employer,job,cryogen_work", rows)
}

// personRow is one row of a person: of a stint, or of what changed and from when. Where a change
// follows, the stint goes on, so that its row has no end.
func personRow(i int, x person, ph phase) []string {
	if ph.change {
		return []string{x.code, "", "", ph.level, ph.crew, "", "", "", ph.first.String(), "", "", ""}
	}
	left, firm, cryogens := "", employer, ""
	if x.left > 0 && ph.last != civil.LastDay {
		left = ph.last.String()
	}
	if x.employer != "" {
		firm = x.employer
	}
	if worksWithCryogens(x) {
		cryogens = "yes"
	}
	email := strings.ToLower(x.code) + "@averhavn.example"
	badge := badgeOf(i)
	return []string{x.code, x.name, email, ph.level, ph.crew, badge, ph.first.String(), left, "", firm, x.job, cryogens}
}

func fixturesTable(a almanac) []byte {
	columns := []string{"swing", "badge_reader", "outlet_height_m", "over_public_path", "alarm_at_pct", "has_repeater", "mounted", "field_t", "has_helium", "has_vent", "starts_on_alarm", "label"}
	var rows [][]string
	for _, f := range fixtures {
		until := ""
		if f.until > 0 {
			until = a.ago(f.until).String()
		}
		cells := []string{f.code, f.kind, f.name, f.zone, a.ago(f.since).String(), until}
		for _, c := range columns {
			cells = append(cells, f.facts[c])
		}
		rows = append(rows, cells)
	}
	return table("code,kind,name,zone,since,until,"+strings.Join(columns, ","), rows)
}

func recordsTable(all []row) []byte {
	var rows [][]string
	for _, r := range sorted(all) {
		on, result := r.day.String(), "pass"
		if r.clock != "" {
			on = r.clock
		}
		if r.failed {
			result = "fail"
		}
		rows = append(rows, []string{r.what, r.subject, on, result, optional(r.until), r.limit, r.by, r.note})
	}
	return table("record,subject,on,result,until,limit,by,note", rows)
}

func eventsTable(all []event) []byte {
	slices.SortStableFunc(all, func(a, b event) int { return int(a.day - b.day) })
	var rows [][]string
	for _, e := range all {
		rows = append(rows, []string{e.code, e.subject, e.day.String(), e.note})
	}
	return table("event,subject,on,note", rows)
}

func excusalsTable(all []excusal) []byte {
	var rows [][]string
	for _, x := range all {
		opens := "no"
		if x.opens {
			opens = "yes"
		}
		rows = append(rows, []string{x.item, x.subject, x.from.String(), x.to.String(), x.reason, x.approvedBy, opens})
	}
	return table("item,subject,from,to,reason,approved_by,opens", rows)
}

func pausesTable(all []pause) []byte {
	var rows [][]string
	for _, p := range all {
		rows = append(rows, []string{p.subject, p.from.String(), optional(p.to), p.reason})
	}
	return table("subject,from,to,reason", rows)
}

func optional(d *civil.Day) string {
	if d == nil {
		return ""
	}
	return d.String()
}
