package book

import (
	"cmp"
	"context"
	"slices"
	"strings"

	"lodebook/models/civil"
	"lodebook/models/program"
	"lodebook/models/standing"
	"lodebook/models/store"
)

// Fixtures lists every fixture that the site ever had, those of the day first, by kind, zone and code.
func (b *Book) Fixtures(ctx context.Context, actor Actor, site string, on *civil.Day) (SiteView, []FixtureSummary, error) {
	var out []FixtureSummary
	var sv SiteView
	var rank map[string]int
	err := b.at(ctx, actor, site, on, func(v *siteOn) error {
		sv, rank = v.SiteView, v.zoneRank()
		rows, err := v.rows(standing.Query{On: v.on, KnownAt: v.k})
		if err != nil {
			return err
		}
		sums := tallies(rows)
		for _, code := range v.fixtureCodes() {
			out = append(out, v.fixtureSummary(code, sums))
		}
		return nil
	})
	slices.SortFunc(out, func(a, b FixtureSummary) int {
		return cmp.Or(boolOrder(b.Here, a.Here), strings.Compare(a.KindName, b.KindName), cmp.Compare(rank[a.Zone], rank[b.Zone]), strings.Compare(a.Code, b.Code))
	})
	return sv, out, err
}

func (v *siteOn) fixtureCodes() []string {
	var out []string
	for _, known := range v.m.engine.Known(v.Code, program.AsksFixture) {
		if _, ok := v.m.fixture(v.Code, known.Code); ok {
			out = append(out, known.Code)
		}
	}
	return out
}

func (v *siteOn) fixtureSummary(code string, sums map[standing.Subject]*tally) FixtureSummary {
	s := standing.Subject{Asks: program.AsksFixture, Code: code}
	f, _ := v.m.fixture(v.Code, code)
	out := FixtureSummary{Code: code, Name: cmp.Or(f.Name, code), Kind: f.Kind, KindName: v.kindName(f.Kind), Zone: v.m.engine.Profile(v.Code, s, v.on, v.k).Zone}
	for _, st := range v.m.stintsAt(v.Code, string(program.AsksFixture), code) {
		out.Since, out.Until = st.First, st.Last
		if covers(st.First, st.Last, v.on) {
			out.Here = true
			break
		}
	}
	if t := sums[s]; t != nil {
		out.Gaps, out.Closing, out.Worst, out.NextDue = t.gaps, t.closing, t.worst, t.next
	}
	return out
}

// Rounds gives what there is to look at: fixtures with a gap or something closing, by zone and code.
func (b *Book) Rounds(ctx context.Context, actor Actor, site string, on *civil.Day) (Round, error) {
	var out Round
	if err := actor.may(FillSheet, site); err != nil {
		if err := actor.may(SeeSite, site); err != nil {
			return out, err
		}
	}
	err := b.read(ctx, func(m *model) error {
		v, err := m.view(site, on, always64, b.Now())
		if err != nil {
			return err
		}
		rows, err := v.rows(standing.Query{On: v.on, KnownAt: v.k})
		if err != nil {
			return err
		}
		out = v.round(rows, func(r Row) bool { return v.mayRecordRow(actor, r) })
		return nil
	})
	return out, err
}

// mayRecordRow tells whether the actor may fill in a sheet that answers the row; who sees the whole
// site sees the whole round.
func (v *siteOn) mayRecordRow(actor Actor, r Row) bool {
	if actor.may(SeeSite, v.Code) == nil {
		return true
	}
	return slices.ContainsFunc(r.Records, func(what string) bool {
		return v.m.mayFill(actor, v.Code, sheetCode(what), v.on) == nil
	})
}

func (v *siteOn) round(rows []Row, keep func(Row) bool) Round {
	out := Round{Site: v.SiteView, On: v.on}
	sums := tallies(rows)
	stops := map[string]*RoundStop{}
	for _, r := range rows {
		if r.Subject.Asks != program.AsksFixture || !keep(r) {
			continue
		}
		if !r.Word.IsGap() && r.Word != standing.Closing {
			out.Later = append(out.Later, r)
			continue
		}
		s := stops[r.Subject.Code]
		if s == nil {
			s = &RoundStop{Fixture: v.fixtureSummary(r.Subject.Code, sums), Devices: true}
			if z, ok := v.Program.Zone(s.Fixture.Zone); ok {
				s.Devices = z.Devices
			}
			stops[r.Subject.Code] = s
		}
		s.Rows = append(s.Rows, r)
	}
	for _, code := range sortedKeys(stops) {
		out.Due = append(out.Due, *stops[code])
	}
	rank := v.zoneRank()
	slices.SortStableFunc(out.Due, func(a, b RoundStop) int { return cmp.Compare(rank[a.Fixture.Zone], rank[b.Fixture.Zone]) })
	slices.SortStableFunc(out.Later, func(a, b Row) int { return compareDays(a.Due, b.Due, civil.LastDay) })
	return out
}

