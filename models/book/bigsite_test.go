package book_test

import (
	"fmt"
	"strings"
	"testing"
	"time"
)

// bigSite is a site of n people with a few records each.
func bigSite(t *testing.T, n int) *desk {
	t.Helper()
	d := newDesk(t)
	var people, records strings.Builder
	people.WriteString("code,name,level,crew,joined,employer\n")
	records.WriteString("record,subject,on\n")
	day := time.Date(2025, 1, 6, 0, 0, 0, 0, time.UTC)
	for p := range n {
		fmt.Fprintf(&people, "P%05d,Person %d,L%d,early,2024-01-01,Yard %d\n", p, p, 1+p%2, p%20)
		for i, what := range []string{"training/level-2", "screening/staff", "training/induction", "acknowledgement/POL-ACCESS"} {
			fmt.Fprintf(&records, "%s,P%05d,%s\n", what, p, day.AddDate(0, i, p%400).Format("2006-01-02"))
		}
	}
	d.imp("people", people.String())
	d.imp("records", records.String())
	return d
}

// TestPagesOfABigSite holds that the queries behind the pages answer for 5,000 people, and that
// their numbers agree with each other.
func TestPagesOfABigSite(t *testing.T) {
	d := bigSite(t, 5000)
	sv, people, err := d.People(t.Context(), d.officer, site, nil)
	d.ok(err)
	list, err := d.Checklist(t.Context(), d.officer, site, nil)
	d.ok(err)
	gaps, inPeople, inItems := 0, 0, 0
	st, err := d.Standings(t.Context(), d.officer, bookQuery())
	d.ok(err)
	for _, r := range st.Gaps() {
		if r.Subject.Asks == "person" {
			gaps++
		}
	}
	for _, p := range people {
		inPeople += p.Gaps
	}
	for _, i := range list.Items {
		if i.Asks == "person" {
			for w, n := range i.Counts {
				if w.IsGap() {
					inItems += n
				}
			}
		}
	}
	if sv.People != 5000 || len(people) != 5000 || gaps == 0 || gaps != inPeople || gaps != inItems {
		t.Errorf("%d people, %d lines; %d gaps, %d by person, %d by item", sv.People, len(people), gaps, inPeople, inItems)
	}
}
