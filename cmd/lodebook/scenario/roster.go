package scenario

import (
	"time"
)

// The roster goes back two weeks and ahead five. On each open day two of each crew of technologists are on duty, and the
// safety officer or her deputy is on call; on one evening to come only one is there, which nobody has noticed yet.
const (
	rosterBack  = 14
	rosterAhead = 35
	thinEvening = 9 // days from today, or the first open day after
)

var (
	earlyDuty = []string{"S05", "S06", "S08", "S09", "S10", "S11", "S12", "S13"}
	lateDuty  = []string{"S22", "S23", "S25", "S26", "S27", "S28"}
)

func rosterTable(a almanac) []byte {
	var rows [][]string
	thin := false
	for ago := rosterBack; ago >= -rosterAhead; ago-- {
		day := a.ago(ago)
		if w := day.Weekday(); w == time.Saturday || w == time.Sunday {
			continue
		}
		n := rosterBack - ago
		add := func(code string, from, to int, duty string) {
			at := func(minute int) string {
				return day.Midnight(a.loc).Add(time.Duration(minute) * time.Minute).UTC().Format(time.RFC3339)
			}
			rows = append(rows, []string{code, at(from), at(to), duty})
		}
		for i := range 2 {
			add(earlyDuty[(n+i)%len(earlyDuty)], 7*60, 15*60, "duty")
		}
		add(lateDuty[n%len(lateDuty)], 14*60+30, 21*60, "duty")
		if ago <= -thinEvening && !thin {
			thin = true // the second one is missing
		} else {
			add(lateDuty[(n+1)%len(lateDuty)], 14*60+30, 21*60, "duty")
		}
		add([]string{officer, deputy}[n/7%2], 0, 24*60, "on-call")
	}
	return table("person,from,to,duty", inOrder(rows))
}
