package program

import (
	"fmt"
	"slices"

	"lodebook/models/civil"
)

// Severity is how grave something is that needs a remedy. Due is how long there is for it, counted from the
// day on which the remedy is asked for. Confirm asks for a second person who looks at what was done.
type Severity struct {
	Code, Name string
	Due        civil.Duration
	Confirm    bool
}

// IncidentKind is a kind of incident or near miss.
type IncidentKind struct{ Code, Name string }

// Report is the site's own rule for telling an outside body of an incident: to whom, and within how many
// days after the day of the incident, which itself does not count.
type Report struct {
	Code, To string
	Within   int
	Working  bool     // only operating days of the site's calendar count
	Kinds    []string // of incident; empty: all
}

// defaultSeverities and defaultIncidents stand where the file names none.
var (
	defaultSeverities = []Severity{
		{"low", "Low", civil.Duration{Days: 90}, false},
		{"medium", "Medium", civil.Duration{Days: 30}, false},
		{"high", "High", civil.Duration{Days: 7}, true},
	}
	defaultIncidents = []IncidentKind{
		{"near-miss", "Near miss"}, {"projectile", "Projectile"}, {"burn", "Burn"}, {"acoustic", "Noise"},
		{"screening-miss", "Missed at screening"}, {"quench", "Quench"}, {"access", "Access"}, {"other", "Something else"},
	}
)

func (r *reader) severities(root object) {
	const accepted = "write a list such as [{severity: low, due: P90D}, {severity: high, due: P7D, confirm: true}], the mildest first"
	taken := map[string]int{}
	root.objects("remedies", "severity", accepted, func(o object) {
		var s Severity
		if n := o.need("severity", acceptedCode); n != nil {
			s.Code, _ = r.code(n, o.at("severity"))
		}
		r.register(o.get("severity"), o.at("severity"), s.Code, taken)
		s.Name = o.named("name", spokenCode(s.Code))
		o.need("due", acceptedDuration)
		if d := o.duration("due", true); d != nil {
			s.Due = *d
		}
		s.Confirm = o.yesNo("confirm", false)
		if n := len(r.p.Severities); n > 0 && r.p.Severities[n-1].Confirm && !s.Confirm {
			milder := r.p.Severities[n-1].Code
			r.fault(o.n, o.at("confirm"), "", "the milder "+milder+" before it is confirmed by a second person and this one is not", "write confirm: true, or put the severities in order, the mildest first")
		}
		r.p.Severities = append(r.p.Severities, s)
	})
	if len(r.p.Severities) == 0 {
		r.p.Severities = defaultSeverities
	}
}

func (r *reader) incidents(root object) {
	r.p.Incidents = listed(root, "incidents", "incident_kind", func(code, name string) IncidentKind { return IncidentKind{code, name} })
	if len(r.p.Incidents) == 0 {
		r.p.Incidents = defaultIncidents
	}
}

// longestReport bounds the days of a report, so that counting them ends.
const longestReport = 3660

func (r *reader) reports(root object) {
	const accepted = "write a list such as [{code: BODY, to: The body that is told, within: 3, days: working}]"
	kinds := codes(r.p.Incidents, func(k IncidentKind) string { return k.Code })
	taken := map[string]int{}
	root.objects("reports", "report", accepted, func(o object) {
		x := Report{Code: o.ownCode()}
		r.register(o.get("code"), o.at("code"), x.Code, taken)
		o.need("to", "write who is told")
		x.To = o.text("to")
		o.need("within", "write a number of days such as 3")
		x.Within = o.whole("within", 0, 0)
		if x.Within > longestReport {
			r.wrong(o.get("within"), o.at("within"), "more than ten years", fmt.Sprintf("write at most %d", longestReport))
		}
		x.Working = o.word("days", []string{"working", "all"}) != "all"
		x.Kinds = o.distinct("kinds", "write a list of kinds of incident", func(n *node, path string) string {
			return r.one(n, path, "a kind of incident", kinds)
		})
		r.p.Reports = append(r.p.Reports, x)
	})
}

// failOut reads what a failed sheet takes out of service.
func (s *Sheet) failOut(o object) {
	s.OnFailOut = o.yesNo("on_fail_out", false)
	s.AlsoZone = o.yesNo("also_zone", false)
	s.BackByAnother = o.yesNo("back_by_another", false)
	for _, key := range []string{"also_zone", "back_by_another"} {
		if n := o.get(key); n != nil && !s.OnFailOut {
			o.r.fault(o.place(key), o.at(key), shown(key), "means something only where a failed sheet takes its fixture out of service", "write on_fail_out: true too, or leave it out")
		}
	}
}

// Severity finds a severity by its code.
func (p *Program) Severity(code string) (*Severity, bool) {
	return find(p.Severities, func(s *Severity) bool { return s.Code == code })
}

// Incident finds a kind of incident by its code.
func (p *Program) Incident(code string) (*IncidentKind, bool) {
	return find(p.Incidents, func(k *IncidentKind) bool { return k.Code == code })
}

// ReportsOf are the reports that the site's rule asks for of a kind of incident.
func (p *Program) ReportsOf(kind string) []Report {
	var out []Report
	for _, x := range p.Reports {
		if len(x.Kinds) == 0 || slices.Contains(x.Kinds, kind) {
			out = append(out, x)
		}
	}
	return out
}

// Due is the last good day for a report of an incident: the day itself does not count.
func (x Report) Due(happened civil.Day, calendar civil.Calendar) civil.Day {
	if !x.Working {
		return min(happened+civil.Day(x.Within), civil.LastDay)
	}
	d := happened
	for n := x.Within; n > 0 && d < civil.LastDay; {
		d++
		if calendar.Operates(d) {
			n--
		}
	}
	return d
}

// oddSeverities lists severities that leave more time than a milder one.
func (p *Program) oddSeverities() []string {
	var out []string
	for i := 1; i < len(p.Severities); i++ {
		if a, b := p.Severities[i-1], p.Severities[i]; a.Due.NominalDays() < b.Due.NominalDays() {
			out = append(out, fmt.Sprintf("Severity %s leaves %s for a remedy and the milder %s only %s.", b.Code, b.Due, a.Code, a.Due))
		}
	}
	return out
}
