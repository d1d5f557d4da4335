package web

import (
	"fmt"
	"net/http"
	"runtime/debug"

	"github.com/gin-gonic/gin"
)

// policy lets a page load this server's own styles, scripts and pictures and nothing else.
const policy = "default-src 'none'; style-src 'self'; script-src 'self'; img-src 'self' data:; font-src 'self'; connect-src 'self'; form-action 'self'; base-uri 'none'; frame-ancestors 'none'"

func setHeaders(h http.Header) {
	h.Set("Content-Security-Policy", policy)
	h.Set("X-Content-Type-Options", "nosniff")
	h.Set("Referrer-Policy", "same-origin")
	h.Set("Cross-Origin-Opener-Policy", "same-origin")
	h.Set("Cross-Origin-Resource-Policy", "same-origin")
	h.Set("Permissions-Policy", "camera=(), microphone=(), geolocation=()")
	h.Set("Cache-Control", "no-store")
}

func (s *server) headers(c *gin.Context) {
	setHeaders(c.Writer.Header())
	if s.o.Secure {
		c.Header("Strict-Transport-Security", "max-age=31536000")
	}
	c.Next()
}

// recover shows the fixed sentence when a handler panics; the cause is logged.
func (s *server) recover(c *gin.Context) {
	defer func() {
		cause := recover()
		if cause == nil {
			return
		}
		s.o.Log.Error("a page panicked", "path", c.FullPath(), "cause", cause, "stack", string(debug.Stack()))
		if !c.Writer.Written() {
			s.fail(&visit{server: s, c: c}, fmt.Errorf("panic: %v", cause))
		}
	}()
	c.Next()
}
