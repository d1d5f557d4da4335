package program

import (
	"bytes"
	_ "embed"
)

//go:embed schema.json
var schema []byte

// Schema is the JSON Schema (draft 2020-12) of the program file: every key, for editors. Parse
// knows more than a schema can say; what it takes, the schema takes too.
func Schema() []byte { return bytes.Clone(schema) }
