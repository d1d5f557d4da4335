package standing

import "lodebook/models/civil"

// Facts are the values of one fact of subjects that hold at the site on the day, as known at k; nil where
// there is none. Each costs a look, where Profile derives everything that selectors may read.
func (e *Engine) Facts(site, code string, of []Subject, on civil.Day, k int64) []any {
	out := make([]any, len(of))
	v, err := e.view(site, k)
	if err != nil {
		return out
	}
	for i, s := range of {
		out[i] = v.fact(v.local(s), code, on)
	}
	return out
}
