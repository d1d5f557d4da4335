package api

import (
	"context"
	"time"

	"github.com/gin-gonic/gin"

	"lodebook/models/book"
)

// reach tells who is entitled to a zone: zone, at, known_at and person are asked for in the query.
func (s *server) reach(c *gin.Context, a book.Actor) (any, error) {
	q := book.ReachQuery{Site: c.Param("site"), Zone: c.Query("zone"), Person: c.Query("person")}
	for name, to := range map[string]**time.Time{"at": &q.At, "known_at": &q.KnownAt} {
		t, err := s.moment(c, name)
		if err != nil {
			return nil, err
		}
		*to = t
	}
	x, err := s.b.Reach(context.WithoutCancel(c.Request.Context()), a, q)
	out := make([]book.ReachJSON, len(x.Rows))
	for i, r := range x.Rows {
		out[i] = r.JSON()
	}
	return out, err
}

// moment reads an instant of the query: RFC 3339, or local time at the site; nil where it is not given.
func (s *server) moment(c *gin.Context, name string) (*time.Time, error) {
	text := c.Query(name)
	if text == "" {
		return nil, nil
	}
	t, err := s.b.Moment(c.Request.Context(), c.Param("site"), name, text)
	return &t, err
}
