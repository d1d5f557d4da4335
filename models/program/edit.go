package program

import (
	"errors"
	"regexp"

	"lodebook/models/civil"
)

var (
	datedLine   = regexp.MustCompile(`(?m)^in_force_from[ \t]*:[^\r\n]*`)
	versionLine = regexp.MustCompile(`(?m)^lodebook[ \t]*:[^\r\n]*(\r?\n|$)`)
)

// SetInForceFrom gives the text of a program with another in_force_from; everything else, comments
// included, stays as it is. The text must be a program without faults.
func SetInForceFrom(src []byte, day civil.Day) ([]byte, error) {
	line := "in_force_from: " + day.String()
	out := src
	if datedLine.Match(src) {
		out = datedLine.ReplaceAll(src, []byte(line))
	} else if at := versionLine.FindIndex(src); at != nil {
		end := "\n"
		if at[1] >= 2 && string(src[at[1]-2:at[1]]) == "\r\n" {
			end = "\r\n"
		}
		out = append(append(append([]byte{}, src[:at[1]]...), line+end...), src[at[1]:]...)
	}
	p, err := Parse(out)
	if err != nil {
		return nil, err
	}
	if p.InForceFrom == nil || *p.InForceFrom != day {
		return nil, errors.New("the day could not be written into this text; write in_force_from on a line of its own")
	}
	return out, nil
}
