package table

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

const (
	bigRows     = 200000
	bigNames    = 5000
	bigWorkbook = "LODEBOOK_TABLE_TEST_WORKBOOK"
)

// TestMain lets the test's own program read a large workbook as a process of its own, so that the
// memory measured is that of reading and of nothing else.
func TestMain(m *testing.M) {
	if name := os.Getenv(bigWorkbook); name != "" {
		if err := readBig(name); err != nil {
			fmt.Fprintln(os.Stderr, err)
			os.Exit(1)
		}
		os.Exit(0)
	}
	os.Exit(m.Run())
}

// readBig reads the workbook and prints how many rows it has and how much memory the process has
// needed at most, in kB (proc(5), VmHWM in /proc/self/status).
func readBig(name string) error {
	f, err := os.Open(name)
	if err != nil {
		return err
	}
	info, err := f.Stat()
	if err != nil {
		return err
	}
	r, faults, err := Open(f, info.Size(), people, []string{"code"}, nil, Options{TempDir: filepath.Dir(name)})
	if err != nil || len(faults) > 0 {
		return fmt.Errorf("%v %w", faults, err)
	}
	n := 0
	for ; ; n++ {
		row, faults, err := r.Next()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil || len(faults) > 0 {
			return fmt.Errorf("%v %w", faults, err)
		}
		if row.Text("code") != fmt.Sprintf("P%06d", n) || row.Text("name") != fmt.Sprintf("Person %d", n%bigNames) {
			return fmt.Errorf("row %d is %q, %q", row.Line, row.Text("code"), row.Text("name"))
		}
		if _, ok, f := row.Day("joined"); !ok || f != nil {
			return fmt.Errorf("row %d: %w", row.Line, f)
		}
	}
	if err := r.Close(); err != nil {
		return err
	}
	status, err := os.ReadFile("/proc/self/status")
	if err != nil {
		return err
	}
	_, rest, _ := strings.Cut(string(status), "VmHWM:")
	fmt.Println(n, strings.Fields(rest)[0])
	return nil
}

// TestBigWorkbook reads 200,000 rows with 205,000 shared strings in a process of its own and holds
// it to 400 MB.
func TestBigWorkbook(t *testing.T) {
	const most = 400 << 10 // kB
	name := filepath.Join(t.TempDir(), "big.xlsx")
	writeBig(t, name)
	cmd := exec.Command(os.Args[0])
	cmd.Env = append(os.Environ(), bigWorkbook+"="+name)
	var out, words bytes.Buffer
	cmd.Stdout, cmd.Stderr = &out, &words
	if err := cmd.Run(); err != nil {
		t.Fatal(err, words.String())
	}
	said := strings.Fields(out.String())
	if len(said) != 2 || said[0] != strconv.Itoa(bigRows) {
		t.Fatalf("said %q", said)
	}
	kB, err := strconv.Atoi(said[1])
	if err != nil || kB > most {
		t.Errorf("reading needed %s kB, want at most %d: %v", said[1], most, err)
	}
	t.Logf("reading needed %d MB", kB>>10)
}

// writeBig writes a workbook of codes, which differ in every row, names, which return, and days; all
// but the days are shared strings.
func writeBig(t *testing.T, name string) {
	t.Helper()
	b := single("")
	b.formats = []string{"dd/mm/yyyy"}
	for _, s := range []string{"code", "name", "joined"} {
		b.strings = append(b.strings, "<t>"+s+"</t>")
	}
	for i := range bigNames {
		b.strings = append(b.strings, fmt.Sprintf("<t>Person %d</t>", i))
	}
	var rows strings.Builder
	rows.WriteString(`<row><c t="s"><v>0</v></c><c t="s"><v>1</v></c><c t="s"><v>2</v></c></row>`)
	for i := range bigRows {
		fmt.Fprintf(&rows, `<row r="%[1]d"><c r="A%[1]d" t="s"><v>%[2]d</v></c><c r="B%[1]d" t="s"><v>%[3]d</v></c><c r="C%[1]d" s="1"><v>%[4]d</v></c></row>`,
			i+2, len(b.strings), 3+i%bigNames, 40000+i%5000)
		b.strings = append(b.strings, fmt.Sprintf("<t>P%06d</t>", i))
	}
	b.sheets[0].data = rows.String()
	file, err := os.Create(name)
	if err != nil {
		t.Fatal(err)
	}
	b.write(t, file)
	if err := file.Close(); err != nil {
		t.Fatal(err)
	}
}
