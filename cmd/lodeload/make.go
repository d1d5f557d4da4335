package main

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"math/rand/v2"
	"os"
	"time"

	"lodebook/cmd/lodeload/network"
	"lodebook/models/book"
)

type makeCommand struct {
	Book     string `required:"" env:"LODEBOOK_BOOK" help:"Path of the book to make; there must be none." placeholder:"site.book"`
	Seed     uint64 `default:"1" help:"Seed of the network and of the book's salts."`
	Sites    int    `default:"5" help:"Number of sites."`
	People   int    `default:"2000" help:"Number of people, spread over the sites."`
	Fixtures int    `default:"200" help:"Number of fixtures, spread over the sites."`
	Days     int    `default:"1826" help:"Length of the history in days, from 2021-01-01."`
	Bulk     bool   `help:"Write in large batches instead of importing table by table; the book is the same."`
	Passages string `help:"Also write the passages through doors of the last 92 days to a CSV file." placeholder:"FILE"`
	Doors    bool   `help:"Also bring those passages into the book."`
	CSV      string `name:"csv" help:"Also write the tables of each site to files in this folder." type:"path" placeholder:"DIR"`
}

func (c *makeCommand) size() network.Size {
	return network.Size{Seed: c.Seed, Sites: c.Sites, People: c.People, Fixtures: c.Fixtures, Days: c.Days}
}

// Run makes the network and writes it into a new book.
func (c *makeCommand) Run(a *app) error {
	n, err := network.New(c.size())
	if err != nil {
		return usage{fmt.Errorf("--%w", err)}
	}
	b, err := book.Create(a.ctx, c.Book, syntheticOptions(n.Size))
	if err != nil {
		return err
	}
	began := a.clock()
	records, err := c.fill(a, b, n)
	if err = errors.Join(err, b.Close()); err != nil {
		return err
	}
	took := a.clock().Sub(began)
	a.say("%d sites, %d people, %d fixtures, %d records in %s: %.0f records a second.", n.Sites, n.People, n.Fixtures, records, took.Round(time.Millisecond), float64(records)/took.Seconds())
	return nil
}

// fill writes every site, and gives how many records there were.
func (c *makeCommand) fill(a *app, b *book.Book, n *network.Network) (records int, err error) {
	passages, err := c.passages()
	if err != nil {
		return 0, err
	}
	actor, err := openNetwork(a, b, n)
	if err != nil {
		return 0, err
	}
	var doors []doorFile
	also := func(s *network.Site) error {
		records += len(s.Records)
		return errors.Join(c.files(s), c.pass(passages, s, s.Code == network.SiteCode(0)), c.keepDoors(s, &doors))
	}
	if c.Bulk {
		err = bulkNetwork(a, b, n, actor, also)
	} else {
		err = importNetwork(a, b, n, actor, also)
	}
	if passages != nil {
		err = errors.Join(err, passages.Close())
	}
	for _, d := range doors {
		if err == nil {
			err = d.bring(a, b, actor)
		}
		err = errors.Join(err, os.Remove(d.path))
	}
	return records, err
}

// doorFile is the passages of a site, which wait until the book has its doors and people.
type doorFile struct{ site, path string }

func (c *makeCommand) keepDoors(s *network.Site, to *[]doorFile) (err error) {
	if !c.Doors {
		return nil
	}
	f, err := os.CreateTemp("", "lodeload-doors-")
	if err != nil {
		return err
	}
	*to = append(*to, doorFile{s.Code, f.Name()})
	return errors.Join(s.WritePassages(f, true), f.Close())
}

func (d doorFile) bring(a *app, b *book.Book, actor book.Actor) error {
	f, err := os.Open(d.path)
	if err != nil {
		return err
	}
	info, err := f.Stat()
	if err != nil {
		return errors.Join(err, f.Close())
	}
	r, err := b.Import(a.ctx, actor, book.ImportOptions{Table: "passages", Site: d.site, File: f, Size: info.Size(), FileName: "passages.csv"})
	if err == nil && len(r.Faults) > 0 {
		err = &r.Faults[0]
	}
	return errors.Join(err, f.Close())
}

func (c *makeCommand) passages() (*os.File, error) {
	if c.Passages == "" {
		return nil, nil
	}
	return os.Create(c.Passages)
}

func (c *makeCommand) pass(f *os.File, s *network.Site, first bool) error {
	if f == nil {
		return nil
	}
	return s.WritePassages(f, first)
}

// files writes the site's tables as CSV files, if asked.
func (c *makeCommand) files(s *network.Site) error {
	if c.CSV == "" {
		return nil
	}
	for _, table := range network.Tables {
		var b bytes.Buffer
		if err := s.WriteCSV(&b, table); err != nil {
			return err
		}
		if err := os.WriteFile(fmt.Sprintf("%s/%s-%s.csv", c.CSV, s.Code, table), b.Bytes(), 0o644); err != nil {
			return err
		}
	}
	return nil
}

// syntheticOptions give a book that is made from a seed a clock that stands still behind the network's last
// day, and salts from the seed: the same seed and size make the same bytes. No real book is kept so.
func syntheticOptions(s network.Size) book.Options {
	at := dayAfter(s)
	return book.Options{Clock: func() time.Time { return at }, Random: seeded(s.Seed)}
}

// seeded is a source of bytes from a seed.
func seeded(seed uint64) io.Reader {
	var key [32]byte
	binary.LittleEndian.PutUint64(key[:], seed)
	return rand.NewChaCha8(key)
}

// maker opens the sites of a synthetic book.
var maker = book.SystemOperator("lodeload")

// openNetwork records the programs of all sites and gives a safety officer of all of them, who brings in the rest.
func openNetwork(a *app, b *book.Book, n *network.Network) (book.Actor, error) {
	var codes []string
	for i := range n.Sites {
		s := n.Outline(i)
		codes = append(codes, s.Code)
		for _, v := range s.Versions {
			if _, err := b.OpenProgram(a.ctx, maker, v.Source, ""); err != nil {
				return book.Actor{}, fmt.Errorf("the program of site %s: %w", s.Code, err)
			}
		}
	}
	if _, err := b.AddAccount(a.ctx, maker, book.AccountForm{Name: "loader", Role: book.SafetyOfficer, Sites: codes}); err != nil {
		return book.Actor{}, err
	}
	return b.ActorNamed(a.ctx, "loader")
}

// importNetwork imports the tables of every site, as a user would.
func importNetwork(a *app, b *book.Book, n *network.Network, actor book.Actor, also func(*network.Site) error) error {
	for s := range n.Each() {
		for _, table := range network.Tables {
			if err := importTable(a, b, s, actor, table); err != nil {
				return err
			}
		}
		if err := also(s); err != nil {
			return err
		}
	}
	return nil
}

func importTable(a *app, b *book.Book, s *network.Site, actor book.Actor, table string) error {
	if s.Rows(table) == 0 {
		return nil // a table without rows is none
	}
	var csv bytes.Buffer
	if err := s.WriteCSV(&csv, table); err != nil {
		return err
	}
	report, err := b.Import(a.ctx, actor, book.ImportOptions{Table: table, Site: s.Code, File: bytes.NewReader(csv.Bytes()), Size: int64(csv.Len()), FileName: table + ".csv"})
	if err != nil {
		return err
	}
	if len(report.Faults) > 0 {
		return fmt.Errorf("%s of site %s: %w", table, s.Code, &report.Faults[0])
	}
	return nil
}
