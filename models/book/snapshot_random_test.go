package book_test

import (
	"bytes"
	"errors"
	"fmt"
	"math/rand/v2"
	"os"
	"testing"
	"time"

	"lodebook/models/book"
)

// scribe writes into a book whatever comes to mind.
type scribe struct {
	*desk
	*rand.Rand
	people, records, batches, plans []string
	version                         int
	done                            map[string]int // how often each of the deeds was taken in
}

// one takes one of the list, or something that is not there.
func (s *scribe) one(list []string) string {
	if len(list) == 0 {
		return "nobody"
	}
	return list[s.IntN(len(list))]
}

// past is a day up to today.
func (s *scribe) past() string { return s.now.AddDate(0, 0, -s.IntN(500)).Format(time.DateOnly) }

func (s *scribe) recordForm() book.RecordForm {
	f := book.RecordForm{Subject: s.one(s.people), On: s.past(), Result: []string{"pass", "pass", "fail"}[s.IntN(3)]}
	f.Record = []string{"training/level-2", "screening/staff", "training/induction", "acknowledgement/POL-ACCESS", "appointment/MRSO"}[s.IntN(5)]
	if s.IntN(4) == 0 {
		f.On += "T0" + fmt.Sprint(s.IntN(10)) + ":30:00Z"
	}
	if s.IntN(4) == 0 {
		f.Until = s.now.AddDate(0, s.IntN(20), 0).Format(time.DateOnly)
	}
	if s.IntN(6) == 0 {
		f.Limit = "III"
	}
	return f
}

// deeds are what can be written; each gives why it was refused.
func (s *scribe) deeds() map[string]func() error {
	ctx := s.Context()
	written := func(list *[]string, r book.Receipt, err error) error {
		if err == nil {
			*list = append(*list, r.ID())
		}
		return err
	}
	fix := func() book.Correction {
		return book.Correction{Supersedes: s.one(s.records), Reason: "wrong-result"}
	}
	return map[string]func() error{
		"person": func() error {
			code := fmt.Sprint("P", len(s.people))
			_, err := s.KeepPerson(ctx, s.officer, site, book.PersonForm{Code: code, Name: "Name of " + code, Badge: "B" + code, Level: s.one([]string{"L1", "L2"}), Crew: s.one([]string{"early", "night"}), Joined: s.past(), Facts: map[string]string{"employer": s.one([]string{"Yard", "Quay"})}}, book.Correction{})
			s.people = append(s.people, code)
			return err
		},
		"change": func() error {
			_, err := s.KeepPerson(ctx, s.officer, site, book.PersonForm{Code: s.one(s.people), Level: s.one([]string{"L1", "L2"}), From: s.past()}, book.Correction{})
			return err
		},
		"fixture": func() error {
			_, err := s.KeepFixture(ctx, s.officer, site, book.FixtureForm{Code: fmt.Sprint("V", s.IntN(4)), Kind: "vent", Name: "A vent", Zone: "IV", Since: s.past()}, book.Correction{})
			return err
		},
		"record": func() error {
			r, err := s.Record(ctx, s.officer, site, s.recordForm(), book.Correction{})
			return written(&s.records, r, err)
		},
		"correction": func() error {
			r, err := s.Record(ctx, s.officer, site, s.recordForm(), fix())
			return written(&s.records, r, err)
		},
		"withdrawal": func() error {
			_, err := s.Withdraw(ctx, s.officer, s.one(s.records), book.Correction{Reason: "not-done"})
			return err
		},
		"event": func() error {
			_, err := s.ReportEvent(ctx, s.officer, site, book.EventForm{Event: "health-change", Subject: s.one(s.people), On: s.past()}, book.Correction{})
			return err
		},
		"excusal": func() error {
			_, err := s.Excuse(ctx, s.officer, site, book.ExcusalForm{Item: "INDUCTION", Subject: s.one(s.people), From: s.past(), To: s.now.AddDate(0, 1, 0).Format(time.DateOnly), Reason: "away"}, book.Correction{})
			return err
		},
		"pause": func() error {
			_, err := s.Pause(ctx, s.officer, site, book.PauseForm{Subject: s.one(s.people), From: s.past(), Reason: "leave"}, book.Correction{})
			return err
		},
		"right": func() error {
			r, err := s.Grant(ctx, s.officer, site, book.RightForm{Person: s.one(s.people), Zone: "IV", From: s.past(), To: s.now.Format(time.DateOnly)}, book.Correction{})
			return written(&s.records, r, err)
		},
		"incident": func() error {
			r, err := s.ReportIncident(ctx, s.officer, site, book.IncidentForm{Kind: s.one([]string{"burn", "quench"}), At: s.past() + "T05:00:00Z", Severity: s.one([]string{"low", "high"}), What: "something", People: []string{s.one(s.people)}, Anonymous: s.IntN(3) == 0})
			return written(&s.records, r, err)
		},
		"remedy": func() error {
			f := book.RemedyForm{Severity: s.one([]string{"low", "high"}), Owner: s.one(s.people), What: "mend it", Incident: fmt.Sprint(1 + s.IntN(4))}
			if s.IntN(2) == 0 {
				f.Incident, f.Item, f.Subject = "", "TRAIN-L2", s.one(s.people)
			}
			r, err := s.KeepRemedy(ctx, s.officer, site, f)
			return written(&s.records, r, err)
		},
		"remedy done": func() error {
			r, err := s.RemedyDone(ctx, s.officer, site, 1+s.IntN(4), book.RemedyDoneForm{Day: s.past()})
			return written(&s.records, r, err)
		},
		"outage": func() error {
			_, err := s.TakeOut(ctx, s.officer, site, book.OutageForm{Subject: s.one([]string{"zone:IV", "fixture:V1"}), Because: "it leans"})
			return err
		},
		"return": func() error {
			r, err := s.SignBack(ctx, s.officer, site, book.ReturnForm{Subject: "zone:IV", Note: "upright"})
			return written(&s.records, r, err)
		},
		"plan": func() error {
			r, err := s.PlanDrill(ctx, s.officer, site, book.PlanForm{Record: "drill/quench", Crew: "early", Day: s.now.AddDate(0, 0, s.IntN(30)).Format(time.DateOnly)}, book.Correction{})
			return written(&s.plans, r, err)
		},
		"drill": func() error {
			_, err := s.RecordDrill(ctx, s.officer, site, book.DrillForm{Plan: s.one(s.plans), Record: "drill/quench", Crew: "early", On: s.now.Format(time.DateOnly), People: []string{s.one(s.people)}})
			return err
		},
		"import": func() error {
			r, err := s.try("records", fmt.Sprintf("record,subject,on\ntraining/induction,%s,%s\nscreening/staff,%s,%s\n", s.one(s.people), s.past(), s.one(s.people), s.past()), book.ImportOptions{})
			if err == nil && r.Batch != "" {
				s.batches = append(s.batches, r.Batch)
			}
			return err
		},
		"undone import": func() error {
			_, err := s.UndoImport(ctx, s.op, s.one(s.batches))
			return err
		},
		"account": func() error {
			_, err := s.AddAccount(ctx, s.op, book.AccountForm{Name: fmt.Sprint("user ", s.Uint32()), Role: book.Member, Person: s.one(s.people), Sites: []string{site}})
			return err
		},
		"erasure": func() error {
			code := s.one(s.people)
			_, err := s.KeepPerson(ctx, s.officer, site, book.PersonForm{Code: code, Left: s.now.AddDate(0, 0, -1).Format(time.DateOnly)}, book.Correction{})
			if err == nil {
				_, err = s.ErasePerson(ctx, s.officer, code)
			}
			return err
		},
		"version": func() error {
			source, err := os.ReadFile("testdata/site.yaml")
			s.ok(err)
			s.version++
			source = bytes.Replace(source, []byte("in_force_from: 2025-01-01"), []byte("in_force_from: "+s.now.AddDate(0, 0, -40+s.version).Format(time.DateOnly)), 1)
			source = bytes.Replace(source, []byte("every: P1Y, guards"), fmt.Appendf(nil, "every: P%dM, guards", 3+s.IntN(20)), 1)
			_, err = s.OpenProgram(ctx, s.op, source, "tried")
			return err
		},
	}
}

