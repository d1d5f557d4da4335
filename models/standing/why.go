package standing

import (
	"errors"
	"fmt"
	"strings"
	"time"

	"lodebook/models/civil"
	"lodebook/models/program"
)

// reasons are sentences that say why.
type reasons []string

func (r *reasons) say(format string, args ...any) { *r = append(*r, fmt.Sprintf(format, args...)) }

// whyFaulty names what a selector needs and does not find.
func whyFaulty(sel *program.Selector, err error) []string {
	var r reasons
	var missing *program.MissingFact
	if errors.As(err, &missing) {
		r.say("The condition %s cannot be judged, because this is not on record for the day: %s.", sel.Source(), strings.Join(missing.Facts, ", "))
	} else {
		r.say("The condition %s cannot be judged: %v.", sel.Source(), err)
	}
	return r
}

// why explains the finding: the version and the start, what decided, the rule and the arithmetic.
func (ob *obligation) why(f finding) []string {
	var r reasons
	ob.whyAsked(&r)
	switch {
	case f.excusal != nil:
		ob.whyExcused(&r, f)
	case ob.item.Cadence.Holds != nil:
		ob.whyHolds(&r, f)
	case f.word == Failed:
		r.say("The last record, %s, failed. It stands as failed until a later record passes.", ob.named(f.record))
	default:
		ob.whyCadence(&r, f)
	}
	return r
}

func (ob *obligation) whyAsked(r *reasons) {
	ed := ob.edition
	r.say("Version %d of the program, in force from %v, asks %s: %s.", ed.Number, ed.InForceFrom, ob.item.Code, strings.TrimSuffix(ob.item.Title, "."))
	if since := ob.inForce(ob.item, ob.on); since != ed.InForceFrom {
		r.say("The item has been in force without a break since %v.", since)
	}
	reason := "the day from which the item has been in force"
	switch start := ob.begins(); {
	case hasStints(ob.subject.subject.Asks) && start == ob.subject.since:
		reason = "the first day of the present stint"
	case start == ob.inForce(ob.item, ob.on):
	case ob.item.When == nil:
		reason = "the day from which the program has declared it"
	default:
		reason = "the day from which the condition " + ob.item.When.Source() + " has held"
	}
	r.say("It has been asked of %s %s since %v, %s.", ob.subject.subject.Asks, ob.subject.subject.Code, ob.begins(), reason)
}

func (ob *obligation) whyExcused(r *reasons, f finding) {
	x := f.excusal
	what, until := "An excusal", "until it is ended"
	if x.Item == "" {
		what = "A pause"
	}
	if x.To != nil {
		until = fmt.Sprintf("to %v, both days included", *x.To)
	}
	r.say("%s%s covers %v: it runs from %v %s.", what, entry(x.ID), ob.on, x.From, until)
	if last, any := ob.last(); any && !last.passed {
		r.say("The last record, %s, failed, but the excusal begins on a later day.", ob.named(last.record))
	}
}

func (ob *obligation) whyHolds(r *reasons, f finding) {
	if c := ob.item.Cadence.Cover; c != nil {
		if f.word == Met {
			r.say("The item asks for %s, %s; nobody was missing on %v by the roster, the records and the appointments that are known.", c.Words(), ob.item.Cadence.Words(), ob.on)
		} else {
			r.say("The item asks for %s, %s; on %v there is a time in which fewer are there. Each day since %v has had one.", c.Words(), ob.item.Cadence.Words(), ob.on, max(f.since, ob.begins()))
		}
		return
	}
	if f.word == Met {
		r.say("The condition %s holds by what is on record for %v.", ob.item.Cadence.Holds.Source(), ob.on)
		return
	}
	r.say("The condition %s does not hold by what is on record for %v; it has not held since %v.", ob.item.Cadence.Holds.Source(), ob.on, max(f.since, ob.begins()))
}

func (ob *obligation) whyCadence(r *reasons, f finding) {
	switch ob.item.Cadence.Rule {
	case program.Every:
		ob.whyEvery(r, f)
	case program.Within:
		ob.whyWithin(r, f)
	case program.Once:
		ob.whyOnce(r, f)
	case program.Each:
		ob.whyEach(r, f)
		return
	case program.After:
		ob.whyAfter(r, f)
		return
	}
	ob.whyWord(r, f)
}

