package store

import (
	"time"

	"lodebook/models/civil"
)

// The row structs of the projections. Each begins with the columns that all lines have, and comes
// with the two functions that take it from and to its public type.

type lineColumns struct {
	Seq   int64 `gorm:"primaryKey;autoIncrement:false"`
	N     int64 `gorm:"primaryKey;autoIncrement:false"`
	Ended int64
	Entry string
	Batch string
}

func lineIn(l Line) lineColumns {
	return lineColumns{Seq: l.Seq, Ended: l.Ended, Entry: l.ID, Batch: l.Batch}
}

func (c lineColumns) out() Line {
	return Line{Seq: c.Seq, Ended: c.Ended, ID: c.Entry, Batch: c.Batch}
}

type subjectColumns struct{ SubjectSite, SubjectKind, SubjectCode string }

func (c subjectColumns) out() SubjectKey {
	return SubjectKey{Site: c.SubjectSite, Kind: c.SubjectKind, Code: c.SubjectCode}
}

func subjectIn(k SubjectKey) subjectColumns { return subjectColumns{k.Site, k.Kind, k.Code} }

type siteLine struct {
	Line                 lineColumns `gorm:"embedded"`
	Code, Name, TimeZone string
}

func siteIn(r SiteRow) siteLine { return siteLine{lineIn(r.Line), r.Code, r.Name, r.TimeZone} }

func siteOut(r siteLine) SiteRow { return SiteRow{r.Line.out(), r.Code, r.Name, r.TimeZone} }

type versionLine struct {
	Line        lineColumns `gorm:"embedded"`
	Site        string
	Number      int
	InForceFrom day
	Retroactive bool
	Source      []byte
}

func versionIn(r VersionRow) versionLine {
	return versionLine{lineIn(r.Line), r.Site, r.Number, day(r.InForceFrom), r.Retroactive, r.Source}
}

func versionOut(r versionLine) VersionRow {
	return VersionRow{r.Line.out(), r.Site, r.Number, civil.Day(r.InForceFrom), r.Retroactive, r.Source}
}

type personLine struct {
	Line                     lineColumns `gorm:"embedded"`
	Code, Name, Email, Badge string
	FromDay                  *day
	Erased                   bool
	Touched                  int64
}

func personIn(r PersonRow) personLine {
	return personLine{Line: lineIn(r.Line), Code: r.Code, Name: r.Name, Email: r.Email, Badge: r.Badge, FromDay: (*day)(r.From), Erased: r.Erased}
}

func personOut(r personLine) PersonRow {
	return PersonRow{r.Line.out(), r.Code, r.Name, r.Email, r.Badge, (*civil.Day)(r.FromDay), r.Erased}
}

type fixtureLine struct {
	Line                   lineColumns `gorm:"embedded"`
	Site, Code, Kind, Name string
}

func fixtureIn(r FixtureRow) fixtureLine {
	return fixtureLine{lineIn(r.Line), r.Site, r.Code, r.Kind, r.Name}
}

func fixtureOut(r fixtureLine) FixtureRow {
	return FixtureRow{r.Line.out(), r.Site, r.Code, r.Kind, r.Name}
}

type stintLine struct {
	Line              lineColumns `gorm:"embedded"`
	Site, Kind, Code  string
	FirstDay, LastDay *day
}

func stintIn(r StintRow) stintLine {
	return stintLine{lineIn(r.Line), r.Site, r.Kind, r.Code, (*day)(r.First), (*day)(r.Last)}
}

func stintOut(r stintLine) StintRow {
	return StintRow{r.Line.out(), r.Site, r.Kind, r.Code, (*civil.Day)(r.FirstDay), (*civil.Day)(r.LastDay)}
}

type factLine struct {
	Line                   lineColumns `gorm:"embedded"`
	Site, Kind, Code, Fact string
	FromDay                day
	Value                  string
	Touched                int64
}

func factIn(r FactRow) factLine {
	return factLine{lineIn(r.Line), r.Site, r.Kind, r.Code, r.Fact, day(r.From), r.Value, 0}
}

func factOut(r factLine) FactRow {
	return FactRow{r.Line.out(), r.Site, r.Kind, r.Code, r.Fact, civil.Day(r.FromDay), r.Value}
}

