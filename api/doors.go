package api

import (
	"context"

	"github.com/gin-gonic/gin"

	"lodebook/models/book"
)

// mostPassages is how many door events one answer holds; a longer time is asked for in parts.
const mostPassages = 10000

// passages gives the door events of a time, judged: from, to and known_at are asked for in the query.
func (s *server) passages(c *gin.Context, a book.Actor) (any, error) {
	q := book.PassageQuery{Site: c.Param("site")}
	from, err := s.moment(c, "from")
	if err != nil {
		return nil, err
	}
	to, err := s.moment(c, "to")
	if err != nil {
		return nil, err
	}
	if q.KnownAt, err = s.moment(c, "known_at"); err != nil {
		return nil, err
	}
	if from == nil || to == nil {
		return nil, &book.Invalid{Faults: []book.Fault{{Field: "from", Problem: "and to are both needed", Accepted: "two instants, as 2026-03-01T08:30:00Z"}}}
	}
	q.From, q.To = *from, *to
	out := []book.PassageJSON{}
	_, err = s.b.Passages(context.WithoutCancel(c.Request.Context()), a, q, func(p book.PassageView) error {
		if len(out) == mostPassages {
			return &book.Invalid{Faults: []book.Fault{{Field: "to", Value: c.Query("to"), Problem: "is too far from the beginning: there are more than 10000 passages", Accepted: "a shorter time"}}}
		}
		out = append(out, p.JSON())
		return nil
	})
	return out, err
}

// rightsDiff gives what has to change in the doors' own system at a moment.
func (s *server) rightsDiff(c *gin.Context, a book.Actor) (any, error) {
	at, err := s.moment(c, "at")
	if err != nil {
		return nil, err
	}
	d, err := s.b.RightsDiff(context.WithoutCancel(c.Request.Context()), a, c.Param("site"), at)
	out := make([]book.HolderChangeJSON, len(d.Rows))
	for i, r := range d.Rows {
		out[i] = r.JSON()
	}
	return out, err
}
