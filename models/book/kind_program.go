package book

import (
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/store"
)

const kindProgram = "program"

// programBody is one version of a site's program. Its source is kept byte for byte.
type programBody struct {
	common
	Number      int       `json:"number"` // counts the site's versions from 1
	InForceFrom civil.Day `json:"in_force_from"`
	Retroactive bool      `json:"retroactive,omitempty"`
	Why         Veiled    `json:"why,omitzero"` // of a retroactive version
	Source      string    `json:"source"`
}

func (b *programBody) kind() string { return kindProgram }
func (b *programBody) version() int { return 1 }

func (b *programBody) validate(c *check) []Fault {
	newest, ok := c.m.newestVersion(c.site)
	if !ok || b.InForceFrom >= newest.InForceFrom || b.Retroactive && !b.Why.IsZero() {
		return nil
	}
	return []Fault{{
		"in_force_from", b.InForceFrom.String(), "lies before " + newest.InForceFrom.String() + ", the newest version's",
		"give a later day, or open with --retroactive and the reason",
	}}
}

func (b *programBody) apply(at applied) []any {
	p, err := program.Parse([]byte(b.Source))
	if err != nil {
		// Only a program without faults is ever written, so this is a newer program's file.
		return []any{store.VersionRow{Line: at.line, Site: at.site, Number: b.Number, InForceFrom: b.InForceFrom, Retroactive: b.Retroactive, Source: []byte(b.Source)}}
	}
	return []any{
		store.SiteRow{Line: at.line, Code: at.site, Name: p.Site.Name, TimeZone: p.Site.TimeZone},
		store.VersionRow{Line: at.line, Site: at.site, Number: b.Number, InForceFrom: b.InForceFrom, Retroactive: b.Retroactive, Source: []byte(b.Source)},
	}
}

// location is the time zone that the version names; UTC where it cannot be read.
func (b *programBody) location() *time.Location {
	p, err := program.Parse([]byte(b.Source))
	if err != nil {
		return time.UTC
	}
	return p.Site.Location
}
