package main

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"net"
	"net/http"
	"slices"
	"strings"
	"sync"
	"sync/atomic"
	"time"

	"github.com/gin-gonic/gin"

	"lodebook/api"
	"lodebook/cmd/lodeload/network"
	"lodebook/models/book"
	"lodebook/web"
)

const clients = 50

// pageRows ask for the first pages of a large site by many clients at once, and for the same bytes of a handler that
// does nothing else.
func pageRows(b *bench) ([]*contest, error) {
	path, n, err := b.makeBook("pages.book", network.Size{Seed: b.network.Seed, Sites: 1, People: b.page, Fixtures: max(12, b.page/10), Days: b.network.Days})
	if err != nil {
		return nil, err
	}
	k, err := book.Open(b.ctx, path, goingOn(n.Size))
	if err != nil {
		return nil, err
	}
	err = k.Turn(b.ctx)
	handler, failed := web.New(k, web.Options{API: func(r gin.IRouter, auth func(*http.Request) (book.Actor, error)) { api.Register(r, k, auth) }})
	site := network.SiteCode(0)
	cookies, unsigned := b.signIn(k, site)
	if err = errors.Join(err, failed, unsigned); err != nil {
		return nil, errors.Join(err, k.Close())
	}
	var out []*contest
	for _, page := range []string{"today", "gaps"} {
		c, err := b.pageRow(handler, cookies, "/s/"+site+"/"+page, page)
		if err != nil {
			return nil, errors.Join(err, k.Close())
		}
		out = append(out, c)
	}
	last := out[len(out)-1]
	stop := last.close
	last.close = func() error { return errors.Join(stop(), k.Close()) }
	return out, nil
}

// signIn gives each client a session of its own.
func (b *bench) signIn(k *book.Book, site string) ([]*http.Cookie, error) {
	var out []*http.Cookie
	for i := range clients {
		name := fmt.Sprintf("client %d", i+1)
		if _, err := k.AddAccount(b.ctx, maker, book.AccountForm{Name: name, Role: book.SafetyOfficer, Sites: []string{site}}); err != nil {
			return nil, err
		}
		secret, err := k.NewLink(b.ctx, maker, name)
		if err != nil {
			return nil, err
		}
		in, err := k.SignInByLink(b.ctx, secret)
		if err != nil {
			return nil, err
		}
		out = append(out, &http.Cookie{Name: "lodebook", Value: in.Secret})
	}
	return out, nil
}

func (b *bench) pageRow(handler http.Handler, cookies []*http.Cookie, path, name string) (*contest, error) {
	ours, err := b.serve(handler)
	if err != nil {
		return nil, err
	}
	body, err := ours.get(&http.Client{}, cookies[0], path)
	if err != nil {
		return nil, err
	}
	gin.SetMode(gin.ReleaseMode)
	bare := gin.New()
	bare.GET(path, func(c *gin.Context) { c.Data(http.StatusOK, "text/html; charset=utf-8", body) })
	theirs, err := b.serve(bare)
	if err != nil {
		return nil, err
	}
	slowest := [2]time.Duration{}
	return &contest{
		work: fmt.Sprintf("the page %s of %d people, %d clients", name, b.page, clients), against: "a bare handler of the same bytes", asked: 0.25,
		check: func() error {
			again, err := ours.get(&http.Client{}, cookies[0], path)
			if err == nil && (!bytes.Equal(again, body) || !strings.Contains(string(body), "</html>")) {
				err = errors.New("a page is not the same when it is asked for again")
			}
			return err
		},
		ours:   b.visits(ours, cookies, path, &slowest[0]),
		theirs: b.visits(theirs, cookies, path, &slowest[1]),
		words: func() string {
			return fmt.Sprintf("%d kB; 99th percentile %.1f ms to %.1f ms", len(body)/1000, slowest[0].Seconds()*1000, slowest[1].Seconds()*1000)
		},
		close: func() error { return errors.Join(ours.stop(), theirs.stop()) },
	}, nil
}

// visits is a side in which the clients ask b.loads times in all; its unit is one answer. slowest is the time
// in which 99 of 100 answers of the last round came.
func (b *bench) visits(s *served, cookies []*http.Cookie, path string, slowest *time.Duration) func() (float64, error) {
	return func() (float64, error) {
		var next atomic.Int64
		var all sync.WaitGroup
		took := make([][]time.Duration, len(cookies))
		errs := make([]error, len(cookies))
		began := b.clock()
		for i, cookie := range cookies {
			all.Go(func() {
				client := &http.Client{Transport: &http.Transport{}}
				defer client.CloseIdleConnections()
				for next.Add(1) <= int64(b.loads) && errs[i] == nil {
					start := b.clock()
					_, errs[i] = s.get(client, cookie, path)
					took[i] = append(took[i], b.clock().Sub(start))
				}
			})
		}
		all.Wait()
		spent := b.clock().Sub(began)
		times := slices.Concat(took...)
		slices.Sort(times)
		*slowest = times[len(times)*99/100]
		return nanoseconds(spent, len(times)), errors.Join(errs...)
	}
}

// served is a handler on an address of this machine.
type served struct {
	url string
	srv *http.Server
}

func (b *bench) serve(h http.Handler) (*served, error) {
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		return nil, err
	}
	s := &served{"http://" + l.Addr().String(), &http.Server{Handler: h, ReadHeaderTimeout: 10 * time.Second}}
	go func() { _ = s.srv.Serve(l) }() // it ends when it is stopped
	return s, nil
}

func (s *served) stop() error { return s.srv.Shutdown(context.Background()) }

func (s *served) get(client *http.Client, cookie *http.Cookie, path string) (body []byte, err error) {
	r, err := http.NewRequest(http.MethodGet, s.url+path, nil)
	if err != nil {
		return nil, err
	}
	r.AddCookie(cookie)
	w, err := client.Do(r)
	if err != nil {
		return nil, err
	}
	defer func() { err = errors.Join(err, w.Body.Close()) }()
	if w.StatusCode != http.StatusOK {
		return nil, fmt.Errorf("%s: %s", path, w.Status)
	}
	return io.ReadAll(w.Body)
}
