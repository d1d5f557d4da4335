package main

import (
	"io"
	"path/filepath"
	"testing"
	"time"

	"lodebook/cmd/lodeload/network"
	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/standing"
)

var tiny = network.Size{Seed: 3, Sites: 3, People: 60, Fixtures: 36, Days: 700}

func testApp(t *testing.T) *app {
	return &app{ctx: t.Context(), stdout: io.Discard, stderr: io.Discard, clock: time.Now}
}

func networkOf(t *testing.T, s network.Size) *network.Network {
	t.Helper()
	n, err := network.New(s)
	if err != nil {
		t.Fatal(err)
	}
	return n
}

// loader is one of the two ways into a book.
type loader func(*app, *book.Book, *network.Network, book.Actor, func(*network.Site) error) error

// bookOf is a book of the network, and the officer who brought it in. As the operator, each entry says
// who that was.
func bookOf(t *testing.T, n *network.Network, load loader, operator bool) (*book.Book, string) {
	t.Helper()
	path := filepath.Join(t.TempDir(), "net.book")
	b, err := book.Create(t.Context(), path, syntheticOptions(n.Size))
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := b.Close(); err != nil {
			t.Error(err)
		}
	})
	actor, err := openNetwork(testApp(t), b, n)
	if err != nil {
		t.Fatal(err)
	}
	if operator {
		actor = maker
	}
	if err := load(testApp(t), b, n, actor, func(*network.Site) error { return nil }); err != nil {
		t.Fatal(err)
	}
	return b, path
}

// TestFeedIsWhatTheBookSays holds that an evaluator that is fed directly judges as the book does after
// an import of the same rows.
func TestFeedIsWhatTheBookSays(t *testing.T) {
	n := networkOf(t, tiny)
	b, _ := bookOf(t, n, importNetwork, false)
	f, err := feed(n)
	if err != nil {
		t.Fatal(err)
	}
	compared := 0
	for i := range n.Sites {
		site := network.SiteCode(i)
		for _, d := range []civil.Day{90, 400, 699} {
			on := network.First + d
			theirs, err := b.Standings(t.Context(), maker, book.StandingQuery{Site: site, On: &on})
			if err != nil {
				t.Fatal(err)
			}
			ours, err := f.engine.Evaluate(site, standing.Query{On: on, KnownAt: standing.Always})
			if err != nil {
				t.Fatal(err)
			}
			rows := theirs.Rows
			if len(ours) != len(rows) {
				t.Fatalf("site %s on %v: %d obligations and %d in the book", site, on, len(ours), len(rows))
			}
			for i := range ours {
				if ours[i].Item != rows[i].Item || ours[i].Subject != rows[i].Subject || ours[i].Word != rows[i].Word {
					t.Errorf("site %s on %v: %s %v %s, in the book %s %v %s", site, on, ours[i].Item, ours[i].Subject, ours[i].Word, rows[i].Item, rows[i].Subject, rows[i].Word)
				}
				compared++
			}
		}
	}
	if compared < 1500 {
		t.Errorf("only %d standings were compared", compared)
	}
}
