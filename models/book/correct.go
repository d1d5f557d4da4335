package book

import (
	"context"
	"errors"
	"fmt"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/store"
)

// Withdraw takes an entry back. What it put on record no longer counts; the entry stays readable.
func (b *Book) Withdraw(ctx context.Context, actor Actor, id string, fix Correction) (Receipt, error) {
	return b.write(ctx, actor, func(s *session) error {
		old, ok, err := s.tx.EntryByID(id)
		if err != nil {
			return err
		}
		if !ok {
			return &NotFound{"entry", id}
		}
		switch old.Kind {
		case kindProgram, kindErasure, kindWithdrawal, kindBatch, kindAccount:
			return invalid("entry", id, fmt.Sprintf("is of kind %s, which is not withdrawn alone", old.Kind), "a new version, a new grant, or the undoing of the whole import")
		}
		body := &withdrawalBody{}
		fix.fill(&body.common)
		return s.add(draft{site: old.Site, supersedes: id, body: body})
	})
}

// UndoImport takes a whole import back: every entry of it that still stands. Entries that were
// corrected since stay as they were corrected.
func (b *Book) UndoImport(ctx context.Context, actor Actor, batch string) (Receipt, error) {
	return b.write(ctx, actor, func(s *session) error {
		head, ok, err := s.tx.EntryByID(batch)
		if err != nil {
			return err
		}
		if !ok || head.Kind != kindBatch {
			return &NotFound{"import", batch}
		}
		if err := actor.may(ImportTables, head.Site); err != nil {
			return err
		}
		by, taken, err := s.batchUndone(batch)
		if err != nil {
			return err
		}
		if taken {
			return &Stale{batch, by}
		}
		body := &withdrawalBody{WholeBatch: batch}
		if err := s.add(draft{site: head.Site, body: body}); err != nil {
			return err
		}
		size, err := s.tx.Size()
		if err != nil {
			return err
		}
		for _, r := range s.m.batches {
			if _, doors := doorTables[r.Table]; doors && r.ID == batch {
				if err := s.tx.RemoveImported(batch); err != nil {
					return err
				}
			}
		}
		return endBatch(s.tx, batch, size-1)
	})
}

// endBatch ends the rows of an import: those of its own entry and of every entry that it brought.
func endBatch(tx *store.Tx, batch string, by int64) error {
	head, ok, err := tx.EntryByID(batch)
	if err != nil {
		return err
	}
	if !ok {
		return &NotFound{"import", batch}
	}
	if err := tx.End(head.Seq, by); err != nil {
		return err
	}
	return tx.EndBatch(batch, by)
}

// batchUndone tells whether an import was taken back already, and by which entry.
func (s *session) batchUndone(batch string) (string, bool, error) {
	for _, r := range s.m.batches {
		if r.ID != batch || r.Ended == 0 {
			continue
		}
		by, err := s.tx.EntryAt(r.Ended)
		return by.ID, true, err
	}
	return "", false, nil
}

// ErasePerson makes a person's names and the free text about them unreadable for good. The entries
// and their hashes stay. The file is scrubbed and its snapshot removed, so that no byte of what was erased
// remains in them.
func (b *Book) ErasePerson(ctx context.Context, actor Actor, person string) (Receipt, error) {
	if err := actor.may(Erase, ""); err != nil {
		return Receipt{}, err
	}
	if actor.Person != "" && actor.Person == person {
		return Receipt{}, &Denied{Action: Erase, Role: actor.Role, Why: "nobody erases themselves; ask another account"}
	}
	receipt, err := b.write(ctx, actor, func(s *session) error {
		for _, site := range s.m.siteCodes() {
			if len(s.m.stintsAt(site, string(program.AsksPerson), person)) > 0 && !actor.SeesSite(site) {
				return &Denied{Action: Erase, Role: actor.Role, Why: "this person was on staff at site " + site + " too; somebody who belongs there has to erase them"}
			}
		}
		return s.erase(person)
	})
	if err != nil {
		return Receipt{}, err
	}
	return receipt, b.afterErasure(ctx)
}

// afterErasure leaves no trace of what was erased, in the file and in memory.
func (b *Book) afterErasure(ctx context.Context) error {
	if err := errors.Join(b.removeSnapshots(), b.st.Scrub(ctx)); err != nil {
		return fmt.Errorf("it is erased, but the file could not be scrubbed; erase again once nobody else has it open: %w", err)
	}
	return b.reload(ctx)
}

func (s *session) erase(person string) error {
	if err := s.add(draft{body: &erasureBody{Person: person}}); err != nil {
		return err
	}
	size, err := s.tx.Size()
	if err != nil {
		return err
	}
	veils, err := s.tx.VeilsOfPerson(person)
	if err != nil {
		return err
	}
	about, err := s.veilsNaming(person)
	if err != nil {
		return err
	}
	if err := s.tx.EraseVeils(append(veils, about...)); err != nil {
		return err
	}
	if err := s.blankBadges(person); err != nil {
		return err
	}
	return blankRows(s.tx, person, size-1)
}

// blankBadges takes the badges that the person bore out of the door events of the times in which they did.
func (s *session) blankBadges(person string) error {
	token := ""
	for _, r := range s.m.people.get(person) {
		if r.Badge == "" {
			continue
		}
		if token == "" {
			var err error
			if token, err = s.b.newID(s.now); err != nil {
				return err
			}
		}
		for _, span := range s.m.badgeSpans(r.Badge, person) {
			for _, site := range s.m.siteCodes() {
				from, to := time.Time{}, time.Time{}
				if span[0] > civil.FirstDay {
					from = span[0].Midnight(s.m.zone(site))
				}
				if span[1] < civil.LastDay {
					to = (span[1] + 1).Midnight(s.m.zone(site))
				}
				if err := s.tx.BlankBadge(site, r.Badge, "erased-"+token, from, to); err != nil {
					return err
				}
			}
		}
	}
	return nil
}

// blankRows takes out of the projected rows what was erased of a person.
func blankRows(tx *store.Tx, person string, seq int64) error {
	if err := tx.BlankPerson(person, seq); err != nil {
		return err
	}
	if err := tx.BlankAccounts(person, seq); err != nil {
		return err
	}
	veils, err := tx.VeilsOfPerson(person)
	if err != nil {
		return err
	}
	for _, v := range veils {
		if v.Path == "badge" {
			if err := tx.BlankMark(v.Seq, seq); err != nil {
				return err
			}
		}
		if v.Path == "visitor" {
			if err := tx.BlankVisit(v.Seq, seq); err != nil {
				return err
			}
		}
		fact, ok := strings.CutPrefix(v.Path, "facts.")
		if !ok {
			continue
		}
		if err := tx.BlankFacts(v.Seq, seq, strings.TrimSuffix(fact, ".w")); err != nil {
			return err
		}
	}
	return nil
}

// reload makes the model anew from the store, so that nothing erased stays in memory.
func (b *Book) reload(ctx context.Context) error {
	b.growing <- struct{}{}
	defer func() { <-b.growing }()
	m := b.emptyModel()
	err := b.st.Read(ctx, func(tx *store.Tx) error {
		size, err := tx.Size()
		if err != nil {
			return err
		}
		return m.takeAfter(tx, size)
	})
	if err == nil {
		b.publish(m)
	}
	return err
}
