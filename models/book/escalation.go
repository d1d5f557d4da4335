package book

import (
	"context"
	"fmt"
	"slices"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
	"lodebook/models/store"
)

// Beside gaps and what closes, the morning's job flags what is wrong around the doors. These flags are about no item of
// the checklist; what stands in its place says what they are about.
const (
	flagReach    = "reach/"    // and a zone: an entitlement that ends within the notice
	flagDoors    = "doors"     // a door that opens for people who are not entitled
	flagPassages = "passages"  // door events that nobody has explained
	flagCover    = "uncovered" // and an item: hours in the next four weeks in which too few are there
)

const (
	passageWeeks = 4 * 7 * 24 * time.Hour // of door events are looked at
	coverAhead   = 28                     // days
	rightNotice  = 30                     // days before a right or a stint ends
)

// alarms are the flags to raise that are about no item.
func (b *Book) alarms(ctx context.Context, site string, day civil.Day) ([]store.FlagRow, error) {
	sv, err := b.SiteHead(ctx, JobActor(), site, &day)
	if err != nil {
		return nil, err
	}
	at := b.Now()
	if day != sv.Today {
		at = day.Midnight(sv.Location).Add(12 * time.Hour)
	}
	flag := func(item, kind, code string, word standing.Word, due *civil.Day) store.FlagRow {
		return store.FlagRow{Site: site, Item: item, Kind: kind, Code: code, Standing: string(word), Owner: string(SafetyOfficer), Due: due}
	}
	var out []store.FlagRow
	for _, z := range sv.Program.Zones {
		if !z.Restricted {
			continue
		}
		x, err := b.Reach(ctx, JobActor(), ReachQuery{Site: site, Zone: z.Code, At: &at})
		if err != nil {
			return nil, err
		}
		for _, r := range x.Rows {
			if last, soon := endsSoon(sv.Program, r, day, sv.Location); soon {
				out = append(out, flag(flagReach+z.Code, string(program.AsksPerson), r.Person, standing.Closing, &last))
			}
		}
	}
	diff, err := b.RightsDiff(ctx, JobActor(), site, &at)
	if err != nil {
		return nil, err
	}
	for _, c := range diff.Rows {
		if f := flag(flagDoors, string(program.AsksFixture), c.Door, standing.Failed, nil); c.Change != "add" && !slices.Contains(out, f) {
			out = append(out, f)
		}
	}
	_, n, err := b.Unexplained(ctx, JobActor(), site, at.Add(-passageWeeks), at, 1)
	if err != nil {
		return nil, err
	}
	if n > 0 {
		out = append(out, flag(flagPassages, string(program.AsksSite), site, standing.Failed, nil))
	}
	short, err := b.Uncovered(ctx, JobActor(), site, at, (day + coverAhead).Midnight(sv.Location))
	if err != nil {
		return nil, err
	}
	for _, u := range short {
		item := flagCover + "/" + u.Item
		if !slices.ContainsFunc(out, func(f store.FlagRow) bool { return f.Item == item }) {
			out = append(out, flag(item, string(program.AsksSite), site, standing.Closing, dayPtr(civil.DayOf(u.From, sv.Location))))
		}
	}
	return out, nil
}

// endsSoon tells whether an entitlement ends within the notice of what ends it, and its last day.
func endsSoon(p *program.Program, r ReachRow, day civil.Day, loc *time.Location) (civil.Day, bool) {
	if !r.Entitled || r.Until == nil {
		return 0, false
	}
	last := civil.DayOf(r.Until.Add(-time.Microsecond), loc)
	from := last - rightNotice
	for _, x := range r.Ends {
		if item, ok := p.Item(x.Item); ok {
			from = min(from, item.Notice.Before(last))
		}
	}
	return last, from <= day
}

// Alarm is a flag that is about no item, in words.
type Alarm struct {
	Words string
	About string // zone, door, site or item
	Kind  string // reach, doors, passages or uncovered
	Who   string // code of a person
	Due   *civil.Day
	Since civil.Day
}

// Alarms gives what the last morning's job has found around the doors and in the roster.
func (b *Book) Alarms(ctx context.Context, actor Actor, site string) ([]Alarm, error) {
	if err := actor.may(SeePassages, site); err != nil {
		return nil, err
	}
	var out []Alarm
	return out, b.withEntries(ctx, func(tx *store.Tx, m *model) error {
		rows, err := tx.Flags(site)
		for _, f := range rows {
			if a, ok := m.alarm(site, f); ok && f.Cleared == nil {
				out = append(out, a)
			}
		}
		return err
	})
}

func (m *model) alarm(site string, f store.FlagRow) (Alarm, bool) {
	a := Alarm{Due: f.Due, Since: f.Opened}
	zone, isReach := strings.CutPrefix(f.Item, flagReach)
	item, isCover := strings.CutPrefix(f.Item, flagCover+"/")
	switch {
	case isReach:
		a.Kind, a.About, a.Who = "reach", zone, f.Code
		a.Words = fmt.Sprintf("%s is entitled to zone %s for a short while more", m.subjectWords(site, subjectBody{"person", f.Code}), zone)
	case isCover:
		a.Kind, a.About = "uncovered", item
		a.Words = "Too few are there for " + item
	case f.Item == flagDoors:
		a.Kind, a.About = "doors", f.Code
		a.Words = m.subjectWords(site, subjectBody{"fixture", f.Code}) + " opens for people who are not entitled"
	case f.Item == flagPassages:
		a.Kind, a.About = "passages", site
		a.Words = "Door events are not explained"
	default:
		return a, false
	}
	return a, true
}
