package web

import (
	"fmt"
	"html/template"
	"strings"
	"time"

	"lodebook/models/book"
	"lodebook/models/civil"
	"lodebook/models/reach"
)

// window is the time that ribbons show, by the site's clocks: whole months, now in the middle.
type window struct {
	from, to, now time.Time
	zone          *time.Location
}

const windowMonths = 6 // before and after the month of now

// windowAround is the window in which a moment stands.
func windowAround(now time.Time, zone *time.Location) window {
	y, m, _ := now.In(zone).Date()
	first := func(months int) time.Time { return civil.Of(y, m+time.Month(months), 1).Midnight(zone) }
	return window{first(-windowMonths), first(windowMonths + 1), now, zone}
}

// words says which months the window shows.
func (w window) words() string {
	last := w.to.Add(-time.Second).In(w.zone)
	return w.from.In(w.zone).Format("January 2006") + " to " + last.Format("January 2006") + ", the line is now"
}

const (
	bandWidth  = 600.0
	lowLongest = 30 * 24 * time.Hour // the last stretch of a bar, as notice is by default: 30 days or a quarter
)

func (w window) x(t time.Time) float64 {
	share := t.Sub(w.from).Seconds() / w.to.Sub(w.from).Seconds()
	return bandWidth * min(max(share, 0), 1)
}

// band draws a ribbon: a hairline while a right is in force, a bar while the person is entitled, its last stretch
// in another ink, a tick at each month and a line now. It says nothing to a screen reader, since what it says always
// stands beside it in words.
func (w window) band(r book.Ribbon) template.HTML {
	var b strings.Builder
	b.WriteString(`<svg class="band" viewBox="0 0 600 18" preserveAspectRatio="none" aria-hidden="true" focusable="false"><path class="month" d="`)
	y, m, _ := w.from.In(w.zone).Date()
	for i := 0; ; i++ {
		t := civil.Of(y, m+time.Month(i), 1).Midnight(w.zone)
		if t.After(w.to) {
			break
		}
		fmt.Fprintf(&b, "M%.1f 0v18", w.x(t))
	}
	b.WriteString(`"/>`)
	for _, s := range r.Rights {
		fmt.Fprintf(&b, `<rect class="right" x="%.1f" y="8" width="%.1f" height="2"/>`, w.x(s.From), w.x(s.To)-w.x(s.From))
	}
	for _, s := range r.Spans {
		if s.Entitled {
			w.bar(&b, s)
		}
	}
	fmt.Fprintf(&b, `<path class="now" d="M%.1f -2v22"/></svg>`, w.x(w.now))
	// Numbers alone: nothing in it comes from outside.
	return template.HTML(b.String())
}

func (w window) bar(b *strings.Builder, s reach.Span) {
	low := s.To
	if s.To.Before(w.to) {
		low = s.To.Add(-min(lowLongest, s.To.Sub(s.From)/4))
	}
	fmt.Fprintf(b, `<rect class="holds" x="%.1f" y="3" width="%.1f" height="12"/>`, w.x(s.From), w.x(low)-w.x(s.From))
	if low.Before(s.To) {
		fmt.Fprintf(b, `<rect class="low" x="%.1f" y="3" width="%.1f" height="12"/>`, w.x(low), w.x(s.To)-w.x(low))
	}
}

// zoneRibbon is one zone on a person's page: their entitlement there, and their rights.
type zoneRibbon struct {
	Zone, URL string
	Line      zoneLine
	Rights    []rightLine
}

// rightLine is one right of a person.
type rightLine struct{ Span, URL, EndURL string }

// zoneRibbons are the restricted zones on a person's page.
func (v *visit) zoneRibbons(person string) ([]zoneRibbon, string, error) {
	rights, err := v.b.Rights(v.ctx(), v.actor, v.site.Code, person)
	if err != nil {
		return nil, "", err
	}
	var out []zoneRibbon
	shown := ""
	for _, z := range v.site.Program.Zones {
		if !z.Restricted {
			continue
		}
		q := book.ReachQuery{Site: v.site.Code, Zone: z.Code, Person: person, At: v.instant()}
		x, err := v.b.Reach(v.ctx(), v.actor, q)
		if err != nil {
			return nil, "", err
		}
		w := windowAround(x.At, x.Site.Location)
		bands, err := v.bands(q, w, x.Rows)
		if err != nil {
			return nil, "", err
		}
		shown = w.words()
		for i, r := range x.Rows {
			l := v.zoneLine(r, x.At, x.Site.Location)
			l.Name, l.Note, l.Band, l.Do = zoneName(z), "", bands[i], nil
			out = append(out, zoneRibbon{Zone: z.Code, URL: v.zoneURL(z.Code), Line: l, Rights: v.rightLines(rights, z.Code)})
		}
	}
	return out, shown, nil
}

// zoneURL leads to the page of a zone, for those who may see it.
func (v *visit) zoneURL(zone string) string {
	if !v.may(book.SeeSite) {
		return ""
	}
	return v.url("zones", zone)
}

// instant is the moment that a page about another day than today shows: its noon, so that what a day begins with and
// what it ends with are on their sides. Nil is now.
func (v *visit) instant() *time.Time {
	if !v.elsewhen() {
		return nil
	}
	noon := v.day().Midnight(v.site.Location).Add(12 * time.Hour)
	return &noon
}

func (v *visit) rightLines(rights []book.RightLine, zone string) []rightLine {
	var out []rightLine
	for _, r := range rights {
		if r.Zone != zone {
			continue
		}
		l := rightLine{Span: "Right from " + v.rightMoment(r.From, false), URL: v.entryURL("right", r.Entry, false)}
		if r.To != nil {
			l.Span += " to " + v.rightMoment(*r.To, true)
		}
		if r.Imported {
			l.Span += ", imported"
		}
		if v.acts(book.KeepRights) && (r.To == nil || civil.DayOf(*r.To, v.site.Location) > v.today()) {
			l.EndURL = with(v.url("end-right"), "entry", r.Entry, "person", r.Person, "zone", zone)
		}
		out = append(out, l)
	}
	return out
}

// rightMoment is a beginning or an end of a right: whole days where it lies on the edge of one.
func (v *visit) rightMoment(t time.Time, end bool) string {
	loc := v.site.Location
	day := civil.DayOf(t, loc)
	if !t.Equal(day.Midnight(loc)) {
		return moment(t, loc, v.today())
	}
	if end {
		day--
	}
	return shortDay(day, v.today())
}
