package api

import (
	"encoding/json"
	"net/http"
	"strings"
	"testing"

	"lodebook/models/book"
)

func TestIncidentsAreForOfficers(t *testing.T) {
	h := served(t)
	for _, role := range book.Roles {
		w := ask(t, h, "/api/sites/QUAY/incidents", role)
		if (w.Code == http.StatusOK) != (role == book.SafetyOfficer) {
			t.Errorf("%s: %d %s", role, w.Code, w.Body)
		}
	}
	if w := ask(t, h, "/api/sites/QUAY/incidents", book.SafetyOfficer); strings.TrimSpace(w.Body.String()) != "[]" {
		t.Errorf("%s", w.Body)
	}
	var list []book.RemedyJSON
	if err := json.Unmarshal(ask(t, h, "/api/sites/QUAY/remedies?open=1", book.Member).Body.Bytes(), &list); err != nil || len(list) != 0 {
		t.Errorf("%+v %v", list, err)
	}
	if w := ask(t, h, "/api/sites/ELSEWHERE/remedies", book.SafetyOfficer); w.Code != http.StatusForbidden {
		t.Errorf("another site's remedies: %d", w.Code)
	}
}
