package web

import (
	"bytes"
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
