package web

import (
	"unsafe"

	"lodebook/models/book"
	"lodebook/models/civil"
)

// short is what asks for attention at a site on a day, with what is counted of it.
type short struct {
	book.Short
	counts book.SpineCounts
}

// shortRoom is how many bytes of what asks for attention are held in memory: the same for everybody who
// sees the site.
const shortRoom = 48 << 20

// short is what asks for the visitor's attention on the day that the page shows. Its rows are shared: they
// are read and never written.
func (v *visit) short() (short, error) {
	if !v.may(book.SeeSite) {
		st, err := v.b.Short(v.ctx(), v.actor, v.site.Code, v.on)
		return short{Short: st}, err
	}
	return v.shortAt(v.site.Code, v.on)
}

// shortAt is the same for whoever sees the site; they have been let in already.
func (v *visit) shortAt(site string, on *civil.Day) (short, error) {
	return v.shorts.get(v.ctx(), onQuery(on)+" "+site, v.b.Stamp, func() (made[short], error) {
		st, err := v.b.Short(v.ctx(), v.actor, site, on)
		if err != nil {
			return made[short]{}, err
		}
		x := short{st, book.SpineCounts{Gaps: len(st.Gaps()), Due: st.Due(), Entries: st.Entries}}
		return made[short]{x, int(unsafe.Sizeof(x)) + len(st.Rows)*rowBytes}, nil
	})
}

// flagRoom is how many bytes of what is known of flags that came back are held in memory.
const flagRoom = 4 << 20

// rowBytes is about what a row takes, with the days and texts that are its own.
const rowBytes = int(unsafe.Sizeof(book.Row{})) + 100
