package web

import (
	"cmp"
	"html/template"
	"slices"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/standing"
)

// alarmLine is what the morning's job has found around the doors and in the roster.
type alarmLine struct {
	Disc            template.HTML
	Text, Note, URL string
	When            string
}

// todayAlarms gathers them: entitlements that end soon by zone, the others one by one.
func (v *visit) todayAlarms(p *todayLeaf) error {
	list, err := v.b.Alarms(v.ctx(), v.actor, v.site.Code)
	if err != nil {
		return err
	}
	soon := map[string][]book.Alarm{}
	for _, a := range list {
		switch a.Kind {
		case "reach":
			soon[a.About] = append(soon[a.About], a)
		case "doors":
			p.Alarms = append(p.Alarms, alarmLine{disc(standing.Failed, 0), a.Words, "", v.url("badges"), "since " + shortDay(a.Since, v.today())})
		case "passages":
			p.Alarms = append(p.Alarms, alarmLine{disc(standing.Failed, 0), a.Words, "", v.url("passages"), "since " + shortDay(a.Since, v.today())})
		default:
			p.Alarms = append(p.Alarms, alarmLine{disc(standing.Closing, 0.3), a.Words, "", v.url("coverage"), shortDayOr(a.Due, v.today(), "")})
		}
	}
	for _, z := range v.site.Program.Zones {
		ending := soon[z.Code]
		if len(ending) == 0 {
			continue
		}
		first := slices.MinFunc(ending, func(a, b book.Alarm) int { return cmp.Compare(dueOf(a), dueOf(b)) })
		p.Alarms = append(p.Alarms, alarmLine{
			disc(standing.Closing, 0.3), "Entitlements to " + zoneName(z) + " that end soon",
			upperFirst(count(len(ending), "person", "people")), v.url("zones", z.Code), "first on " + shortDayOr(first.Due, v.today(), ""),
		})
	}
	return nil
}

func dueOf(a book.Alarm) civil.Day {
	if a.Due == nil {
		return civil.LastDay
	}
	return *a.Due
}
