package standing

import (
	"maps"
	"slices"
	"strings"
)

// limits numbers the sets of zones to which clearances with a restriction are limited; 0 is no limit. It is copied when
// one is added.
type limits struct {
	number map[string]uint16
	zones  [][]string // by number, from 1
}

// put numbers a set of zones.
func (l *limits) put(zones []string) uint16 {
	if len(zones) == 0 {
		return 0
	}
	zones = slices.Sorted(slices.Values(zones))
	key := strings.Join(zones, " ")
	no, ok := l.number[key]
	if !ok {
		if len(l.zones) == 1<<16-1 {
			panic("a book of more than 65535 different limits")
		}
		if l.number = maps.Clone(l.number); l.number == nil {
			l.number = map[string]uint16{}
		}
		l.zones = append(l.zones[:len(l.zones):len(l.zones)], zones)
		no = uint16(len(l.zones))
		l.number[key] = no
	}
	return no
}

// allow tells whether a limit leaves the zone open.
func (l *limits) allow(no uint16, zone string) bool {
	return no == 0 || slices.Contains(l.zones[no-1], zone)
}
