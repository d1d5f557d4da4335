package web

import (
	"bytes"
	"fmt"
	"net/http"
	"net/http/httptest"
	"reflect"
	"strings"
	"sync"
	"testing"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
)

// heldPaths are the addresses of every page that may be held, some with a query.
func heldPaths() []string {
	names := strings.NewReplacer(":site", fell, "/people/:code", "/people/P2", "/fixtures/:code", "/fixtures/V1", ":kind", "crew", ":item", "TRAIN-L2", ":code", "early")
	var out []string
	for _, r := range routes {
		if r.held {
			out = append(out, names.Replace(r.path))
		}
	}
	at := "/s/" + fell
	return append(out, at+"/today?on=2026-11-02", at+"/gaps?by=owner", at+"/gaps?of=TRAIN-L2", at+"/gaps?on=2027-03-01", at+"/people?crew=night")
}

// forgetful is the house with a server that holds nothing in memory.
func (h *house) forgetful() *house {
	h.Helper()
	if h.blank == nil {
		s, err := newServer(h.b, Options{PublicURL: "http://book.example"})
		h.ok(err)
		s.remember(0, 0, 0)
		h.blank, err = s.handler()
		h.ok(err)
	}
	f := *h
	f.handler = h.blank
	return &f
}

// same fails the test where a page is not the one that would be made now, for a role.
func (h *house) same(why string, role book.Role, paths []string) {
	h.Helper()
	j, fresh := h.as(role), h.forgetful()
	for _, path := range paths {
		got, want := h.get(j, path), fresh.get(j, path)
		if got.Code != want.Code || got.Body.String() != want.Body.String() {
			h.Errorf("%s: %s as %s is not what would be made now: %d, want %d\n%s", why, path, role, got.Code, want.Code, difference(got.Body.String(), want.Body.String()))
		}
	}
}

// difference shows where two texts part.
func difference(got, want string) string {
	i := 0
	for i < min(len(got), len(want)) && got[i] == want[i] {
		i++
	}
	from := max(0, i-60)
	return fmt.Sprintf("got  …%s\nwant …%s", got[from:min(len(got), i+100)], want[from:min(len(want), i+100)])
}

// writing is one kind of write; a second return value of it is the entry to put right.
type writing struct {
	name string
	do   func(h *house, b *book.Book) error
}

