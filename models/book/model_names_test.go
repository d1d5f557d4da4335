package book

import (
	"fmt"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"lodebook/models/store"
)

// Who is meant by a name is what a walk over everybody finds, however people are named, renamed and corrected.
func TestPersonNamed(t *testing.T) {
	names := []string{"", "Åsa Berg", "åsa BERG", "ASA Berg", "Straße", "STRASSE", "Kelvin \u212a", "kelvin k", "\xff", "\ufffd"}
	rapid.Check(t, func(t *rapid.T) {
		m := newModel()
		for seq := range int64(rapid.IntRange(1, 30).Draw(t, "rows")) {
			r := store.PersonRow{
				Line: store.Line{Seq: seq, Ended: rapid.SampledFrom([]int64{0, 0, 0, 99}).Draw(t, "ended")},
				Code: rapid.SampledFrom([]string{"A", "B", "C", "D"}).Draw(t, "code"), Name: rapid.SampledFrom(names).Draw(t, "name"),
			}
			if seq%4 == 3 {
				m = m.fork()
				r.Seq-- // of an entry whose row was there already, such as one that is erased
			}
			if err := m.take(store.Delta{People: []store.PersonRow{r}}); err != nil {
				t.Fatal(err)
			}
		}
		for _, name := range names[1:] {
			var bear []string
			for code := range m.people.all() {
				if p, ok := m.person(code); ok && strings.EqualFold(p.Name, name) {
					bear = append(bear, code)
				}
			}
			want := ""
			if len(bear) == 1 {
				want = bear[0]
			}
			if got := m.personNamed(name); got != want {
				t.Fatalf("by %q %q is meant, want %q of %q", name, got, want, bear)
			}
		}
	})
}

// BenchmarkPersonNamed is of 200,000 people.
func BenchmarkPersonNamed(b *testing.B) {
	m := newModel()
	for i := range 200_000 {
		code := fmt.Sprintf("P%06d", i)
		if err := m.take(store.Delta{People: []store.PersonRow{{Line: store.Line{Seq: int64(i)}, Code: code, Name: "Name of " + code}}}); err != nil {
			b.Fatal(err)
		}
	}
	b.ResetTimer()
	for i := range b.N {
		code := fmt.Sprintf("P%06d", i*7919%200_000)
		if got := m.personNamed("NAME OF " + code); got != code {
			b.Fatal(got)
		}
	}
}
