package store

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"

	"lodebook/models/civil"
)

// full is one row of every projection, with a value in every field.
func full(seq int64) []any {
	rows := []any{
		&SiteRow{}, &VersionRow{}, &PersonRow{}, &FixtureRow{}, &StintRow{}, &FactRow{}, &RecordRow{},
		&EventRow{}, &ExcusalRow{}, &RightRow{}, &MarkRow{}, &VisitRow{}, &VisitStepRow{}, &DutyRow{}, &StockRow{}, &IncidentRow{}, &ReportRow{}, &RemedyRow{}, &RemedyStepRow{}, &OutageRow{}, &ReturnRow{}, &PlanRow{}, &AccountRow{}, &BatchRow{},
	}
	out := make([]any, len(rows))
	for i, r := range rows {
		v := reflect.ValueOf(r).Elem()
		fill(v, 100*i)
		line := v.FieldByName("Line").Addr().Interface().(*Line)
		*line = Line{Seq: seq, ID: entry(int(seq)).ID, Batch: "batch-1"}
		out[i] = v.Interface()
	}
	return out
}

// fill sets every field to a value that is not zero and differs from field to field.
func fill(v reflect.Value, n int) {
	switch x := v.Addr().Interface().(type) {
	case *civil.Day:
		*x = civil.Of(2024, 2, 29) + civil.Day(n)
		return
	case *time.Time:
		*x = began.Add(time.Duration(n) * time.Microsecond)
		return
	}
	switch v.Kind() {
	case reflect.String:
		v.SetString(fmt.Sprintf("text %d é", n))
	case reflect.Int, reflect.Int64:
		v.SetInt(int64(n + 1))
	case reflect.Bool:
		v.SetBool(true)
	case reflect.Pointer:
		v.Set(reflect.New(v.Type().Elem()))
		fill(v.Elem(), n)
	case reflect.Slice:
		v.Set(reflect.MakeSlice(v.Type(), 2, 2))
		fill(v.Index(0), n)
		fill(v.Index(1), n+1)
	case reflect.Struct:
		for i := range v.NumField() {
			fill(v.Field(i), n+i)
		}
	case reflect.Uint8:
		v.SetUint(uint64(n%255 + 1))
	default:
		panic(v.Type())
	}
}

// rowsOf gives all rows of a delta, table by table.
func rowsOf(d Delta) []any {
	var all []any
	v := reflect.ValueOf(d)
	for i := range v.NumField() {
		for j := range v.Field(i).Len() {
			all = append(all, v.Field(i).Index(j).Interface())
		}
	}
	return all
}

func changed(t *testing.T, s *Store, since int64) Delta {
	t.Helper()
	var d Delta
	read(t, s, func(tx *Tx) error {
		var err error
		d, err = tx.Changed(since)
		return err
	})
	return d
}

func TestEveryFieldOfEveryRowComesBack(t *testing.T) {
	s := filled(t, 2)
	want := full(1)
	write(t, s, func(tx *Tx) error { return tx.Put(want...) })
	if got := rowsOf(changed(t, s, -1)); !reflect.DeepEqual(got, want) {
		t.Errorf("got\n%+v\nwant\n%+v", got, want)
	}
	if len(want) != len(projections) {
		t.Errorf("%d rows are tried of %d projections", len(want), len(projections))
	}
}

func TestAbsentValuesStayAbsent(t *testing.T) {
	s := filled(t, 2)
	line := Line{Seq: 1, ID: "id"}
	want := []any{
		StintRow{Line: line}, RecordRow{Line: line}, EventRow{Line: line}, ExcusalRow{Line: line}, RightRow{Line: line, From: began}, AccountRow{Line: line},
	}
	write(t, s, func(tx *Tx) error { return tx.Put(want...) })
	if got := rowsOf(changed(t, s, -1)); !reflect.DeepEqual(got, want) {
		t.Errorf("got\n%+v\nwant\n%+v", got, want)
	}
}

func TestMomentsAreKeptInUTC(t *testing.T) {
	s := filled(t, 1)
	local := began.In(time.FixedZone("", 5*3600+1800))
	write(t, s, func(tx *Tx) error { return tx.Put(EventRow{Line: Line{Seq: 0}, Time: &local}) })
	got := changed(t, s, -1).Events[0].Time
	if !got.Equal(began) || got.Location() != time.UTC {
		t.Errorf("%v became %v", local, got)
	}
}

