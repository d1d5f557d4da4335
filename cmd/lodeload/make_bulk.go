package main

import (
	"lodebook/cmd/lodeload/network"
	"lodebook/models/book"
)

// bulkSite opens the site and takes its tables in by the bulk path.
func bulkSite(a *app, b *book.Book, s *network.Site) error { return importSite(a, b, s) }
