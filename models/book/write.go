package book

import (
	"context"
	"errors"
	"fmt"
	"time"

	"github.com/google/uuid"

	"lodebook/models/civil"
	"lodebook/models/standing"
	"lodebook/models/store"
)

// Receipt says what became of a write: Written and Unchanged are identifiers of entries.
type Receipt struct {
	Written   []string
	Unchanged []string
}

// ID is the identifier of the first entry of the receipt, written or found there already.
func (r Receipt) ID() string {
	for _, ids := range [][]string{r.Written, r.Unchanged} {
		if len(ids) > 0 {
			return ids[0]
		}
	}
	return ""
}

// session is one write under way: a transaction, the model it is checked against, one moment.
type session struct {
	b       *Book
	m       *model // what the write is checked against
	tx      *store.Tx
	actor   Actor
	now     time.Time // recorded-at: the later of the clock and the last recorded-at
	receipt Receipt
	alone   bool            // its rows are taken into m at once, so that those after them are checked against them
	rows    []any           // else they are kept until it is done
	bears   map[string]bool // sites whose stock may be another one after it
}

// write lets fn add entries, in a transaction that it may share with other writes of this process. When
// fn fails nothing of it stays. When write returns, what fn wrote is on the disk and the next read sees it.
func (b *Book) write(ctx context.Context, actor Actor, fn func(s *session) error) (Receipt, error) {
	return b.submitted(&request{ctx: ctx, actor: actor, fn: fn})
}

// writeAlone is write in a transaction of its own, for what is long.
func (b *Book) writeAlone(ctx context.Context, actor Actor, fn func(s *session) error) (Receipt, error) {
	return b.submitted(&request{ctx: ctx, actor: actor, fn: fn, alone: true})
}

// submitted has a write done and takes stock of what it bears on.
func (b *Book) submitted(r *request) (Receipt, error) {
	receipt, err := b.submit(r)
	if err == nil {
		b.restock(r.ctx, r)
	}
	return receipt, err
}

// operate writes what is no part of the book: secrets, sessions, flags, runs.
func (b *Book) operate(ctx context.Context, fn func(tx *store.Tx, m *model) error) error {
	_, err := b.submit(&request{ctx: ctx, fn: func(s *session) error { return fn(s.tx, s.m) }})
	return err
}

func (b *Book) recordedAt(tx *store.Tx) (time.Time, error) {
	now := b.Now()
	last, ok, err := tx.LastRecordedAt()
	if err != nil {
		return now, err
	}
	if ok && last.After(now) {
		return last, nil
	}
	return now, nil
}

// check gives what bodies of the site are validated against.
func (s *session) check(site string) *check {
	return &check{m: s.m, actor: s.actor, site: site, now: s.now}
}

// add validates the drafts and writes them. A draft whose identifier is on record with the same
// content is left as it is; with other content it is a *Conflict.
func (s *session) add(drafts ...draft) error {
	var entries []store.Entry
	var veils [][]store.Veil
	var bodies []draft
	for _, d := range drafts {
		kept, err := s.prepare(&d)
		if err != nil {
			return err
		}
		if !kept {
			continue
		}
		e, v, err := s.b.encode(d, s.actor, s.now)
		if err != nil {
			return err
		}
		entries, veils, bodies = append(entries, e), append(veils, v), append(bodies, d)
	}
	return s.append(entries, veils, bodies)
}

// prepare validates one draft; false means that it is on record already.
func (s *session) prepare(d *draft) (bool, error) {
	s.sign(d.body)
	if d.id == "" {
		id, err := s.b.newID(s.now)
		if err != nil {
			return false, err
		}
		d.id = id
	} else if err := checkID(d.id); err != nil {
		return false, err
	} else if found, err := s.recorded(*d); found || err != nil {
		return false, err
	}
	c := s.check(d.site)
	c.imported = d.batch != ""
	if d.supersedes != "" {
		if err := s.checkCorrection(d, c); err != nil {
			return false, err
		}
	}
	if faults := d.body.validate(c); len(faults) > 0 {
		return false, &Invalid{faults}
	}
	return true, nil
}

// checkID checks an identifier that came from outside.
func checkID(id string) error {
	if u, err := uuid.Parse(id); err != nil || u.String() != id {
		return invalid("id", id, "is no UUID", "one in its usual form; open the form again for a fresh one")
	}
	return nil
}

// sign notes the system user behind an operator's entry.
func (s *session) sign(b body) {
	if s.actor.Role == Operator {
		b.shared().Operator = veiled(s.actor.Name, "")
	}
}

// recorded tells whether the draft's identifier already stands for the same content.
func (s *session) recorded(d draft) (bool, error) {
	old, ok, err := s.tx.EntryByID(d.id)
	if err != nil || !ok {
		return false, err
	}
	was, err := s.open(old)
	if err != nil {
		return false, err
	}
	recorded, err := plain(was)
	if err != nil {
		return false, err
	}
	given, err := plain(d.body)
	if err != nil {
		return false, err
	}
	if recorded != given || old.Kind != d.body.kind() || old.Site != d.site || old.Supersedes != d.supersedes {
		return false, s.conflict(old, was, recorded, given)
	}
	s.receipt.Unchanged = append(s.receipt.Unchanged, d.id)
	return true, nil
}

// open decodes a stored entry with its veiled values.
func (s *session) open(e store.Entry) (body, error) {
	veils, err := s.tx.Veils(e.Seq)
	if err != nil {
		return nil, err
	}
	return decode(e, veils[e.Seq])
}

// slipTime is how long a slip of one's own can be put right without a reason.
const slipTime = 10 * time.Minute

