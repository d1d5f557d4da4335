package network

import (
	"encoding/csv"
	"fmt"
	"io"
	"strings"
	"time"

	"lodebook/models/civil"
)

// Tables are those that a site is imported from, in that order.
var Tables = []string{"people", "fixtures", "records", "events", "excusals", "pauses"}

// headers are the columns of each table.
var headers = map[string]string{
	"people":   "code,name,email,badge,level,crew,joined,left,from,employer,cryogen_work",
	"fixtures": "code,kind,name,zone,since,until,swing,outlet_height_m,over_public_path",
	"records":  "record,subject,on,result,until,limit,by,note",
	"events":   "event,subject,on,note",
	"excusals": "item,subject,from,to,reason,approved_by,opens",
	"pauses":   "subject,from,to,reason",
	"passages": "at,door,badge,direction",
}

// WriteCSV writes one of Tables as it is imported: UTF-8 with a header row.
func (s *Site) WriteCSV(w io.Writer, table string) error {
	header, ok := headers[table]
	if !ok {
		return fmt.Errorf("table: found %q; write one of %s", table, strings.Join(Tables, ", "))
	}
	c := csv.NewWriter(w)
	_ = c.Write(strings.Split(header, ",")) // the writer keeps its error
	s.cells(table, func(row ...string) { _ = c.Write(row) })
	c.Flush()
	return c.Error()
}

// Rows is how many rows one of Tables has.
func (s *Site) Rows(table string) int {
	n := 0
	s.cells(table, func(...string) { n++ })
	return n
}

// WritePassages writes the site's passages, with a header row if asked.
func (s *Site) WritePassages(w io.Writer, header bool) error {
	c := csv.NewWriter(w)
	if header {
		_ = c.Write(strings.Split(headers["passages"], ","))
	}
	for p := range s.Passages() {
		_ = c.Write([]string{p.At.UTC().Format(time.RFC3339), p.Door, p.Badge, p.Direction})
	}
	c.Flush()
	return c.Error()
}

func (s *Site) cells(table string, put func(row ...string)) {
	switch table {
	case "people":
		for _, p := range s.People {
			put(p.Code, p.Name, p.Email, p.Badge, p.Level, p.Crew, DayText(p.Joined), DayText(p.Left), DayText(p.From), p.Employer, p.Cryogen)
		}
	case "fixtures":
		for _, f := range s.Fixtures {
			put(f.Code, f.Kind, f.Name, f.Zone, DayText(f.Since), DayText(f.Until), f.Facts["swing"], f.Facts["outlet_height_m"], f.Facts["over_public_path"])
		}
	case "records":
		for i := range s.Records {
			r := &s.Records[i]
			put(r.What, r.Subject.String(), r.On(), r.Result(), DayText(r.Until), r.Limit, r.By, r.Note)
		}
	case "events":
		for _, e := range s.Events {
			put(e.Code, e.Subject.String(), DayText(e.Day), e.Note)
		}
	case "excusals":
		for _, x := range s.Excusals {
			put(x.Item, x.Subject.String(), DayText(x.From), DayText(x.To), x.Reason, x.ApprovedBy, YesNo(x.Opens))
		}
	case "pauses":
		for _, p := range s.Pauses {
			put(p.Subject.String(), DayText(p.From), DayText(p.To), p.Reason)
		}
	}
}

// DayText is a day as a table has it, empty for NoDay.
func DayText(d civil.Day) string {
	if d == NoDay {
		return ""
	}
	return d.String()
}

// YesNo is a truth as a table has it.
func YesNo(b bool) string {
	if b {
		return "yes"
	}
	return "no"
}

// On is when the record was done, as a table has it.
func (r *Record) On() string {
	if r.Time.IsZero() {
		return r.Day.String()
	}
	return r.Time.UTC().Format(time.RFC3339)
}

// Result is the record's result, as a table has it.
func (r *Record) Result() string {
	if r.Failed {
		return "fail"
	}
	return "pass"
}
