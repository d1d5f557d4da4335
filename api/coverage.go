package api

import (
	"github.com/gin-gonic/gin"

	"lodebook/models/book"
)

// coverage tells when a site is short of people: from, to (days), item and known_at are asked for in the query.
func (s *server) coverage(c *gin.Context, a book.Actor) (any, error) {
	q := book.CoverQuery{Site: c.Param("site"), Item: c.Query("item")}
	var err error
	if q.From, q.To, err = s.b.CoverTime(c.Request.Context(), q.Site, c.Query("from"), c.Query("to")); err != nil {
		return nil, err
	}
	if q.KnownAt, err = s.moment(c, "known_at"); err != nil {
		return nil, err
	}
	x, err := s.b.Coverage(c.Request.Context(), a, q)
	out := make([]book.UncoveredJSON, len(x.Rows))
	for i, r := range x.Rows {
		out[i] = r.JSON()
	}
	return out, err
}
