package standing

import (
	"maps"
	"slices"

	"lodebook/models/civil"
)

// calendar says which rows of a board may turn on which day. What it says of a row may be old: whoever
// comes to the day looks at the row again.
type calendar struct {
	first civil.Day
	near  [aheadDays][]ref // the days from the first on
	far   map[civil.Day][]ref
}

const aheadDays = 512

func newCalendar(first civil.Day) *calendar {
	return &calendar{first: first, far: map[civil.Day][]ref{}}
}

func (c *calendar) put(d civil.Day, r ref) {
	if i := d - c.first; 0 <= i && i < aheadDays {
		c.near[i] = append(c.near[i], r)
		return
	}
	c.far[d] = append(c.far[d], r)
}

func (c *calendar) on(d civil.Day) []ref {
	if i := d - c.first; 0 <= i && i < aheadDays {
		return c.near[i]
	}
	return c.far[d]
}

// from gives a calendar of its own that begins on a later day; the days before are left out.
func (c *calendar) from(first civil.Day) *calendar {
	f := newCalendar(first)
	for i := range f.near {
		f.near[i] = slices.Clip(c.on(first + civil.Day(i)))
	}
	f.far = maps.Clone(c.far)
	maps.DeleteFunc(f.far, func(d civil.Day, _ []ref) bool { return d < first+aheadDays })
	return f
}
