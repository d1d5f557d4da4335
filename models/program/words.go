package program

import (
	"fmt"
	"strings"

	"lodebook/models/civil"
)

// Words says the cadence in words, as in "every year", "twice within a year", "each operating day"
// or "within 2 days after roof-work".
func (c Cadence) Words() string {
	switch c.Rule {
	case Every:
		words := "every " + span(c.Every, "")
		if c.MonthEnd {
			words += ", to the end of the month"
		}
		return words
	case Within:
		return times(c.Count) + " within " + span(c.Within, "a ")
	case Once:
		return "once"
	case Each:
		if c.Operating && c.Each == civil.ByDay {
			return "each operating day"
		}
		if c.Operating {
			return "each " + c.Each.String() + " that has an operating day"
		}
		return "each " + c.Each.String()
	case After:
		return "within " + span(c.Within, "a ") + " after " + anyOf(c.After)
	case Holds:
		return "always"
	case Cover:
		if c.Cover == nil || c.Cover.AllDay {
			return "at all hours"
		}
		return "in all operating hours"
	}
	return ""
}

func times(n int) string {
	switch n {
	case 1:
		return "once"
	case 2:
		return "twice"
	}
	return fmt.Sprintf("%d times", n)
}

// span says a duration in words; one writes a single year, month, week or day without its number.
func span(d civil.Duration, one string) string {
	var parts []string
	for _, p := range []struct {
		n    int
		unit string
	}{{d.Years, "year"}, {d.Months, "month"}, {d.Weeks, "week"}, {d.Days, "day"}} {
		switch {
		case p.n == 1 && len(parts) == 0:
			parts = append(parts, one+p.unit)
		case p.n == 1:
			parts = append(parts, "1 "+p.unit)
		case p.n > 1:
			parts = append(parts, fmt.Sprintf("%d %ss", p.n, p.unit))
		}
	}
	if len(parts) == 0 {
		return "0 days"
	}
	return strings.Join(parts, " and ")
}
