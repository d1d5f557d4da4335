package web

import "lodebook/models/book"

// spine is the margin of every page: where one is, where one can go, who one is.
type spine struct {
	Site     string // name; empty outside a site
	Home     string
	Counts   string // "61 people, 38 fixtures"
	Links    []spineLink
	More     []spineLink
	Sites    []spineLink // the other sites of the account
	Entries  string
	Who, Job string
}

// spineLink is one link of the spine; Count 0 shows none.
type spineLink struct {
	Name, URL string
	Count     int
	About     string // what the count counts, for a screen reader
	Current   bool
}

// The sections of the spine, which pages name as theirs.
const (
	secToday     = "Today"
	secMine      = "My record"
	secRounds    = "Rounds"
	secPeople    = "People"
	secZones     = "Zones"
	secDesk      = "Desk"
	secCoverage  = "Coverage"
	secDrills    = "Drills"
	secChecklist = "Checklist"
	secGaps      = "Gaps"
	secRemedies  = "Remedies"
	secIncidents = "Incidents"
	secBook      = "Book"
	secImport    = "Import"
	secJobs      = "Jobs"
	secAccounts  = "Accounts"
	secPassword  = "Password"
	secHelp      = "Words"
)

// spine makes the margin. On a page outside a site the links lead to the account's first site.
func (v *visit) spine(section string) (*spine, error) {
	sites, err := v.b.Sites(v.ctx(), v.actor)
	if err != nil {
		return nil, err
	}
	s := &spine{Who: v.actor.Name, Job: v.actor.Role.Words(), Home: "/"}
	at := v.site
	if at.Code == "" && len(sites) > 0 {
		if at, err = v.b.SiteHead(v.ctx(), v.actor, sites[0].Code, nil); err != nil {
			return nil, err
		}
	}
	for _, other := range sites {
		if other.Code != at.Code {
			s.Sites = append(s.Sites, spineLink{Name: other.Name, URL: siteURL(other.Code, "today")})
		}
	}
	if at.Code != "" {
		if err := v.siteLinks(s, at, section); err != nil {
			return nil, err
		}
	}
	s.More = v.moreLinks(at.Code, section)
	return s, nil
}

func (v *visit) siteLinks(s *spine, at book.SiteView, section string) error {
	counts, err := v.counts(at)
	if err != nil {
		return err
	}
	s.Site, s.Home = at.Name, siteURL(at.Code, "today")
	s.Counts = upperFirst(count(at.People, "person", "people")) + ", " + count(at.Fixtures, "fixture", "fixtures")
	s.Entries = grouped(counts.Entries)
	add := func(show bool, name string, n int, about string, parts ...string) {
		if show {
			u := with(siteURL(at.Code, parts...), "on", onQuery(v.on))
			s.Links = append(s.Links, spineLink{name, u, n, about, name == section})
		}
	}
	see := v.may(book.SeeSite)
	add(true, secToday, 0, "", "today")
	add(!see && v.actor.Person != "", secMine, 0, "", "people", v.actor.Person)
	add(see || v.may(book.FillSheet), secRounds, counts.Due, "fixtures due", "rounds")
	add(see, secPeople, 0, "", "people")
	add(see, secZones, 0, "", "zones")
	add(v.may(book.HandleVisits), secDesk, 0, "", "desk")
	add(see, secCoverage, 0, "", "coverage")
	add(see, secDrills, 0, "", "drills")
	add(see, secChecklist, 0, "", "checklist")
	add(see, secGaps, counts.Gaps, "gaps", "gaps")
	add(see || v.may(book.DoRemedies), secRemedies, 0, "", "remedies")
	add(v.may(book.SeeBook), secBook, 0, "", "book")
	return nil
}

func (v *visit) moreLinks(site, section string) []spineLink {
	var out []spineLink
	add := func(show bool, name, url string) {
		if show {
			out = append(out, spineLink{Name: name, URL: url, Current: name == section})
		}
	}
	add(site != "" && v.may(book.ReportIncident), secIncidents, siteURL(site, "incidents"))
	add(site != "" && v.may(book.ReportIncident), "Report an incident", siteURL(site, "incident"))
	add(site != "" && v.may(book.ImportTables), secImport, siteURL(site, "import"))
	add(v.may(book.SeeBook), secJobs, "/jobs")
	add(v.may(book.KeepAccounts), secAccounts, "/accounts")
	add(true, secPassword, "/password")
	add(true, secHelp, "/help")
	return out
}

// counts are those of today. Whoever does not see the whole site sees none but the number of entries.
func (v *visit) counts(at book.SiteView) (book.SpineCounts, error) {
	if !v.may(book.SeeSite) {
		size, err := v.b.Size(v.ctx())
		return book.SpineCounts{Entries: size}, err
	}
	st, err := v.shortAt(at.Code, nil)
	return st.counts, err
}
