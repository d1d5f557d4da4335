package book

import (
	"cmp"
	"fmt"
	"slices"
	"strings"

	"lodebook/models/program"
	"lodebook/models/standing"
	"lodebook/models/store"
)

// failedSheets are the fixtures and sheets of which an import brought a failure that takes them out of service.
type failedSheets map[subjectWhat]*program.Sheet

type subjectWhat struct {
	subject subjectBody
	what    string
}

// note remembers a row that is a failed sheet.
func (f failedSheets) note(in *importing, b body) {
	r, ok := b.(*recordBody)
	if !ok {
		return
	}
	if sheet, out := in.m.takesOut(in.o.Site, r, in.now); out {
		f[subjectWhat{r.Subject, r.Record}] = sheet
	}
}

// takeOut takes out of service what by all that is on record now failed when it was last looked at: an old
// failure that was mended since takes nothing out. The outages are no part of the import, so that taking it back
// signs nothing back.
func (f failedSheets) takeOut(in *importing) error {
	keys := make([]subjectWhat, 0, len(f))
	for k := range f {
		keys = append(keys, k)
	}
	slices.SortFunc(keys, func(a, b subjectWhat) int {
		return cmp.Or(strings.Compare(a.subject.Code, b.subject.Code), strings.Compare(a.what, b.what))
	})
	for _, k := range keys {
		last, ok, err := in.lastRecord(k)
		if err != nil {
			return err
		}
		known := slices.ContainsFunc(in.m.outages.get(in.o.Site), func(r store.OutageRow) bool { return r.Record == last.ID })
		if !ok || last.Passed || known {
			continue
		}
		body := &recordBody{Record: k.what, Subject: k.subject, On: moment{day: last.Day, time: last.Time}.String(), Result: Fail}
		if err := in.add(in.m.outageDrafts(draft{id: last.ID, site: in.o.Site}, body, f[k])...); err != nil {
			return err
		}
		in.receipt = Receipt{}
		in.report.Notes = append(in.report.Notes, fmt.Sprintf("%s is out of service: %s failed when it was last looked at, on %s", k.subject.Code, k.what, last.Day))
	}
	return nil
}

// lastRecord is the latest record of a fixture on a sheet that stands.
func (in *importing) lastRecord(k subjectWhat) (store.RecordRow, bool, error) {
	rows, err := in.tx.RecordsAt(in.m.engine.Lines(in.o.Site, standing.Subject{Asks: program.AsksFixture, Code: k.subject.Code}))
	rows = slices.DeleteFunc(rows, func(r store.RecordRow) bool {
		return r.Ended != 0 || r.What != k.what || r.Subject != k.subject.key(in.o.Site)
	})
	if len(rows) == 0 {
		return store.RecordRow{}, false, err
	}
	// Of one day those without a time come first, then those with one by their time.
	slices.SortStableFunc(rows, func(a, b store.RecordRow) int {
		switch {
		case a.Day != b.Day:
			return cmp.Compare(a.Day, b.Day)
		case a.Time == nil || b.Time == nil:
			return boolOrder(a.Time != nil, b.Time != nil)
		default:
			return a.Time.Compare(*b.Time)
		}
	})
	return rows[len(rows)-1], true, err
}
