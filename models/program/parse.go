package program

import "bytes"

// formatVersion is the version of the program file's format that this room reads.
const formatVersion = "1"

// Parse reads a program file. The error is a Faults with everything that is wrong in the file, in
// order of line and column; the program is nil then. Nothing of a faulty file is used.
func Parse(src []byte) (*Program, error) {
	text, faults := cleaned(src)
	if len(faults) > 0 {
		return nil, faults.sorted()
	}
	root, faults := grow(text)
	if root == nil {
		return nil, faults.sorted()
	}
	r := newReader(text)
	r.faults = faults
	r.program(root)
	if len(r.faults) > 0 {
		return nil, r.faults.sorted()
	}
	r.p.Source = bytes.Clone(src)
	return r.p, nil
}

// program reads the sections so that what is referred to is known before what refers to it.
func (r *reader) program(root *node) {
	o, ok := r.object(root, "", "program")
	if !ok {
		return
	}
	r.version(o)
	r.p.InForceFrom = o.day("in_force_from")
	r.site(o)
	r.calendar(o)
	r.levels(o)
	r.zones(o)
	r.p.Posts = listed(o, "posts", "post", func(code, name string) Post { return Post{code, name} })
	r.p.Crews = listed(o, "crews", "crew", func(code, name string) Crew { return Crew{code, name} })
	r.p.PersonFacts = r.facts(o, "person_facts", AsksPerson)
	r.fixtureKinds(o)
	r.events(o)
	r.documents(o)
	r.severities(o)
	r.incidents(o)
	r.reports(o)
	r.sheets(o)
	r.items(o)
	o.close()
}

func (r *reader) version(o object) {
	const accepted = "write lodebook: 1"
	n := o.need("lodebook", accepted)
	if n == nil {
		return
	}
	if n.kind != scalar || n.text != formatVersion {
		r.wrong(n, "lodebook", "this Lodebook reads program files of version "+formatVersion, accepted)
	}
}
