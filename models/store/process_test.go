package store

import (
	"bufio"
	"errors"
	"fmt"
	"os/exec"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"time"
)

// helpAppend opens the book args[0] and appends args[2] entries one by one, whose identifiers begin
// with args[1]. It prints the identifier of each once Write has acknowledged it.
func helpAppend(args []string) error {
	set := quick()
	set.busy = 30 * time.Second
	s, err := open(background, args[0], set)
	if err != nil {
		return err
	}
	n, err := strconv.Atoi(args[2])
	if err != nil {
		return err
	}
	for i := range n {
		id := fmt.Sprintf("%s-%d", args[1], i)
		err = s.Write(background, func(tx *Tx) error { return appendNow(tx, id) })
		if err != nil {
			return err
		}
		fmt.Println(id)
	}
	return s.Close()
}

// appendNow appends an entry with an erasable value and a projected row, as a command would.
func appendNow(tx *Tx, id string) error {
	size, err := tx.Size()
	if err != nil {
		return err
	}
	e, veils := veiledEntry(int(size), "P1", "Ada Example")
	e.ID = id
	seq, err := tx.Append([]Entry{e}, [][]Veil{veils})
	if err != nil {
		return err
	}
	return tx.Put(PersonRow{Line: Line{Seq: seq, ID: id}, Code: "P1", Name: "Ada Example"})
}

func TestTwoProcessesWriteAtOnce(t *testing.T) {
	s := newBook(t)
	const each = 150
	var writers []*exec.Cmd
	for _, name := range []string{"first", "second"} {
		c := process(t, "append", address(s), name, strconv.Itoa(each))
		must(t, c.Start())
		writers = append(writers, c)
	}
	// This process writes too, and looks on.
	seen := int64(0)
	for i := range 20 {
		for {
			err := s.Write(background, func(tx *Tx) error { return appendNow(tx, fmt.Sprintf("own-%d", i)) })
			if err == nil {
				break
			}
			if !errors.Is(err, ErrBusy) {
				t.Fatal(err)
			}
		}
		size, err := s.Size(background)
		must(t, err)
		if size <= seen {
			t.Errorf("the size went from %d to %d", seen, size)
		}
		seen = size
	}
	for _, c := range writers {
		must(t, c.Wait())
	}
	report := sound(t, s)
	if report.Entries != 2*each+20 {
		t.Errorf("%d entries are there, want %d", report.Entries, 2*each+20)
	}
	read(t, s, func(tx *Tx) error {
		d, err := tx.Changed(-1)
		if len(d.People) != 2*each+20 {
			t.Errorf("%d projected rows are there", len(d.People))
		}
		return err
	})
}

// A process that is killed in the middle of its writes loses nothing that it acknowledged.
func TestKillLosesNothingAcknowledged(t *testing.T) {
	for round := range 3 {
		s := newBook(t)
		must(t, s.Close())
		acknowledged := killedAfter(t, address(s), 40+round*35)
		again := reopened(t, address(s))
		report := sound(t, again)
		if report.Entries < int64(len(acknowledged)) || report.Entries > int64(len(acknowledged))+1 {
			t.Errorf("%d entries are there, %d were acknowledged and one may have been under way", report.Entries, len(acknowledged))
		}
		read(t, again, func(tx *Tx) error {
			found, err := tx.EntryIDs(acknowledged)
			if len(found) != len(acknowledged) {
				t.Errorf("of %d acknowledged entries %d are there", len(acknowledged), len(found))
			}
			return err
		})
		write(t, again, func(tx *Tx) error { return appendNow(tx, "afterwards") })
	}
}

// killedAfter starts a writer, kills it as soon as it has acknowledged so many entries, and gives
// all that it acknowledged.
func killedAfter(t *testing.T, path string, n int) []string {
	t.Helper()
	c := process(t, "append", path, "id", "1000000")
	out, err := c.StdoutPipe()
	must(t, err)
	must(t, c.Start())
	var ids []string
	lines := bufio.NewScanner(out)
	for lines.Scan() {
		ids = append(ids, lines.Text())
		if len(ids) == n {
			must(t, c.Process.Signal(syscall.SIGKILL))
		}
	}
	var died *exec.ExitError
	if err := c.Wait(); !errors.As(err, &died) || !strings.Contains(err.Error(), "killed") {
		t.Fatalf("the writer was not killed: %v", err)
	}
	if len(ids) < n {
		t.Fatalf("only %d entries were acknowledged", len(ids))
	}
	return ids
}
