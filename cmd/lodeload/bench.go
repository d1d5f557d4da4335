package main

import (
	"errors"
	"fmt"
	"os"
	"slices"
	"time"

	"lodebook/cmd/lodeload/network"
)

type benchCommand struct {
	Quick    bool   `help:"A small network: the whole bench ends within a minute."`
	Format   string `enum:"table,json" default:"table" help:"table or json."`
	Dir      string `type:"path" help:"Folder for the databases, which are deleted again; default: the system's." placeholder:"DIR"`
	Rounds   int    `default:"5" help:"How often both sides are timed, one after the other."`
	Postgres string `help:"Address of a PostgreSQL database that may be filled; default: one is started where PostgreSQL is installed." placeholder:"URL"`
}

// scale is how large each part of the bench is.
type scale struct {
	network network.Size // of the evaluator's rows
	book    network.Size // of the book that is read and written
	page    int          // people of the site whose pages are asked for
	loads   int          // requests, and records written, in a round
	mix     int          // new records that the evaluator is given in a round
	rounds  int
}

var (
	fullScale = scale{
		network: network.Full, book: network.Size{Seed: 1, Sites: 20, People: 8000, Fixtures: 800, Days: 1826},
		page: 5000, loads: 4000, mix: 20_000,
	}
	quickScale = scale{
		network: network.Size{Seed: 1, Sites: 25, People: 10_000, Fixtures: 1000, Days: 1826},
		book:    network.Size{Seed: 1, Sites: 2, People: 400, Fixtures: 40, Days: 1826},
		page:    1000, loads: 500, mix: 1500,
	}
)

// Run runs every row and prints the result.
func (c *benchCommand) Run(a *app) error {
	if c.Rounds < 1 {
		return usage{fmt.Errorf("--rounds: found %d; write 1 or more", c.Rounds)}
	}
	s := fullScale
	if c.Quick {
		s = quickScale
	}
	s.rounds = c.Rounds
	dir, err := os.MkdirTemp(c.Dir, "lodeload")
	if err != nil {
		return fmt.Errorf("--dir: %w", err)
	}
	b := &bench{app: a, scale: s, dir: dir, address: c.Postgres}
	r, err := b.run(contests)
	if err = errors.Join(err, b.close(), os.RemoveAll(dir)); err != nil {
		return err
	}
	return r.write(a.stdout, c.Format)
}

// bench is one run: the scale, and what rows share.
type bench struct {
	*app
	scale
	dir     string
	address string // of PostgreSQL
	world   *world
	lite    *database
	pg      *postgres
}

// contest is one row: two ways to the same answer. Each side does the work of one round and gives how long
// one unit of it took.
type contest struct {
	work, against string
	asked         float64                 // the least ratio of their time to ours
	absent        string                  // why there is nothing to measure against, in words; the sides are then nil
	check         func() error            // asserts, before any timing, that both sides give the same answer
	ours, theirs  func() (float64, error) // nanoseconds, or bytes where work says so
	words         func() string           // more about the result, told in words; may be nil
	close         func() error            // may be nil
}

// maker makes the contests of one file.
type rowMaker func(b *bench) ([]*contest, error)

// contests are the rows in the order in which they are printed.
var contests = []rowMaker{memoryRows, asOfRows, todayRows, scanRows, overRows, recordRows, selectRows, bookRows, pageRows}

// run makes, checks and times every row.
func (b *bench) run(makers []rowMaker) (*result, error) {
	r := &result{Machine: machine()}
	for _, m := range makers {
		all, err := m(b)
		if err != nil {
			return nil, err
		}
		for _, c := range all {
			row, err := b.row(c)
			if err != nil {
				return nil, fmt.Errorf("%s, against %s: %w", c.work, c.against, err)
			}
			b.say("%s", row.sentence())
			r.Rows = append(r.Rows, row)
		}
	}
	r.Sizes = b.sizes()
	return r, nil
}

// row runs one contest.
func (b *bench) row(c *contest) (row, error) {
	out := row{Work: c.work, Against: c.against, Asked: c.asked}
	if c.absent != "" {
		out.Against += " (" + c.absent + ")"
		return out, nil
	}
	if c.check != nil {
		if err := c.check(); err != nil {
			return out, err
		}
	}
	var ours, theirs []float64
	for range b.rounds {
		for _, side := range []struct {
			do func() (float64, error)
			to *[]float64
		}{{c.ours, &ours}, {c.theirs, &theirs}} {
			took, err := side.do()
			if err != nil {
				return out, err
			}
			*side.to = append(*side.to, took)
		}
	}
	out.take(median(ours), median(theirs))
	if c.words != nil {
		out.Against += " (" + c.words() + ")"
	}
	if c.close != nil {
		return out, c.close()
	}
	return out, nil
}

// close ends what the run has started.
func (b *bench) close() error {
	var errs []error
	if b.lite != nil {
		errs = append(errs, b.lite.close())
	}
	if b.pg != nil {
		errs = append(errs, b.pg.close())
	}
	return errors.Join(errs...)
}

// timed makes a side of something that is done so many times in a round; its unit is one of them.
func (b *bench) timed(times int, do func() error) func() (float64, error) {
	return func() (float64, error) {
		began := b.clock()
		for range times {
			if err := do(); err != nil {
				return 0, err
			}
		}
		return nanoseconds(b.clock().Sub(began), times), nil
	}
}

func nanoseconds(d time.Duration, units int) float64 {
	return float64(d.Nanoseconds()) / float64(max(units, 1))
}

func median(all []float64) float64 {
	s := slices.Sorted(slices.Values(all))
	n := len(s)
	if n == 0 {
		return 0
	}
	return (s[(n-1)/2] + s[n/2]) / 2
}
