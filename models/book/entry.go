package book

import (
	"encoding/json"
	"errors"
	"fmt"
	"time"

	"github.com/google/uuid"

	"lodebook/models/ledger"
	"lodebook/models/store"
)

// body is the content of one kind of entry. Each kind is one file: its struct, its checks
// (validate) and the projected rows that it makes (apply).
type body interface {
	kind() string
	version() int
	shared() *common
	// validate checks the content against what is on record.
	validate(c *check) []Fault
	// apply gives the projected rows; line is already filled with the entry's seq, id and batch.
	apply(at applied) []any
}

// applied is what apply needs to know of the entry around the body.
type applied struct {
	line  store.Line
	site  string
	actor string
	at    time.Time
	zone  func(site string) *time.Location
}

// common is what every body carries besides its own fields.
type common struct {
	Operator   Veiled `json:"operator,omitzero"`    // the system user of an operator's command
	Reason     string `json:"reason,omitempty"`     // of a correction: a code of the pick-list
	ReasonText Veiled `json:"reason_text,omitzero"` // of a correction: more, in free text
}

func (c *common) shared() *common { return c }

// Reasons is the pick-list for corrections: code and words.
var Reasons = []struct{ Code, Words string }{
	{"slip", "A slip of the pen"},
	{"wrong-subject", "It was about somebody or something else"},
	{"wrong-day", "It happened on another day"},
	{"wrong-result", "The result was another one"},
	{"not-done", "It was not done"},
	{"twice", "It was recorded twice"},
	{"other", "Another reason, written below"},
}

// ReasonWords gives the words of a reason's code.
func ReasonWords(code string) string {
	for _, r := range Reasons {
		if r.Code == code {
			return r.Words
		}
	}
	return code
}

// envelope is the canonical form of an entry. Its order is of no matter: RFC 8785 sorts it.
type envelope struct {
	Actor      string          `json:"actor"`
	At         string          `json:"at"`
	Batch      string          `json:"batch,omitempty"`
	Body       json.RawMessage `json:"body"`
	ID         string          `json:"id"`
	Kind       string          `json:"kind"`
	Site       string          `json:"site,omitempty"`
	Supersedes string          `json:"supersedes,omitempty"`
	V          int             `json:"v"`
}

// instantLayout is how instants are written in entries: RFC 3339 in UTC with microseconds.
const instantLayout = "2006-01-02T15:04:05.000000Z"

// newBody makes an empty body of each kind at its newest version; decode fills it.
var newBody = map[string]func() body{
	kindProgram:    func() body { return new(programBody) },
	kindPerson:     func() body { return new(personBody) },
	kindFixture:    func() body { return new(fixtureBody) },
	kindRecord:     func() body { return new(recordBody) },
	kindEvent:      func() body { return new(eventBody) },
	kindExcusal:    func() body { return new(excusalBody) },
	kindRight:      func() body { return new(rightBody) },
	kindVisit:      func() body { return new(visitBody) },
	kindVisitStep:  func() body { return new(visitStepBody) },
	kindMark:       func() body { return new(markBody) },
	kindDuty:       func() body { return new(dutyBody) },
	kindStock:      func() body { return new(stockBody) },
	kindPause:      func() body { return new(pauseBody) },
	kindWithdrawal: func() body { return new(withdrawalBody) },
	kindErasure:    func() body { return new(erasureBody) },
	kindAccount:    func() body { return new(accountBody) },
	kindPlan:       func() body { return new(planBody) },
	kindBatch:      func() body { return new(batchBody) },

	kindIncident:       func() body { return new(incidentBody) },
	kindIncidentReport: func() body { return new(incidentReportBody) },
	kindRemedy:         func() body { return new(remedyBody) },
	kindRemedyDone:     func() body { return new(remedyDoneBody) },
	kindRemedyCheck:    func() body { return new(remedyCheckBody) },
	kindOutage:         func() body { return new(outageBody) },
	kindReturn:         func() body { return new(returnBody) },
}

// lifts turn the body of an older version into the next one: kind, then version from. None is
// needed yet; a new version of a kind adds its own here and keeps the old golden bytes.
var lifts = map[string]map[int]func(json.RawMessage) (json.RawMessage, error){}

// TooNew says that an entry is of a kind or version that this program does not know.
type TooNew struct {
	Kind string
	V    int
}

