package reach

import (
	"slices"
	"sort"
	"time"

	"lodebook/models/standing"
)

// Then tells whether people were entitled at instants, each as the book knew it at a moment of its own. It remembers what
// it worked out for a person as long as nothing that bears on them came on record between, so that to be quick it is asked
// about each person in order of moments. It is for one caller at a time.
type Then struct {
	e       *standing.Engine
	site    string
	changes map[string][]int64
	last    map[personZone]*remembered
	latest  *Reader // for all of whom nothing came on record after their moment
}

type personZone struct{ person, zone string }

// remembered is what was known of a person at a moment.
type remembered struct {
	k      int64   // the last change up to the moment
	reader *Reader // until there is a ribbon
	asked  int
	ribbon []Span // made when it is worth it
}

const (
	ribbonAfter = 6    // so many questions about the same are answered one by one
	mostPeople  = 5000 // of whom something is remembered
)

// NewThen makes ready to answer about a site.
func NewThen(e *standing.Engine, site string) *Then {
	return &Then{e: e, site: site, changes: map[string][]int64{}, last: map[personZone]*remembered{}}
}

// At tells whether the person was entitled to the zone at the instant as known at sequence number k, and if not, why.
// The error tells that the site was not known.
func (t *Then) At(person, zone string, at time.Time, k int64) (entitled bool, reasons []Reason, err error) {
	m, err := t.remember(person, zone, k)
	if err != nil {
		return false, nil, err
	}
	m.asked++
	if m.asked > ribbonAfter && m.ribbon == nil {
		m.ribbon, m.reader = m.reader.Ribbon(person, zone), nil
	}
	if m.ribbon == nil {
		w := m.reader.whereabouts(person, zone)
		entitled, reasons = m.reader.judge(&w, zone, at, func(item string) standing.Stretch { return m.reader.g.At(item, zone, person, at) })
		return entitled, reasons, nil
	}
	i, _ := slices.BinarySearchFunc(m.ribbon, at, func(s Span, at time.Time) int {
		if s.To.IsZero() || s.To.After(at) {
			return 1
		}
		return -1
	})
	return m.ribbon[i].Entitled, m.ribbon[i].Reasons, nil
}

// remember gives what is remembered of the person as known at k.
func (t *Then) remember(person, zone string, k int64) (*remembered, error) {
	changes, ok := t.changes[person]
	if !ok {
		if len(t.changes) >= mostPeople {
			clear(t.changes)
			clear(t.last)
		}
		changes = t.e.Changes(t.site, person)
		t.changes[person] = changes
	}
	n := sort.Search(len(changes), func(i int) bool { return changes[i] > k })
	known := int64(-1)
	if n > 0 {
		known = changes[n-1]
	}
	if n == len(changes) {
		known = standing.Always // nothing came after
	}
	key := personZone{person, zone}
	if m := t.last[key]; m != nil && m.k == known {
		return m, nil
	}
	r, err := t.open(known)
	if err != nil {
		return nil, err
	}
	m := &remembered{k: known, reader: r}
	t.last[key] = m
	return m, nil
}

// open is a reader of what was known at a moment.
func (t *Then) open(known int64) (*Reader, error) {
	if known != standing.Always {
		return New(t.e, t.site, known)
	}
	if t.latest == nil {
		r, err := New(t.e, t.site, known)
		if err != nil {
			return nil, err
		}
		t.latest = r
	}
	return t.latest, nil
}
