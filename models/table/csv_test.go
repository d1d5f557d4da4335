package table

import (
	"errors"
	"fmt"
	"io"
	"reflect"
	"runtime"
	"slices"
	"strings"
	"testing"
)

// TestRFC4180 reads the examples of RFC 4180 §2, with a header before those that have none.
func TestRFC4180(t *testing.T) {
	plain := [][]string{{"aaa", "bbb", "ccc"}, {"zzz", "yyy", "xxx"}}
	for _, c := range []struct {
		rule, text string
		want       [][]string
	}{
		{"1", "aaa,bbb,ccc\r\nzzz,yyy,xxx\r\n", plain},
		{"2", "aaa,bbb,ccc\r\nzzz,yyy,xxx", plain},
		{"4", "aaa,bbb,ccc", plain[:1]},
		{"5", "\"aaa\",\"bbb\",\"ccc\"\r\nzzz,yyy,xxx", plain},
		{"6", "\"aaa\",\"b\r\nbb\",\"ccc\"\r\nzzz,yyy,xxx", [][]string{{"aaa", "b\nbb", "ccc"}, plain[1]}},
		{"7", "\"aaa\",\"b\"\"bb\",\"ccc\"", [][]string{{"aaa", `b"bb`, "ccc"}}},
	} {
		rows, _, faults := read(t, []byte("code,name,email\r\n"+c.text), Options{}, "code", "name", "email")
		if len(faults) > 0 || !reflect.DeepEqual(rows, c.want) {
			t.Errorf("rule %s: %q, want %q; faults %v", c.rule, rows, c.want, faults)
		}
	}
}

// TestRagged checks that a row with too few or too many cells is a fault of that row alone.
func TestRagged(t *testing.T) {
	text := "code,name,email\nP1,Ada\nP2,Bo,,\nP3,Cy,c@example.org,more\nP4,Di,\n\"P5\n\",Ed\nP6,Flo,\n"
	rows, lines, faults := read(t, []byte(text), Options{}, "code")
	if !slices.Equal(lines, []int{3, 5, 8}) || rows[0][0] != "P2" {
		t.Errorf("lines %v, rows %q: empty cells too many are no harm", lines, rows)
	}
	want := []Fault{
		{2, "", "P1 | Ada", "the row has 2 cells, the header has 3", ""},
		{4, "", "P3 | Cy | c@example.org | more", "the row has 4 cells, the header has 3", ""},
		{6, "", "P5 | Ed", "the row has 2 cells, the header has 3", ""},
	}
	for i := range faults {
		if faults[i].Accepted == "" {
			t.Errorf("%v does not say what is accepted", faults[i])
		}
		faults[i].Accepted = ""
	}
	if !slices.Equal(faults, want) {
		t.Errorf("faults %+v, want %+v", faults, want)
	}
}

// TestQuotes checks that quotes out of place are faults, and that reading goes on where it can.
func TestQuotes(t *testing.T) {
	text := "code,name\nP1,5\" pipe\nP2,\"Ada\" Byte\nP3,\"Bo\"\n"
	rows, _, faults := read(t, []byte(text), Options{}, "code")
	if len(rows) != 1 || rows[0][0] != "P3" || len(faults) != 2 {
		t.Fatalf("rows %q, faults %v", rows, faults)
	}
	only(t, faults[:1], 2, "column 2", "stands inside a cell without quotes")
	only(t, faults[1:], 3, "column 2", "goes on after its closing quote")

	rows, _, faults = read(t, []byte("code,name\nP1,Ada\nP2,\"Bo\nP3,Cy\n"), Options{}, "code")
	if len(rows) != 1 {
		t.Errorf("rows %q, want the one before the open quote", rows)
	}
	only(t, faults, 3, "", "never closed")

	// The row starts on line 2, the cell that is not closed on line 3.
	_, _, faults = read(t, []byte("code,name\n\"P\n2\",\"Bo\nP3,Cy\n"), Options{})
	only(t, faults, 3, "", "never closed")

	// A large file after an open quote is not gathered in memory.
	_, _, faults = read(t, []byte("code,name\nP1,\"Ada\n"+strings.Repeat("P2,Bo\n", 100000)), Options{})
	only(t, faults, 2, "", "no closing one within")

	rows, _, faults = read(t, []byte("code, name\nP1, \"a, b\"\n"), Options{}, "name")
	if len(faults) > 0 || rows[0][0] != "a, b" {
		t.Errorf("rows %q, faults %v: a blank before a quote is no harm", rows, faults)
	}
}

