package web

import (
	"errors"
	"fmt"
	"io"
	"net/http"
	"net/http/httptest"
	"slices"
	"sync"
	"sync/atomic"
	"testing"
	"time"

	"github.com/gin-gonic/gin"

	"lodebook/models/book"
)

// The pages that a safety officer opens first each morning.
var firstPages = []string{"/s/" + fell + "/today", "/s/" + fell + "/gaps"}

// BenchmarkPages lets 50 signed-in clients ask for a page of a site of 5,000 people, and for the same
// bytes from a bare handler, one after the other over the network of this machine.
func BenchmarkPages(b *testing.B) {
	h := crowded(b, 5000)
	jars := h.crowd(50)
	for _, path := range firstPages {
		b.Run(path[len("/s/"+fell+"/"):], func(b *testing.B) {
			body := h.page(jars[0], path).Body.Bytes()
			bare := load{handler: bareHandler(path, body), jars: jars, path: path, size: len(body)}
			pages := load{handler: h.handler, jars: jars, path: path}
			b.ResetTimer()
			ours := pages.run(b, b.N)
			b.StopTimer()
			theirs := bare.run(b, b.N)
			b.ReportMetric(0, "ns/op")
			b.ReportMetric(float64(len(body))/1000, "kB")
			b.ReportMetric(ours.rate, "pages/s")
			b.ReportMetric(theirs.rate, "bare/s")
			b.ReportMetric(ours.rate/theirs.rate, "ratio")
			b.ReportMetric(ours.p99.Seconds()*1000, "p99-ms")
			b.ReportMetric(theirs.p99.Seconds()*1000, "bare-p99-ms")
		})
	}
}

// bareHandler writes the bytes and does nothing else.
func bareHandler(path string, body []byte) http.Handler {
	gin.SetMode(gin.ReleaseMode)
	e := gin.New()
	e.GET(path, func(c *gin.Context) { c.Data(http.StatusOK, "text/html; charset=utf-8", body) })
	return e
}

// crowd signs n accounts in: officers, facilities, readers, administrators and members.
func (h *house) crowd(n int) []*jar {
	h.Helper()
	roles := []book.Role{book.SafetyOfficer, book.Facilities, book.Reader, book.Administrator}
	out := make([]*jar, n)
	for i := range out {
		f := book.AccountForm{Name: fmt.Sprintf("account %d", i+1), Role: roles[i%len(roles)]}
		if f.Role != book.Administrator {
			f.Sites = []string{fell}
		}
		_, err := h.b.AddAccount(h.Context(), h.op, f)
		h.ok(err)
		secret, err := h.b.NewLink(h.Context(), h.op, f.Name)
		h.ok(err)
		in, err := h.b.SignInByLink(h.Context(), secret)
		h.ok(err)
		out[i] = &jar{map[string]string{"lodebook": in.Secret}}
	}
	return out
}

// load is one page asked for by many clients at once, each with a connection and a session of its own.
// With a size, every answer must have so many bytes.
type load struct {
	handler http.Handler
	jars    []*jar
	path    string
	size    int
}

type pace struct {
	rate float64 // answers a second
	p99  time.Duration
}

// run asks n times in all.
func (l load) run(t testing.TB, n int) pace {
	t.Helper()
	srv := httptest.NewServer(l.handler)
	defer srv.Close()
	var left atomic.Int64
	left.Store(int64(n))
	took := make([][]time.Duration, len(l.jars))
	failed := make(chan error, len(l.jars))
	var all sync.WaitGroup
	began := time.Now()
	for i, j := range l.jars {
		all.Go(func() {
			client := &http.Client{Transport: &http.Transport{}, CheckRedirect: func(*http.Request, []*http.Request) error { return http.ErrUseLastResponse }}
			defer client.CloseIdleConnections()
			for left.Add(-1) >= 0 {
				start := time.Now()
				if err := l.ask(client, srv.URL, j); err != nil {
					failed <- err
					return
				}
				took[i] = append(took[i], time.Since(start))
			}
		})
	}
	all.Wait()
	spent := time.Since(began)
	select {
	case err := <-failed:
		t.Fatal(err)
	default:
	}
	times := slices.Concat(took...)
	slices.Sort(times)
	return pace{float64(len(times)) / spent.Seconds(), times[len(times)*99/100]}
}

// ask sends one request and reads the answer whole.
func (l load) ask(client *http.Client, url string, j *jar) error {
	r, err := http.NewRequest(get, url+l.path, nil)
	if err != nil {
		return err
	}
	r.AddCookie(&http.Cookie{Name: "lodebook", Value: j.cookies["lodebook"]})
	w, err := client.Do(r)
	if err != nil {
		return err
	}
	n, err := io.Copy(io.Discard, w.Body)
	err = errors.Join(err, w.Body.Close())
	switch {
	case err != nil:
		return err
	case w.StatusCode != http.StatusOK:
		return fmt.Errorf("%s: %s", l.path, w.Status)
	case l.size != 0 && int(n) != l.size:
		return fmt.Errorf("%s: %d bytes, want %d", l.path, n, l.size)
	}
	return nil
}

// BenchmarkFresh makes the pages anew each time, since the minute is another one.
func BenchmarkFresh(b *testing.B) {
	h := crowded(b, 5000)
	j, morning := h.as(book.SafetyOfficer), h.now
	for _, path := range firstPages {
		b.Run(path[len("/s/"+fell+"/"):], func(b *testing.B) {
			for i := 0; b.Loop(); i++ {
				h.now = morning.Add(time.Duration(i%2) * time.Minute)
				h.page(j, path)
			}
		})
	}
}