// writings are every kind of write that a page may show.
func writings() []writing {
	var plan, record, pause, waiting, batch string
	keep := func(id *string) func(book.Receipt, error) error {
		return func(r book.Receipt, err error) error {
			*id = r.ID()
			return err
		}
	}
	only := func(_ book.Receipt, err error) error { return err }
	none := book.Correction{}
	return []writing{
		{"a person", func(h *house, b *book.Book) error {
			return only(b.KeepPerson(h.Context(), h.officer(), fell, book.PersonForm{Code: "P5", Name: "Runa Lund", Level: "L2", Crew: "early", Joined: "2026-01-01"}, none))
		}},
		{"another name", func(h *house, b *book.Book) error {
			return only(b.KeepPerson(h.Context(), h.officer(), fell, book.PersonForm{Code: "P1", Name: "Ines Arruda-Holm"}, none))
		}},
		{"a fixture", func(h *house, b *book.Book) error {
			return only(b.KeepFixture(h.Context(), h.officer(), fell, book.FixtureForm{Code: "V3", Kind: "vent", Name: "East vent", Zone: "IV", Since: "2026-01-01"}, none))
		}},
		{"a record", func(h *house, b *book.Book) error {
			return keep(&record)(b.Record(h.Context(), h.officer(), fell, book.RecordForm{Record: "training/level-2", Subject: "person:P1", On: "2026-11-20"}, none))
		}},
		{"a correction", func(h *house, b *book.Book) error {
			return keep(&record)(b.Record(h.Context(), h.officer(), fell, book.RecordForm{Record: "training/level-2", Subject: "person:P1", On: "2026-11-20", Result: "fail"}, book.Correction{Supersedes: record, Reason: "wrong-result"}))
		}},
		{"a withdrawal", func(h *house, b *book.Book) error {
			return only(b.Withdraw(h.Context(), h.officer(), record, book.Correction{Reason: "not-done"}))
		}},
		{"a session", func(h *house, b *book.Book) error {
			return only(b.RecordSession(h.Context(), h.officer(), fell, book.SessionForm{Record: "screening/staff", On: "2026-11-30", People: []string{"P2", "P3"}}))
		}},
		{"a sheet", func(h *house, b *book.Book) error {
			_, _, err := b.FillSheet(h.Context(), h.officer(), fell, book.SheetForm{Record: "inspection/vent-yearly", Fixture: "V1", On: "2026-12-01", Values: map[string]string{"outlet_clear": "yes", "clear_of_path_m": "5"}}, none)
			return err
		}},
		{"a plan", func(h *house, b *book.Book) error {
			return keep(&plan)(b.PlanDrill(h.Context(), h.officer(), fell, book.PlanForm{Record: "drill/quench", Crew: "early", Day: "2026-12-03", At: "14:00"}, none))
		}},
		{"a drill", func(h *house, b *book.Book) error {
			return only(b.RecordDrill(h.Context(), h.officer(), fell, book.DrillForm{Plan: plan, Record: "drill/quench", Crew: "early", On: "2026-12-01", People: []string{"P1", "P2"}}))
		}},
		{"an event", func(h *house, b *book.Book) error {
			return only(b.ReportEvent(h.Context(), h.officer(), fell, book.EventForm{Event: "roof-work", Subject: "fixture:V2", On: "2026-11-28"}, none))
		}},
		{"an excusal", func(h *house, b *book.Book) error {
			return only(b.Excuse(h.Context(), h.officer(), fell, book.ExcusalForm{Item: "TRAIN-L2", Subject: "person:P3", From: "2026-11-01", To: "2026-12-24", Reason: "Away on a course"}, none))
		}},
		{"an imported excusal", func(h *house, b *book.Book) error {
			id, err := h.importTo(b, "excusals", "item,subject,from,to,reason,opens\nSCREEN,P4,2026-11-01,2026-12-24,New here,yes\n")
			waiting = id
			return err
		}},
		{"an import undone", func(h *house, b *book.Book) error {
			return only(b.UndoImport(h.Context(), h.op, waiting))
		}},
		{"a pause", func(h *house, b *book.Book) error {
			return keep(&pause)(b.Pause(h.Context(), h.officer(), fell, book.PauseForm{Subject: "person:P4", From: "2026-11-25", Reason: "Leave"}, none))
		}},
		{"a pause ended", func(h *house, b *book.Book) error {
			return only(b.EndPause(h.Context(), h.officer(), pause, civil.Of(2026, time.November, 30)))
		}},
		{"an import", func(h *house, b *book.Book) error {
			id, err := h.importTo(b, "records", "record,subject,on\ntraining/induction,P4,2026-11-23\n")
			batch = id
			return err
		}},
		{"another import undone", func(h *house, b *book.Book) error {
			return only(b.UndoImport(h.Context(), h.op, batch))
		}},
		{"flags", func(h *house, b *book.Book) error {
			_, err := b.RaiseFlags(h.Context(), book.JobActor(), fell, civil.Of(2026, time.December, 1))
			return err
		}},
		{"flags cleared", func(h *house, b *book.Book) error {
			r, err := b.Record(h.Context(), h.officer(), fell, book.RecordForm{Record: "training/level-2", Subject: "person:P1", On: "2026-11-30"}, none)
			if err == nil {
				record = r.ID()
				_, err = b.RaiseFlags(h.Context(), book.JobActor(), fell, civil.Of(2026, time.December, 1))
			}
			return err
		}},
		{"a gap again", func(h *house, b *book.Book) error {
			return only(b.Withdraw(h.Context(), h.officer(), record, book.Correction{Reason: "not-done"}))
		}},
		{"flags again", func(h *house, b *book.Book) error {
			_, err := b.RaiseFlags(h.Context(), book.JobActor(), fell, civil.Of(2026, time.December, 1))
			return err
		}},
		{"an account", func(h *house, b *book.Book) error {
			_, err := b.AddAccount(h.Context(), h.op, book.AccountForm{Name: "another", Role: book.Reader, Sites: []string{fell}})
			return err
		}},
		{"a person who left", func(h *house, b *book.Book) error {
			return only(b.KeepPerson(h.Context(), h.officer(), fell, book.PersonForm{Code: "P5", Joined: "2026-01-01", Left: "2026-06-30"}, none))
		}},
		{"an erased person", func(h *house, b *book.Book) error {
			return only(b.ErasePerson(h.Context(), h.officer(), "P5"))
		}},
		{"a program", func(h *house, b *book.Book) error {
			_, err := b.RewriteProgram(h.Context(), h.officer(), fell, func(source []byte) ([]byte, error) {
				return bytes.Replace(source, []byte("title: Site induction"), []byte("title: The first walk round"), 1), nil
			})
			return err
		}},
		{"another site", func(h *house, b *book.Book) error {
			_, err := b.OpenProgram(h.Context(), h.op, []byte("lodebook: 1\nin_force_from: 2025-01-01\nsite: {code: GILL, name: Gill Lane, time_zone: Asia/Kathmandu}\nzones: [{code: I}]\n"), "")
			return err
		}},
	}
}

