package web

import (
	"encoding/base64"
	"encoding/json"
	"net/http"
	"time"
)

// notice is what the next page says once, at its top.
type notice struct {
	Text     string `json:"t"`
	Link     string `json:"l,omitempty"`
	LinkText string `json:"w,omitempty"`
}

const (
	noticeLife  = time.Minute
	noticeRoom  = 900 // bytes of text, so that the cookie stays well below its limit
	noticeEnded = "…"
)

func (s *server) noticeName() string { return s.cookieName() + "-notice" }

// setNotice leaves a notice for the next page.
func (v *visit) setNotice(n notice) {
	if len(n.Text) > noticeRoom {
		n.Text = string([]rune(n.Text)[:noticeRoom/4]) + noticeEnded
	}
	data, err := json.Marshal(n)
	if err != nil {
		return // strings always marshal
	}
	http.SetCookie(v.c.Writer, v.cookie(v.noticeName(), base64.RawURLEncoding.EncodeToString(data), noticeLife))
}

// hasNotice tells whether the page that is asked for is the one to show a notice.
func (v *visit) hasNotice() bool {
	_, err := v.c.Request.Cookie(v.noticeName())
	return err == nil
}

// takeNotice takes the notice that an earlier request left.
func (v *visit) takeNotice() *notice {
	c, err := v.c.Request.Cookie(v.noticeName())
	if err != nil {
		return nil
	}
	http.SetCookie(v.c.Writer, v.cookie(v.noticeName(), "", 0))
	data, err := base64.RawURLEncoding.DecodeString(c.Value)
	if err != nil {
		return nil
	}
	n := &notice{}
	if err := json.Unmarshal(data, n); err != nil || n.Text == "" {
		return nil
	}
	if n.Link != "" {
		n.Link = localPath(n.Link)
	}
	return n
}
