package main

import (
	"bufio"
	"encoding/json"
	"fmt"
	"io"
	"math"
	"os"
	"runtime"
	"strings"
	"text/tabwriter"
	"time"
)

// result is what a bench prints. Its JSON is fixed.
type result struct {
	Machine string `json:"machine"`
	Sizes   sizes  `json:"sizes"`
	Rows    []row  `json:"rows"`
}

// sizes is how much there was.
type sizes struct {
	Sites       int   `json:"sites"`
	People      int   `json:"people"`
	Fixtures    int   `json:"fixtures"`
	Days        int   `json:"days"`
	Obligations int   `json:"obligations"`
	Records     int64 `json:"records"`
	Changes     int   `json:"changes"` // days on which a standing turned
	Rounds      int   `json:"rounds"`
}

// row is one comparison. Ratio is their time over ours (of memory: their bytes over ours), and Asked the least
// that it shall be: below 1 where ours may take longer. Without anything to measure against, the numbers
// and Holds are null.
type row struct {
	Work     string   `json:"work"`
	OursNS   *float64 `json:"ours_ns"`
	Against  string   `json:"against"`
	TheirsNS *float64 `json:"theirs_ns"`
	Ratio    *float64 `json:"ratio"`
	Asked    float64  `json:"asked"`
	Holds    *bool    `json:"holds"`
}

// take fills the measured numbers in.
func (r *row) take(ours, theirs float64) {
	ratio := theirs / ours
	holds := ratio >= r.Asked
	ours, theirs, ratio = significant(ours), significant(theirs), significant(ratio)
	r.OursNS, r.TheirsNS, r.Ratio, r.Holds = &ours, &theirs, &ratio, &holds
}

// significant rounds to four digits: more would be noise.
func significant(x float64) float64 {
	if x == 0 || math.IsInf(x, 0) || math.IsNaN(x) {
		return 0
	}
	unit := math.Pow(10, 3-math.Floor(math.Log10(math.Abs(x))))
	return math.Round(x*unit) / unit
}

// sentence tells the row to whoever waits.
func (r row) sentence() string {
	if r.Ratio == nil {
		return r.Work + ", against " + r.Against
	}
	return fmt.Sprintf("%s, against %s: %s to %s, %.3g times", r.Work, r.Against, r.amount(*r.OursNS), r.amount(*r.TheirsNS), *r.Ratio)
}

// amount writes a time, or bytes where the work is counted in them.
func (r row) amount(x float64) string {
	if strings.Contains(r.Work, "bytes") {
		return fmt.Sprintf("%.1f MB", x/1e6)
	}
	d := time.Duration(x)
	switch {
	case d < 10*time.Microsecond:
		return fmt.Sprintf("%.0f ns", x)
	case d < 10*time.Millisecond:
		return fmt.Sprintf("%.1f µs", x/1e3)
	}
	return fmt.Sprintf("%.1f ms", x/1e6)
}

// demand writes what was asked.
func (r row) demand() string {
	if r.Asked < 1 {
		return fmt.Sprintf("at most %.3g times ours over theirs", 1/r.Asked)
	}
	return fmt.Sprintf("at least %.3g times", r.Asked)
}

func (r *result) write(w io.Writer, format string) error {
	if format == "json" {
		e := json.NewEncoder(w)
		e.SetIndent("", "  ")
		e.SetEscapeHTML(false)
		return e.Encode(r)
	}
	return r.table(w)
}

func (r *result) table(w io.Writer) error {
	s := r.Sizes
	_, err := fmt.Fprintf(w, "%s\n%d sites, %d people, %d fixtures, %d obligations, %d records over %d days; medians of %d rounds\n\n", r.Machine, s.Sites, s.People, s.Fixtures, s.Obligations, s.Records, s.Days, s.Rounds)
	if err != nil {
		return err
	}
	t := tabwriter.NewWriter(w, 0, 8, 2, ' ', 0)
	lines := []string{"work\tours\tagainst\ttheirs\tratio\tasked\tholds"}
	for _, x := range r.Rows {
		ours, theirs, ratio, holds := "-", "-", "-", "-"
		if x.Ratio != nil {
			ours, theirs, ratio, holds = x.amount(*x.OursNS), x.amount(*x.TheirsNS), fmt.Sprintf("%.3g", *x.Ratio), "no"
			if *x.Holds {
				holds = "yes"
			}
		}
		lines = append(lines, strings.Join([]string{x.Work, ours, x.Against, theirs, ratio, x.demand(), holds}, "\t"))
	}
	if _, err := fmt.Fprintln(t, strings.Join(lines, "\n")); err != nil {
		return err
	}
	return t.Flush()
}

// machine says on what the bench ran.
func machine() string {
	return fmt.Sprintf("%d cores, %s, %s/%s, %s", runtime.GOMAXPROCS(0), processor(), runtime.GOOS, runtime.GOARCH, runtime.Version())
}

// processor is the name of the processor, where the system tells it.
func processor() string {
	f, err := os.Open("/proc/cpuinfo")
	if err != nil {
		return "processor unknown"
	}
	defer func() { _ = f.Close() }() // it was only read
	lines := bufio.NewScanner(f)
	for lines.Scan() {
		if name, value, ok := strings.Cut(lines.Text(), ":"); ok && strings.TrimSpace(name) == "model name" {
			return strings.TrimSpace(value)
		}
	}
	return "processor unknown"
}
