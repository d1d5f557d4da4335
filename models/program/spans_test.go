package program

import (
	"testing"
	"time"

	"pgregory.net/rapid"

	"lodebook/models/civil"
)

// The usual notice by the formats page: 30 days or a quarter of the cadence, whichever is shorter
// (a year counts 365 days, a quarter 90, a month 30, a week 7; rounded down); 30 days for once,
// none for after and holds.
func TestUsualNotice(t *testing.T) {
	p := mustParse(t, vocabulary+`
  - {code: "P1Y", title: T, asks: person, record: training/x, every: P1Y}
  - {code: "P6M", title: T, asks: person, record: training/x, every: P6M}
  - {code: "P3M", title: T, asks: person, record: training/x, every: P3M}
  - {code: "P1M", title: T, asks: person, record: training/x, every: P1M}
  - {code: "P2W", title: T, asks: person, record: training/x, every: P2W}
  - {code: "P1W", title: T, asks: person, record: training/x, every: P1W}
  - {code: "P3D", title: T, asks: person, record: training/x, every: P3D}
  - {code: "P3Y", title: T, asks: person, record: training/x, every: P3Y}
  - {code: within-P1M, title: T, asks: crew, record: drill/x, within: P1M}
  - {code: within-P2Y, title: T, asks: crew, record: drill/x, within: P2Y, count: 3}
  - {code: day, title: T, asks: site, record: check/x, each: day}
  - {code: week, title: T, asks: site, record: check/x, each: week}
  - {code: month, title: T, asks: site, record: check/x, each: month}
  - {code: quarter, title: T, asks: site, record: check/x, each: quarter}
  - {code: year, title: T, asks: site, record: check/x, each: year}
  - {code: once, title: T, asks: person, record: training/x, once: true}
  - {code: after, title: T, asks: person, record: screening/x, after: [change], within: P1D}
  - {code: holds, title: T, asks: post, holds: size(subject.holders) > 0}
`)
	want := map[string]int{
		"P1Y": 30, "P6M": 30, "P3M": 22, "P1M": 7, "P2W": 3, "P1W": 1, "P3D": 0, "P3Y": 30,
		"within-P1M": 7, "within-P2Y": 30,
		"day": 0, "week": 1, "month": 7, "quarter": 22, "year": 30,
		"once": 30, "after": 0, "holds": 0,
	}
	for _, it := range p.Items {
		if it.Notice.Given != nil || it.Notice.Days != want[it.Code] {
			t.Errorf("%s: notice %+v, want %d days", it.Code, it.Notice, want[it.Code])
		}
		first := civil.Duration{}
		if it.Cadence.Rule == Within {
			first = it.Cadence.Within
		}
		same(t, "first of "+it.Code, it.First, first)
		delete(want, it.Code)
	}
	if len(want) > 0 {
		t.Errorf("not read: %v", want)
	}
}

func TestGivenSpans(t *testing.T) {
	p := mustParse(t, vocabulary+`
  - {code: X, title: T, asks: crew, record: drill/x, within: P1Y, first: P0D, notice: P2M, grace: P7D}
`)
	it, notice := p.Items[0], length("P2M")
	same(t, "spans", []any{it.First, it.Notice, it.Grace}, []any{civil.Duration{}, Notice{Given: &notice}, length("P7D")})
}

func TestShorter(t *testing.T) {
	for _, c := range []struct {
		a, b string
		want bool
	}{
		{"P60D", "P1Y", true},
		{"P27D", "P1M", true},
		{"P28D", "P1M", false}, // from a day of February
		{"P364D", "P1Y", true},
		{"P365D", "P1Y", false},
		{"P1M", "P31D", false},
		{"P1M", "P32D", true},
		{"P11M", "P1Y", true},
		{"P12M", "P1Y", false},
		{"P1Y", "P366D", false},
		{"P1Y", "P367D", true},
		{"P1M1D", "P1M1W", true},
		{"P1W", "P7D", false},
		{"P0D", "P1D", true},
		{"P1M30D", "P2M", false},
		{"P1M27D", "P2M", true},
	} {
		if got := shorter(length(c.a), length(c.b)); got != c.want {
			t.Errorf("%s shorter than %s: %v, want %v", c.a, c.b, got, c.want)
		}
	}
}

// Against the plain statement, on every day of two spans that hold every sequence of months that
// the Gregorian calendar has within the lengths drawn: one around a leap century, one around
// another.
func TestShorterOnEveryDay(t *testing.T) {
	var days []civil.Day
	for _, year := range []int{1996, 2096} {
		for d := civil.Of(year, time.January, 1); d < civil.Of(year+9, time.January, 1); d++ {
			days = append(days, d)
		}
	}
	rapid.Check(t, func(t *rapid.T) {
		a, b := drawLength(t, "a"), drawLength(t, "b")
		want, most := true, 0
		for _, d := range days {
			want = want && d.Add(a) < d.Add(b)
			most = max(most, int(d.Add(a)-d))
		}
		if got := shorter(a, b); got != want {
			t.Fatalf("%s shorter than %s: %v, want %v", a, b, got, want)
		}
		if got := longest(a); got != most {
			t.Fatalf("%s spans up to %d days, found %d", a, got, most)
		}
	})
}

func drawLength(t *rapid.T, name string) civil.Duration {
	return civil.Duration{Months: rapid.IntRange(0, 14).Draw(t, name+" months"), Days: rapid.IntRange(0, 40).Draw(t, name+" days")}
}
