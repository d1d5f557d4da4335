package api

import (
	"github.com/gin-gonic/gin"

	"lodebook/models/book"
)

// remedies are those that the account may see; ?open=1 leaves the closed ones out.
func (s *server) remedies(c *gin.Context, a book.Actor) (any, error) {
	site := c.Param("site")
	list, err := s.b.Remedies(c.Request.Context(), a, site, c.Query("open") != "")
	out := make([]book.RemedyJSON, len(list))
	for i, x := range list {
		out[i] = x.JSON(site)
	}
	return out, err
}

// incidents are for safety officers.
func (s *server) incidents(c *gin.Context, a book.Actor) (any, error) {
	site := c.Param("site")
	list, err := s.b.Incidents(c.Request.Context(), a, site)
	out := make([]book.IncidentJSON, len(list))
	for i, x := range list {
		out[i] = x.JSON(site)
	}
	return out, err
}
