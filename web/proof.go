package web

import (
	"net/http"
	"strconv"

	"lodebook/models/book"
)

// proof is a page that is ready to be sent.
type proof struct {
	status int
	body   []byte
}

// pageRoom is how many bytes of pages are held in memory.
const pageRoom = 32 << 20

func (v *visit) send(p proof) {
	v.c.Header("Content-Length", strconv.Itoa(len(p.body)))
	v.c.Data(p.status, "text/html; charset=utf-8", p.body)
}

// fromMemory gives the page as it was made before, if it would be made the same now, else makes it and
// holds it for the next who ask. Only whole pages are held: no error, no file.
func (v *visit) fromMemory(r route) error {
	p, err := v.pages.get(v.ctx(), v.pageKey(), v.b.Stamp, func() (made[proof], error) {
		v.proof = &proof{}
		if err := v.make(r); err != nil {
			return made[proof]{}, err
		}
		if v.proof.status != http.StatusOK {
			return made[proof]{value: *v.proof}, nil
		}
		return made[proof]{*v.proof, len(v.proof.body)}, nil
	})
	if err != nil || p.status == 0 { // the handler has sent a file by itself
		return err
	}
	v.send(p)
	return nil
}

// pageKey is all that a held page hangs on beside the book and the day: who asks, and for what.
func (v *visit) pageKey() string {
	return actorKey(v.actor) + " " + v.c.Request.URL.RequestURI()
}

// actorKey tells actors apart by everything that is known of them.
func actorKey(a book.Actor) string {
	until := ""
	if a.Until != nil {
		until = a.Until.String()
	}
	var key []byte
	for _, part := range append([]string{a.Account, a.Name, string(a.Role), a.Person, until}, a.Sites...) {
		key = strconv.AppendQuote(key, part)
	}
	return string(key)
}