type recordLine struct {
	Line           lineColumns `gorm:"embedded"`
	Ord            int64
	Site           string
	Subject        subjectColumns `gorm:"embedded"`
	What           string
	OnDay          day
	AtTime         *instant
	Passed, Remark bool
	UntilDay       *day
	OpenZones      string
	Session        string
}

func recordIn(r RecordRow) recordLine {
	return recordLine{
		Line: lineIn(r.Line), Ord: r.Order, Site: r.Site, Subject: subjectIn(r.Subject), What: r.What,
		OnDay: day(r.Day), AtTime: (*instant)(r.Time), Passed: r.Passed, Remark: r.Remark,
		UntilDay: (*day)(r.Until), OpenZones: r.Limit, Session: r.Session,
	}
}

func recordOut(r recordLine) RecordRow {
	return RecordRow{
		Line: r.Line.out(), Order: r.Ord, Site: r.Site, Subject: r.Subject.out(), What: r.What,
		Day: civil.Day(r.OnDay), Time: (*time.Time)(r.AtTime), Passed: r.Passed, Remark: r.Remark,
		Until: (*civil.Day)(r.UntilDay), Limit: r.OpenZones, Session: r.Session,
	}
}

type eventLine struct {
	Line    lineColumns `gorm:"embedded"`
	Site    string
	Subject subjectColumns `gorm:"embedded"`
	Event   string
	OnDay   day
	AtTime  *instant
}

func eventIn(r EventRow) eventLine {
	return eventLine{lineIn(r.Line), r.Site, subjectIn(r.Subject), r.Event, day(r.Day), (*instant)(r.Time)}
}

func eventOut(r eventLine) EventRow {
	return EventRow{r.Line.out(), r.Site, r.Subject.out(), r.Event, civil.Day(r.OnDay), (*time.Time)(r.AtTime)}
}

type excusalLine struct {
	Line           lineColumns `gorm:"embedded"`
	Site           string
	Subject        subjectColumns `gorm:"embedded"`
	Item           string
	FromDay        day
	ToDay          *day
	Opens, Waiting bool
}

func excusalIn(r ExcusalRow) excusalLine {
	return excusalLine{
		Line: lineIn(r.Line), Site: r.Site, Subject: subjectIn(r.Subject), Item: r.Item,
		FromDay: day(r.From), ToDay: (*day)(r.To), Opens: r.Opens, Waiting: r.Waiting,
	}
}

func excusalOut(r excusalLine) ExcusalRow {
	return ExcusalRow{
		Line: r.Line.out(), Site: r.Site, Subject: r.Subject.out(), Item: r.Item,
		From: civil.Day(r.FromDay), To: (*civil.Day)(r.ToDay), Opens: r.Opens, Waiting: r.Waiting,
	}
}

type rightLine struct {
	Line               lineColumns `gorm:"embedded"`
	Site, Person, Zone string
	FromTime           instant
	ToTime             *instant
}

func rightIn(r RightRow) rightLine {
	return rightLine{lineIn(r.Line), r.Site, r.Person, r.Zone, instant(r.From), (*instant)(r.To)}
}

type dutyLine struct {
	Line             lineColumns `gorm:"embedded"`
	Site, Person     string
	FromTime, ToTime instant
	Duty             string
}

func dutyIn(r DutyRow) dutyLine {
	return dutyLine{lineIn(r.Line), r.Site, r.Person, instant(r.From), instant(r.To), r.Duty}
}

func dutyOut(r dutyLine) DutyRow {
	return DutyRow{r.Line.out(), r.Site, r.Person, time.Time(r.FromTime), time.Time(r.ToTime), r.Duty}
}

type stockLine struct {
	Line             lineColumns `gorm:"embedded"`
	Site, Item       string
	FromTime, ToTime instant
	Spans            codes
}

func stockIn(r StockRow) stockLine {
	return stockLine{lineIn(r.Line), r.Site, r.Item, instant(r.From), instant(r.To), codes(r.Spans)}
}

func stockOut(r stockLine) StockRow {
	return StockRow{r.Line.out(), r.Site, r.Item, time.Time(r.FromTime), time.Time(r.ToTime), r.Spans}
}

