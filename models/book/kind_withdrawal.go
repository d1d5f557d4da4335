package book

import "lodebook/models/store"

const (
	kindWithdrawal = "withdrawal"
	kindErasure    = "erasure"
	kindBatch      = "batch"
)

// withdrawalBody takes an entry back (the one that its envelope supersedes), or a whole import.
type withdrawalBody struct {
	common
	WholeBatch string `json:"whole_batch,omitempty"` // identifier of the import that is taken back
}

func (b *withdrawalBody) kind() string { return kindWithdrawal }
func (b *withdrawalBody) version() int { return 1 }

func (b *withdrawalBody) validate(*check) []Fault { return nil }

// apply makes no rows: the rows of what is withdrawn are ended by the write itself.
func (b *withdrawalBody) apply(applied) []any { return nil }

// erasureBody says that a person's names and free text were made unreadable.
type erasureBody struct {
	common
	Person string `json:"person"`
	Visit  string `json:"visit,omitempty"` // the entry of a visit, in place of a person
}

func (b *erasureBody) kind() string { return kindErasure }
func (b *erasureBody) version() int { return 1 }

func (b *erasureBody) validate(c *check) []Fault {
	if b.Visit != "" {
		return nil
	}
	p, ok := c.m.person(b.Person)
	switch {
	case !ok:
		return []Fault{{"person", b.Person, "is not on record", "the code of a person"}}
	case p.Erased:
		return []Fault{{"person", b.Person, "was erased already", ""}}
	}
	if site, here := c.m.presentAt(b.Person, c.now); here {
		return []Fault{{"person", b.Person, "is still on staff at " + site, "record the day they left first"}}
	}
	return nil
}

func (b *erasureBody) apply(applied) []any { return nil }

// batchBody heads an import: what table, from which file, how many rows were written.
type batchBody struct {
	common
	Table string `json:"table"`
	File  Veiled `json:"file,omitzero"`
	Rows  int    `json:"rows"`
}

func (b *batchBody) kind() string { return kindBatch }
func (b *batchBody) version() int { return 1 }

func (b *batchBody) validate(*check) []Fault { return nil }

func (b *batchBody) apply(at applied) []any {
	return []any{store.BatchRow{Line: at.line, Site: at.site, Table: b.Table, File: b.File.String(), Rows: b.Rows, Actor: at.actor, At: at.at}}
}