func (ob *obligation) whyEvery(r *reasons, f finding) {
	c := &ob.item.Cadence
	r.say("The item wants %s every %v.", ob.wanted(), c.Every)
	if f.renewal.record == nil {
		ob.whyFirst(r, f)
		return
	}
	n := &f.renewal
	r.say("The deciding record is %s; it passed.", ob.named(n.record))
	sum := fmt.Sprintf("%v plus %v is %v", n.from, c.Every, n.sum)
	if n.anniversary {
		sum = fmt.Sprintf("It came no more than %v before the old due day and not after it, so the anniversary is kept: %s", *c.Early, sum)
	}
	if c.MonthEnd {
		sum += fmt.Sprintf(", moved to the month's end: %v", n.end)
	}
	r.say("%s.", sum)
	if n.until != noDay {
		r.say("The record itself is good until %v; the earlier of the two days counts, which is %v.", n.until, n.due)
	}
	if last := ob.deeds[len(ob.deeds)-1]; last.record != n.record {
		r.say("The later record, %s, would not move that day on, so it stays.", ob.named(last.record))
	}
}

func (ob *obligation) whyWithin(r *reasons, f finding) {
	c := &ob.item.Cadence
	r.say("The item wants %s on %s within any %v; records of one day count once.", ob.wanted(), days(c.Count), c.Within)
	if f.record == nil {
		ob.whyFirst(r, f)
		return
	}
	r.say("The deciding record is %s, the %s day with one that passed, counted back from %v.", ob.named(f.record), latest(c.Count), ob.on)
	r.say("%v plus %v is %v.", f.from, c.Within, *f.due)
}

func (ob *obligation) whyOnce(r *reasons, f finding) {
	r.say("The item wants %s once.", ob.wanted())
	switch {
	case f.record == nil:
		ob.whyFirst(r, f)
	case f.due == nil:
		r.say("The latest record that passed is %s. It has no last good day, so it counts for good.", ob.named(f.record))
	default:
		r.say("The latest record that passed is %s; it is good until %v.", ob.named(f.record), *f.due)
	}
}

// whyFirst tells of the first due day, while there are not enough records.
func (ob *obligation) whyFirst(r *reasons, f finding) {
	if _, any := ob.accepted(); any {
		r.say("There are not enough records that passed up to %v.", ob.on)
	} else {
		r.say("There is no record that passed up to %v.", ob.on)
	}
	r.say("The first is due %v after the start: %v plus %v is %v.", ob.item.First, ob.begins(), ob.item.First, *f.due)
}

// whyWord tells what the due day makes of the day judged.
func (ob *obligation) whyWord(r *reasons, f finding) {
	if f.due == nil {
		return
	}
	notice := ob.item.Notice.Before(*f.due)
	switch f.word {
	case Met, Awaited:
		r.say("The notice of %s begins on %v; %v is before it, so it stands as %s.", ob.noticed(), notice, ob.on, f.word)
	case Closing:
		ob.whyClosing(r, *f.due, fmt.Sprintf("The notice of %s began on %v and the due day is %v", ob.noticed(), notice, *f.due))
	case Lapsed:
		r.say("%s without a record that renews it, so it stands as lapsed.", ob.goneBy(*f.due))
	case Missing:
		r.say("%s and no record passed before %v, so it stands as missing.", ob.goneBy(*f.due), ob.on+1)
	}
}

func (ob *obligation) whyClosing(r *reasons, due civil.Day, ahead string) {
	if ob.on > due {
		r.say("The due day, %v, has gone by, but the grace of %v runs to %v, so on %v it stands as closing.", due, ob.item.Grace, due.Add(ob.item.Grace), ob.on)
		return
	}
	r.say("%s, so on %v it stands as closing.", ahead, ob.on)
}

// goneBy tells of a last good day before the day judged.
func (ob *obligation) goneBy(due civil.Day) string {
	if ob.item.Grace.IsZero() {
		return fmt.Sprintf("The last good day, %v, has gone by", due)
	}
	return fmt.Sprintf("The last good day, %v, and the grace of %v, to %v, have gone by", due, ob.item.Grace, due.Add(ob.item.Grace))
}