func rightOut(r rightLine) RightRow {
	return RightRow{r.Line.out(), r.Site, r.Person, r.Zone, time.Time(r.FromTime), (*time.Time)(r.ToTime)}
}

type markLine struct {
	Line        lineColumns `gorm:"embedded"`
	Site        string
	AtTime      instant
	Door, Badge string
	Touched     int64
}

func markIn(r MarkRow) markLine {
	return markLine{lineIn(r.Line), r.Site, instant(r.At), r.Door, r.Badge, 0}
}

func markOut(r markLine) MarkRow {
	return MarkRow{r.Line.out(), r.Site, time.Time(r.AtTime), r.Door, r.Badge}
}

type visitLine struct {
	Line                     lineColumns `gorm:"embedded"`
	Site                     string
	Visitor, Employer, Badge string
	Kind                     string
	Zones                    codes
	FromTime, ToTime         instant
	Escort, Person           string
	Tools                    codes
	Late                     bool
	Touched                  int64
}

func visitIn(r VisitRow) visitLine {
	return visitLine{
		Line: lineIn(r.Line), Site: r.Site, Visitor: r.Visitor, Employer: r.Employer, Badge: r.Badge, Kind: r.Kind, Zones: codes(r.Zones),
		FromTime: instant(r.From), ToTime: instant(r.To), Escort: r.Escort, Person: r.Person, Tools: codes(r.Tools), Late: r.Late,
	}
}

func visitOut(r visitLine) VisitRow {
	return VisitRow{
		Line: r.Line.out(), Site: r.Site, Visitor: r.Visitor, Employer: r.Employer, Badge: r.Badge, Kind: r.Kind, Zones: r.Zones,
		From: time.Time(r.FromTime), To: time.Time(r.ToTime), Escort: r.Escort, Person: r.Person, Tools: r.Tools, Late: r.Late,
	}
}

type visitStepLine struct {
	Line              lineColumns `gorm:"embedded"`
	Site, Visit, Step string
	AtTime            instant
	Screener, Outcome string
	Account           string
}

func visitStepIn(r VisitStepRow) visitStepLine {
	return visitStepLine{lineIn(r.Line), r.Site, r.Visit, r.Step, instant(r.At), r.Screener, r.Outcome, r.Account}
}

func visitStepOut(r visitStepLine) VisitStepRow {
	return VisitStepRow{r.Line.out(), r.Site, r.Visit, r.Step, time.Time(r.AtTime), r.Screener, r.Outcome, r.Account}
}

type planLine struct {
	Line             lineColumns `gorm:"embedded"`
	Site, What, Crew string
	OnDay            day
	AtClock          string
}

func planIn(r PlanRow) planLine {
	return planLine{lineIn(r.Line), r.Site, r.What, r.Crew, day(r.Day), r.At}
}

func planOut(r planLine) PlanRow {
	return PlanRow{r.Line.out(), r.Site, r.What, r.Crew, civil.Day(r.OnDay), r.AtClock}
}

type accountLine struct {
	Line           lineColumns `gorm:"embedded"`
	ID, Name, Role string
	Sites          codes
	Person         string
	UntilDay       *day
	Disabled       bool
	Touched        int64
}

func accountIn(r AccountRow) accountLine {
	return accountLine{lineIn(r.Line), r.ID, r.Name, r.Role, codes(r.Sites), r.Person, (*day)(r.Until), r.Disabled, 0}
}

func accountOut(r accountLine) AccountRow {
	return AccountRow{r.Line.out(), r.ID, r.Name, r.Role, r.Sites, r.Person, (*civil.Day)(r.UntilDay), r.Disabled}
}

type batchLine struct {
	Line             lineColumns `gorm:"embedded"`
	Site, What, File string
	RowCount         int
	Actor            string
	At               instant
}

func batchIn(r BatchRow) batchLine {
	return batchLine{lineIn(r.Line), r.Site, r.Table, r.File, r.Rows, r.Actor, instant(r.At)}
}

func batchOut(r batchLine) BatchRow {
	return BatchRow{r.Line.out(), r.Site, r.What, r.File, r.RowCount, r.Actor, time.Time(r.At)}
}
