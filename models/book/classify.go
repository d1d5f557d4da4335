package book

import (
	"errors"

	"lodebook/models/program"
	"lodebook/models/store"
)

// Class is how an error is shown: the HTTP status and a sentence. It is the one place where errors
// are mapped, for pages and for problem details alike.
type Class struct {
	Status   int
	Sentence string
}

// Unknown is what is shown of an error that nobody outside can mend.
const Unknown = "Something went wrong inside. It has been written down; nothing of what you sent was kept."

// Classify maps an error. What it does not know is internal: status 500 and a fixed sentence.
func Classify(err error) Class {
	var (
		invalid  *Invalid
		faults   program.Faults
		denied   *Denied
		missing  *NotFound
		stale    *Stale
		conflict *Conflict
		signIn   *BadSignIn
		many     *TooMany
		refusal  *store.Refusal
		tooNew   *TooNew
	)
	switch {
	case errors.As(err, &invalid), errors.As(err, &faults):
		return Class{422, err.Error()}
	case errors.As(err, &denied):
		return Class{403, upperFirst(err.Error()) + "."}
	case errors.As(err, &missing):
		return Class{404, upperFirst(err.Error()) + "."}
	case errors.As(err, &stale), errors.As(err, &conflict):
		return Class{409, upperFirst(err.Error()) + "."}
	case errors.As(err, &signIn):
		return Class{401, upperFirst(err.Error()) + "."}
	case errors.As(err, &many):
		return Class{429, upperFirst(err.Error()) + "."}
	case errors.As(err, &refusal):
		return Class{503, upperFirst(refusal.Reason)}
	case errors.As(err, &tooNew):
		return Class{503, upperFirst(err.Error()) + "."}
	default:
		return Class{500, Unknown}
	}
}