func (v *siteOn) zoneRank() map[string]int {
	rank := map[string]int{}
	for i, z := range v.Program.Zones {
		rank[z.Code] = i + 1
	}
	return rank
}

// Checklist gives the items in force on a day with their counts.
func (b *Book) Checklist(ctx context.Context, actor Actor, site string, on *civil.Day) (Checklist, error) {
	var out Checklist
	var seqs []int64
	err := b.at(ctx, actor, site, on, func(v *siteOn) error {
		rows, err := v.rows(standing.Query{On: v.on, KnownAt: v.k})
		if err != nil {
			return err
		}
		out = Checklist{Site: v.SiteView, On: v.on, Warnings: v.Program.Warnings()}
		byItem := map[string][]Row{}
		for _, r := range rows {
			byItem[r.Item] = append(byItem[r.Item], r)
		}
		for _, item := range v.Program.Items {
			s := ItemSummary{Item: item, CadenceWords: item.Cadence.Words(), Counts: map[standing.Word]int{}}
			for _, r := range byItem[item.Code] {
				s.Counts[r.Word]++
				s.Subjects++
				if Worse(r.Word, s.Worst) {
					s.Worst = r.Word
				}
			}
			out.Items = append(out.Items, s)
		}
		for _, ver := range slices.Backward(v.m.site(site).versions) {
			seqs = append(seqs, ver.row.Seq)
			out.Versions = append(out.Versions, VersionLine{Number: ver.row.Number, InForceFrom: ver.row.InForceFrom, Retroactive: ver.row.Retroactive, Entry: ver.row.ID, Items: len(ver.program.Items)})
		}
		return nil
	})
	if err != nil {
		return out, err
	}
	err = b.st.Read(ctx, func(tx *store.Tx) error {
		for i, seq := range seqs {
			e, err := tx.EntryAt(seq)
			if err != nil {
				return err
			}
			out.Versions[i].Recorded = e.RecordedAt
		}
		return nil
	})
	return out, err
}

// Source gives the text of the newest version of a site's program.
func (b *Book) Source(ctx context.Context, actor Actor, site string) ([]byte, error) {
	var out []byte
	err := b.at(ctx, actor, site, nil, func(v *siteOn) error {
		out = slices.Clone(v.m.site(site).newest().row.Source)
		return nil
	})
	return out, err
}

// Drills gives the plans, the standings that drills answer, and the drills that were held.
func (b *Book) Drills(ctx context.Context, actor Actor, site string, on *civil.Day) (DrillView, error) {
	var out DrillView
	err := b.at(ctx, actor, site, on, func(v *siteOn) error {
		rows, err := v.rows(standing.Query{On: v.on, KnownAt: v.k})
		if err != nil {
			return err
		}
		out = DrillView{Site: v.SiteView, On: v.on, Titles: map[string]string{}}
		for _, r := range rows {
			if slices.ContainsFunc(r.Records, isDrill) {
				out.Rows = append(out.Rows, r)
			}
		}
		for _, i := range v.Program.Items {
			for _, what := range i.Records {
				if isDrill(what) && !slices.Contains(out.Codes, what) {
					out.Codes = append(out.Codes, what)
					out.Titles[what] = v.whatTitle(what)
				}
			}
		}
		out.Plans = v.plans()
		out.Held, err = v.heldDrills()
		return err
	})
	return out, err
}

func isDrill(what string) bool { return strings.HasPrefix(what, "drill/") }

func (v *siteOn) plans() []PlanLine {
	var out []PlanLine
	for _, p := range v.m.plans {
		if p.Site != v.Code || p.Ended != 0 {
			continue
		}
		out = append(out, PlanLine{
			Entry: p.ID, What: p.What, Title: v.whatTitle(p.What), Crew: p.Crew, CrewName: cmp.Or(named(v.Program.Crew(p.Crew)), p.Crew),
			Day: p.Day, At: p.At, Done: len(v.m.done.get(p.ID)) > 0,
		})
	}
	slices.SortStableFunc(out, func(a, b PlanLine) int { return cmp.Compare(a.Day, b.Day) })
	return out
}

func (v *siteOn) heldDrills() ([]RecordLine, error) {
	var rows []store.RecordRow
	for _, code := range v.m.site(v.Code).crewCodes() {
		records, err := v.m.recordsOf(v.Code, standing.Subject{Asks: program.AsksCrew, Code: code})
		if err != nil {
			return nil, err
		}
		for _, r := range records {
			if isDrill(r.What) && r.Ended == 0 && r.Day <= v.on {
				rows = append(rows, r)
			}
		}
	}
	return v.recordLines(rows), nil
}
