package table

import (
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"
	"time"

	"lodebook/models/civil"
)

// serialForm is a bare number, which in a column of dates is a spreadsheet's serial.
var serialForm = regexp.MustCompile(`^\d+([.,]\d+)?$`)

// lastSerial is 9999-12-31 in the 1900 system.
const lastSerial = 2958465

// Numbers in this range are more likely a year (2025, 2025.03) than the serial of a day around 1905.
const firstYear, lastYear = 1900, 2100

const millisPerDay = 86400000

// readSerial understands a bare number as a serial date, with a time of day if it has a fraction.
func (d dateRules) readSerial(s string) (w when, problem, accepted string) {
	point := strings.Replace(s, ",", ".", 1)
	serial, err := strconv.ParseFloat(point, 64)
	if err != nil || point != s && !d.traits.decimalComma {
		return w, "is neither a day nor a spreadsheet's serial number of one", isoDay
	}
	if serial >= firstYear && serial < lastYear+1 {
		return w, "may be a year, or the serial number of a day around 1905", isoDay
	}
	w, ok := fromSerial(serial, d.traits.epoch)
	if !ok {
		return w, refusedSerial(serial, d.traits.epoch), acceptedFor(s)
	}
	w.serial = true
	return w, "", ""
}

func refusedSerial(serial float64, e Epoch) string {
	if e == Epoch1900 && math.Trunc(serial) == 60 {
		return "is the serial number of 1900-02-29, a day that never was"
	}
	return "is no serial number of a day"
}

// acceptedFor knows the compact form of a day, which people take for a date and is out of range
// as a serial.
func acceptedFor(s string) string {
	if t, err := time.Parse("20060102", s); err == nil {
		return t.Format("2006-01-02")
	}
	return fmt.Sprintf("%s, or a serial number from 1 to %d", isoDay, lastSerial)
}

// fromSerial turns a serial date into a day and, if it has a fraction, a time of day to the
// millisecond, which is as fine as a fraction of a serial can be trusted
// (ECMA-376 part 1, §18.17.4). False: no such day.
func fromSerial(serial float64, e Epoch) (when, bool) {
	if math.IsNaN(serial) || serial < 0 || serial > lastSerial+1 {
		return when{}, false
	}
	millis := int64(math.Round(serial * millisPerDay))
	w := when{
		clock: time.Duration(millis%millisPerDay) * time.Millisecond,
		timed: millis%millisPerDay != 0,
	}
	n := civil.Day(millis / millisPerDay)
	first := map[Epoch]civil.Day{Epoch1900: 1, Epoch1904: 0}[e]
	switch {
	case n < first:
		return w, false
	case e == Epoch1904:
		w.day = civil.Of(1904, time.January, 1) + n
	case n == 60:
		return w, false
	case n < 60:
		w.day = civil.Of(1899, time.December, 31) + n
	default:
		// From serial 61 on the count includes the 1900-02-29 that never was.
		w.day = civil.Of(1899, time.December, 30) + n
	}
	return w, w.day <= civil.LastDay
}

// String writes a date and its time of day as far as it has one, so that read understands it.
func (w when) String() string {
	if !w.timed {
		return w.day.String()
	}
	return w.day.String() + " " + clockText(w.clock)
}

func clockText(d time.Duration) string {
	layout := "15:04:05.000"
	if d%time.Second == 0 {
		layout = "15:04:05"
	}
	return time.Unix(0, 0).UTC().Add(d).Format(layout)
}
