package store

import (
	"bytes"
	"fmt"
	"slices"

	"gorm.io/gorm"

	"lodebook/models/ledger"
)

type veilRow struct {
	Seq    int64  `gorm:"primaryKey;autoIncrement:false"`
	Path   string `gorm:"primaryKey"`
	Person string
	Salt   []byte
	Value  []byte
	Erased bool
}

// appendVeils numbers the erasable values of a new entry and adds their rows.
func appendVeils(to []veilRow, seq int64, veils []Veil) ([]veilRow, error) {
	for i := range veils {
		v := &veils[i]
		v.Seq = seq
		if v.Erased || len(v.Salt) != ledger.SaltSize || v.Path == "" {
			return nil, fmt.Errorf("value %d of entry %d needs a path and a salt of %d bytes", i, seq, ledger.SaltSize)
		}
		if bytes.IndexByte(v.Value, 0) >= 0 || hasZero(v.Value) {
			return nil, refuse(nil, "The text at %q holds a zero byte, which no book keeps; leave it out.", v.Path)
		}
		r := veilRow(*v)
		if r.Value == nil {
			r.Value = []byte{} // an empty value is one; only an erased veil has none
		}
		to = append(to, r)
	}
	return to, nil
}

// Veils gives the erasable values of the entries of those sequence numbers, in order of path.
func (t *Tx) Veils(seqs ...int64) (map[int64][]Veil, error) {
	out := make(map[int64][]Veil)
	for _, r := range t.pending.veils {
		if slices.Contains(seqs, r.Seq) {
			out[r.Seq] = append(out[r.Seq], Veil(r))
		}
	}
	for len(seqs) > 0 {
		n := min(len(seqs), batchRows)
		err := t.collect(out, t.db.Where("seq IN ?", seqs[:n]))
		if err != nil {
			return nil, err
		}
		seqs = seqs[n:]
	}
	return out, nil
}

func (t *Tx) veilsBetween(first, last int64) (map[int64][]Veil, error) {
	out := make(map[int64][]Veil)
	err := t.collect(out, t.db.Where("seq BETWEEN ? AND ?", first, last))
	return out, err
}

func (t *Tx) collect(to map[int64][]Veil, q *gorm.DB) error {
	rows, err := find[veilRow](q.Table("veils").Order("seq, path"))
	for _, r := range rows {
		to[r.Seq] = append(to[r.Seq], Veil(r))
	}
	return err
}

// VeilsOfPerson gives every erasable value that is about a person, erased ones included.
func (t *Tx) VeilsOfPerson(code string) ([]Veil, error) {
	err := t.settle()
	if err != nil {
		return nil, err
	}
	rows, err := find[veilRow](t.db.Table("veils").Where("person = ? AND person <> ''", code).Order("seq, path"))
	out := make([]Veil, len(rows))
	for i, r := range rows {
		out[i] = Veil(r)
	}
	return out, err
}

// EraseVeils destroys the salts and values of the veils, which it knows by Seq and Path. It leaves
// ErrMissing for one that is not there. The bytes are out of the file for certain once Scrub has
// run.
func (t *Tx) EraseVeils(veils []Veil) error {
	for _, v := range veils {
		r := t.db.Table("veils").Where("seq = ? AND path = ?", v.Seq, v.Path).
			Updates(map[string]any{"salt": nil, "value": nil, "erased": true})
		err := one(r.RowsAffected, r.Error, "entry %d has no value at %q", v.Seq, v.Path)
		if err != nil {
			return err
		}
	}
	return nil
}

// hasZero tells whether a JSON text has a string with a zero byte, which PostgreSQL cannot keep as
// text: no book takes one, so that every book can be moved.
func hasZero(text []byte) bool {
	for at := 0; ; {
		i := bytes.Index(text[at:], []byte(`\u0000`))
		if i < 0 {
			return false
		}
		at += i
		before := bytes.TrimRight(text[:at], `\`)
		if (at-len(before))%2 == 0 {
			return true // the backslash is not itself escaped
		}
		at++
	}
}

func zeroByte(e *Entry) error {
	return refuse(fmt.Errorf("entry %s", e.ID), "A text of this %s holds a zero byte, which no book keeps; leave it out.", e.Kind)
}
