// Command report reads the output of go test -json and prints what failed, what was skipped (which
// counts as a failure) and one closing line.
package main

import (
	"bufio"
	"encoding/json"
	"fmt"
	"os"
	"slices"
	"strings"
)

type event struct {
	Action, Package, Test, Output string
	Elapsed                       float64
}

func main() {
	if len(os.Args) != 2 {
		fmt.Fprintln(os.Stderr, "usage: report FILE")
		os.Exit(2)
	}
	f, err := os.Open(os.Args[1])
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(2)
	}
	if !report(bufio.NewScanner(f)) {
		os.Exit(1)
	}
}

// report prints the run and tells whether it is good.
func report(lines *bufio.Scanner) bool {
	lines.Buffer(nil, 16<<20)
	count := map[string]int{}
	output := map[string][]string{}
	var bad []string
	for lines.Scan() {
		var e event
		if json.Unmarshal(lines.Bytes(), &e) != nil {
			fmt.Println(lines.Text())
			continue
		}
		name := strings.TrimSpace(e.Package + " " + e.Test)
		switch e.Action {
		case "output", "build-output":
			output[name] = append(output[name], e.Output)
		case "pass", "fail", "skip":
			if e.Test == "" {
				if e.Action != "skip" { // a package without tests
					fmt.Printf("%s\t%s\t%.1fs\n", e.Action, e.Package, e.Elapsed)
				}
				if e.Action != "fail" {
					continue
				}
			} else {
				count[e.Action]++
			}
			if e.Action != "pass" {
				bad = append(bad, name)
			}
		}
	}
	slices.Sort(bad)
	for _, name := range bad {
		fmt.Printf("\n-- %s\n%s", name, strings.Join(output[name], ""))
	}
	if count["skip"] > 0 {
		fmt.Println("\nA skipped test counts as a failure here.")
	}
	fmt.Printf("\n%d passed, %d failed, %d skipped\n", count["pass"], count["fail"], count["skip"])
	return len(bad) == 0 && count["pass"] > 0
}
