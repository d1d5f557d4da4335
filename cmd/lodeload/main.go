// Lodeload makes synthetic networks of any size and runs Lodebook's side-by-side benchmarks.
package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/signal"
	"syscall"
	"time"
	_ "time/tzdata"

	"github.com/alecthomas/kong"
)

// Exit statuses: those of lodebook that can occur here.
const (
	exitDone    = 0
	exitRefused = 1
	exitUsage   = 2
)

// commands is every subcommand; each stands in a file of its own.
type commands struct {
	Make  makeCommand  `cmd:"" help:"Make a book with an invented network in it, the same for the same seed and size."`
	Bench benchCommand `cmd:"" help:"Run the comparisons of the README and print medians."`
}

// app is what a command needs from outside.
type app struct {
	ctx            context.Context
	stdout, stderr io.Writer
	clock          func() time.Time
}

// usage is an error in how a command was called.
type usage struct{ error }

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	status := (&app{ctx: ctx, stdout: os.Stdout, stderr: os.Stderr, clock: time.Now}).run(os.Args[1:])
	stop()
	os.Exit(status)
}

// left is thrown by kong when it wants to leave, after --help.
type left int

// run does one command and gives the status to leave with.
func (a *app) run(args []string) (status int) {
	defer func() {
		if r := recover(); r != nil {
			code, ok := r.(left)
			if !ok {
				panic(r)
			}
			status = int(code)
		}
	}()
	var c commands
	parser, err := kong.New(&c, kong.Name("lodeload"), kong.Description("Makes synthetic networks and runs Lodebook's benchmarks."),
		kong.Writers(a.stdout, a.stderr), kong.Exit(func(code int) { panic(left(code)) }), kong.UsageOnError(), kong.Bind(a))
	if err != nil {
		return a.fail(err)
	}
	parsed, err := parser.Parse(args)
	if err != nil {
		return a.fail(usage{err})
	}
	if err := parsed.Run(a); err != nil {
		return a.fail(err)
	}
	return exitDone
}

// say writes words for a person to standard error.
func (a *app) say(format string, args ...any) {
	// There is nowhere left to tell that standard error cannot be written.
	_, _ = fmt.Fprintf(a.stderr, format+"\n", args...)
}

// fail prints the reason and gives the status.
func (a *app) fail(err error) int {
	var wrong usage
	if errors.As(err, &wrong) {
		a.say("lodeload: %v", err)
		a.say("Try: lodeload --help")
		return exitUsage
	}
	a.say("%v", err)
	return exitRefused
}
