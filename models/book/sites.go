package book

import (
	"cmp"
	"context"
	"fmt"
	"maps"
	"slices"
	"strings"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
)

// OpenReport says what opening a program did.
type OpenReport struct {
	Site      string
	Version   int
	From      civil.Day
	New       bool              // the site is new
	Unchanged bool              // the newest version is the same file already
	Overruled []OverruledRange  // recorded versions that the new one overrules, and from when
	Changed   []ChangedStanding // of a retroactive version: past standings that it changes
	Warnings  []string
}

// OverruledRange is a version that counts no more from a day on.
type OverruledRange struct {
	Version int
	From    civil.Day
}

// OpenProgram adds the site of a program file to the book, or a new version of its program. Faults
// of the file are program.Faults; an in_force_from before the newest version's needs why.
func (b *Book) OpenProgram(ctx context.Context, actor Actor, source []byte, why string) (OpenReport, error) {
	p, err := program.Parse(source)
	if err != nil {
		return OpenReport{}, err
	}
	report := OpenReport{Site: p.Site.Code, Warnings: p.Warnings()}
	receipt, err := b.write(ctx, actor, func(s *session) error { return s.openProgram(p, why, &report) })
	if err != nil || len(receipt.Written) == 0 || report.New {
		return report, err
	}
	report.Changed, err = b.changedStandings(ctx, report)
	return report, err
}

func (s *session) openProgram(p *program.Program, why string, report *OpenReport) error {
	site := s.m.site(p.Site.Code)
	action := SetProgram
	if site == nil {
		action, report.New = OpenSite, true
	}
	if err := s.actor.may(action, siteIf(site)); err != nil {
		return err
	}
	report.From = civil.DayOf(s.now, p.Site.Location)
	if p.InForceFrom != nil {
		report.From = *p.InForceFrom
	}
	report.Version = 1
	if site != nil {
		newest := site.newest()
		if string(newest.row.Source) == string(p.Source) {
			report.Unchanged, report.Version, report.From = true, newest.row.Number, newest.row.InForceFrom
			return nil
		}
		report.Version = newest.row.Number + 1
		report.Overruled = overruled(site, report.From)
	}
	body := &programBody{Number: report.Version, InForceFrom: report.From, Source: string(p.Source), Why: veiled(why, "")}
	if newest, ok := s.m.newestVersion(p.Site.Code); ok && report.From < newest.InForceFrom {
		body.Retroactive = true
	}
	return s.add(draft{site: p.Site.Code, body: body})
}

func siteIf(s *siteModel) string {
	if s == nil {
		return ""
	}
	return s.code
}

// overruled names each version that counts on some day from the given one on, and from when it no
// longer does. A version counts from its own first day to the day before that of the next version
// recorded after it.
func overruled(s *siteModel, from civil.Day) []OverruledRange {
	var out []OverruledRange
	for i, v := range s.versions {
		end := civil.LastDay
		for _, w := range s.versions[i+1:] {
			end = min(end, w.row.InForceFrom)
		}
		if first := max(from, v.row.InForceFrom); first < end {
			out = append(out, OverruledRange{v.row.Number, first})
		}
	}
	return out
}

// ChangedStanding is a past standing that a version changed, over a span of days.
type ChangedStanding struct {
	Item     string
	Subject  standing.Subject
	From, To civil.Day
	Was, Now standing.Word // empty: no obligation
}

// changedStandings compares, for each day from the newest version's first to yesterday, what was
// known before that version with what is known now.
func (b *Book) changedStandings(ctx context.Context, r OpenReport) ([]ChangedStanding, error) {
	var out []ChangedStanding
	err := b.read(ctx, func(m *model) error {
		seq := m.site(r.Site).newest().row.Seq
		open := map[string]*ChangedStanding{}
		today := civil.DayOf(b.Now(), m.zone(r.Site))
		for d := r.From; d < today; d++ {
			was, err := m.words(r.Site, d, seq-1)
			if err != nil {
				return err
			}
			now, err := m.words(r.Site, d, always64)
			if err != nil {
				return err
			}
			out = append(out, compareDay(open, d, was, now)...)
		}
		for _, k := range sortedKeys(open) {
			out = append(out, *open[k])
		}
		return nil
	})
	slices.SortFunc(out, func(x, y ChangedStanding) int {
		return cmp.Or(strings.Compare(x.Item, y.Item), strings.Compare(x.Subject.Code, y.Subject.Code), cmp.Compare(x.From, y.From))
	})
	return out, err
}

// words gives the standing of every obligation of a site on a day.
func (m *model) words(site string, d civil.Day, k int64) (map[string]standing.Standing, error) {
	list, err := m.engine.Evaluate(site, standing.Query{On: d, KnownAt: k})
	out := make(map[string]standing.Standing, len(list))
	for _, s := range list {
		out[s.Item+" "+string(s.Subject.Asks)+":"+s.Subject.Code] = s
	}
	return out, err
}

// compareDay extends the open spans by one day and gives those that ended with the day before.
func compareDay(open map[string]*ChangedStanding, d civil.Day, was, now map[string]standing.Standing) []ChangedStanding {
	var ended []ChangedStanding
	keys := map[string]standing.Standing{}
	maps.Copy(keys, was)
	maps.Copy(keys, now)
	for k, s := range keys {
		a, b := was[k].Word, now[k].Word
		if o := open[k]; o != nil && a == o.Was && b == o.Now {
			o.To = d
			continue
		}
		if o := open[k]; o != nil {
			ended = append(ended, *o)
			delete(open, k)
		}
		if a != b {
			open[k] = &ChangedStanding{s.Item, s.Subject, d, d, a, b}
		}
	}
	for k, o := range open {
		if _, ok := keys[k]; !ok {
			ended = append(ended, *o)
			delete(open, k)
		}
	}
	return ended
}

// RewriteProgram makes a new version of a site's program from its newest text: adopting a group, or
// an edit on the page.
func (b *Book) RewriteProgram(ctx context.Context, actor Actor, site string, rewrite func([]byte) ([]byte, error)) (OpenReport, error) {
	if err := actor.may(SetProgram, site); err != nil {
		return OpenReport{}, err
	}
	var source []byte
	var newest, today civil.Day
	err := b.read(ctx, func(m *model) error {
		s := m.site(site)
		if s == nil {
			return &NotFound{"site", site}
		}
		source = s.newest().row.Source
		v, _ := m.newestVersion(site)
		newest, today = v.InForceFrom, civil.DayOf(b.Now(), m.zone(site))
		return nil
	})
	if err != nil {
		return OpenReport{}, err
	}
	source, err = rewrite(source)
	if err != nil {
		return OpenReport{}, err
	}
	source, err = program.SetInForceFrom(source, max(today, newest))
	if err != nil {
		return OpenReport{}, fmt.Errorf("the program could not be dated: %w", err)
	}
	return b.OpenProgram(ctx, actor, source, "")
}
