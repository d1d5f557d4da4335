package main

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"net"
	"net/http"
	"net/netip"
	"sync"
	"time"

	"github.com/gin-gonic/gin"

	"lodebook/api"
	"lodebook/jobs"
	"lodebook/models/book"
	"lodebook/web"
)

type serveCommand struct {
	bookFlag
	serveFlags
}

type serveFlags struct {
	Listen       string         `default:"127.0.0.1:8470" help:"Address to listen on."`
	PublicURL    string         `help:"Address under which people reach it; default: http:// and the address it listens on."`
	TLSCert      string         `name:"tls-cert" type:"existingfile" help:"Certificate (PEM)." placeholder:"FILE"`
	TLSKey       string         `name:"tls-key" type:"existingfile" help:"Key of the certificate (PEM)." placeholder:"FILE"`
	TrustedProxy []netip.Prefix `help:"Networks whose X-Forwarded-For is believed; may be repeated." placeholder:"CIDR"`
}

// Run serves the book until it is told to stop.
func (c *serveCommand) Run(a *app) error {
	return a.open(c.bookFlag, func(b *book.Book) error { return c.serve(a, b, nil) })
}

// serve listens, says where, and serves until the context ends; ready is told the address.
func (f *serveFlags) serve(a *app, b *book.Book, ready func(url string) error) error {
	if (f.TLSCert == "") != (f.TLSKey == "") {
		return &exit{exitUsage, errors.New("--tls-cert and --tls-key go together")}
	}
	l, err := net.Listen("tcp", f.Listen)
	if err != nil {
		return fmt.Errorf("--listen: %s cannot be listened on: %w", f.Listen, err)
	}
	log := slog.New(slog.NewTextHandler(a.stderr, nil))
	url := f.url(l.Addr())
	handler, err := web.New(b, web.Options{
		PublicURL: url, Secure: f.TLSCert != "" || isHTTPS(f.PublicURL), TrustedProxies: f.TrustedProxy, Log: log, Jobs: nextRuns(b),
		API: func(r gin.IRouter, auth func(*http.Request) (book.Actor, error)) { api.Register(r, b, auth) },
	})
	if err != nil {
		return errors.Join(err, l.Close())
	}
	if ready == nil {
		ready = func(url string) error { a.say("Lodebook is at %s", url); return nil }
	}
	if err := ready(url); err != nil {
		return errors.Join(err, l.Close())
	}
	return f.run(a, b, l, handler, log)
}

func isHTTPS(url string) bool { return len(url) > 8 && url[:8] == "https://" }

func (f *serveFlags) url(addr net.Addr) string {
	switch {
	case f.PublicURL != "":
		return f.PublicURL
	case f.TLSCert != "":
		return "https://" + addr.String()
	default:
		return "http://" + addr.String()
	}
}

// run serves and runs the jobs; both are stopped and waited for.
func (f *serveFlags) run(a *app, b *book.Book, l net.Listener, handler http.Handler, log *slog.Logger) error {
	srv := &http.Server{
		Handler: handler, ReadHeaderTimeout: 10 * time.Second, ReadTimeout: 2 * time.Minute, WriteTimeout: 5 * time.Minute,
		IdleTimeout: 2 * time.Minute, ErrorLog: slog.NewLogLogger(log.Handler(), slog.LevelWarn),
	}
	ctx, stop := context.WithCancel(a.ctx)
	var wg sync.WaitGroup
	wg.Go(func() { jobs.NewRunner(b, log).Start(ctx) })
	served := make(chan error, 1)
	go func() {
		if f.TLSCert != "" {
			served <- srv.ServeTLS(l, f.TLSCert, f.TLSKey)
			return
		}
		served <- srv.Serve(l)
	}()
	var err error
	select {
	case err = <-served:
	case <-a.ctx.Done():
		grace, cancel := context.WithTimeout(context.WithoutCancel(a.ctx), 10*time.Second)
		err = srv.Shutdown(grace)
		cancel()
	}
	stop()
	wg.Wait()
	if _, unkept := b.KeepSnapshot(context.WithoutCancel(a.ctx), 1); unkept != nil {
		// The book is whole without it; the next start only takes longer.
		log.Error("no snapshot was written", "error", unkept)
	}
	if errors.Is(err, http.ErrServerClosed) {
		return nil
	}
	return err
}

// nextRuns tells the jobs page when each job runs next.
func nextRuns(b *book.Book) func(context.Context) ([]web.JobLine, error) {
	return func(ctx context.Context) ([]web.JobLine, error) {
		sites, err := b.Sites(ctx, book.JobActor())
		if err != nil {
			return nil, err
		}
		var out []web.JobLine
		for _, s := range sites {
			for _, j := range jobs.All {
				next, err := j.Next(s.Location, b.Now())
				if err != nil {
					return nil, err
				}
				out = append(out, web.JobLine{Name: j.Name, About: j.About, Site: s.Code, Next: next.In(s.Location)})
			}
		}
		return out, nil
	}
}
