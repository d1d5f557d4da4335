package main

import (
	"encoding/json"
	"io"
	"strings"
	"testing"
	"time"

	"lodebook/models/book"
)

// office makes a book with two accounts, an incident and two remedies in it.
func (s *shell) office() string {
	s.Helper()
	path := s.site()
	for name, role := range map[string]string{"olga": "safety-officer", "rob": "reader"} {
		s.must(exitDone, "user", "add", name, "--role", role, "--site", "QUAY", "--book", path)
	}
	a := &app{ctx: s.Context(), clock: func() time.Time { return s.now }, stderr: io.Discard}
	err := a.open(bookFlag{Book: path}, func(b *book.Book) error {
		officer, err := b.ActorNamed(s.Context(), "olga")
		if err != nil {
			return err
		}
		if _, err := b.ReportIncident(s.Context(), officer, "QUAY", book.IncidentForm{Kind: "burn", At: "2026-03-01 08:30", Severity: "high", What: "=1+1 a coil was hot"}); err != nil {
			return err
		}
		for _, f := range []book.RemedyForm{{Incident: "1", Severity: "high", Owner: "olga", What: "=2+2 change the coil"}, {Item: "VENT", Subject: "fixture:V1", Severity: "low", Owner: "P1", What: "look at it"}} {
			if _, err := b.KeepRemedy(s.Context(), officer, "QUAY", f); err != nil {
				return err
			}
		}
		_, err = b.RemedyDone(s.Context(), officer, "QUAY", 2, book.RemedyDoneForm{Day: "2026-03-02"})
		return err
	})
	if err != nil {
		s.Fatal(err)
	}
	return path
}

func TestRemediesAndIncidentsOnTheCommandLine(t *testing.T) {
	s := newShell(t)
	path := s.office()
	at := []string{"--book", path, "--site", "QUAY"}
	out, _ := s.must(exitDone, append([]string{"remedies", "--format", "json", "--as", "olga"}, at...)...)
	var list []book.RemedyJSON
	if err := json.Unmarshal([]byte(out), &list); err != nil || len(list) != 2 || list[0].Due.String() != "2026-03-09" || *list[0].Incident != 1 || list[1].State != "closed" || *list[1].Subject != "fixture:V1" {
		t.Fatalf("%s %v", out, err)
	}
	if out, _ = s.must(exitDone, append([]string{"remedies", "--open"}, at...)...); strings.Contains(out, "VENT") || strings.Contains(out, "coil") || !strings.Contains(out, "Incident 1") {
		t.Errorf("to the operator: %s", out)
	}
	if out, _ = s.must(exitDone, append([]string{"remedies", "--format", "csv"}, at...)...); strings.Contains(out, "coil") || strings.Count(out, "\n") != 3 {
		t.Errorf("to the operator, as CSV: %s", out)
	}
	for _, as := range [][]string{nil, {"--as", "rob"}} {
		for _, format := range []string{"table", "json", "csv"} {
			out, words := s.must(exitRefused, append(append([]string{"incidents", "--format", format}, at...), as...)...)
			if strings.Contains(out+words, "coil") || !strings.Contains(words, "safety officer") {
				t.Errorf("%v: %s%s", as, out, words)
			}
		}
	}
	for _, format := range []string{"table", "json", "csv"} {
		out, _ := s.must(exitDone, append([]string{"incidents", "--as", "olga", "--format", format}, at...)...)
		if !strings.Contains(out, "a coil was hot") || format == "csv" && strings.Contains(out, ",=1+1") {
			t.Errorf("%s", out)
		}
	}
	s.now = s.now.AddDate(0, 0, 8)
	out, _ = s.must(exitGaps, append([]string{"gaps", "--strict", "--format", "json"}, at...)...)
	if !strings.Contains(out, `"item": "remedy"`) && !strings.Contains(out, `"item":"remedy"`) {
		t.Errorf("no overdue remedy among the gaps: %s", out)
	}
	if strings.Contains(out, "coil") {
		t.Errorf("the gaps tell of the incident: %s", out)
	}
	s.must(exitUsage, "remedies", "--book", path)
}
