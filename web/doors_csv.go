package web

import (
	"bytes"
	"errors"
	"strings"
	"time"

	"lodebook/models/book"
	"lodebook/models/table"
)

// badgesCSV is the table that is handed to who runs the doors.
func (v *visit) badgesCSV(d book.RightsDiff) error {
	var buf bytes.Buffer
	header := []string{"badge", "person", "name", "door", "zone", "change", "reasons", "at"}
	rows := func(yield func([]string) bool) {
		for _, r := range d.Rows {
			reasons := make([]string, len(r.Reasons))
			for i, x := range r.Reasons {
				reasons[i] = x.String()
			}
			if !yield([]string{r.Badge, r.Person, r.Name, r.Door, r.Zone, r.Change, strings.Join(reasons, "; "), d.At.UTC().Format(time.RFC3339)}) {
				return
			}
		}
	}
	if err := table.Write(&buf, header, rows); err != nil {
		return err
	}
	v.c.Header("Content-Disposition", `attachment; filename="badges-`+strings.Map(plainName, v.site.Code)+`.csv"`)
	v.c.Data(200, "text/csv; charset=utf-8", buf.Bytes())
	return nil
}

// passagesCSV writes every door event of a time as it is judged, so that millions of them need no memory.
func (v *visit) passagesCSV(q book.PassageQuery) error {
	v.c.Header("Content-Disposition", `attachment; filename="door-events-`+strings.Map(plainName, v.site.Code)+`.csv"`)
	v.c.Header("Content-Type", "text/csv; charset=utf-8")
	header := []string{"at", "door", "zone", "badge", "person", "direction", "verdict", "verdict_then", "reasons"}
	enough := errors.New("nobody reads on")
	var failed error
	rows := func(yield func([]string) bool) {
		_, failed = v.b.Passages(v.ctx(), v.actor, q, func(p book.PassageView) error {
			reasons := make([]string, len(p.Reasons))
			for i, x := range p.Reasons {
				reasons[i] = x.String()
			}
			if !yield([]string{p.At.Format(time.RFC3339Nano), p.Door, p.Zone, p.Badge, p.Person, p.Direction, string(p.Verdict), string(p.Then), strings.Join(reasons, "; ")}) {
				return enough
			}
			return nil
		})
	}
	err := table.Write(v.c.Writer, header, rows)
	if errors.Is(failed, enough) {
		failed = nil
	}
	return errors.Join(err, failed)
}
