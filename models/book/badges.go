package book

import (
	"slices"

	"lodebook/models/civil"
	"lodebook/models/store"
)

// putBadge notes who bears the badge of the row, or bore it.
func (m *model) putBadge(r store.PersonRow) {
	if r.Badge == "" {
		return
	}
	if codes := m.badges.get(r.Badge); !slices.Contains(codes, r.Code) {
		m.badges.set(r.Badge, append(codes, r.Code))
	}
}

// badgeHolder is the person whose badge it was on a day, as known at k; empty if it was nobody's. A badge is theirs
// from the day on that its line names, until a line of another person names the same badge from that day or a later
// one, or a line of their own names another badge.
func (m *model) badgeHolder(badge string, on civil.Day, k int64) string {
	if badge == "" {
		return ""
	}
	holder := ""
	var last store.PersonRow
	for _, code := range m.badges.get(badge) {
		for _, r := range m.people.get(code) {
			if r.Badge == badge && counts(r, on, k) && (holder == "" || laterBadge(r, last)) {
				holder, last = code, r
			}
		}
	}
	if holder == "" || m.badgeOf(holder, on, k) != badge {
		return ""
	}
	return holder
}

// badgeOf is the badge of a person on a day, as known at k.
func (m *model) badgeOf(person string, on civil.Day, k int64) string {
	var last store.PersonRow
	for _, r := range m.people.get(person) {
		if r.Badge != "" && counts(r, on, k) && (last.Badge == "" || laterBadge(r, last)) {
			last = r
		}
	}
	return last.Badge
}

func counts(r store.PersonRow, on civil.Day, k int64) bool {
	return r.Seq <= k && (r.Ended == 0 || r.Ended > k) && (r.From == nil || *r.From <= on)
}

// laterBadge tells whether a line of a badge takes the place of another: from a later day on, or recorded later.
func laterBadge(a, b store.PersonRow) bool {
	if d := compareDays(a.From, b.From, civil.FirstDay); d != 0 {
		return d > 0
	}
	return a.Seq > b.Seq
}

// badgeSpans are the runs of days, both ends included, on which the badge was the person's by all that is recorded.
func (m *model) badgeSpans(badge, person string) [][2]civil.Day {
	turns := []civil.Day{civil.FirstDay}
	for _, code := range m.badges.get(badge) {
		for _, r := range m.people.get(code) {
			if r.From != nil {
				turns = append(turns, *r.From)
			}
		}
	}
	slices.Sort(turns)
	var out [][2]civil.Day
	for _, d := range slices.Compact(turns) {
		if n := len(out); n > 0 && out[n-1][1] == civil.LastDay {
			out[n-1][1] = d - 1
		}
		if m.badgeHolder(badge, d, always64) == person {
			out = append(out, [2]civil.Day{d, civil.LastDay})
		}
	}
	return out
}
