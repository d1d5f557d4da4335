package web

import (
	"bytes"
	"fmt"
	"os"
	"strings"
	"testing"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/table"
)

// crowded is a house with the large site of testdata: as many people as are asked for, a fixture for
// each twenty-five of them, and a history in which three obligations in a hundred are gaps and six are
// closing. The same number gives the same book.
func crowded(t testing.TB, people int) *house {
	t.Helper()
	h := newHouse(t)
	source, err := os.ReadFile("testdata/large.yaml")
	h.ok(err)
	h.open(source)
	h.bring("people", "code,name,level,crew,joined,employer", crowdOf(people))
	h.bring("fixtures", "code,kind,name,zone,since", thingsOf(people/25+3))
	h.bring("records", "record,subject,on,result", h.deedsOf(people))
	h.ok(h.b.Turn(h.Context())) // as the server does when it begins
	_, err = h.b.RaiseFlags(h.Context(), book.JobActor(), fell, civil.DayOf(h.now, h.now.Location()))
	h.ok(err)
	return h
}

// bring imports a table, which must be taken whole.
func (h *house) bring(what, header string, rows []string) {
	h.Helper()
	file := []byte(header + "\n" + strings.Join(rows, "\n") + "\n")
	r, err := h.b.Import(h.Context(), h.op, book.ImportOptions{Table: what, Site: fell, File: bytes.NewReader(file), Size: int64(len(file)), FileName: what + ".csv", Read: table.Options{}})
	h.ok(err)
	if len(r.Faults) > 0 || r.Written != len(rows) {
		h.Fatalf("of %d rows of %s %d were written, with faults %v", len(rows), what, r.Written, r.Faults)
	}
}

var (
	firstNames = []string{"Ines", "Milo", "Sanna", "Teo", "Runa", "Ivo", "Marit", "Osk", "Lene", "Pavo", "Tilde"}
	lastNames  = []string{"Arruda", "Prent", "Holm", "Varga", "Skarre", "Lund", "Tembo", "Okerr", "Vasko", "Brandt", "Quist", "Moreau", "Dahl"}
	employers  = []string{"Fell Street", "Skerry Works", "Brindle Works"}
	crowdCrews = []string{"early", "late", "night"}
)

func crowdOf(n int) []string {
	rows := make([]string, n)
	for i := range rows {
		rows[i] = fmt.Sprintf("P%d,%s %s,L%d,%s,2025-02-01,%s", i+1, firstNames[i%len(firstNames)], lastNames[i%len(lastNames)], i%2+1, crowdCrews[i%3], employers[i%7%3])
	}
	return rows
}

func thingsOf(n int) []string {
	rows := make([]string, n)
	for i := range rows {
		kind := []string{"door", "vent", "detector"}[i%3]
		rows[i] = fmt.Sprintf("F%d,%s,%s %d,III,2025-02-01", i+1, kind, strings.ToUpper(kind[:1])+kind[1:], i/3+1)
	}
	return rows
}

var crowdRecords = []string{"acknowledgement/POL-ACCESS", "training/oxygen-alarm", "training/evacuation", "training/hearing", "training/induction", "training/labels", "training/life-support", "training/quench", "screening/staff"}

// deedsOf is the history: for each thing that is asked, one record, a year and a bit old for the one in
// fifty that has lapsed, nearly a year for those that are closing; one in a hundred was never done.
func (h *house) deedsOf(people int) []string {
	today := civil.DayOf(h.now, h.now.Location())
	var rows []string
	add := func(record, subject string, chance int) {
		age := chance % 300
		switch {
		case chance < 10:
			return
		case chance < 30:
			age = 366 + chance%30
		case chance < 90:
			age = 340 + chance%20
		}
		rows = append(rows, fmt.Sprintf("%s,%s,%s,pass", record, subject, today-civil.Day(age)))
	}
	for i := range people {
		level := fmt.Sprintf("training/level-%d", i%2+1)
		for j, what := range append([]string{level}, crowdRecords...) {
			add(what, fmt.Sprintf("person:P%d", i+1), (i*7919+j*4373+i/7)%1000)
		}
	}
	for i := range people/25 + 3 {
		what := []string{"inspection/door", "inspection/vent-yearly", "check/detector"}[i%3]
		rows = append(rows, fmt.Sprintf("%s,fixture:F%d,%s,pass", what, i+1, today-civil.Day(i%40)))
	}
	return rows
}