// importTo imports a table and gives its batch.
func (h *house) importTo(b *book.Book, table, text string) (string, error) {
	r, err := b.Import(h.Context(), h.op, book.ImportOptions{Table: table, Site: fell, File: strings.NewReader(text), Size: int64(len(text)), FileName: table + ".csv"})
	if err == nil && r.Written == 0 {
		err = fmt.Errorf("nothing was written: %+v", r)
	}
	return r.Batch, err
}

// TestHeldPagesAreThoseOfNow: after every kind of write, by this process or another, each page is the one
// that would be made now.
func TestHeldPagesAreThoseOfNow(t *testing.T) {
	for _, who := range []string{"own", "another process"} {
		t.Run(who, func(t *testing.T) {
			h := furnished(t)
			b := h.b
			if who != "own" {
				b = h.elsewhere()
			}
			at, paths := "/s/"+fell, heldPaths()
			for _, w := range writings() {
				before := h.page(h.as(book.SafetyOfficer), "/s/"+fell+"/today").Body.String()
				h.ok(w.do(h, b))
				h.same(w.name, book.SafetyOfficer, paths)
				h.same(w.name, book.Facilities, []string{at + "/today", at + "/gaps"})
				h.same(w.name, book.Member, []string{at + "/today", at + "/people/P2"})
				after := h.page(h.as(book.SafetyOfficer), "/s/"+fell+"/today").Body.String()
				if seen := before != after; !seen && !strings.HasPrefix(w.name, "flags") { // the number of entries stands on every page
					t.Errorf("%s is not to be seen on Today", w.name)
				}
			}
			h.page(h.as(book.SafetyOfficer), "/s/"+fell+"/gaps").says("main", "reopened once")
		})
	}
}

// TestHeldPagesTurnWithTheDay: at the midnight of the site, which is not that of UTC, and at any other.
func TestHeldPagesTurnWithTheDay(t *testing.T) {
	h := furnished(t)
	h.record("training/level-2", "person:P1", "2025-12-01", "pass") // due at the end of December
	zone, err := time.LoadLocation("Europe/Lisbon")
	h.ok(err)
	for _, day := range []int{2, 3} {
		midnight := time.Date(2026, 12, day, 0, 0, 0, 0, zone)
		h.now = midnight.Add(-time.Hour)
		delete(h.jars, book.SafetyOfficer) // the session of the day before has ended
		j := h.as(book.SafetyOfficer)
		for _, step := range []struct {
			at  time.Duration
			day int
		}{{-time.Minute, day - 1}, {-time.Second, day - 1}, {0, day}, {time.Second, day}} {
			h.now = midnight.Add(step.at)
			h.page(j, "/s/"+fell+"/today").says("h1", fmt.Sprint(step.day, " December"))
			h.same(h.now.String(), book.SafetyOfficer, heldPaths())
		}
	}
}

