package book

import (
	"lodebook/models/civil"
	"lodebook/models/store"
)

const (
	kindExcusal = "excusal"
	kindPause   = "pause"
)

// excusalBody is a dated, reasoned, approved exception for one obligation. Opens asks that it also
// opens reach; it does so once a safety officer stands behind it (Confirmed).
type excusalBody struct {
	common
	Item       string      `json:"item"`
	Subject    subjectBody `json:"subject"`
	From       civil.Day   `json:"from"`
	To         civil.Day   `json:"to"`
	Because    Veiled      `json:"because,omitzero"`
	ApprovedBy Veiled      `json:"approved_by,omitzero"` // of an import: a claim
	Opens      bool        `json:"opens,omitempty"`
	Confirmed  bool        `json:"confirmed,omitempty"`
}

func (b *excusalBody) kind() string { return kindExcusal }
func (b *excusalBody) version() int { return 1 }

func (b *excusalBody) validate(c *check) []Fault {
	faults := c.checkItem("item", b.Item)
	faults = append(faults, c.checkSubject("subject", b.Subject)...)
	if b.To < b.From {
		faults = append(faults, Fault{"to", b.To.String(), "lies before the first day, " + b.From.String(), "a day on or after it"})
	}
	if b.Because.IsZero() {
		faults = append(faults, Fault{"reason", "", "is empty", "say why this is excused"})
	}
	if b.Opens && b.Confirmed && c.actor.Person != "" && c.actor.Person == b.Subject.person() {
		faults = append(faults, Fault{"opens", "yes", "nobody approves an excusal for themselves", "ask another safety officer"})
	}
	return faults
}

func (b *excusalBody) apply(at applied) []any {
	to := b.To
	return []any{store.ExcusalRow{
		Line: at.line, Site: at.site, Subject: b.Subject.key(at.site), Item: b.Item, From: b.From, To: &to,
		Opens: b.Opens && b.Confirmed, Waiting: b.Opens && !b.Confirmed,
	}}
}

// pauseBody is a span in which a subject is away or out of service; an absent end is open.
type pauseBody struct {
	common
	Subject subjectBody `json:"subject"`
	From    civil.Day   `json:"from"`
	To      *civil.Day  `json:"to,omitempty"`
	Because Veiled      `json:"because,omitzero"`
}

func (b *pauseBody) kind() string { return kindPause }
func (b *pauseBody) version() int { return 1 }

func (b *pauseBody) validate(c *check) []Fault {
	faults := c.checkSubject("subject", b.Subject)
	if b.To != nil && *b.To < b.From {
		faults = append(faults, Fault{"to", b.To.String(), "lies before the first day, " + b.From.String(), "a day on or after it, or nothing"})
	}
	return faults
}

func (b *pauseBody) apply(at applied) []any {
	return []any{store.ExcusalRow{Line: at.line, Site: at.site, Subject: b.Subject.key(at.site), From: b.From, To: b.To}}
}
