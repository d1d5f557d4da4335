package book

import (
	"fmt"
	"strings"
	"time"

	"lodebook/models/store"
)

const kindMark = "mark"

// markBody says that a safety officer has explained a passage: at which door, at what instant and by which badge. It is
// no substitute for a visit.
type markBody struct {
	common
	At    string `json:"at"` // RFC 3339 in UTC, to the microsecond
	Door  string `json:"door"`
	Badge Veiled `json:"badge,omitzero"`
	Note  Veiled `json:"note,omitzero"`
}

func (b *markBody) kind() string { return kindMark }
func (b *markBody) version() int { return 1 }

func (b *markBody) validate(*check) []Fault {
	var faults []Fault
	if _, err := time.Parse(time.RFC3339Nano, b.At); err != nil {
		faults = append(faults, Fault{"at", b.At, "is not an instant", "write it as 2026-03-01T08:30:00Z"})
	}
	if b.Door == "" {
		faults = append(faults, Fault{"door", "", "is empty", "the door of the passage"})
	}
	if strings.TrimSpace(b.Note.String()) == "" {
		faults = append(faults, Fault{"note", "", "is empty", "say how the passage is explained"})
	}
	return faults
}

func (b *markBody) apply(at applied) []any {
	t, _ := time.Parse(time.RFC3339Nano, b.At)
	return []any{store.MarkRow{Line: at.line, Site: at.site, At: t.UTC(), Door: b.Door, Badge: b.Badge.Value}}
}

func (b *markBody) words() string { return fmt.Sprintf("A passage explained: %s, %s", b.Door, b.At) }
