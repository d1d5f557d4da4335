package web

import (
	"strconv"
	"strings"
)

// perPage is how many lines of a long list one page shows.
const perPage = 100

// pager is the foot of a long list.
type pager struct {
	First, Last, Total int // lines shown, from 1
	Prev, Next         string
}

// More tells whether the list has more than one page.
func (p pager) More() bool { return p.Prev != "" || p.Next != "" }

// paged cuts a long list to the page that the address asks for.
func paged[T any](v *visit, list []T) ([]T, pager) {
	n, err := strconv.Atoi(v.query("page"))
	if err != nil || n < 1 || (n-1)*perPage >= len(list) {
		n = 1
	}
	first := (n - 1) * perPage
	last := min(first+perPage, len(list))
	p := pager{First: first + 1, Last: last, Total: len(list)}
	if n > 1 {
		p.Prev = v.pageURL(n - 1)
	}
	if last < len(list) {
		p.Next = v.pageURL(n + 1)
	}
	return list[first:last], p
}

func (v *visit) pageURL(n int) string {
	q := v.c.Request.URL.Query()
	q.Set("page", strconv.Itoa(n))
	return v.c.Request.URL.EscapedPath() + "?" + q.Encode()
}

// finder is the box that filters a list by words.
type finder struct {
	Path, Query, Label string
	Keep               []hidden
	Shown, Total       int
}

// find keeps the lines in whose text every word of ?find= stands.
func find[T any](v *visit, list []T, label string, text func(T) string) ([]T, finder) {
	f := finder{Path: v.c.Request.URL.EscapedPath(), Query: v.query("find"), Label: label, Total: len(list), Shown: len(list)}
	for _, k := range v.keys("find", "page") {
		for _, value := range v.c.Request.URL.Query()[k] {
			f.Keep = append(f.Keep, hidden{k, value})
		}
	}
	words := strings.Fields(strings.ToLower(f.Query))
	if len(words) == 0 {
		return list, f
	}
	var out []T
	for _, x := range list {
		if hasAll(strings.ToLower(text(x)), words) {
			out = append(out, x)
		}
	}
	f.Shown = len(out)
	return out, f
}

func hasAll(text string, words []string) bool {
	for _, w := range words {
		if !strings.Contains(text, w) {
			return false
		}
	}
	return true
}
