package program

import (
	"cmp"
	"fmt"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"time"
	_ "time/tzdata" // time zones must not depend on the machine's own list

	"lodebook/models/civil"
)

func (r *reader) site(root object) {
	const accepted = "write site: {code: A, name: Site A, time_zone: Europe/Lisbon}"
	n := root.need("site", accepted)
	if n == nil {
		return
	}
	o, ok := r.object(n, "site", "site")
	if !ok {
		return
	}
	s := &r.p.Site
	s.Code = o.ownCode()
	s.Name = o.named("name", s.Code)
	s.TimeZone, s.Location = o.timeZone()
	o.close()
}

func (o object) timeZone() (string, *time.Location) {
	const accepted = "write a name of the IANA time zone database, such as Atlantic/Azores or Etc/UTC"
	n := o.need("time_zone", accepted)
	if n == nil {
		return "", nil
	}
	s, ok := o.r.plainText(n, o.at("time_zone"), accepted)
	if !ok {
		return "", nil
	}
	loc, err := time.LoadLocation(s)
	// LoadLocation takes "" for UTC and "Local" for the machine's own zone.
	if err != nil || s == "" || s == "Local" {
		o.r.wrong(n, o.at("time_zone"), "no time zone has that name", accepted)
		return s, nil
	}
	return s, loc
}

// weekdays are the days of the week in the file's order and words.
var weekdays = []string{"mon", "tue", "wed", "thu", "fri", "sat", "sun"}

// weekday turns a place in weekdays into Go's.
func weekday(i int) time.Weekday { return time.Weekday((i + 1) % 7) }

func (r *reader) calendar(root object) {
	r.p.Calendar = civil.EveryDay()
	n := root.get("calendar")
	if n == nil || n.kind == nothing {
		return
	}
	o, ok := r.object(n, "calendar", "calendar")
	if !ok {
		return
	}
	r.openDays(o)
	r.closedDays(o)
	r.hours(o)
	o.close()
}

func (r *reader) openDays(o object) {
	if o.get("open") == nil {
		return
	}
	open := o.distinct("open", "write a list such as [mon, tue]", func(n *node, path string) string {
		return r.word(n, path, weekdays)
	})
	r.p.Calendar.Open = [7]bool{}
	for _, d := range open {
		r.p.Calendar.Open[weekday(slices.Index(weekdays, d))] = true
	}
}

func (r *reader) closedDays(o object) {
	o.distinct("closed", "write a list of days such as [2026-12-25]", func(n *node, path string) string {
		d := r.day(n, path)
		if d == nil {
			return ""
		}
		if r.p.Calendar.Closed == nil {
			r.p.Calendar.Closed = map[civil.Day]bool{}
		}
		r.p.Calendar.Closed[*d] = true
		return d.String()
	})
}

const acceptedHours = `write hours such as mon-fri: "07:30-20:00"`

// hours reads {mon-fri: "07:30-20:00", "sat, sun": ["08:00-12:00", "13:00-16:00"]}.
func (r *reader) hours(o object) {
	n := o.get("hours")
	if n == nil || n.kind == nothing {
		return
	}
	if n.kind != mapping {
		r.wrong(n, "calendar.hours", "not a mapping", acceptedHours)
		return
	}
	r.gather(n, "calendar.hours", func(e entry) { r.hoursOf(e) })
	slices.SortStableFunc(r.p.Hours, func(a, b OpenHours) int {
		return cmp.Or(cmp.Compare(a.Weekday, b.Weekday), cmp.Compare(a.From, b.From))
	})
	if most := 7 * 24; len(r.p.Hours) > most {
		r.fault(n, "calendar.hours", fmt.Sprintf("%d spans of hours", len(r.p.Hours)), "more than any week needs", fmt.Sprintf("write at most %d", most))
		return
	}
	if a, b, clash := overlap(r.p.Hours); clash {
		r.wrong(n, "calendar.hours", fmt.Sprintf("the hours %s and %s overlap", a, b), "write each hour of the week once")
	}
}

func (r *reader) hoursOf(e entry) {
	path := "calendar.hours." + e.key.text
	days, ok := dayList(e.key.text)
	if !ok {
		r.fault(e.key, path, shown(e.key.text), "not days of the week", "write mon, mon-fri or \"sat, sun\" with the days "+strings.Join(weekdays, ", "))
	}
	spans := []*node{e.value}
	paths := []string{path}
	if e.value.kind == list {
		spans, paths = e.value.items, nil
		for i := range spans {
			paths = append(paths, fmt.Sprintf("%s[%d]", path, i))
		}
	}
	for i, span := range spans {
		from, to, ok := hourSpan(span)
		if !ok {
			r.wrong(span, paths[i], "not hours of a day", `write hours in quotes such as "07:30-20:00"; "22:00-06:00" crosses midnight, "00:00-24:00" is the whole day`)
			continue
		}
		for _, d := range days {
			r.p.Hours = append(r.p.Hours, OpenHours{weekday(d), from, to})
		}
	}
}

// dayList reads "mon", "mon-fri", "fri-mon" or "mon, wed, fri" into places in weekdays.
func dayList(s string) ([]int, bool) {
	var days []int
	for _, part := range strings.FieldsFunc(s, func(c rune) bool { return c == ',' || c == ' ' }) {
		first, last, ranged := strings.Cut(part, "-")
		if !ranged {
			last = first
		}
		a, b := slices.Index(weekdays, first), slices.Index(weekdays, last)
		if a < 0 || b < 0 {
			return nil, false
		}
		for d := a; ; d = (d + 1) % 7 {
			if slices.Contains(days, d) {
				return nil, false
			}
			days = append(days, d)
			if d == b {
				break
			}
		}
	}
	return days, len(days) > 0
}

var spanPattern = regexp.MustCompile(`^(\d\d):(\d\d)-(\d\d):(\d\d)$`)

// hourSpan reads "07:30-20:00" into minutes from midnight; the end of hours that cross midnight
// lies beyond 24:00.
func hourSpan(n *node) (from, to int, ok bool) {
	m := spanPattern.FindStringSubmatch(strings.ReplaceAll(n.text, " ", ""))
	if n.kind != scalar || m == nil {
		return 0, 0, false
	}
	var v [4]int
	for i := range v {
		v[i], _ = strconv.Atoi(m[i+1]) // two digits each, by the pattern
	}
	const day = 24 * 60
	from, to = v[0]*60+v[1], v[2]*60+v[3]
	if v[1] > 59 || v[3] > 59 || from >= day || to > day || from == to {
		return 0, 0, false
	}
	if to < from {
		to += day
	}
	return from, to, true
}

// overlap finds two spans of the week that share a minute, over the end of the week too.
func overlap(hours []OpenHours) (a, b string, found bool) {
	const day, week = 24 * 60, 7 * 24 * 60
	for i, x := range hours {
		for _, y := range hours[i+1:] {
			gap := int(y.Weekday)*day + y.From - int(x.Weekday)*day - x.From
			if gap < x.To-x.From || gap+y.To-y.From > week {
				return x.String(), y.String(), true
			}
		}
	}
	return "", "", false
}

// String writes the hours as in the file.
func (h OpenHours) String() string {
	clock := func(m int) string { return fmt.Sprintf("%02d:%02d", m/60, m%60) }
	to := h.To
	if to > 24*60 {
		to -= 24 * 60
	}
	return fmt.Sprintf("%s %s-%s", weekdays[(int(h.Weekday)+6)%7], clock(h.From), clock(to))
}