// write takes n of the deeds. What the book refuses is left.
func (s *scribe) write(n int, but ...string) {
	s.Helper()
	deeds := s.deeds()
	names := make([]string, 0, len(deeds))
	for _, name := range deedNames {
		if len(but) == 0 || name != but[0] {
			names = append(names, name)
		}
	}
	for range n {
		s.now = s.now.Add(time.Duration(s.IntN(100)) * time.Minute)
		name := names[s.IntN(len(names))]
		err := deeds[name]()
		var invalid *book.Invalid
		var stale *book.Stale
		var missing *book.NotFound
		switch {
		case err == nil:
			s.done[name]++
		case errors.As(err, &invalid), errors.As(err, &stale), errors.As(err, &missing):
		default:
			s.Fatalf("%s: %v", name, err)
		}
	}
}

var deedNames = []string{
	"person", "person", "record", "record", "record", "record", "record", "correction", "correction", "withdrawal", "change", "fixture",
	"event", "excusal", "pause", "right", "incident", "incident", "remedy", "remedy", "remedy", "remedy done", "remedy done", "outage", "return", "plan", "drill", "import", "undone import", "account", "erasure", "version",
}

// Whatever was written before and after a snapshot, a book that starts from it answers as one that is read from
// its rows, and goes on so.
func TestSnapshotAndWhatCameAfterAreTheBook(t *testing.T) {
	after := map[string]int{}
	for seed := range uint64(8) {
		t.Run(fmt.Sprint(seed), func(t *testing.T) {
			d := newFileDesk(t)
			s := &scribe{desk: d, Rand: rand.New(rand.NewPCG(seed, 1)), done: map[string]int{}}
			s.write(20 + s.IntN(60))
			if s.IntN(2) == 0 {
				d.ok(d.Turn(t.Context()))
			}
			d.keep()
			old, err := os.ReadFile(d.snapshot())
			d.ok(err)
			s.done = after
			s.write(30 + s.IntN(40))
			d.ok(os.WriteFile(d.snapshot(), old, 0o600)) // also when an erasure has removed it
			from, told := d.opened()
			if *told != "" {
				t.Fatal(*told)
			}
			d.ok(os.RemoveAll(d.snapshot()))
			rows, _ := d.opened()
			from.same(rows)
			d.same(rows)
			s.write(5)
			from.same(rows)
			d.same(rows)
		})
	}
	for _, name := range deedNames {
		if after[name] == 0 {
			t.Errorf("no %s came after a snapshot: the test tries too little", name)
		}
	}
}
