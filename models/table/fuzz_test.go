package table

import (
	"bytes"
	"errors"
	"io"
	"os"
	"strings"
	"testing"
	"time"
)

// FuzzOpen reads anything at all: it never panics, never gives a row that is out of order or
// faults without words, and always ends.
func FuzzOpen(f *testing.F) {
	b := single(data(1, []string{"code", "name", "joined"}, []string{` t="s"><v>0</v>`, ` t="b"><v>1</v>`, ` s="1"><v>43831.5</v>`}))
	b.strings, b.formats = []string{"<t>P1</t>"}, []string{"dd/mm/yyyy hh:mm"}
	for _, seed := range []string{
		"code,name,joined\nP1,Ada,2025-03-01\n\"P2\",\"a\nb\",45717.5\n",
		"sep=;\ncode;joined\nP1;25/12/2025 08:30\n",
		"\xff\xfe" + string(in16("code\tname\r\nP1\tÅse\r\n", false)),
		"code,name\nP1,\"open\nP2,x\n",
		"code,name\rP1,\xe5\r",
		string(b.bytes(f)),
		string(stored(f, b)),
	} {
		f.Add([]byte(seed), uint8(0))
	}
	f.Fuzz(func(t *testing.T, content []byte, how uint8) {
		o := Options{Dates: []DateOrder{"", DMY, MDY}[how%3], Serials: Epoch(how / 3 % 2), MaxUnfolded: 1 << 20, TempDir: os.TempDir()}
		r, faults, err := Open(bytes.NewReader(content), int64(len(content)), people, []string{"code"}, []string{"height_m"}, o)
		if err != nil || (r == nil) != (len(faults) > 0) {
			t.Fatal(r, faults, err)
		}
		worded(t, faults)
		if r == nil {
			return
		}
		drain(t, r)
	})
}

// drain reads a table to its end and closes it.
func drain(t *testing.T, r *Reader) {
	defer closed(t, r)
	for line := 1; ; {
		row, faults, err := r.Next()
		if errors.Is(err, io.EOF) {
			return
		}
		if err != nil {
			t.Fatal(err)
		}
		worded(t, faults)
		if len(faults) > 0 {
			continue
		}
		if row.Line <= line {
			t.Fatalf("line %d after line %d", row.Line, line)
		}
		line = row.Line
		exercise(t, row)
		if done, total := r.Progress(); done < 0 || done > total {
			t.Fatalf("progress %d of %d", done, total)
		}
	}
}

func worded(t *testing.T, faults []Fault) {
	for _, f := range faults {
		if f.Problem == "" || f.Accepted == "" {
			t.Fatalf("a fault without words: %+v", f)
		}
	}
}

// exercise reads every cell in every way.
func exercise(t *testing.T, row Row) {
	for _, col := range append(people, "height_m", "nothing") {
		if s := row.Text(col); s != strings.TrimFunc(s, invisible) {
			t.Fatalf("%q has blanks around it", s)
		}
		day, ok, f := row.Day(col)
		if f != nil {
			worded(t, []Fault{*f})
		}
		m, okM, f := row.Moment(col, time.UTC)
		if f != nil {
			worded(t, []Fault{*f})
		}
		if ok && (!okM || m.Day != day) {
			t.Fatalf("%q is the day %s and the moment %+v", row.Text(col), day, m)
		}
		if _, _, f := row.YesNo(col); f != nil {
			worded(t, []Fault{*f})
		}
		if _, _, f := row.Number(col); f != nil {
			worded(t, []Fault{*f})
		}
		row.Words(col)
	}
}

// FuzzSheet reads a workbook whose sheet, shared strings and number format are anything at all; the
// checksums of a zip keep FuzzOpen from getting that far.
func FuzzSheet(f *testing.F) {
	f.Add(data(1, []string{"code", "joined"}, []string{` t="s"><v>0</v>`, ` s="1"><v>43831.5</v>`}, []string{"P2", ` t="e"><v>#N/A</v>`}), "<t>P1</t>", "dd/mm/yyyy hh:mm")
	f.Add(`<row><c t="inlineStr"><is><t>code</t></is></c></row><row r="9"><c r="C9"><f>1</f></c></row>`, "<r><t>x</t></r>", "0000")
	f.Add(`<row><c t="d"><v>2020-01-01T00:00:00</v></c><c t="str"><v>code</v></c></row><row><c s="1"><v>1e9</v></c></row>`, "", "[h]:mm;@")
	f.Fuzz(func(t *testing.T, rows, shared, format string) {
		b := single(rows)
		b.strings, b.formats = []string{shared}, []string{format}
		content := stored(t, b)
		r, faults, err := opened(content, Options{TempDir: t.TempDir()})
		if err != nil || (r == nil) != (len(faults) > 0) {
			t.Fatal(r, faults, err)
		}
		worded(t, faults)
		if r != nil {
			drain(t, r)
		}
	})
}