func (e *TooNew) Error() string {
	return fmt.Sprintf("the book holds an entry of kind %q, version %d, which this program is too old to read", e.Kind, e.V)
}

// decode reads a stored entry's body, lifts it to the newest version and fills its veiled values in.
func decode(e store.Entry, veils []store.Veil) (body, error) {
	var env envelope
	if err := json.Unmarshal(e.Bytes, &env); err != nil {
		return nil, fmt.Errorf("entry %d is not readable: %w", e.Seq, err)
	}
	return decodeBody(env, veils)
}

func decodeBody(env envelope, veils []store.Veil) (body, error) {
	mk, ok := newBody[env.Kind]
	if !ok {
		return nil, &TooNew{env.Kind, env.V}
	}
	b := mk()
	if env.V > b.version() {
		return nil, &TooNew{env.Kind, env.V}
	}
	raw := env.Body
	for v := env.V; v < b.version(); v++ {
		lift, ok := lifts[env.Kind][v]
		if !ok {
			return nil, fmt.Errorf("no way is known to read version %d of kind %q", v, env.Kind)
		}
		var err error
		if raw, err = lift(raw); err != nil {
			return nil, err
		}
	}
	if err := json.Unmarshal(raw, b); err != nil {
		return nil, fmt.Errorf("the body of a %q entry is not readable: %w", env.Kind, err)
	}
	if err := unveil(b, veils); err != nil {
		return nil, err
	}
	return b, nil
}

// draft is an entry that is about to be written.
type draft struct {
	id         string // empty: a new UUIDv7
	site       string
	supersedes string
	batch      string
	body       body
}

// encode seals the draft and gives its stored form without Seq.
func (b *Book) encode(d draft, actor Actor, at time.Time) (store.Entry, []store.Veil, error) {
	veils, err := seal(d.body, b.random)
	if err != nil {
		return store.Entry{}, nil, err
	}
	e, err := d.encode(actor, at)
	return e, veils, err
}

// encode gives the stored form, without Seq, of a draft whose body is sealed.
func (d *draft) encode(actor Actor, at time.Time) (store.Entry, error) {
	content, err := json.Marshal(d.body)
	if err != nil {
		return store.Entry{}, err
	}
	env := envelope{
		Actor: actor.id(), At: at.UTC().Format(instantLayout), Batch: d.batch, Body: content, ID: d.id,
		Kind: d.body.kind(), Site: d.site, Supersedes: d.supersedes, V: d.body.version(),
	}
	bytes, err := ledger.Canonical(env)
	if err != nil {
		return store.Entry{}, err
	}
	return store.Entry{
		ID: d.id, Kind: env.Kind, V: env.V, Site: d.site, Batch: d.batch, Supersedes: d.supersedes,
		Actor: env.Actor, RecordedAt: at, Bytes: bytes,
	}, nil
}

// newID makes a UUIDv7 from the clock and randomness that were passed in.
func (b *Book) newID(now time.Time) (string, error) {
	var u uuid.UUID
	if _, err := b.random.Read(u[6:]); err != nil {
		return "", err
	}
	ms := now.UnixMilli()
	for i := range 6 {
		u[i] = byte(ms >> (40 - 8*i))
	}
	u[6] = u[6]&0x0f | 0x70
	u[8] = u[8]&0x3f | 0x80
	return u.String(), nil
}

// plain gives a body's content with its veiled values in the open, for comparing two writes of one
// identifier and for showing both. Commitments differ from write to write by their salts, so each
// stands as the same mark while the rest is written out.
func plain(b body) (string, error) {
	shown, commits := map[string]string{}, map[string]string{}
	mark := func(path string, v *Veiled) error {
		if !v.IsZero() {
			shown[path], commits[path] = v.String(), v.commit
			v.commit = "x"
		}
		return nil
	}
	if err := walkVeils(b, mark); err != nil {
		return "", err
	}
	content, marshalErr := json.Marshal(b)
	err := walkVeils(b, func(path string, v *Veiled) error { v.commit = commits[path]; return nil })
	if marshalErr != nil || err != nil {
		return "", errors.Join(marshalErr, err)
	}
	out, err := ledger.Canonical(struct {
		Body   json.RawMessage   `json:"body"`
		Veiled map[string]string `json:"veiled"`
	}{content, shown})
	return string(out), err
}
