package program

import "testing"

func TestCadenceWords(t *testing.T) {
	p := mustParse(t, vocabulary+`
  - {code: a, title: T, asks: person, record: training/x, every: P1Y, to: month-end}
  - {code: b, title: T, asks: person, record: training/x, every: P1Y6M}
  - {code: c, title: T, asks: crew, record: drill/x, within: P1Y, count: 2}
  - {code: d, title: T, asks: crew, record: drill/x, within: P18M}
  - {code: e, title: T, asks: crew, record: drill/x, within: P3M, count: 5}
  - {code: f, title: T, asks: person, record: training/x, once: true}
  - {code: g, title: T, asks: site, record: check/x, each: day, days: operating}
  - {code: h, title: T, asks: site, record: check/x, each: week, days: operating}
  - {code: i, title: T, asks: site, record: check/x, each: quarter}
  - {code: j, title: T, asks: fixture, record: inspection/x, after: [roof-work, storm], within: P1D}
  - {code: k, title: T, asks: post, holds: size(subject.holders) > 0}
`)
	want := []string{
		"every year, to the end of the month", "every year and 6 months", "twice within a year", "once within 18 months",
		"5 times within 3 months", "once", "each operating day", "each week that has an operating day", "each quarter",
		"within a day after roof-work or storm", "always",
	}
	for i, it := range p.Items {
		same(t, it.Code, it.Cadence.Words(), want[i])
	}
}
