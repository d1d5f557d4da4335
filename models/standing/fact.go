package standing

import "lodebook/models/civil"

// Fact is the value of one fact of a subject that holds at the site on the day, as known at k; nil where
// there is none. It costs a look, where Profile derives everything that selectors may read.
func (e *Engine) Fact(site string, s Subject, code string, on civil.Day, k int64) any {
	v, err := e.view(site, k)
	if err != nil {
		return nil
	}
	return v.fact(v.local(s), code, on)
}
