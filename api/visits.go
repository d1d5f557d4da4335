package api

import (
	"context"

	"github.com/gin-gonic/gin"

	"lodebook/models/book"
	"lodebook/models/civil"
)

// visits gives the visits of a day: on and open are asked for in the query.
func (s *server) visits(c *gin.Context, a book.Actor) (any, error) {
	q := book.VisitQuery{Site: c.Param("site"), Open: c.Query("open") != ""}
	if text := c.Query("on"); text != "" {
		d, err := civil.ParseDay(text)
		if err != nil {
			return nil, &book.Invalid{Faults: []book.Fault{{Field: "on", Value: text, Problem: "is not a day", Accepted: "write it as YYYY-MM-DD"}}}
		}
		q.On = &d
	}
	list, err := s.b.Visits(context.WithoutCancel(c.Request.Context()), a, q)
	out := make([]book.VisitJSON, len(list))
	for i, v := range list {
		out[i] = v.JSON()
	}
	return out, err
}
