package store

import (
	"time"

	"lodebook/models/civil"
)

// The row structs of incidents, remedies and what is out of service.

type incidentLine struct {
	Line                 lineColumns `gorm:"embedded"`
	Site                 string
	Number               int
	Kind, Zone, Severity string
	AtTime               instant
	Anonymous            bool
	Reporter             string
	People               codes
}

func incidentIn(r IncidentRow) incidentLine {
	return incidentLine{lineIn(r.Line), r.Site, r.Number, r.Kind, r.Zone, r.Severity, instant(r.At), r.Anonymous, r.Reporter, codes(r.People)}
}

func incidentOut(r incidentLine) IncidentRow {
	return IncidentRow{r.Line.out(), r.Site, r.Number, r.Kind, r.Zone, r.Severity, time.Time(r.AtTime), r.Anonymous, r.Reporter, r.People}
}

type reportLine struct {
	Line     lineColumns `gorm:"embedded"`
	Site     string
	Incident int
	Code     string
	OnDay    day
}

func reportIn(r ReportRow) reportLine {
	return reportLine{lineIn(r.Line), r.Site, r.Incident, r.Code, day(r.Day)}
}

func reportOut(r reportLine) ReportRow {
	return ReportRow{r.Line.out(), r.Site, r.Incident, r.Code, civil.Day(r.OnDay)}
}

type remedyLine struct {
	Line                     lineColumns `gorm:"embedded"`
	Site                     string
	Number, Incident         int
	Record, Item             string
	Subject                  subjectColumns `gorm:"embedded"`
	Severity, Owner, Account string
	Made, Due                day
	Confirm                  bool
}

func remedyIn(r RemedyRow) remedyLine {
	return remedyLine{
		lineIn(r.Line), r.Site, r.Number, r.Incident, r.Record, r.Item, subjectIn(r.Subject), r.Severity, r.Owner, r.Account, day(r.Made), day(r.Due), r.Confirm,
	}
}

func remedyOut(r remedyLine) RemedyRow {
	return RemedyRow{
		r.Line.out(), r.Site, r.Number, r.Incident, r.Record, r.Item, r.Subject.out(), r.Severity, r.Owner, r.Account, civil.Day(r.Made), civil.Day(r.Due), r.Confirm,
	}
}

type remedyStepLine struct {
	Line            lineColumns `gorm:"embedded"`
	Site            string
	Remedy          int
	Step            string
	OnDay           day
	Account, DoneBy string
}

func remedyStepIn(r RemedyStepRow) remedyStepLine {
	return remedyStepLine{lineIn(r.Line), r.Site, r.Remedy, r.Step, day(r.Day), r.Account, r.DoneBy}
}

func remedyStepOut(r remedyStepLine) RemedyStepRow {
	return RemedyStepRow{r.Line.out(), r.Site, r.Remedy, r.Step, civil.Day(r.OnDay), r.Account, r.DoneBy}
}

type outageLine struct {
	Line          lineColumns `gorm:"embedded"`
	Site          string
	Subject       subjectColumns `gorm:"embedded"`
	Cause, Record string
	FromTime      instant
	Another       bool
	Account       string
}

func outageIn(r OutageRow) outageLine {
	return outageLine{lineIn(r.Line), r.Site, subjectIn(r.Subject), r.Cause, r.Record, instant(r.From), r.Another, r.Account}
}

func outageOut(r outageLine) OutageRow {
	return OutageRow{r.Line.out(), r.Site, r.Subject.out(), r.Cause, r.Record, time.Time(r.FromTime), r.Another, r.Account}
}

type returnLine struct {
	Line    lineColumns `gorm:"embedded"`
	Site    string
	Outages codes
	AtTime  instant
}

func returnIn(r ReturnRow) returnLine {
	return returnLine{lineIn(r.Line), r.Site, codes(r.Outages), instant(r.At)}
}

func returnOut(r returnLine) ReturnRow {
	return ReturnRow{r.Line.out(), r.Site, r.Outages, time.Time(r.AtTime)}
}