// checkCorrection checks that the entry to be superseded is the current one, of the same kind, and
// that a reason is given where one is needed.
func (s *session) checkCorrection(d *draft, c *check) error {
	old, ok, err := s.tx.EntryByID(d.supersedes)
	if err != nil {
		return err
	}
	if !ok {
		return &NotFound{"entry", d.supersedes}
	}
	by, taken, err := s.tx.SupersededBy(d.supersedes)
	if err != nil {
		return err
	}
	if taken {
		return &Stale{d.supersedes, by.ID}
	}
	if d.body.kind() != kindWithdrawal && d.body.kind() != old.Kind {
		return invalid("kind", d.body.kind(), "takes the place of an entry of kind "+old.Kind, "the same kind, or a withdrawal")
	}
	if err := s.mayCorrect(old, d.body.shared()); err != nil {
		return err
	}
	c.old, err = s.open(old)
	c.oldSeq = old.Seq
	if err != nil {
		return err
	}
	return s.mayRevise(old, c.old, d.body.shared())
}

func (s *session) mayCorrect(old store.Entry, given *common) error {
	own := old.Actor == s.actor.id()
	action := Correct
	if own {
		action = CorrectOwn
	}
	if s.actor.Role != Operator || !own {
		if err := s.actor.may(action, old.Site); err != nil {
			return err
		}
	}
	if given.Reason == "" && (!own || s.now.Sub(old.RecordedAt) > slipTime) {
		return invalid("reason", "", "is empty", "choose why the entry is corrected")
	}
	if given.Reason == "other" && given.ReasonText.IsZero() {
		return invalid("reason_text", "", "is empty", "write the reason in a sentence")
	}
	if given.Reason != "" && ReasonWords(given.Reason) == given.Reason {
		return invalid("reason", given.Reason, "is not on the list of reasons", "choose one of the list")
	}
	return nil
}

// append writes the entries, ends what they supersede, and puts their rows.
func (s *session) append(entries []store.Entry, veils [][]store.Veil, drafts []draft) error {
	if len(entries) == 0 {
		return nil
	}
	first, err := s.tx.Append(entries, veils)
	if err != nil {
		return err
	}
	var rows []any
	for i, d := range drafts {
		seq := first + int64(i)
		if err := s.endSuperseded(d, seq); err != nil {
			return err
		}
		made := d.body.apply(appliedOf(entries[i], seq, s.m.zone))
		s.bearsOn(d, made)
		rows = append(rows, made...)
		s.receipt.Written = append(s.receipt.Written, d.id)
	}
	if s.alone {
		if err := s.m.takeRows(rows); err != nil {
			return err
		}
	} else {
		s.rows = append(s.rows, rows...)
	}
	return s.tx.Put(rows...)
}

func appliedOf(e store.Entry, seq int64, zone func(string) *time.Location) applied {
	line := store.Line{Seq: seq, ID: e.ID, Batch: e.Batch}
	return applied{line: line, site: e.Site, actor: e.Actor, at: e.RecordedAt, zone: zone}
}

func (s *session) endSuperseded(d draft, seq int64) error {
	if d.supersedes == "" {
		return nil
	}
	old, ok, err := s.tx.EntryByID(d.supersedes)
	if err != nil {
		return err
	}
	if !ok {
		return fmt.Errorf("entry %s went away while it was superseded", d.supersedes)
	}
	return s.tx.End(old.Seq, seq)
}

// Rebuild drops every projected row and makes them anew from the entries.
func (b *Book) Rebuild(ctx context.Context) error {
	_, err := b.writeAlone(ctx, SystemOperator(""), func(s *session) error {
		if err := s.tx.DropProjections(); err != nil {
			return err
		}
		return replay(s.tx)
	})
	if err == nil {
		err = b.removeSnapshots()
	}
	if err != nil {
		return err
	}
	return b.reload(ctx)
}

// replay applies every entry in order.
func replay(tx *store.Tx) error {
	zones := map[string]*time.Location{}
	zone := func(site string) *time.Location {
		if l := zones[site]; l != nil {
			return l
		}
		return time.UTC
	}
	return tx.EachEntry(0, func(e store.Entry, veils []store.Veil) error {
		bd, err := decode(e, veils)
		if err != nil {
			return err
		}
		if err := replayEnds(tx, e, bd); err != nil {
			return err
		}
		if p, ok := bd.(*programBody); ok {
			zones[e.Site] = p.location()
		}
		return tx.Put(bd.apply(appliedOf(e, e.Seq, zone))...)
	})
}

func replayEnds(tx *store.Tx, e store.Entry, bd body) error {
	if e.Supersedes != "" {
		old, ok, err := tx.EntryByID(e.Supersedes)
		if err != nil || !ok {
			return errors.Join(err, fmt.Errorf("entry %d supersedes %s, which is not there", e.Seq, e.Supersedes))
		}
		return tx.End(old.Seq, e.Seq)
	}
	if w, ok := bd.(*withdrawalBody); ok && w.WholeBatch != "" {
		return endBatch(tx, w.WholeBatch, e.Seq)
	}
	if x, ok := bd.(*erasureBody); ok {
		return blankRows(tx, x.Person, e.Seq)
	}
	return nil
}

// known resolves a moment to the sequence number that was known then.
func (b *Book) knownAt(ctx context.Context, at *time.Time) (int64, error) {
	if at == nil {
		return always64, nil
	}
	var seq int64
	err := b.st.Read(ctx, func(tx *store.Tx) error {
		var err error
		seq, err = tx.SeqAt(*at)
		return err
	})
	return seq, err
}

const always64 = standing.Always

// dayPtr gives a pointer to a copy of the day.
func dayPtr(d civil.Day) *civil.Day { return &d }