// TestHeldPagesAreMadeAlike: a page that may be held hangs on nothing but the book, the day, the address
// and the actor: made twice, it is the same to the byte, and sets no cookie.
func TestHeldPagesAreMadeAlike(t *testing.T) {
	h := furnished(t)
	for _, role := range book.Roles {
		if role == book.Operator || role == book.Scheduler {
			continue
		}
		for _, path := range heldPaths() {
			a, b := h.forgetful().get(h.as(role), path), h.forgetful().get(h.as(role), path)
			if a.Body.String() != b.Body.String() || len(a.Result().Cookies()) > 0 {
				t.Errorf("%s as %s is made in two ways: %s", path, role, difference(a.Body.String(), b.Body.String()))
			}
		}
	}
}

// TestNobodySeesTheHeldPageOfAnother: accounts of every role and of different sites ask for the same
// addresses at the same time, and each is shown their own page.
func TestNobodySeesTheHeldPageOfAnother(t *testing.T) {
	h := furnished(t)
	h.ok(writings()[len(writings())-1].do(h, h.b)) // a second site
	for i, f := range []book.AccountForm{
		{Name: "gill officer", Role: book.SafetyOfficer, Sites: []string{"GILL"}},
		{Name: "both", Role: book.Reader, Sites: []string{fell, "GILL"}},
		{Name: "other member", Role: book.Member, Sites: []string{fell}, Person: "P3"},
		{Name: "until", Role: book.Reader, Sites: []string{fell}, Until: dayOf(2026, 12, 24)},
	} {
		_, err := h.b.AddAccount(h.Context(), h.op, f)
		h.ok(err)
		role := book.Role(fmt.Sprint("jar ", i)) // a jar of its own
		h.actors[role], err = h.b.ActorNamed(h.Context(), f.Name)
		h.ok(err)
		secret, err := h.b.NewLink(h.Context(), h.op, f.Name)
		h.ok(err)
		in, err := h.b.SignInByLink(h.Context(), secret)
		h.ok(err)
		h.jars[role] = &jar{map[string]string{"lodebook": in.Secret}}
	}
	for _, role := range []book.Role{book.Administrator, book.SafetyOfficer, book.Facilities, book.Member, book.Reader} {
		h.as(role)
	}
	paths := append(heldPaths(), "/s/GILL/today", "/s/GILL/gaps")
	want := map[book.Role]map[string]string{}
	for role, j := range h.jars {
		want[role] = map[string]string{}
		fresh := h.forgetful()
		for _, path := range paths {
			a := fresh.get(j, path)
			want[role][path] = fmt.Sprint(a.Code, a.Body.String())
			if a.Code == http.StatusOK && !strings.Contains(a.text("nav.spine .foot"), h.actors[role].Name) {
				t.Errorf("%s for %s does not name them", path, h.actors[role].Name)
			}
		}
	}
	var all sync.WaitGroup
	for role, j := range h.jars {
		all.Go(func() {
			for range 3 {
				for _, path := range paths {
					w := httptest.NewRecorder()
					r := httptest.NewRequest(get, path, nil)
					r.AddCookie(&http.Cookie{Name: "lodebook", Value: j.cookies["lodebook"]})
					h.handler.ServeHTTP(w, r)
					if got := fmt.Sprint(w.Code, w.Body.String()); got != want[role][path] {
						t.Errorf("%s for %s is not their own: %s", path, role, difference(got, want[role][path]))
					}
				}
			}
		})
	}
	all.Wait()
}

func dayOf(year int, month time.Month, d int) *civil.Day {
	day := civil.Of(year, month, d)
	return &day
}