// TestDelimiter checks how the separator is told.
func TestDelimiter(t *testing.T) {
	for _, c := range []struct {
		name, text string
		want       []string
		line       int
	}{
		{"said first", "sep=;\ncode;name\nP1;a,b", []string{"P1", "a,b"}, 3},
		{"said first, quoted, CR LF", "\"SEP=\t\"\r\ncode\tname\r\nP1\ta", []string{"P1", "a"}, 3},
		{"commas in a header of semicolons", "code;\"name\";employer;\nP1;\"a;b\";x,y,z;", []string{"P1", "a;b"}, 2},
		{"one column", "code\nP1", []string{"P1", ""}, 2},
		{"separator inside quotes", "\"code\",\"name\"\nP1,a;b;c", []string{"P1", "a;b;c"}, 2},
	} {
		t.Run(c.name, func(t *testing.T) {
			rows, lines, faults := read(t, []byte(c.text), Options{}, "code", "name")
			if len(faults) > 0 || len(rows) != 1 || !slices.Equal(rows[0], c.want) || lines[0] != c.line {
				t.Errorf("rows %q at %v, faults %v; want %q at %d", rows, lines, faults, c.want, c.line)
			}
		})
	}
}

// TestTooWide checks that a row without end is refused.
func TestTooWide(t *testing.T) {
	_, _, faults := read(t, []byte("code,name\nP1,Ada"+strings.Repeat(",x", 2000)+"\nP2,Bo\n"), Options{})
	only(t, faults, 2, "", "more columns than a table can have")
	_, _, faults = read(t, []byte("code,name\nP1,Ada"+strings.Repeat(","+strings.Repeat("x", 30000), 200)+"\n"), Options{})
	only(t, faults, 2, "", "longer than a table's row")
}

// generated is a file that is made as it is read, so that it costs no memory itself.
type generated struct {
	head string
	row  func(i int) string // all of one length
	n    int
}

func (g generated) size() int64 { return int64(len(g.head) + g.n*len(g.row(0))) }

func (g generated) ReadAt(p []byte, off int64) (int, error) {
	written := 0
	if off < int64(len(g.head)) {
		written = copy(p, g.head[off:])
		off += int64(written)
	}
	width := int64(len(g.row(0)))
	for written < len(p) && off < g.size() {
		at := off - int64(len(g.head))
		k := copy(p[written:], g.row(int(at / width))[at%width:])
		written, off = written+k, off+int64(k)
	}
	if written < len(p) {
		return written, io.EOF
	}
	return written, nil
}

// TestFlatMemory reads 200,000 rows of CSV and watches the heap.
func TestFlatMemory(t *testing.T) {
	const rows, most = 200000, 20 << 20
	g := generated{
		head: "code,name,email,level,joined,left\r\n",
		row: func(i int) string {
			return fmt.Sprintf("P%06d,\"Person %06d, of the site\",p%06d@example.org,L2,2025-01-31,\r\n", i, i, i)
		},
		n: rows,
	}
	runtime.GC()
	r, faults, err := Open(g, g.size(), people, []string{"code"}, nil, Options{})
	if err != nil || len(faults) > 0 {
		t.Fatal(faults, err)
	}
	defer closed(t, r)
	var m runtime.MemStats
	n, high := 0, uint64(0)
	for ; ; n++ {
		row, fs, err := r.Next()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil || len(fs) > 0 {
			t.Fatal(fs, err)
		}
		if row.Text("code") != fmt.Sprintf("P%06d", n) || row.Line != n+2 {
			t.Fatalf("row %d is %q at line %d", n, row.Text("code"), row.Line)
		}
		if n%5000 == 0 {
			runtime.ReadMemStats(&m)
			high = max(high, m.HeapAlloc)
		}
	}
	if n != rows {
		t.Errorf("%d rows, want %d", n, rows)
	}
	if high > most {
		t.Errorf("the heap rose to %d MB, want at most %d MB", high>>20, most>>20)
	}
}
