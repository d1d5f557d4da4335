// Lodebook is the book that an MR imaging site keeps of its safety programme.
package main

import (
	"context"
	"crypto/rand"
	"errors"
	"fmt"
	"io"
	"os"
	"os/signal"
	"os/user"
	"syscall"
	"time"
	_ "time/tzdata"

	"github.com/alecthomas/kong"

	"lodebook/models/book"
	"lodebook/models/program"
)

// Exit statuses, as the README lists them.
const (
	exitDone    = 0
	exitRefused = 1
	exitUsage   = 2
	exitGaps    = 3
	exitPartial = 4
	exitFailed  = 5
)

// commands is every subcommand; each stands in a file of its own.
type commands struct {
	Demo       demoCommand       `cmd:"" help:"A throwaway book with an invented site, served at once."`
	Open       openCommand       `cmd:"" help:"Make a book, add a site to it, or give a site a new version of its program."`
	Serve      serveCommand      `cmd:"" help:"The web app, the API and the jobs."`
	Import     importCommand     `cmd:"" help:"Bring in people, fixtures, records, events, excusals, pauses, rights or roster from CSV or XLSX."`
	Standing   standingCommand   `cmd:"" help:"Standings on any day."`
	Gaps       gapsCommand       `cmd:"" help:"What falls short."`
	Reach      reachCommand      `cmd:"" help:"Who is entitled to a zone, until when, and why not."`
	Visits     visitsCommand     `cmd:"" help:"Who visits on a day."`
	Passages   passagesCommand   `cmd:"" help:"Door events of a time, each held against who was entitled."`
	RightsDiff rightsDiffCommand `cmd:"" help:"What to withdraw and what to add in the doors' own system."`
	Coverage   coverageCommand   `cmd:"" help:"When nobody is on duty who must be."`
	Job        jobCommand        `cmd:"" help:"Run one scheduled job now."`
	Backup     backupCommand     `cmd:"" help:"A consistent copy of a live book."`
	Restore    restoreCommand    `cmd:"" help:"Put a verified copy in the place of a book."`
	Move       moveCommand       `cmd:"" help:"Copy a book from a file to a PostgreSQL database, or back."`
	Erase      eraseCommand      `cmd:"" help:"Make a person's names and the texts about them unreadable for good."`
	User       userCommand       `cmd:"" help:"Accounts: add, list, disable, role, link."`
	Schema     schemaCommand     `cmd:"" help:"The JSON Schema of the program file."`
	Verify     verifyCommand     `cmd:"" help:"Recompute every hash of a book."`

	Remedies  remediesCommand  `cmd:"" help:"Corrective actions: what is open, whose and until when."`
	Incidents incidentsCommand `cmd:"" help:"Incidents and near misses, for a safety officer (--as)."`
}

// app is what a command needs from outside.
type app struct {
	ctx            context.Context
	stdin          io.Reader
	stdout, stderr io.Writer
	clock          func() time.Time
	terminal       bool // stderr is one: progress is drawn on one line
}

// exit is an error that carries the status to leave with; its text is printed when it has one.
type exit struct {
	status int
	err    error
}

func (e *exit) Error() string {
	if e.err == nil {
		return ""
	}
	return e.err.Error()
}

func (e *exit) Unwrap() error { return e.err }

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	info, err := os.Stderr.Stat()
	a := &app{
		ctx: ctx, stdin: os.Stdin, stdout: os.Stdout, stderr: os.Stderr, clock: time.Now,
		terminal: err == nil && info.Mode()&os.ModeCharDevice != 0,
	}
	status := a.run(os.Args[1:])
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
	parser, err := kong.New(&c, kong.Name("lodebook"), kong.Description("The book that an MR imaging site keeps of its safety programme."),
		kong.Writers(a.stdout, a.stderr), kong.Exit(func(code int) { panic(left(code)) }), kong.UsageOnError(), kong.Bind(a))
	if err != nil {
		return a.fail(err)
	}
	parsed, err := parser.Parse(args)
	if err != nil {
		a.say("lodebook: %v", err)
		a.say("Try: lodebook --help")
		return exitUsage
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
	var e *exit
	if errors.As(err, &e) {
		if e.err != nil {
			a.say("%v", e.err)
		}
		return e.status
	}
	var faults program.Faults
	if errors.As(err, &faults) {
		a.say("The program file has %d faults; nothing was written:", len(faults))
	}
	a.say("%v", err)
	return exitRefused
}

// bookFlag names the book that a command works on.
type bookFlag struct {
	Book      string `required:"" env:"LODEBOOK_BOOK" help:"Path of the book, or the address of its PostgreSQL database." placeholder:"site.book"`
	Snapshots string `env:"LODEBOOK_SNAPSHOTS" type:"existingdir" help:"Folder for the snapshots from which the next start is quick; default: beside a file, and none of a database." placeholder:"DIR"`
}

// asFlag names the account that writes.
type asFlag struct {
	As string `env:"LODEBOOK_AS" help:"Name of the account that this is done as; its role decides."`
}

// siteFlag names a site of the book.
type siteFlag struct {
	Site string `required:"" help:"Code of the site." placeholder:"CODE"`
}

// formatFlag says how a listing is written.
type formatFlag struct {
	Format string `enum:"table,json,csv" default:"table" help:"table, json or csv."`
}

func (a *app) options() book.Options {
	return book.Options{
		Clock: a.clock, Random: rand.Reader,
		Tell: func(sentence string) { a.say("%s", sentence) }, Progress: a.reading(),
	}
}

// reading tells of every million rows how many have been read.
func (a *app) reading() func(rows, entries int64) {
	const step = 1_000_000
	said := int64(0)
	return func(rows, entries int64) {
		if rows/step > said {
			said = rows / step
			a.say("Reading the book without a snapshot: %d million rows of %d entries so far.", said, entries)
		}
	}
}

// open opens the book and gives it to fn.
func (a *app) open(f bookFlag, fn func(b *book.Book) error) error {
	if err := named("--book", f.Book); err != nil {
		return err
	}
	return a.openWith(f, a.options(), fn)
}

// openSite opens of a book what answers about one site need, to read it.
func (a *app) openSite(f bookFlag, site string, fn func(b *book.Book) error) error {
	if err := named("--book", f.Book); err != nil {
		return err
	}
	o := a.options()
	o.Site = site
	return a.openWith(f, o, fn)
}

func (a *app) openWith(f bookFlag, o book.Options, fn func(b *book.Book) error) error {
	o.Snapshots = f.Snapshots
	b, err := book.Open(a.ctx, f.Book, o)
	if err != nil {
		return err
	}
	return errors.Join(fn(b), b.Close())
}

// named refuses an empty name of a book.
func named(flag, book string) error {
	if book == "" && flag == "--book" {
		return &exit{exitUsage, errors.New("--book: name the book, or set LODEBOOK_BOOK")}
	}
	if book == "" {
		return &exit{exitUsage, fmt.Errorf("%s: name the book", flag)}
	}
	return nil
}

// actor is who a command is done as.
func (a *app) actor(b *book.Book, f asFlag) (book.Actor, error) {
	if f.As == "" {
		u, err := user.Current()
		if err != nil {
			return book.SystemOperator("unknown"), nil
		}
		return book.SystemOperator(u.Username), nil
	}
	return b.ActorNamed(a.ctx, f.As)
}