// What Changed gives since an entry is what that entry and later ones did, and no more.
func TestChangedGivesWhatIsNew(t *testing.T) {
	s := filled(t, 10)
	person := func(seq int64, code string) PersonRow {
		return PersonRow{Line: Line{Seq: seq}, Code: code, Name: "Ada Example"}
	}
	write(t, s, func(tx *Tx) error {
		return tx.Put(person(0, "P0"), person(1, "P1"), person(2, "P2"), person(3, "P3"), person(4, "P4"))
	})
	write(t, s, func(tx *Tx) error {
		return errors.Join(tx.End(1, 5), tx.End(2, 6), tx.BlankPerson("P3", 7), tx.BlankPerson("P4", 6), tx.End(4, 8))
	})
	for since, want := range map[int64][]string{
		-1: {"P0", "P1", "P2", "P3", "P4"},
		0:  {"P1", "P2", "P3", "P4"},
		3:  {"P1", "P2", "P3", "P4"},
		4:  {"P1", "P2", "P3", "P4"},
		5:  {"P2", "P3", "P4"},
		6:  {"P3", "P4"},
		7:  {"P4"},
		8:  nil,
	} {
		var got []string
		for _, p := range changed(t, s, since).People {
			got = append(got, p.Code)
		}
		if !slices.Equal(got, want) {
			t.Errorf("since %d: %v, want %v", since, got, want)
		}
	}
	ended := changed(t, s, 4).People[0]
	if ended.Ended != 5 || ended.Name != "Ada Example" {
		t.Errorf("the ended row is %+v", ended)
	}
}

// A server asks for changes after every write, so it may not read whole tables for it.
func TestChangedGoesByIndexes(t *testing.T) {
	s := newFile(t)
	for _, p := range projections {
		for _, c := range p.conditions() {
			rows, err := s.r.Raw("EXPLAIN QUERY PLAN SELECT * FROM "+p.title()+" WHERE "+c, sql.Named("since", 7)).Rows()
			must(t, err)
			plan, err := rowsAsText(rows)
			must(t, errors.Join(err, rows.Close()))
			if len(plan) != 1 || !strings.Contains(plan[0], "SEARCH "+p.title()+" USING INDEX") {
				t.Errorf("%s where %s: %v", p.title(), c, plan)
			}
		}
	}
}

func TestRowsComeInOrder(t *testing.T) {
	s := filled(t, 5)
	record := func(seq, order int64, subject string) RecordRow {
		return RecordRow{Line: Line{Seq: seq}, Order: order, Subject: SubjectKey{Code: subject}}
	}
	// Several rows of one entry keep their order over calls and transactions, and a correction keeps
	// the place of what it corrects.
	write(t, s, func(tx *Tx) error {
		return errors.Join(
			tx.Put([]RecordRow{record(2, 2, "c"), record(2, 2, "a")}),
			tx.Put(record(3, 3, "d")),
			tx.Put(record(2, 2, "b")),
			tx.Put(record(4, 1, "first")),
		)
	})
	write(t, s, func(tx *Tx) error { return tx.Put(record(3, 3, "c"), record(2, 2, "z")) })
	for _, since := range []int64{-1, 0, 1} {
		var got []string
		for _, r := range changed(t, s, since).Records {
			got = append(got, r.Subject.Code)
		}
		if want := []string{"first", "c", "a", "b", "z", "d", "c"}; !slices.Equal(got, want) {
			t.Errorf("since %d: %v, want %v", since, got, want)
		}
	}
}

func TestPutTakesManyAndInBatches(t *testing.T) {
	const n = 2*batchRows + 7
	s := filled(t, n)
	write(t, s, func(tx *Tx) error {
		for i := range n {
			must(t, tx.Put(FactRow{Line: Line{Seq: int64(i)}, Fact: "crew", Value: "null"}))
		}
		d, err := tx.Changed(-1)
		if len(d.Facts) != n {
			t.Errorf("the transaction sees %d of its %d rows", len(d.Facts), n)
		}
		return err
	})
	if got := len(changed(t, s, -1).Facts); got != n {
		t.Errorf("%d of %d rows are there", got, n)
	}
}

func TestPutRefuses(t *testing.T) {
	s := filled(t, 1)
	for name, row := range map[string]any{
		"what is no row":              42,
		"a pointer":                   &SiteRow{},
		"a row of operation":          FlagRow{},
		"an entry that is not there":  SiteRow{Line: Line{Seq: 1}},
		"a later one, in a long list": append(make([]SiteRow, batchRows), SiteRow{Line: Line{Seq: 9}}),
	} {
		err := s.Write(background, func(tx *Tx) error { return tx.Put(row) })
		if err == nil {
			t.Errorf("%s was put", name)
		}
	}
	if rows := rowsOf(changed(t, s, -1)); len(rows) != 0 {
		t.Errorf("rows were left: %v", rows)
	}
}

func TestEndEndsOnlyWhatStands(t *testing.T) {
	s := filled(t, 9)
	write(t, s, func(tx *Tx) error {
		must(t, tx.Put(full(1)...))
		must(t, tx.Put(full(2)...))
		must(t, tx.End(1, 5)) // rows of the same transaction too
		must(t, tx.End(1, 6)) // what has ended stays ended by the first
		return nil
	})
	for _, r := range rowsOf(changed(t, s, -1)) {
		line := reflect.ValueOf(r).FieldByName("Line").Interface().(Line)
		if want := map[int64]int64{1: 5, 2: 0}[line.Seq]; line.Ended != want {
			t.Errorf("%T of entry %d is ended by %d, want %d", r, line.Seq, line.Ended, want)
		}
	}
	for _, by := range []int64{0, -1} {
		err := s.Write(background, func(tx *Tx) error { return tx.End(1, by) })
		if err == nil {
			t.Errorf("entry %d ended something", by)
		}
	}
}

