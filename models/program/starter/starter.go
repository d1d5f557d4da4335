// Package starter is the program that a new site can begin with: zones, levels, posts, crews, kinds
// of fixture and facts, and a checklist in groups, none of which is active before the site adopts
// it. It is a starting point; local codes, the accreditor's current text, the manufacturers and the
// site's medical director and safety officer decide. It is pure: bytes in, bytes out.
package starter

import (
	"embed"
	"fmt"
	"strconv"
	"strings"
	"sync"

	"lodebook/models/program"
)

//go:embed head.yaml library.yaml sheets.yaml groups/*.yaml
var files embed.FS

// Group is a named set of items that a site adopts together.
type Group struct {
	Code, Title, About string
	Items              []GroupItem
}

// GroupItem is what one item of a group would ask. Cadence is in words.
type GroupItem struct{ Code, Title, Basis, Cadence string }

// groups are the groups in the order in which they are shown; each has a file of its code.
var groups = []Group{
	{Code: "people", Title: "People", About: "Training to each level, induction, screening of staff, and the list of who may enter."},
	{Code: "doors", Title: "Doors", About: "Doors and signs of the zones: that they close, lock, open from inside and can be opened under over-pressure."},
	{Code: "vents", Title: "Quench vents", About: "The outlet, the rain cap and mesh, standing water, the distances, and the inside of the pipe."},
	{Code: "oxygen", Title: "Oxygen monitors", About: "The reading before the first patient, the alarm, calibration and sensors."},
	{Code: "detectors", Title: "Ferromagnetic detectors", About: "The trial before the first patient, sensitivity, service and procedure. A detector is an aid and replaces no screening."},
	{Code: "magnets", Title: "Magnets and cryogens", About: "Cooling, helium, the joint to the vent, maintenance, performance, the marked boundary, dewars."},
	{Code: "emergency-off", Title: "Quench buttons and electrical emergency-off", About: "Looks and tests. Never press a quench button to test it."},
	{Code: "exhaust", Title: "Exhaust", About: "The fan that clears the magnet room: its run, its flow, its start on the oxygen alarm."},
	{Code: "labels", Title: "Labels", About: "MR labels of portable items, and what does not belong in the magnet rooms. An unlabelled item is treated as MR Unsafe."},
	{Code: "hearing-and-pads", Title: "Hearing protection and pads", About: "What keeps patients and staff from noise and burns, and lets patients call."},
	{Code: "drills", Title: "Drills", About: "What every crew rehearses, nights included. A drill never takes a ferrous prop past the door."},
	{Code: "policies", Title: "Policies", About: "Policies and procedures: reviewed, read, and incidents gone through."},
	{Code: "posts", Title: "Posts", About: "The medical director, the safety officer and the safety expert."},
	{Code: "after-events", Title: "After an event", About: "What is looked at after a quench, work on the roof, a repair, a reported change or an incident."},
}

// library is the whole starter, read.
type library struct {
	text    []byte
	program *program.Program
	pieces  map[string]map[string]program.Piece // list -> code -> text
}

var whole = sync.OnceValues(func() (*library, error) {
	text, err := joined()
	if err != nil {
		return nil, err
	}
	p, err := program.Parse(text)
	if err != nil {
		return nil, fmt.Errorf("the starter program: %w", err)
	}
	l := &library{text: text, program: p, pieces: map[string]map[string]program.Piece{}}
	for _, list := range []string{"posts", "fixture_kinds", "events", "documents", "sheets", "items"} {
		cut, err := program.Cut(text, list)
		if err != nil {
			return nil, err
		}
		l.pieces[list] = map[string]program.Piece{}
		for _, p := range cut {
			l.pieces[list][p.Code] = p
		}
	}
	return l, nil
})

// joined puts the files together into one program.
func joined() ([]byte, error) {
	names := []string{"head.yaml", "library.yaml", "sheets.yaml"}
	for _, g := range groups {
		names = append(names, "groups/"+g.Code+".yaml")
	}
	var text []byte
	for i, name := range names {
		part, err := files.ReadFile(name)
		if err != nil {
			return nil, err
		}
		if i == 3 {
			text = append(text, "items:\n"...)
		}
		text = append(text, part...)
	}
	return text, nil
}

// New writes the program of a new site: everything but items. The error is a program.Faults where
// the code, the name or the time zone cannot be used.
func New(code, name, timeZone string) ([]byte, error) {
	head, err := files.ReadFile("head.yaml")
	if err != nil {
		return nil, err
	}
	site := fmt.Sprintf("site: {code: %s, name: %s, time_zone: %s}", quoted(code), strconv.Quote(name), quoted(timeZone))
	text := strings.Replace(string(head), `site: {code: STARTER, name: "Starter", time_zone: Etc/UTC}`, site, 1)
	text += "# The checklist: what the site demands of itself.\nitems: []\n"
	if _, err := program.Parse([]byte(text)); err != nil {
		return nil, err
	}
	return []byte(text), nil
}

// quoted leaves plain what is plain in YAML.
func quoted(s string) string {
	plain := s != "" && strings.IndexFunc(s, func(c rune) bool {
		return (c < 'a' || c > 'z') && (c < 'A' || c > 'Z') && c != '/'
	}) < 0
	if plain && s != "null" && s != "Null" && s != "NULL" {
		return s
	}
	return strconv.Quote(s)
}

// Groups lists the groups with what each item would ask. It panics if the starter that is built
// into the program has a fault, which its tests rule out.
func Groups() []Group {
	l, err := whole()
	if err != nil {
		panic(err)
	}
	out := make([]Group, len(groups))
	for i, g := range groups {
		out[i] = g
		for _, it := range l.items(g) {
			out[i].Items = append(out[i].Items, GroupItem{it.Code, it.Title, it.Basis, it.Cadence.Words()})
		}
	}
	return out
}

// items are the items of a group, which name it by its title.
func (l *library) items(g Group) []*program.Item {
	var out []*program.Item
	for i := range l.program.Items {
		if it := &l.program.Items[i]; it.Group == g.Title {
			out = append(out, it)
		}
	}
	return out
}
