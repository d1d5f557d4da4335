package main

import (
	"io"
	"os"
)

// isTerminal tells whether a stream is a terminal that somebody types at.
func isTerminal(r io.Reader) bool {
	f, ok := r.(*os.File)
	if !ok {
		return false
	}
	info, err := f.Stat()
	return err == nil && info.Mode()&os.ModeCharDevice != 0
}