func TestEndBatchEndsTheImport(t *testing.T) {
	s := newBook(t)
	all := entriesUpTo(0, 6)
	for i := 1; i <= 3; i++ {
		all[i].Batch = "batch-1"
	}
	all[4].Batch = "batch-2"
	write(t, s, func(tx *Tx) error {
		_, err := tx.Append(all, nil)
		must(t, err)
		for i := range 5 {
			must(t, tx.Put(SiteRow{Line: Line{Seq: int64(i)}}, FixtureRow{Line: Line{Seq: int64(i)}}))
		}
		must(t, tx.End(2, 4)) // was corrected meanwhile
		return tx.EndBatch("batch-1", 5)
	})
	want := []int64{0, 5, 4, 5, 0}
	d := changed(t, s, -1)
	for i := range want {
		if d.Sites[i].Ended != want[i] || d.Fixtures[i].Ended != want[i] {
			t.Errorf("rows of entry %d are ended by %d and %d, want %d", i, d.Sites[i].Ended, d.Fixtures[i].Ended, want[i])
		}
	}
	err := s.Write(background, func(tx *Tx) error { return tx.EndBatch("", 5) })
	if err == nil {
		t.Error("what was not imported was ended as an import")
	}
}

func TestBlankingEmptiesNamesAndNothingElse(t *testing.T) {
	s := filled(t, 5)
	write(t, s, func(tx *Tx) error {
		must(t, tx.Put(
			PersonRow{Line: Line{Seq: 0, ID: "i"}, Code: "P1", Name: "Ada Example", Email: "ada@example.org", Badge: "77"},
			PersonRow{Line: Line{Seq: 1}, Code: "P2", Name: "Bo Example"},
			FactRow{Line: Line{Seq: 0}, Code: "P1", Fact: "employer", Value: `"Example Ltd"`},
			FactRow{Line: Line{Seq: 0}, Code: "P1", Fact: "crew", Value: `"early"`},
			FactRow{Line: Line{Seq: 1}, Code: "P2", Fact: "employer", Value: `"Example Ltd"`},
			AccountRow{Line: Line{Seq: 0}, ID: "a-1", Name: "ada", Role: "member", Person: "P1"},
			AccountRow{Line: Line{Seq: 1}, ID: "a-2", Name: "bo", Role: "member", Person: "P2"},
			AccountRow{Line: Line{Seq: 2}, ID: "a-3", Name: "desk", Role: "reader"},
		))
		return errors.Join(tx.BlankPerson("P1", 4), tx.BlankFacts(0, 4, "employer", "remark"),
			tx.BlankAccounts("P1", 4), tx.BlankAccounts("", 4))
	})
	d := changed(t, s, 3)
	people := []PersonRow{{Line: Line{Seq: 0, ID: "i"}, Code: "P1", Erased: true}}
	facts := []FactRow{{Line: Line{Seq: 0}, Code: "P1", Fact: "employer", Value: "null"}}
	accounts := []AccountRow{{Line: Line{Seq: 0}, ID: "a-1", Role: "member", Person: "P1"}}
	if !reflect.DeepEqual(d, Delta{People: people, Facts: facts, Accounts: accounts}) {
		t.Errorf("changed: %+v", d)
	}
	all := changed(t, s, -1)
	if all.Accounts[1].Name != "bo" || all.Accounts[2].Name != "desk" || all.People[1].Name != "Bo Example" || all.Facts[1].Value != `"early"` || all.Facts[2].Value != `"Example Ltd"` {
		t.Errorf("others were blanked: %+v", all)
	}
}

func TestProjectionsCanBeMadeAgain(t *testing.T) {
	s := filled(t, 4)
	fillBook := func(tx *Tx) error {
		return errors.Join(tx.Put(full(1)...), tx.Put(full(2)...), tx.End(1, 3), tx.BlankPerson("text 201 é", 3))
	}
	write(t, s, fillBook)
	before, err := s.Dump(background)
	must(t, err)
	write(t, s, func(tx *Tx) error { return tx.Put(full(3)...) })
	other, err := s.Dump(background)
	must(t, err)
	if reflect.DeepEqual(before, other) {
		t.Error("other projections have the same dump")
	}
	write(t, s, func(tx *Tx) error {
		must(t, tx.Put(full(3)...)) // what is held back is dropped too
		must(t, tx.DropProjections())
		d, err := tx.Changed(-1)
		if rows := rowsOf(d); len(rows) != 0 {
			t.Errorf("rows were left: %v", rows)
		}
		return errors.Join(err, fillBook(tx))
	})
	after, err := s.Dump(background)
	must(t, err)
	if !reflect.DeepEqual(before, after) {
		t.Errorf("made again:\n%v\nbefore:\n%v", after, before)
	}
	for _, p := range projections {
		if len(after[p.title()]) != 2 {
			t.Errorf("the dump of %s has %d rows", p.title(), len(after[p.title()]))
		}
	}
	if size, err := s.Size(context.Background()); size != 4 || err != nil {
		t.Errorf("%d entries are left (%v)", size, err)
	}
}
