package book

import (
	"context"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// SheetHead is what stands over a sheet: the fixture, whether a phone may go into its zone, and when
// it was last looked at on this sheet.
type SheetHead struct {
	Name    string
	Zone    string
	Devices bool
	Last    *civil.Day
}

// SheetHead gives the head of a sheet to whoever may fill it in.
func (b *Book) SheetHead(ctx context.Context, actor Actor, site, fixture, record string) (SheetHead, error) {
	out := SheetHead{Devices: true}
	if err := actor.may(FillSheet, site); err != nil {
		return out, err
	}
	err := b.read(ctx, func(m *model) error {
		v, err := m.view(site, nil, always64, b.Now())
		if err != nil {
			return err
		}
		if _, ok := m.fixture(site, fixture); !ok {
			return &NotFound{"fixture", fixture}
		}
		if err := m.mayFill(actor, site, sheetCode(record), v.on); err != nil {
			return err
		}
		s := standing.Subject{Asks: program.AsksFixture, Code: fixture}
		out.Name = v.subjectName(s)
		out.Zone = m.engine.Profile(site, s, v.on, v.k).Zone
		if z, ok := v.Program.Zone(out.Zone); ok {
			out.Devices = z.Devices
		}
		out.Last = m.engine.LastDay(site, s, record)
		return nil
	})
	return out, err
}

// FreshID makes an identifier for an entry that a form will write, so that sending the form twice
// writes once.
func (b *Book) FreshID() (string, error) { return b.newID(b.Now()) }
