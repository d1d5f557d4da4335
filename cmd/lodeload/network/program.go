package network

import (
	"bytes"
	_ "embed"
	"fmt"
	"strings"
	"text/template"

	"lodebook/models/civil"
)

//go:embed site.yaml
var siteYAML string

var siteTemplate = template.Must(template.New("site.yaml").Parse(siteYAML))

// Sites lie in some zone of a few, so that days begin at different moments.
var zones = []string{"Atlantic/Azores", "Atlantic/Faroe", "Indian/Mauritius", "Pacific/Auckland"}

var (
	placeHeads = []string{"Tarn", "Skerry", "Holm", "Fell", "Marl", "Brae", "Copse", "Lorn", "Wick", "Esker"}
	placeTails = []string{" Quay", " Hill", " Cross", " Water", " Green", " Reach", " Mead", " Point", " End", " Sound"}
)

// programs are the versions of the site's program. Every sixth site records a second one, which judges
// screening by another rule, drops nothing and adds an item.
func (s *Site) programs() []Version {
	v := []Version{{First, s.source(First, false)}}
	if from, ok := s.second(); ok {
		v = append(v, Version{from, s.source(from, true)})
	}
	return v
}

// second is the day from which the site's second version is in force, if it has one.
func (s *Site) second() (civil.Day, bool) {
	from := First + civil.Day(s.n.Days*3/5)
	return from, s.no%6 == 5 && from > First
}

// walks tells whether the site is walked every day: an item that only some sites have.
func (s *Site) walks() bool { return s.no%10 == 3 }

func (s *Site) source(from civil.Day, second bool) []byte {
	var b bytes.Buffer
	open := "mon, tue, wed, thu, fri"
	if s.no%4 == 1 {
		open += ", sat"
	}
	err := siteTemplate.Execute(&b, map[string]any{
		"From": from, "Code": s.Code, "Name": s.Name, "TimeZone": s.TimeZone, "Open": open, "Closed": s.closed(), "Second": second, "Daily": s.walks(),
	})
	if err != nil {
		panic(err) // the template is tried by every test
	}
	return b.Bytes()
}

// closed are the days of each year on which the site does not operate.
func (s *Site) closed() string {
	var days []string
	for year := 2021; ; year++ {
		new := fmt.Sprintf("%d-01-01", year)
		if d, err := civil.ParseDay(new); err != nil || d > s.n.Last() {
			return strings.Join(days, ", ")
		}
		days = append(days, new, fmt.Sprintf("%d-12-27", year))
	}
}
