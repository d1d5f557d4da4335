package book

import (
	"fmt"
	"strings"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// CadenceWords says how often an item asks.
func CadenceWords(c program.Cadence) string {
	switch c.Rule {
	case program.Every:
		return everyWords(c)
	case program.Within:
		if c.Count > 1 {
			return fmt.Sprintf("%s times within %s", smallNumber(c.Count), DurationWords(c.Within))
		}
		return "once within " + DurationWords(c.Within)
	case program.Once:
		return "once"
	case program.Each:
		if c.Operating && c.Each == civil.ByDay {
			return "every operating day"
		}
		return "each " + c.Each.String()
	case program.After:
		return "within " + DurationWords(c.Within) + " after " + strings.Join(c.After, " or ")
	default:
		return "must hold every day"
	}
}

func everyWords(c program.Cadence) string {
	s := "every " + strings.TrimPrefix(DurationWords(c.Every), "one ")
	if c.MonthEnd {
		s += ", kept to the month's end"
	}
	return s
}

// DurationWords says a duration: "one year", "six months", "30 days".
func DurationWords(d civil.Duration) string {
	var parts []string
	for _, p := range []struct {
		n    int
		word string
	}{{d.Years, "year"}, {d.Months, "month"}, {d.Weeks, "week"}, {d.Days, "day"}} {
		switch {
		case p.n == 1:
			parts = append(parts, "one "+p.word)
		case p.n > 1:
			parts = append(parts, smallNumber(p.n)+" "+p.word+"s")
		}
	}
	if len(parts) == 0 {
		return "no days"
	}
	return strings.Join(parts, " and ")
}

var numberWords = []string{"no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten", "eleven", "twelve"}

// smallNumber writes numbers up to twelve as words.
func smallNumber(n int) string {
	if n >= 0 && n < len(numberWords) {
		return numberWords[n]
	}
	return fmt.Sprint(n)
}
