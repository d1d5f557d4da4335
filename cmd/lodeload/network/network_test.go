package network_test

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"strings"
	"testing"
	_ "time/tzdata"

	"lodebook/cmd/lodeload/network"
	"lodebook/models/civil"
	"lodebook/models/program"
)

var small = network.Size{Seed: 7, Sites: 6, People: 240, Fixtures: 120, Days: 1826}

func built(t *testing.T, s network.Size) *network.Network {
	t.Helper()
	n, err := network.New(s)
	if err != nil {
		t.Fatal(err)
	}
	return n
}

// digest is a hash over all that a network says.
func digest(t *testing.T, s network.Size) string {
	t.Helper()
	h := sha256.New()
	for site := range built(t, s).Each() {
		for _, v := range site.Versions {
			h.Write(v.Source)
		}
		for _, table := range network.Tables {
			if err := site.WriteCSV(h, table); err != nil {
				t.Fatal(err)
			}
		}
		if err := site.WritePassages(h, true); err != nil {
			t.Fatal(err)
		}
	}
	return hex.EncodeToString(h.Sum(nil))
}

func TestTheSameSizeGivesTheSameBytes(t *testing.T) {
	one, other := small, small
	other.Seed++
	if a, b := digest(t, one), digest(t, one); a != b {
		t.Error("two networks of one size differ")
	}
	if digest(t, one) == digest(t, other) {
		t.Error("another seed gives the same network")
	}
}

// A site is the same whether the ones in front of it were made or not.
func TestASiteStandsAlone(t *testing.T) {
	var inOrder, alone bytes.Buffer
	for s := range built(t, small).Each() {
		if s.Code == network.SiteCode(4) {
			_ = s.WriteCSV(&inOrder, "records")
		}
	}
	_ = built(t, small).Site(4).WriteCSV(&alone, "records")
	if inOrder.Len() == 0 || !bytes.Equal(inOrder.Bytes(), alone.Bytes()) {
		t.Errorf("%d bytes in order, %d alone", inOrder.Len(), alone.Len())
	}
}

func TestPrograms(t *testing.T) {
	versions, rules := 0, map[program.CadenceRule]bool{}
	for s := range built(t, small).Each() {
		versions += len(s.Versions)
		for _, v := range s.Versions {
			p, err := program.Parse(v.Source)
			if err != nil {
				t.Fatal(err)
			}
			if len(p.Items) < 38 || len(p.Items) > 42 || p.Site.Code != s.Code {
				t.Errorf("site %s has %d items", p.Site.Code, len(p.Items))
			}
			for _, i := range p.Items {
				rules[i.Cadence.Rule] = true
			}
		}
	}
	if versions != small.Sites+1 || len(rules) != 6 {
		t.Errorf("%d versions; rules %v", versions, rules)
	}
}

// TestShape holds what the history is made for: everything that can go wrong does, now and then.
func TestShape(t *testing.T) {
	n := built(t, small)
	var records, failed, timed, until, late, guests, changes, leavers, excusals, pauses, events, passages int
	home := map[string]string{}
	for s := range n.Each() {
		records, excusals, pauses, events = records+len(s.Records), excusals+len(s.Excusals), pauses+len(s.Pauses), events+len(s.Events)
		latest := civil.Day(0)
		for _, r := range s.Records {
			if r.Day < network.First || r.Day > n.Last() {
				t.Fatalf("a record of %v", r.Day)
			}
			if r.Day < latest {
				late++
			}
			latest = max(latest, r.Day)
			failed += one(r.Failed)
			timed += one(!r.Time.IsZero())
			until += one(r.Until != network.NoDay)
		}
		for _, p := range s.People {
			if at, ok := home[p.Code]; ok && at != s.Code {
				guests++
			}
			home[p.Code] = s.Code
			changes += one(p.From != network.NoDay)
			leavers += one(p.Left != network.NoDay)
		}
		for range s.Passages() {
			passages++
		}
	}
	for _, x := range []struct {
		what           string
		n, least, most int
	}{
		{"records", records, 20_000, 60_000}, {"failures", failed, records / 500, records / 50}, {"records with a time", timed, records / 4, records},
		{"records with an end", until, 200, records / 5}, {"records handed in late", late, records / 100, records},
		{"guests", guests, 1, 20}, {"changes", changes, 5, 100}, {"leavers", leavers, 10, 120},
		{"excusals", excusals, 1, 30}, {"pauses", pauses, 3, 60}, {"events", events, 30, 600}, {"passages", passages, 1000, 4000},
		{"people", len(home), small.People, small.People},
	} {
		if x.n < x.least || x.n > x.most {
			t.Errorf("%s: %d; expected from %d to %d", x.what, x.n, x.least, x.most)
		}
	}
}

func one(b bool) int {
	if b {
		return 1
	}
	return 0
}

func TestWrongSizesAreNamed(t *testing.T) {
	for field, s := range map[string]network.Size{
		"sites": {Sites: 0, Days: 1}, "days": {Sites: 1}, "people": {Sites: 1, Days: 1, People: -1}, "fixtures": {Sites: 1, Days: 1, Fixtures: 1 << 40},
	} {
		if _, err := network.New(s); err == nil || !strings.HasPrefix(err.Error(), field+": ") {
			t.Errorf("%s: %v", field, err)
		}
	}
}

// The smallest networks can be made too.
func TestSmallest(t *testing.T) {
	for _, s := range []network.Size{{Sites: 1, Days: 1}, {Sites: 3, People: 2, Fixtures: 1, Days: 1}, {Sites: 1, People: 40, Fixtures: 20, Days: 20}} {
		for site := range built(t, s).Each() {
			for _, r := range site.Records {
				if r.Day > s.Last() {
					t.Errorf("a record of %v in %d days", r.Day, s.Days)
				}
			}
		}
	}
}
