package scenario

import (
	"bytes"
	_ "embed"
	"fmt"
	"strings"
	"sync"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/program/starter"
)

//go:embed site.yaml
var head string

// adopted are the groups of the starter that the site has taken on.
var adopted = []string{
	"people", "doors", "vents", "oxygen", "detectors", "magnets", "emergency-off",
	"exhaust", "labels", "hearing-and-pads", "drills", "posts", "after-events",
}

// undated is the site's program without its days: its own head and the groups it adopted.
var undated = sync.OnceValues(func() ([]byte, error) {
	src := []byte(head)
	for _, group := range adopted {
		var err error
		src, err = starter.Adopt(src, group)
		if err != nil {
			return nil, fmt.Errorf("the program of the demo: %w", err)
		}
	}
	return src, nil
})

// source writes the site's program as of a day.
func source(today civil.Day) ([]byte, error) {
	src, err := undated()
	if err != nil {
		return nil, err
	}
	closed := closedDays(today)
	days := make([]string, len(closed))
	for i, d := range closed {
		days[i] = d.String()
	}
	src = bytes.Replace(src, []byte("closed: []"), []byte("closed: ["+strings.Join(days, ", ")+"]"), 1)
	src, err = program.SetInForceFrom(src, inForceFrom(today))
	if err != nil {
		return nil, fmt.Errorf("the program of the demo: %w", err)
	}
	return src, nil
}
