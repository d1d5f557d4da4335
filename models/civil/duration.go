package civil

import (
	"fmt"
	"strconv"
	"strings"
	"time"
)

// Duration is an ISO 8601 duration of whole years, months, weeks and days. Its parts are never
// negative; the zero value is P0D.
type Duration struct {
	Years, Months, Weeks, Days int
}

// maxPart keeps every sum of a day and a duration far inside what Day can hold.
const maxPart = 1000

// ParseDuration reads P1Y2M3W4D and its shorter forms; a time part is refused, since the book
// counts in civil days.
func ParseDuration(s string) (Duration, error) {
	bad := func() (Duration, error) {
		return Duration{}, fmt.Errorf("%q is not a duration; write years, months, weeks and days as in P1Y, P6M, P2W or P30D", s)
	}
	rest, ok := strings.CutPrefix(s, "P")
	if !ok || rest == "" {
		return bad()
	}
	var d Duration
	units := "YMWD"
	for rest != "" {
		i := 0
		for i < len(rest) && rest[i] >= '0' && rest[i] <= '9' {
			i++
		}
		if i == 0 || i == len(rest) {
			return bad()
		}
		n, err := strconv.Atoi(rest[:i])
		if err != nil || n > maxPart*10 {
			return bad()
		}
		u := strings.IndexByte(units, rest[i])
		if u < 0 {
			return bad()
		}
		switch units[u] {
		case 'Y':
			d.Years = n
		case 'M':
			d.Months = n
		case 'W':
			d.Weeks = n
		case 'D':
			d.Days = n
		}
		units = units[u+1:]
		rest = rest[i+1:]
	}
	if d.Years > maxPart || d.Months > maxPart*10 || d.Weeks > maxPart*10 || d.Days > maxPart*10 {
		return bad()
	}
	return d, nil
}

// String writes the duration in ISO 8601, parts of zero left out; the zero duration is P0D.
func (d Duration) String() string {
	if d.IsZero() {
		return "P0D"
	}
	var b strings.Builder
	b.WriteByte('P')
	for _, p := range []struct {
		n int
		u byte
	}{{d.Years, 'Y'}, {d.Months, 'M'}, {d.Weeks, 'W'}, {d.Days, 'D'}} {
		if p.n != 0 {
			b.WriteString(strconv.Itoa(p.n))
			b.WriteByte(p.u)
		}
	}
	return b.String()
}

// IsZero tells whether the duration is P0D.
func (d Duration) IsZero() bool { return d == Duration{} }

// MarshalText writes the duration for JSON and YAML.
func (d Duration) MarshalText() ([]byte, error) { return []byte(d.String()), nil }

// UnmarshalText reads what MarshalText wrote.
func (d *Duration) UnmarshalText(b []byte) error {
	v, err := ParseDuration(string(b))
	if err != nil {
		return err
	}
	*d = v
	return nil
}

// NominalDays is the length by the plain count that the default notice uses: a year is 365 days,
// a month 30, a week 7.
func (d Duration) NominalDays() int { return d.Years*365 + d.Months*30 + d.Weeks*7 + d.Days }

// Add moves the day forward: years and months in one step (a day that the month does not have
// becomes its last day), then weeks and days, after XML Schema part 2, appendix E. The result is
// held inside FirstDay and LastDay.
func (d Day) Add(p Duration) Day { return d.shift(p, 1) }

// Sub moves the day back by the same steps as Add. It does not always undo Add.
func (d Day) Sub(p Duration) Day { return d.shift(p, -1) }

func (d Day) shift(p Duration, sign int) Day {
	if months := (p.Years*12 + p.Months) * sign; months != 0 {
		y, m, day := d.Date()
		total := y*12 + int(m) - 1 + months
		ny, nm := floorDiv(total, 12), time.Month(total-floorDiv(total, 12)*12+1)
		if last := DaysIn(ny, nm); day > last {
			day = last
		}
		d = Of(ny, nm, day)
	}
	d += Day(sign * (p.Weeks*7 + p.Days))
	return min(max(d, FirstDay), LastDay)
}

func floorDiv(a, b int) int {
	q := a / b
	if a%b < 0 {
		q--
	}
	return q
}
