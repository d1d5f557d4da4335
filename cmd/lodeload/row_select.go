package main

import (
	"fmt"

	"lodebook/models/program"
	"lodebook/models/standing"
)

// selectRows ask of whom each item is asked today: each selector once for each different set of the facts that it
// reads, against a CEL evaluation for each pair.
func selectRows(b *bench) ([]*contest, error) {
	w, err := b.load()
	if err != nil {
		return nil, err
	}
	pairs, selectors := w.pairs()
	subjects := map[standing.Subject]bool{}
	each := func() (yes int) {
		for i := range pairs {
			profile := w.engine.Profile(pairs[i].site, pairs[i].subject, w.today(), standing.Always)
			for _, sel := range pairs[i].selectors {
				if match, err := sel.Match(profile); err == nil && match {
					yes++
				}
			}
			yes += pairs[i].always
		}
		return yes
	}
	for i := range pairs {
		subjects[standing.Subject{Asks: pairs[i].subject.Asks, Code: pairs[i].site + pairs[i].subject.Code}] = true
	}
	return []*contest{{
		work:    fmt.Sprintf("%d selectors over %d people and fixtures", selectors, len(subjects)),
		against: "one CEL evaluation for each pair, what they read looked up once a subject", asked: 20,
		check: func() error {
			if ours, theirs := w.engine.Asked(w.today()), each(); ours != theirs || ours == 0 {
				return fmt.Errorf("selectors: %d matches and %d", ours, theirs)
			}
			return nil
		},
		ours:   b.timed(3, func() error { w.engine.Asked(w.today()); return nil }),
		theirs: b.timed(1, func() error { each(); return nil }),
	}}, nil
}

// pair is a subject with the selectors that are put to it.
type pair struct {
	site      string
	subject   standing.Subject
	selectors []*program.Selector
	always    int // items that ask every such subject
}

// pairs are the present subjects of all sites with what their site's program asks of their kind.
func (w *world) pairs() (out []pair, selectors int) {
	on := w.today()
	for _, site := range w.sites {
		v, ok := w.engine.VersionOn(site, on, standing.Always)
		if !ok {
			continue
		}
		selectors = max(selectors, len(v.Program.Items))
		for _, asks := range program.AllAsks {
			var sels []*program.Selector
			always := 0
			for i := range v.Program.Items {
				switch item := &v.Program.Items[i]; {
				case item.Asks != asks:
				case item.When == nil:
					always++
				default:
					sels = append(sels, item.When)
				}
			}
			for _, s := range w.engine.Subjects(site, asks, on, standing.Always) {
				out = append(out, pair{site, s, sels, always})
			}
		}
	}
	return out, selectors
}