func (ob *obligation) whyEach(r *reasons, f finding) {
	c := &ob.item.Cadence
	counts := ""
	if c.Operating {
		counts = "; only operating days count"
	}
	r.say("The item wants %s in each %v that asks%s.", ob.wanted(), c.Each, counts)
	switch {
	case f.word == Met:
		r.say("The %s has %s, which passed.", ob.spoken(f.period), ob.named(f.record))
		if f.due == nil {
			r.say("No later %v will ask.", c.Each)
		} else {
			r.say("The next %v that asks has %v as its last day that counts.", c.Each, *f.due)
		}
	case f.due == nil:
		r.say("No %v will ask, by the calendar, the start and the excusals.", c.Each)
	case f.word.IsGap():
		r.say("The %s asked for a record by %v and has none that passed.", ob.spoken(f.period), *f.due)
		ob.whyWord(r, f)
	case ob.on > *f.due:
		r.say("The %s asked for a record by %v and has none that passed.", ob.spoken(f.period), *f.due)
		ob.whyClosing(r, *f.due, "")
	default:
		r.say("The %s asks for a record by %v, its last day that counts.", ob.spoken(f.period), *f.due)
		ob.whyWord(r, f)
	}
}

func (ob *obligation) whyAfter(r *reasons, f finding) {
	c := &ob.item.Cadence
	ev := f.event
	r.say("The item wants %s within %v after %s.", ob.wanted(), c.Within, strings.Join(c.After, " or "))
	happened := fmt.Sprintf("%s%s on %s", ev.Code, entry(ev.ID), ob.moment(ev.Day, ev.Time))
	if f.word == Met {
		r.say("Every such event is answered; the latest, %s, by %s, which passed.", happened, ob.named(f.record))
		return
	}
	r.say("The earliest that no record answers is %s.", happened)
	if len(ob.item.Guards) > 0 {
		r.say("The item guards a zone, so on the day itself only a record with a later time would answer.")
	}
	r.say("%v plus %v is %v.", ev.on, c.Within, *f.due)
	if f.word == Closing {
		ob.whyClosing(r, *f.due, "That day has not gone by")
		return
	}
	ob.whyWord(r, f)
}

// named says which record: its kind, day, time and entry.
func (ob *obligation) named(r *record) string {
	return fmt.Sprintf("%s of %s%s", ob.kind(r), ob.moment(r.day, r.time()), entry(ob.e.marks.at(r.seq).String()))
}

// kind is the kind and code under which the record is on file.
func (ob *obligation) kind(r *record) string {
	for _, what := range ob.item.Records {
		list := ob.records(ob.subject.local, what)
		for i := range list {
			if &list[i] == r {
				return what
			}
		}
	}
	return "a record"
}

// moment is a day, with the time by the site's clock where there is one.
func (ob *obligation) moment(day civil.Day, at *time.Time) string {
	if at == nil {
		return day.String()
	}
	return at.In(ob.edition.loc).Format("2006-01-02 at 15:04")
}

func entry(id string) string {
	if id == "" {
		return ""
	}
	return " (entry " + id + ")"
}

// wanted says what answers the item.
func (ob *obligation) wanted() string { return "a record of " + strings.Join(ob.item.Records, " or ") }

// spoken names a period by its days.
func (ob *obligation) spoken(p asked) string {
	if p.First == p.Last {
		return "day " + p.First.String()
	}
	return fmt.Sprintf("%v from %v to %v", ob.item.Cadence.Each, p.First, p.Last)
}

func (ob *obligation) noticed() string {
	if given := ob.item.Notice.Given; given != nil {
		return given.String()
	}
	return days(ob.item.Notice.Days)
}

func days(n int) string {
	if n == 1 {
		return "1 day"
	}
	return fmt.Sprintf("%d days", n)
}

func latest(n int) string {
	switch n {
	case 1:
		return "latest"
	case 2:
		return "second latest"
	case 3:
		return "third latest"
	}
	return fmt.Sprintf("%dth latest", n)
}
