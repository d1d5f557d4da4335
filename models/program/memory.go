package program

import (
	"crypto/sha256"
	"fmt"
	"io"
	"sync"
)

// The sites of a network ask much the same in much the same words. What a selector comes to depends only on
// its text and on what it can read, so it is made once for all programs in which both are the same.

// memory holds selectors by what they depend on.
type memory struct {
	mu   sync.Mutex
	made map[[sha256.Size]byte]*Selector
}

// memorySize is how many selectors are held; when there are more, all are forgotten.
const memorySize = 10_000

var selectors memory

func (m *memory) find(key [sha256.Size]byte) *Selector {
	m.mu.Lock()
	defer m.mu.Unlock()
	return m.made[key]
}

func (m *memory) keep(key [sha256.Size]byte, s *Selector) {
	m.mu.Lock()
	defer m.mu.Unlock()
	if m.made == nil || len(m.made) >= memorySize {
		m.made = map[[sha256.Size]byte]*Selector{}
	}
	m.made[key] = s
}

// remembered is compile by way of the memory.
func (s *scope) remembered(src string) (*Selector, []flaw) {
	if s.print == nil {
		s.print = s.fingerprint()
	}
	h := sha256.New()
	_, _ = h.Write(s.print) // a hash takes everything
	_, _ = io.WriteString(h, src)
	key := [sha256.Size]byte(h.Sum(nil))
	if made := selectors.find(key); made != nil {
		return made, nil
	}
	made, flaws := s.compile(src)
	if len(flaws) == 0 {
		selectors.keep(key, made)
	}
	return made, flaws
}

// fingerprint is the same for scopes in which the same can be read.
func (s *scope) fingerprint() []byte {
	h := sha256.New()
	_, _ = fmt.Fprintf(h, "%q", s.asks)
	for _, list := range []map[string]*attribute{s.fields, s.facts} {
		_, _ = fmt.Fprintf(h, " %d", len(list))
		for _, name := range sortedKeys(list) {
			a := list[name]
			_, _ = fmt.Fprintf(h, " %q %q %q %t %q %t %t", name, a.name, a.typ, a.codes == nil, a.codes, a.open, a.check != nil)
		}
	}
	return h.Sum(nil)
}