// TestActorsAreToldApart: whatever of an actor differs, the page held for one is not given to the other.
func TestActorsAreToldApart(t *testing.T) {
	full := reflect.TypeFor[book.Actor]()
	base := actorKey(book.Actor{})
	for i := range full.NumField() {
		var a book.Actor
		fill(reflect.ValueOf(&a).Elem().Field(i), 0)
		if actorKey(a) == base {
			t.Errorf("%s of an actor is not in the key", full.Field(i).Name)
		}
	}
	a, b := book.Actor{Name: "a", Role: "b"}, book.Actor{Name: `a" "b`}
	if actorKey(a) == actorKey(b) {
		t.Error("two actors have one key")
	}
	if one, two := (book.Actor{Sites: []string{"A", "B"}}), (book.Actor{Sites: []string{"A B"}}); actorKey(one) == actorKey(two) {
		t.Error("two lists of sites have one key")
	}
}

// TestNoticeIsShownOnce: the page that shows a notice is not held, nor is it taken from memory.
func TestNoticeIsShownOnce(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	path := "/s/" + fell + "/today"
	h.page(j, path).has(0, ".notice")
	if a := h.post(j, "/password", "password", "a long enough secret", "again", "a long enough secret"); a.Code != http.StatusSeeOther {
		t.Fatalf("the password was not set: %d", a.Code)
	}
	h.page(j, path).has(1, ".notice")
	h.page(j, path).has(0, ".notice")
}

// TestHeldPagesAndWriters: with readers all the time, whoever has written sees it on the next page.
func TestHeldPagesAndWriters(t *testing.T) {
	h := furnished(t)
	j := h.as(book.SafetyOfficer)
	secret, officer := j.cookies["lodebook"], h.officer()
	ask := func(path string) string {
		w := httptest.NewRecorder()
		r := httptest.NewRequest(get, path, nil)
		r.AddCookie(&http.Cookie{Name: "lodebook", Value: secret})
		h.handler.ServeHTTP(w, r)
		if w.Code != http.StatusOK {
			t.Errorf("%s: %d", path, w.Code)
		}
		return w.Body.String()
	}
	done := make(chan struct{})
	var readers, writers sync.WaitGroup
	for i := range 4 {
		readers.Go(func() {
			for {
				select {
				case <-done:
					return
				default:
					ask([]string{"/s/" + fell + "/today", "/s/" + fell + "/gaps", "/s/" + fell + "/people"}[i%3])
				}
			}
		})
	}
	for w, b := range []*book.Book{h.b, h.elsewhere()} {
		writers.Go(func() {
			for i := range 8 {
				code := fmt.Sprintf("N%d%d", w, i)
				if _, err := b.KeepPerson(t.Context(), officer, fell, book.PersonForm{Code: code, Name: "Newcomer " + code, Level: "L1", Joined: "2026-10-01"}, book.Correction{}); err != nil {
					t.Error(err)
				}
				if !strings.Contains(ask("/s/"+fell+"/people"), "Newcomer "+code) {
					t.Errorf("%s is not among the people", code)
				}
			}
		})
	}
	writers.Wait()
	close(done)
	readers.Wait()
}

// TestPagesOfACrowd: many clients over the network, each with a session of its own, are given the page that
// would be made for them, and a bare handler's bytes come whole. It is the benchmark at a small size.
func TestPagesOfACrowd(t *testing.T) {
	h := crowded(t, 100)
	jars := h.crowd(8)
	for _, path := range firstPages {
		body := h.page(jars[0], path).Body.Bytes()
		load{handler: bareHandler(path, body), jars: jars, path: path, size: len(body)}.run(t, 40)
		load{handler: h.handler, jars: jars, path: path}.run(t, 40)
		for i, j := range jars {
			got, want := h.page(j, path), h.forgetful().get(j, path)
			if got.Body.String() != want.Body.String() {
				t.Errorf("%s for client %d: %s", path, i+1, difference(got.Body.String(), want.Body.String()))
			}
		}
	}
	h.page(jars[0], "/s/"+fell+"/today").says(".say", "things have run out or failed")
	h.page(jars[0], "/s/"+fell+"/gaps").says(".say", "gaps in")
}
