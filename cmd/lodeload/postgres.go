package main

// postgres is a PostgreSQL database with the world in it.
type postgres struct {
	*database
	absent string // why there is none, in words
}

// postgresRow is the row against PostgreSQL's best form; without PostgreSQL it says so.
func (b *bench) postgresRow(work string, asked float64, forms []form, at int, right answer, ours func() (float64, error)) (*contest, error) {
	return &contest{work: work, against: "PostgreSQL", asked: asked, absent: "PostgreSQL not found"}, nil
}

var postgresAsOf, postgresToday []form
