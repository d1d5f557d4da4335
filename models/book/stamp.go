package book

import (
	"context"
	"strconv"
	"time"
)

// Stamp gives a text that stays the same for as long as every query gives the same answer: it changes when
// anything was written, by this or another process, and with each minute of the clock, since every civil
// day of every zone begins with one. Read it before asking: then what is written meanwhile is never taken
// for seen.
func (b *Book) Stamp(ctx context.Context) (string, error) {
	written, err := b.st.Stamp(ctx)
	return written + " " + strconv.FormatInt(minuteOf(b.Now()), 10), err
}

func minuteOf(t time.Time) int64 { return t.Unix() / 60 }
