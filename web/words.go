package web

import (
	"fmt"
	"strconv"
	"strings"
	"time"
	"unicode/utf8"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

var numberWords = []string{"no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten", "eleven", "twelve"}

// number writes numbers up to twelve as words and the others with a comma at each thousand.
func number(n int) string {
	if n >= 0 && n < len(numberWords) {
		return numberWords[n]
	}
	return grouped(int64(n))
}

// grouped writes a number with a comma at each thousand.
func grouped(n int64) string {
	s := fmt.Sprint(n)
	for i := len(s) - 3; i > 0 && s[i-1] != '-'; i -= 3 {
		s = s[:i] + "," + s[i:]
	}
	return s
}

// count writes "one person", "four people", "no fixtures".
func count(n int, one, many string) string {
	if n == 1 {
		return "one " + one
	}
	return number(n) + " " + many
}

func upperFirst(s string) string {
	r, size := utf8.DecodeRuneInString(s)
	if size == 0 {
		return s
	}
	return strings.ToUpper(string(r)) + s[size:]
}

// spaced writes a code as words.
func spaced(code string) string {
	return strings.NewReplacer("-", " ", "_", " ").Replace(code)
}

// and joins "a", "a and b", "a, b and c".
func and(parts []string) string {
	if len(parts) < 2 {
		return strings.Join(parts, "")
	}
	last := len(parts) - 1
	return strings.Join(parts[:last], ", ") + " and " + parts[last]
}

// shortDay is a day as a table has it: "30 Nov", with the year where it is not that of today.
func shortDay(d, today civil.Day) string {
	if d.Format("2006") == today.Format("2006") {
		return d.Format("2 Jan")
	}
	return d.Format("2 Jan 2006")
}

// shortDayOr is a day that may be absent.
func shortDayOr(d *civil.Day, today civil.Day, absent string) string {
	if d == nil {
		return absent
	}
	return shortDay(*d, today)
}

// longDay is a day as a heading has it: "Tuesday 1 December", with the year where it is not that of today.
func longDay(d, today civil.Day) string {
	if d.Format("2006") == today.Format("2006") {
		return d.Format("Monday 2 January")
	}
	return d.Format("Monday 2 January 2006")
}

// moment is an instant by the clocks of a zone: "1 Dec, 08:40".
func moment(t time.Time, zone *time.Location, today civil.Day) string {
	if zone == nil {
		zone = time.UTC
	}
	return shortDay(civil.DayOf(t, zone), today) + ", " + t.In(zone).Format("15:04")
}

// days writes a number of days: "today", "1 day", "30 days".
func days(n int) string {
	switch n {
	case 0:
		return "today"
	case 1:
		return "1 day"
	}
	return grouped(int64(n)) + " days"
}

// until says how far off a day is: "today", "tomorrow", "in 9 days", "3 days ago".
func until(d, today civil.Day) string {
	switch n := int(d - today); {
	case n == 0:
		return "today"
	case n == 1:
		return "tomorrow"
	case n == -1:
		return "yesterday"
	case n < 0:
		return days(-n) + " ago"
	default:
		return "in " + days(n)
	}
}

// word is a standing as it is read: the code names it, and "cannot be told" is a data fault.
func word(w standing.Word) string {
	if w == standing.DataFault {
		return "cannot be told"
	}
	return string(w)
}

// askedOf names many subjects of a kind: "four people", "three fixtures".
func askedOf(n int, asks program.Asks) string {
	names := map[program.Asks][2]string{
		program.AsksPerson: {"person", "people"}, program.AsksFixture: {"fixture", "fixtures"}, program.AsksZone: {"zone", "zones"},
		program.AsksCrew: {"crew", "crews"}, program.AsksPost: {"post", "posts"}, program.AsksDocument: {"document", "documents"},
		program.AsksSite: {"site", "sites"}, book.AsksRemedy: {"remedy", "remedies"}, book.AsksReport: {"report", "reports"},
	}
	w := names[asks]
	return count(n, w[0], w[1])
}

func faultLines(faults program.Faults) []string {
	out := make([]string, len(faults))
	for i, f := range faults {
		out[i] = fmt.Sprintf("Line %d, column %d: %s", f.Line, f.Column, f.Sentence())
	}
	return out
}

// trimNumber writes a number without zeros at its end.
func trimNumber(n float64) string { return strconv.FormatFloat(n, 'f', -1, 64) }
