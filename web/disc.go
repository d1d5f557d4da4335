package web

import (
	"fmt"
	"html/template"
	"math"

	"lodebook/models/standing"
)

// The well of ink, on a square of 24: a ring, and in it a level.
const (
	centre = 12.0
	well   = 7.2
	least  = 0.12 // what is closing still shows some ink
)

// disc draws a standing: its ring tells the word, its level the share of the span that is left, 0 to 1.
// It says nothing to a screen reader, since its word always stands beside it.
func disc(w standing.Word, left float64) template.HTML {
	inside := ""
	switch w {
	case standing.Met:
		inside = ink(left)
	case standing.Closing:
		inside = ink(max(left, least))
	case standing.Failed:
		inside = `<path class="mark" d="M8 8l8 8M16 8l-8 8"/>`
	case standing.Excused:
		inside = `<path class="mark" d="M8 12h8"/>`
	case standing.DataFault:
		inside = `<path class="mark" d="M9.4 9.6a2.6 2.6 0 1 1 3.9 2.3c-.8.5-1.3 1-1.3 1.9M12 16.4v.5"/>`
	}
	// Numbers and the words of the trade: nothing in it comes from outside.
	return template.HTML(fmt.Sprintf(`<svg class="disc disc-%s" viewBox="0 0 24 24" aria-hidden="true" focusable="false"><circle class="ring" cx="12" cy="12" r="9.5"/>%s</svg>`, discClass(w), inside))
}

func discClass(w standing.Word) string {
	switch w {
	case standing.Met, standing.Closing, standing.Lapsed, standing.Missing, standing.Failed, standing.Excused, standing.Awaited, standing.DataFault:
		return string(w)
	default:
		return "none"
	}
}

// ink is the part of the well below its level.
func ink(share float64) string {
	share = min(max(share, 0), 1)
	if share > 0.995 {
		return `<circle class="ink" cx="12" cy="12" r="7.2"/>`
	}
	if share < 0.005 {
		return ""
	}
	y := centre + well - 2*well*share
	half := math.Sqrt(well*well - (y-centre)*(y-centre))
	large := 0
	if share > 0.5 {
		large = 1
	}
	return fmt.Sprintf(`<path class="ink" d="M%.2f %.2fA%.1f %.1f 0 %d 0 %.2f %.2fZ"/>`, centre-half, y, well, well, large, centre+half, y)
}
